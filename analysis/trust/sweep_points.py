"""The points of a resolution sweep, and the pool of partitions from which they are taken."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from analysis.agreement import pairwise_ami
from analysis.methods import Leiden
from analysis.modules import modularity
from analysis.network import FloatArray, IntArray, Network
from analysis.progress import Progress
from analysis.trust.chains import LabelTable, canonical
from analysis.trust.envelope import Domain, quality_lines, upper_envelope

UNKNOWN = float("nan")


@dataclass(frozen=True, eq=False)
class SweepPoint:
    """One resolution of a sweep.

    Attributes
    ----------
    resolution : float
    labels : int32 array, shape (nodes,)
        The partition of highest quality at this resolution among all runs of the sweep, from the largest module.
    modules, modules_of_three : int
        Number of modules; of those with three genes or more.
    modularity : float
        Standard modularity (resolution 1) of the partition.
    quality : float
        The quality that was optimised.
    seed_ami : float
        Mean AMI of every two runs at this resolution; NaN for one run.
    noise_ami : float
        Mean AMI of the noisy copies' runs with `labels`; NaN without copies.
    neighbour_ami : float
        Mean AMI with the partitions of the points beside it.
    low, high : int
        Fewest and most modules among the runs and the copies at this resolution.
    best_from, best_to : float
        Range over which no other partition of the sweep is better.
    """

    resolution: float
    labels: IntArray
    modules: int
    modules_of_three: int
    modularity: float
    quality: float
    seed_ami: float = UNKNOWN
    noise_ami: float = UNKNOWN
    neighbour_ami: float = UNKNOWN
    low: int = 0
    high: int = 0
    best_from: float = UNKNOWN
    best_to: float = UNKNOWN


def bare_point(network: Network, quality: str, resolution: float, labels: NDArray[np.int32]) -> SweepPoint:
    """Return a point of which nothing is known but its partition."""
    labels = canonical(labels)
    sizes = np.bincount(labels)
    return SweepPoint(
        resolution,
        labels,
        len(sizes),
        int((sizes >= 3).sum()),
        modularity(network, labels),
        Leiden(quality, resolution).score(network, labels),
        low=len(sizes),
        high=len(sizes),
    )


class PartitionPool:
    """All partitions of a sweep, and which of them is best where.

    Quality is linear in resolution, so each partition of the network itself competes at every resolution, not only at
    the one that it was found at. Partitions of noisy copies serve for comparison alone.

    Parameters
    ----------
    runs : int
        The first `runs` chains are on the network itself; those that follow on noisy copies.
    grid : float64 array, shape (points,)
        Ascending resolutions.
    """

    def __init__(self, network: Network, quality: str, runs: int, grid: FloatArray) -> None:
        self.network = network
        self.quality = quality
        self.runs = runs
        self.grid = grid
        self._tables: dict[int, LabelTable] = {}
        self._lines: dict[int, FloatArray] = {}
        self._leading = np.full(len(grid), -np.inf)

    def add(self, position: int, table: LabelTable) -> list[SweepPoint]:
        """Take in the labels of one chain; return bare points where they are the best so far."""
        self._tables[position] = table
        if position >= self.runs:
            return []
        lines = quality_lines(self.network, table, self.quality)
        self._lines[position] = lines
        values = lines[:, 0] - self.grid[:, None] * lines[:, 1]
        better = np.flatnonzero(values.max(axis=1) > self._leading)
        self._leading = np.maximum(self._leading, values.max(axis=1))
        return [self._bare(step, table[values[step].argmax()]) for step in better.tolist()]

    def domains(self) -> tuple[Domain, ...]:
        """Return the partitions that are best somewhere, from the coarsest; all chains must be in."""
        lines = np.concatenate([self._lines[position] for position in range(self.runs)])
        winners, ends = upper_envelope(lines[:, 0], lines[:, 1], float(self.grid[0]), float(self.grid[-1]))
        found = []
        for winner, start, end in zip(winners.tolist(), ends[:-1].tolist(), ends[1:].tolist(), strict=True):
            position, row = divmod(winner, len(self.grid))
            labels = canonical(self._tables[position][row])
            found.append(Domain(start, end, labels, int(labels.max(initial=-1)) + 1))
        return tuple(found)

    def points(self, domains: Sequence[Domain], progress: Progress) -> tuple[SweepPoint, ...]:
        """Return all points with their figures of agreement, but for that with their neighbours."""
        best = np.searchsorted([domain.resolution_to for domain in domains[:-1]], self.grid, side="right")
        points = []
        for step, place in enumerate(best.tolist()):
            progress(step / len(self.grid), "comparing the partitions")
            points.append(self._point(step, domains[place]))
        return tuple(points)

    def _bare(self, step: int, labels: NDArray[np.int32]) -> SweepPoint:
        return bare_point(self.network, self.quality, float(self.grid[step]), labels)

    def _point(self, step: int, domain: Domain) -> SweepPoint:
        bare = self._bare(step, domain.labels)
        tables = [self._tables[position][step] for position in range(len(self._tables))]
        ami = ami_matrix([domain.labels, *tables])
        runs = 1 + self.runs
        counts = [bare.modules, *(len(np.unique(labels)) for labels in tables)]
        return replace(
            bare,
            seed_ami=_mean(ami[1:runs, 1:runs][np.triu_indices(self.runs, 1)]),
            noise_ami=_mean(ami[0, runs:]),
            low=min(counts),
            high=max(counts),
            best_from=domain.resolution_from,
            best_to=domain.resolution_to,
        )


def ami_matrix(partitions: Sequence[NDArray[np.int32]]) -> FloatArray:
    """Return the AMI of every two partitions, shape (partitions, partitions), 1 on the diagonal."""
    matrix = np.eye(len(partitions))
    upper = np.triu_indices(len(partitions), 1)
    matrix[upper] = pairwise_ami(partitions)
    matrix[upper[::-1]] = matrix[upper]
    return matrix


def with_neighbours(points: Sequence[SweepPoint], ami: FloatArray) -> tuple[SweepPoint, ...]:
    """Fill in the agreement of each point with the points beside it."""
    beside = np.diagonal(ami, 1)
    padded = np.concatenate([[np.nan], beside, [np.nan]])
    return tuple(
        replace(point, neighbour_ami=_mean(pair[~np.isnan(pair)]))
        for point, pair in zip(points, np.column_stack([padded[:-1], padded[1:]]), strict=True)
    )


def _mean(values: FloatArray) -> float:
    return float(values.mean()) if len(values) else UNKNOWN
