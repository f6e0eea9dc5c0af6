"""Stretches of resolution over which the partition hardly changes, and the resolution they suggest."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from analysis.network import FloatArray, Network
from analysis.trust.sweep_points import SweepPoint

HARDLY_CHANGES = 0.9
STANDS_OUT_SCORE = 0.5
STANDS_OUT_AGREEMENT = 0.6


@dataclass(frozen=True)
class Plateau:
    """A stretch of the sweep over which the partition hardly changes.

    Attributes
    ----------
    resolution_from, resolution_to : float
        Its ends: where the first of its partitions begins to be the best one, and the last ceases to be.
    first, last, middle : int
        Positions in the sweep's points; `middle` is the one nearest to the geometric middle.
    modules : int
        Number of modules at the middle.
    agreement : float
        Mean agreement (AMI) of noisy copies with the partitions of the stretch; of seeds where no noisy copy was made.
    score : float
        ``ln(resolution_to / resolution_from) · agreement``, by which plateaus are ranked.
    """

    resolution_from: float
    resolution_to: float
    first: int
    last: int
    middle: int
    modules: int
    agreement: float
    score: float

    @property
    def stands_out(self) -> bool:
        """Whether it is wide and steady enough to be suggested: score 0.5 or more, agreement 0.6 or more.

        The two marks are a choice: random networks without modules stay below them, and so do stretches narrower than a
        factor of 1.65 however steady they are.
        """
        return self.score >= STANDS_OUT_SCORE and self.agreement >= STANDS_OUT_AGREEMENT


@dataclass(frozen=True)
class Suggestion:
    """A resolution and the reason for it in one sentence.

    Attributes
    ----------
    position : int
        Its position in the sweep's points.
    stands_out : bool
        False where no stretch is wide and steady enough; the reason says so.
    """

    resolution: float
    position: int
    reason: str
    stands_out: bool


def is_undivided(network: Network, labels: NDArray[Any]) -> bool:
    """Whether one module holds three quarters of the largest component, and that component half of all nodes."""
    giant = network.components == 0
    largest = np.bincount(labels[giant]).max(initial=0)
    return bool(giant.sum() >= 0.5 * len(labels) and largest > 0.75 * giant.sum())


def share_in_modules(labels: NDArray[Any]) -> float:
    """Return the share of nodes in modules of three or more; 0 without nodes."""
    sizes = np.bincount(labels)
    return float(sizes[sizes >= 3].sum()) / max(len(labels), 1)


def find_plateaus(
    points: Sequence[SweepPoint], ami: FloatArray, agreement: FloatArray, trivial: NDArray[np.bool_]
) -> tuple[Plateau, ...]:
    """Return the plateaus, best first, without overlap.

    A plateau is a longest stretch of two points or more in which every two partitions agree with AMI 0.9 or better. Of
    stretches that overlap, the one of the better score stays.

    Parameters
    ----------
    ami : float64 array, shape (points, points)
        Agreement of the points' partitions.
    agreement : float64 array, shape (points,)
        Agreement under noise; see `Plateau`.
    trivial : bool array, shape (points,)
        Points that no plateau may hold.
    """
    log_grid = np.log([point.resolution for point in points])
    found = []
    for first, last in _stretches(ami >= HARDLY_CHANGES, trivial):
        low, high = points[first].best_from, points[last].best_to
        inside = slice(first, last + 1)
        middle = first + int(np.argmin(np.abs(log_grid[inside] - np.log(low * high) / 2)))
        steady = float(agreement[inside].mean())
        score = float(np.log(high / low)) * max(steady, 0.0)
        found.append(Plateau(low, high, first, last, middle, points[middle].modules, steady, score))
    found.sort(key=lambda plateau: (-plateau.score, plateau.first))
    kept: list[Plateau] = []
    for plateau in found:
        if all(plateau.last < other.first or plateau.first > other.last for other in kept):
            kept.append(plateau)
    return tuple(kept)


def suggest(
    plateaus: Sequence[Plateau],
    grid: FloatArray,
    agreement: FloatArray,
    *,
    in_modules: FloatArray,
    undivided: NDArray[np.bool_],
    against: str,
) -> Suggestion:
    """Return the middle of the best plateau, or, where none stands out, the point of best agreement, and say why.

    Parameters
    ----------
    in_modules : float64 array, shape (points,)
        Share of nodes in modules of three or more.
    undivided : bool array, shape (points,)
        Points at which the network is one module.
    against : str
        What the agreement is with, in words: "copies with 10 % of the edges left out".
    """
    standing = [plateau for plateau in plateaus if plateau.stands_out]
    if standing:
        best = standing[0]
        reason = (
            f"From {best.resolution_from:.2g} to {best.resolution_to:.2g} the modules hardly change "
            f"({best.modules:,} at {grid[best.middle]:.2g}), and {against} agree with them "
            f"(mean AMI {best.agreement:.2f}): the steadiest stretch of the sweep."
        )
        return Suggestion(float(grid[best.middle]), best.middle, reason, True)
    usable = ~undivided & (in_modules >= 0.5)
    if not usable.any():
        position = len(grid) // 2
        reason = (
            "Nothing to choose by: at every resolution of this sweep the network is one module, or most genes stand "
            f"alone; {grid[position]:.2g} is only the middle of the sweep."
        )
        return Suggestion(float(grid[position]), position, reason, False)
    position = int(np.argmax(np.where(usable, agreement, -np.inf)))
    reason = (
        f"No stretch of resolution stands out; {grid[position]:.2g} is where {against} agree best "
        f"(mean AMI {agreement[position]:.2f}), a place to start from and no more."
    )
    return Suggestion(float(grid[position]), position, reason, False)


def _stretches(alike: NDArray[np.bool_], trivial: NDArray[np.bool_]) -> list[tuple[int, int]]:
    """Return the longest stretches of two points or more in which all are alike and none is trivial."""
    stretches: list[tuple[int, int]] = []
    reached = -1
    for first in range(len(trivial)):
        last = first - 1
        while last + 1 < len(trivial) and not trivial[last + 1] and alike[first : last + 1, last + 1].all():
            last += 1
        if last > first and last > reached:
            stretches.append((first, last))
            reached = last
    return stretches
