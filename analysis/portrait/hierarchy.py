"""Clustering against degree: whether the partners of hubs are joined less than those of other genes."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Any

import numpy as np
from numpy.typing import NDArray

from analysis.network import FloatArray, Network, locked
from analysis.portrait.degree_distribution import degree_bins

RESAMPLES = 200
FEWEST_BINS = 3
SOURCE = "Ravasz & Barabási 2003"


@dataclass(frozen=True, eq=False)
class Hierarchy:
    """Mean local clustering by degree, ``C(k)``.

    Attributes
    ----------
    degrees : int64 array, shape (distinct,)
        Degrees from 2 on that occur.
    genes : int64 array, shape (distinct,)
        How many genes have each.
    clustering : float64 array, shape (distinct,)
        ``C(k)``: mean over those genes.
    bin_degree, bin_clustering : float64 arrays, shape (bins,)
        Means over bins that widen with the degree.
    bin_null : float64 array, shape (bins,)
        The same in networks with the same degrees, mean over those that were drawn; NaN before any was.
    slope, slope_low, slope_high : float
        Of ``ln C(k)`` against ``ln k`` over the bins with C above 0, with the 95 % interval from resampled genes
        (Efron 1979); NaN where fewer than three bins have one.
    flat : float
        The level of a random network, where ``C(k)`` is the density whatever the degree.
    """

    degrees: NDArray[np.int64]
    genes: NDArray[np.int64]
    clustering: FloatArray
    bin_degree: FloatArray
    bin_clustering: FloatArray
    bin_null: FloatArray
    slope: float
    slope_low: float
    slope_high: float
    flat: float

    def with_nulls(self, by_degree: NDArray[Any]) -> Hierarchy:
        """Return it with the mean ``C(k)`` of null networks, shape (highest degree + 1,)."""
        if not len(self.degrees):
            return self
        found = _binned(self.degrees, self.genes, by_degree[self.degrees])[1]
        return replace(self, bin_null=locked(found))

    def sentence(self) -> str:
        """Say whether clustering falls with the degree, and whether the degrees alone would make it fall."""
        if np.isnan(self.slope):
            return "Too few genes have partners that are joined to say how clustering depends on the degree."
        slope, low, high = (_signed(each) for each in (self.slope, self.slope_low, self.slope_high))
        interval = f"slope {slope}, 95 % from {low} to {high}"
        if self.slope_high >= 0:
            how = "rises" if self.slope_low > 0 else "does not clearly change"
            return f"Clustering {how} with the degree ({interval}): no sign of a hierarchy of modules."
        told = f"Clustering falls with the degree ({interval}; a hierarchical model has −1, a random network 0)"
        null = self._null_slope()
        if np.isnan(null):
            return f"{told}."
        return f"{told}; the degrees alone give {_signed(null)}."

    def _null_slope(self) -> float:
        return _slope(self.bin_degree, self.bin_null)


def hierarchy(network: Network, local: FloatArray, seed: int) -> Hierarchy:
    """Return ``C(k)`` and its slope.

    Parameters
    ----------
    local : float64 array, shape (nodes,)
        Local clustering of each node.
    seed : int
        Of the resampling.
    """
    degree = network.degree
    nodes = np.flatnonzero(degree >= 2)
    degrees, genes = np.unique(degree[nodes], return_counts=True)
    degrees = degrees.astype(np.int64)
    flat = 2 * network.edge_count / max(network.node_count * (network.node_count - 1), 1)
    if not len(nodes):
        nothing = locked(np.zeros(0))
        missing = (float("nan"),) * 3
        return Hierarchy(locked(degrees), locked(genes), nothing, nothing, nothing, nothing, *missing, flat)
    by_degree = mean_by_degree(degree, local)[degrees]
    middle, means = _binned(degrees, genes, by_degree)
    low, high = _interval(degree[nodes], local[nodes], np.random.default_rng(seed))
    return Hierarchy(
        locked(degrees),
        locked(genes),
        locked(by_degree),
        locked(middle),
        locked(means),
        locked(np.full(len(means), np.nan)),
        _slope(middle, means),
        low,
        high,
        flat,
    )


def mean_by_degree(degree: NDArray[Any], local: FloatArray) -> FloatArray:
    """Return the mean of a figure over the nodes of each degree, shape (highest degree + 1,); 0 where there is none."""
    held = np.bincount(degree)
    found: FloatArray = np.bincount(degree, local) / np.maximum(held, 1)
    return found


def _binned(degrees: NDArray[Any], genes: NDArray[Any], values: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Return mean degree and mean value over the genes of each bin that holds any."""
    borders = degree_bins(int(degrees[-1]))
    place = np.searchsorted(borders, degrees, side="right") - 1
    held = np.bincount(place, genes, len(borders))
    kept = held > 0
    middle = np.bincount(place, genes * degrees, len(borders))[kept] / held[kept]
    return middle, np.bincount(place, genes * values, len(borders))[kept] / held[kept]


def _signed(value: float) -> str:
    return f"{value:.2f}".replace("-", "−")


def _slope(degree: FloatArray, values: FloatArray) -> float:
    """Return the slope of least squares on log axes, over values above 0."""
    kept = values > 0
    if kept.sum() < FEWEST_BINS:
        return float("nan")
    across, up = np.log(degree[kept]), np.log(values[kept])
    across = across - across.mean()
    return float(across @ (up - up.mean()) / (across @ across))


def _interval(degree: NDArray[Any], local: FloatArray, random: np.random.Generator) -> tuple[float, float]:
    found = []
    for _ in range(RESAMPLES):
        drawn = random.integers(0, len(degree), len(degree))
        degrees, genes = np.unique(degree[drawn], return_counts=True)
        means = mean_by_degree(degree[drawn], local[drawn])[degrees]
        found.append(_slope(*_binned(degrees, genes, means)))
    known = np.array(found)[~np.isnan(found)]
    if not len(known):
        return float("nan"), float("nan")
    low, high = np.quantile(known, [0.025, 0.975])
    return float(low), float(high)
