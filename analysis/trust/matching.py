"""Best-match Jaccard of many modules in many partitions."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from analysis.modules import Modules
from analysis.network import FloatArray

if TYPE_CHECKING:
    from analysis.trust.sweep import Sweep

DISSOLVED = 0.5
LARGE = 30_000_000

Labels = NDArray[np.int32]


def best_matches(members: Sequence[NDArray[np.int32]], labelings: Sequence[Labels]) -> FloatArray:
    """Return the overlap of each group with its best match in each partition, shape (groups, partitions).

    The Jaccard index, members shared over members of either; its best value is Hennig's measure (Hennig 2007). Time and
    memory are linear in the members of the groups, one partition after another.

    Parameters
    ----------
    members : sequence of int32 arrays
        Node indices of each group; none empty. Groups may overlap.
    labelings : sequence of int32 arrays, each of shape (nodes,)
        Non-negative labels.
    """
    table = np.zeros((len(members), len(labelings)))
    match = matcher(members, len(labelings))
    for column, labels in enumerate(labelings):
        table[:, column] = match(labels)
    return table


def matcher(members: Sequence[NDArray[np.int32]], partitions: int) -> Callable[[Labels], FloatArray]:
    """Return a function from the labels of a partition to one column of `best_matches`.

    Parameters
    ----------
    partitions : int
        How often it will be called. The compiled form is five times quicker; where little is to be done, loading the
        compiler would cost more, and a sparse product does the same.
    """
    if not len(members):
        return lambda _labels: np.zeros(0)
    nodes = np.concatenate(members)
    starts = np.concatenate([[0], np.cumsum([len(group) for group in members])])
    return _compiled(nodes, starts) if len(nodes) * partitions > LARGE else by_product(nodes, starts)


def _compiled(nodes: NDArray[np.int32], starts: NDArray[np.int64]) -> Callable[[Labels], FloatArray]:
    from analysis.trust.matching_compiled import best_of_each

    def match(labels: Labels) -> FloatArray:
        best = np.zeros(len(starts) - 1)
        best_of_each(nodes, starts, labels, np.bincount(labels), best)
        return best

    return match


def by_product(nodes: NDArray[np.int32], starts: NDArray[np.int64]) -> Callable[[Labels], FloatArray]:
    """Return a function of labels: the product of groups × nodes with nodes × labels counts what they share.

    Parameters
    ----------
    nodes : int32 array
        Members of all groups, one group after another.
    starts : int64 array, shape (groups + 1,)
        Where each group begins in `nodes`.
    """
    from scipy.sparse import csr_array

    sizes = np.diff(starts)
    count = int(nodes.max()) + 1
    groups = csr_array((np.ones(len(nodes), np.int32), nodes, starts.astype(np.int32)), shape=(len(sizes), count))

    def match(labels: Labels) -> FloatArray:
        label_sizes = np.bincount(labels)
        own = csr_array(
            (np.ones(count, np.int32), labels[:count], np.arange(count + 1, dtype=np.int32)),
            shape=(count, len(label_sizes)),
        )
        shared = groups @ own
        rows = np.repeat(np.arange(len(sizes)), np.diff(shared.indptr))
        quotient = shared.data / (sizes[rows] + label_sizes[shared.indices] - shared.data)
        best: FloatArray = np.maximum.reduceat(quotient, shared.indptr[:-1])
        return best

    return match


def stability_over_sweep(modules: Modules, labelings: Sequence[Labels]) -> FloatArray:
    """Return each module's mean best-match Jaccard over all partitions given, shape (modules,) (Hennig 2007).

    Given the partitions of noisy copies at all resolutions of a sweep, this is the stability that goes into support.
    """
    if not len(labelings):
        return np.full(len(modules), np.nan)
    mean: FloatArray = best_matches(modules.members, labelings).mean(axis=1)
    return mean


def module_ranges(modules: Modules, sweep: Sweep, threshold: float = DISSOLVED) -> tuple[FloatArray, FloatArray]:
    """Return the range of resolution over which each module holds: two arrays of shape (modules,).

    A module holds at a resolution where its best match there has a Jaccard index above `threshold`; at 0.5 or below it
    counts as dissolved (Hennig 2007), and above it no second module can match. The range is the unbroken stretch around
    the point of the best match, from grid point to grid point; NaN where the module holds nowhere.
    """
    match = best_matches(modules.members, [point.labels for point in sweep.points])
    return unbroken_range(match, sweep.resolutions, threshold)


def unbroken_range(match: FloatArray, grid: FloatArray, threshold: float) -> tuple[FloatArray, FloatArray]:
    """Return the first and last resolution of the stretch around the best match in which it stays above a threshold.

    Parameters
    ----------
    match : float64 array, shape (modules, points)
    grid : float64 array, shape (points,)
        Ascending resolutions.

    Returns
    -------
    low, high : float64 arrays, shape (modules,)
        NaN where the match is nowhere above the threshold.
    """
    low, high = np.full(len(match), np.nan), np.full(len(match), np.nan)
    if not len(match):
        return low, high
    holds = match > threshold
    peak = match.argmax(axis=1)
    columns = np.arange(len(grid))
    before = np.where(~holds & (columns < peak[:, None]), columns, -1).max(axis=1)
    after = np.where(~holds & (columns > peak[:, None]), columns, len(grid)).min(axis=1)
    somewhere = holds.any(axis=1)
    low[somewhere] = grid[before[somewhere] + 1]
    high[somewhere] = grid[after[somewhere] - 1]
    return low, high
