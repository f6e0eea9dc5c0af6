"""Agreement of two partitions, and of a module with the modules of another run."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from analysis.modules import Modules
from analysis.network import FloatArray

CELLS_PER_NODE, FEW_NODES = 16, 1_000  # a table with more cells costs more to search than sorting the nodes does


@dataclass(frozen=True)
class Contingency:
    """Non-empty cells of the table of two partitions of the same nodes.

    Attributes
    ----------
    counts : int64 array, shape (cells,)
    rows, columns : int64 arrays, shape (cells,)
    row_sizes, column_sizes : int64 arrays
    """

    counts: NDArray[np.int64]
    rows: NDArray[np.int64]
    columns: NDArray[np.int64]
    row_sizes: NDArray[np.int64]
    column_sizes: NDArray[np.int64]

    @property
    def total(self) -> int:
        """Return the number of nodes."""
        return int(self.row_sizes.sum())


def contingency(first: NDArray[Any], second: NDArray[Any]) -> Contingency:
    """Count the nodes that share each pair of labels; labels are non-negative, shape (nodes,)."""
    rows, columns = int(first.max(initial=-1)) + 1, int(second.max(initial=-1)) + 1
    key = first.astype(np.int64) * columns + second
    if rows * columns <= CELLS_PER_NODE * max(len(first), FEW_NODES):
        table = np.bincount(key, minlength=rows * columns)
        cells = np.flatnonzero(table)
        counts = table[cells]
    else:
        cells, counts = np.unique(key, return_counts=True)
    return Contingency(
        counts,
        cells // max(columns, 1),
        cells % max(columns, 1),
        np.bincount(first, minlength=rows),
        np.bincount(second, minlength=columns),
    )


def rand_index(first: NDArray[Any], second: NDArray[Any]) -> float:
    """Return the share of node pairs on which two partitions agree (Rand 1971)."""
    both, left, right, pairs = _pair_counts(first, second)
    return 1.0 if pairs == 0 else (pairs + 2 * both - left - right) / pairs


def adjusted_rand_index(first: NDArray[Any], second: NDArray[Any]) -> float:
    """Return the Rand index corrected for chance (Hubert & Arabie 1985, eq. 5); 1 for equal partitions."""
    both, left, right, pairs = _pair_counts(first, second)
    if pairs == 0:
        return 1.0
    expected = left * right / pairs
    ceiling = (left + right) / 2
    return 1.0 if ceiling == expected else (both - expected) / (ceiling - expected)


def mutual_information(first: NDArray[Any], second: NDArray[Any]) -> float:
    """Return the mutual information of two partitions, in nats."""
    return _information(contingency(first, second))


def entropy(labels: NDArray[Any]) -> float:
    """Return the entropy of the module sizes of a partition, in nats."""
    return _entropy(np.bincount(labels))


def variation_of_information(first: NDArray[Any], second: NDArray[Any]) -> float:
    """Return ``H(X) + H(Y) − 2 I(X, Y)``, in nats (Meilă 2003)."""
    table = contingency(first, second)
    distance = _entropy(table.row_sizes) + _entropy(table.column_sizes) - 2 * _information(table)
    return max(distance, 0.0)


def normalised_mutual_information(first: NDArray[Any], second: NDArray[Any]) -> float:
    """Return ``2 I / (H(X) + H(Y))`` (Danon, Díaz-Guilera, Duch & Arenas 2005); 1 where both have one module."""
    table = contingency(first, second)
    mean = (_entropy(table.row_sizes) + _entropy(table.column_sizes)) / 2
    return 1.0 if mean == 0 else _information(table) / mean


def adjusted_mutual_information(first: NDArray[Any], second: NDArray[Any]) -> float:
    """Return AMI with the arithmetic mean of the entropies (Vinh, Epps & Bailey 2010, Table 2, AMI_sum)."""
    return float(pairwise_ami([first, second])[0])


def pairwise_ami(partitions: Sequence[NDArray[Any]]) -> FloatArray:
    """Return the AMI of every pair of partitions, row by row: (0,1), (0,2) to the last, then (1,2).

    The expected information of a pair of modules depends only on their sizes, so it is computed once for all pairs of
    sizes that occur in any of the partitions.

    Parameters
    ----------
    partitions : sequence of int arrays, each of shape (nodes,)
        Non-negative labels.
    """
    sizes = [np.bincount(labels) for labels in partitions]
    distinct, table = _expected_table(sizes, len(partitions[0]))
    counts = np.array(
        [np.bincount(np.searchsorted(distinct, size[size > 0]), minlength=len(distinct)) for size in sizes]
    )
    expected = counts @ table @ counts.T
    entropies = [_entropy(size) for size in sizes]
    scores = []
    for i, first in enumerate(partitions):
        for j in range(i + 1, len(partitions)):
            found = _information(contingency(first, partitions[j]))
            scores.append(_adjust(found, float(expected[i, j]), (entropies[i] + entropies[j]) / 2))
    return np.array(scores, np.float64)


def ami_to(reference: NDArray[Any], partitions: Sequence[NDArray[Any]]) -> FloatArray:
    """Return the AMI of one partition with each of several, shape (partitions,)."""
    return np.array([adjusted_mutual_information(reference, labels) for labels in partitions], np.float64)


@dataclass(frozen=True)
class Match:
    """How the modules of a reference are found again in another run.

    Attributes
    ----------
    jaccard : float64 array, shape (reference modules,)
        Overlap with the best-matching module: members shared over members of either (Hennig 2007).
    best : int64 array, shape (reference modules,)
        Position of that module in the other run; −1 where nothing overlaps.
    home : int64 array, shape (modules of the other run,)
        Position of the reference module with which each shares most members; −1 for none.
    """

    jaccard: FloatArray
    best: NDArray[np.int64]
    home: NDArray[np.int64]


def match_modules(reference: Modules, other: Modules) -> Match:
    """Match the modules of two results, partitions or covers, on the same nodes."""
    overlap = (membership_matrix(reference).T @ membership_matrix(other)).tocoo()
    shared = overlap.data.astype(np.float64)
    rows, columns = overlap.row.astype(np.int64), overlap.col.astype(np.int64)
    union = reference.sizes[rows] + other.sizes[columns] - shared
    jaccard = np.zeros(len(reference))
    best = _argmax_by(rows, shared / union, columns, len(reference))
    jaccard[rows] = 0.0
    np.maximum.at(jaccard, rows, shared / union)
    return Match(jaccard, best, _argmax_by(columns, shared, rows, len(other)))


def best_match_jaccard(reference: Modules, other: Modules) -> FloatArray:
    """Return the overlap of each reference module with its best match in another run, shape (modules,)."""
    return match_modules(reference, other).jaccard


def membership_matrix(modules: Modules) -> Any:
    """Return the sparse 0/1 matrix (CSR), shape (nodes, modules)."""
    from scipy.sparse import csr_array

    nodes, owners = modules.memberships
    return csr_array((np.ones(len(nodes), np.int32), (nodes, owners)), shape=(modules.node_count, len(modules)))


def _argmax_by(groups: NDArray[Any], values: NDArray[Any], items: NDArray[Any], count: int) -> NDArray[np.int64]:
    """Return, for each group, the item of the largest value; of equal ones the first item."""
    order = np.lexsort((-items, values, groups))
    found = np.full(count, -1, np.int64)
    found[groups[order]] = items[order]
    return found


def _pair_counts(first: NDArray[Any], second: NDArray[Any]) -> tuple[int, int, int, int]:
    table = contingency(first, second)
    both = int((table.counts * (table.counts - 1) // 2).sum())
    left = int((table.row_sizes * (table.row_sizes - 1) // 2).sum())
    right = int((table.column_sizes * (table.column_sizes - 1) // 2).sum())
    return both, left, right, table.total * (table.total - 1) // 2


def _entropy(sizes: NDArray[Any]) -> float:
    present = sizes[sizes > 0]
    total = present.sum()
    if len(present) <= 1:
        return 0.0
    return float(np.log(total) - (present * np.log(present)).sum() / total)


def _information(table: Contingency) -> float:
    total = table.total
    if total == 0:
        return 0.0
    expected = table.row_sizes[table.rows] * (table.column_sizes[table.columns] / total)
    return float((table.counts * np.log(table.counts / expected)).sum() / total)


def _adjust(found: float, expected: float, mean_entropy: float) -> float:
    if mean_entropy == 0:
        return 1.0
    spread = mean_entropy - expected
    if abs(spread) < 1e-12 * mean_entropy:  # two partitions into single nodes: nothing to correct
        return 1.0 if abs(found - mean_entropy) < 1e-12 * mean_entropy else 0.0
    return (found - expected) / spread


def _expected_table(sizes: Sequence[NDArray[Any]], total: int) -> tuple[NDArray[Any], FloatArray]:
    """Return the distinct module sizes, and for each pair (a, b) of them the expected share of information.

    ``Σ_n (n/N) ln(N n / (a b)) · P(n)``, `P` hypergeometric (Vinh, Epps & Bailey 2010, eq. 24a); terms further than
    nine standard deviations from the mean are below the precision of a double and left out.
    """
    distinct = np.unique(np.concatenate([size[size > 0] for size in sizes]))
    log_factorial = np.concatenate([[0.0], np.cumsum(np.log(np.arange(1, total + 1)))])
    table = np.zeros((len(distinct), len(distinct)))
    for row, a in enumerate(distinct):
        table[row, row:] = _expected_row(int(a), distinct[row:], total, log_factorial)
    return distinct, np.triu(table) + np.triu(table, 1).T


def _expected_row(a: int, others: NDArray[Any], total: int, log_factorial: FloatArray) -> FloatArray:
    mean = a * (others / total)
    reach = 9 * np.sqrt(mean) + 30
    low = np.maximum(np.maximum(1, a + others - total), np.floor(mean - reach)).astype(np.int64)
    high = np.minimum(np.minimum(a, others), np.ceil(mean + reach)).astype(np.int64)
    length = np.maximum(high - low + 1, 0)
    owner = np.repeat(np.arange(len(others)), length)
    start = np.repeat(np.cumsum(length) - length, length)
    shared = low[owner] + np.arange(len(owner)) - start
    b = others[owner]
    f = log_factorial
    log_chance = (
        f[a] + f[b] + f[total - a] + f[total - b]
        - f[total] - f[shared] - f[a - shared] - f[b - shared] - f[total - a - b + shared]
    )  # fmt: skip
    terms = shared / total * np.log(total * (shared / (a * b.astype(np.float64)))) * np.exp(log_chance)
    return np.bincount(owner, terms, len(others)).astype(np.float64)
