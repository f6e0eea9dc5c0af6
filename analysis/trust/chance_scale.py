"""The scale on which the evidence of modules is compared: that of chance modules of like size and strength."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from analysis.network import FloatArray

LIKE_SIZED = 50
FEWEST_FOR_A_LINE = 5

IntegerArray = NDArray[np.int64]


@dataclass(frozen=True, eq=False)
class ChanceModules:
    """The modules of three genes or more that were found in null networks, all arrays of shape (modules,).

    Attributes
    ----------
    nulls : int
        Number of null networks, those without such modules included.
    null : int64 array
        The null network that each comes from, ascending.
    size : int64 array
    strength, evidence, internal_density, conductance : float64 arrays
        As in `analysis.modules.ModuleFigures`.
    """

    nulls: int
    null: IntegerArray
    size: IntegerArray
    strength: FloatArray
    evidence: FloatArray
    internal_density: FloatArray
    conductance: FloatArray


@dataclass(frozen=True, eq=False)
class ChanceScale:
    """Chance modules summed up by size, so that a line through those of like size costs no pass over them.

    Attributes
    ----------
    present : int64 array, shape (sizes,)
        Sizes that occur, ascending.
    sums : float64 array, shape (sizes, 6)
        For each: number of modules, and sums of x, x², y, y² and xy, where x is the logarithm of the mean strength of a
        member and y the evidence.
    low, high : float64 arrays, shape (sizes,)
        Least and greatest x.
    """

    present: IntegerArray
    sums: FloatArray
    low: FloatArray
    high: FloatArray

    @classmethod
    def of(cls, chance: ChanceModules) -> ChanceScale:
        """Sum up the chance modules."""
        present, place = np.unique(chance.size, return_inverse=True)
        x = _log_strength(chance.size, chance.strength)
        sums = np.zeros((len(present), 6))
        np.add.at(sums, place, _terms(x, chance.evidence))
        low, high = np.full(len(present), np.inf), np.full(len(present), -np.inf)
        np.minimum.at(low, place, x)
        np.maximum.at(high, place, x)
        return cls(present, sums, low, high)

    def distance(
        self, size: IntegerArray, strength: FloatArray, evidence: FloatArray, *, own: bool = False
    ) -> FloatArray:
        """Return how far evidence lies above what like chance modules have, in their standard deviations.

        Parameters
        ----------
        size, strength, evidence : arrays, shape (modules,)
        own : bool
            Whether the modules are the chance modules themselves: each is then left out of its own scale.
        """
        sums, low, high = self._gather(size)
        x = _log_strength(size, strength)
        if own:
            sums = sums - _terms(x, evidence)
        return _from_line(np.clip(x, low, high), evidence, sums)

    def _gather(self, size: IntegerArray) -> tuple[FloatArray, FloatArray, FloatArray]:
        """Return the sums over chance modules of like size, and their range of x, one row for each module."""
        distinct, place = np.unique(size, return_inverse=True)
        sums = np.zeros((len(distinct), 6))
        low, high = np.zeros(len(distinct)), np.zeros(len(distinct))
        if len(self.present):
            for row, each in enumerate(distinct):
                like = self._like(int(each))
                sums[row] = self.sums[like].sum(axis=0)
                low[row], high[row] = self.low[like].min(), self.high[like].max()
        return sums[place], low[place], high[place]

    def _like(self, size: int) -> NDArray[np.bool_]:
        """Return which of the sizes count as like size."""
        distance = np.abs(np.log(self.present / size))
        order = np.argsort(distance, kind="stable")
        needed = int(np.searchsorted(np.cumsum(self.sums[order, 0]), LIKE_SIZED))
        reach = distance[order[min(needed, len(order) - 1)]] + 1e-9
        like: NDArray[np.bool_] = distance <= reach
        return like


def _log_strength(size: IntegerArray, strength: FloatArray) -> FloatArray:
    x: FloatArray = np.log(np.maximum(strength / size, 1e-12))
    return x


def _terms(x: FloatArray, y: FloatArray) -> FloatArray:
    return np.column_stack([np.ones(len(x)), x, x * x, y, y * y, x * y])


def _from_line(x: FloatArray, y: FloatArray, sums: FloatArray) -> FloatArray:
    """Return the distance of points from least-squares lines, in standard deviations of the residuals.

    A line that too few points, or points of one x, cannot bear is level. Without any spread the distance is 0, or
    infinite above the line.
    """
    count, sum_x, sum_xx, sum_y, sum_yy, sum_xy = sums.T
    safe = np.maximum(count, 1)
    mean_x, mean_y = sum_x / safe, sum_y / safe
    spread_x = np.maximum(sum_xx - safe * mean_x**2, 0.0)
    spread_y = np.maximum(sum_yy - safe * mean_y**2, 0.0)
    common = sum_xy - safe * mean_x * mean_y
    sloped = (count >= FEWEST_FOR_A_LINE) & (spread_x > 1e-9 * np.maximum(sum_xx, 1.0))
    slope = np.divide(common, spread_x, out=np.zeros_like(common), where=sloped)
    left = np.maximum(spread_y - slope * common, 0.0)
    freedom = np.maximum(count - 1 - sloped, 0)
    deviation = np.sqrt(np.divide(left, freedom, out=np.zeros_like(left), where=freedom > 0))
    excess = y - mean_y - slope * (x - mean_x)
    magnitude = np.maximum(np.abs(mean_y), np.abs(y))
    without: FloatArray = np.where(excess > 1e-6 * magnitude, np.inf, 0.0)
    distance: FloatArray = np.divide(excess, deviation, out=without, where=deviation > 1e-6 * magnitude)
    return distance
