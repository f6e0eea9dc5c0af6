"""Agreement of two covers of the same nodes; partitions are covers too."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import NDArray

from analysis.agreement import membership_matrix
from analysis.modules import Modules
from analysis.network import FloatArray

ROWS_AT_A_TIME = 512


def overlapping_information(first: Modules, second: Modules) -> float:
    """Return the normalised mutual information of two covers, between 0 and 1; 1 for equal ones.

    Each module is a yes-or-no variable over the nodes. ``H(X_k|Y) = min_l H(X_k|Y_l)`` over the modules `l` of the
    other cover for which ``h(P11) + h(P00) ≥ h(P01) + h(P10)``, else `H(X_k)`; then
    ``N = 1 − ½ [mean_k H(X_k|Y)/H(X_k) + mean_l H(Y_l|X)/H(Y_l)]`` (Lancichinetti, Fortunato & Kertész 2009,
    New Journal of Physics 11:033015, appendix B). A module of all nodes has no entropy; it counts as found where the
    other cover has one too. 1 where neither cover has a module, 0 where one has none.
    """
    if not len(first) or not len(second):
        return float(len(first) == len(second))
    return 1.0 - (_lack(first, second) + _lack(second, first)) / 2


def omega_index(first: Modules, second: Modules) -> float:
    """Return the omega index: the adjusted Rand index for covers; 1 for equal ones, 0 as expected by chance.

    Two covers agree on a pair of nodes where the pair is together in equally many modules of each. With `A_j` and `B_j`
    the pairs that are together `j` times, ``ω_e = Σ_j A_j B_j / M²`` over `M` pairs, and
    ``ω = (ω_u − ω_e) / (1 − ω_e)`` (Collins & Dent 1988, Multivariate Behavioral Research 23:231).
    """
    pairs = first.node_count * (first.node_count - 1) // 2
    if pairs == 0:
        return 1.0
    table = _together(first, second, pairs)
    agreed = np.trace(table) / pairs
    expected = float(table.sum(axis=1)[: min(table.shape)] @ table.sum(axis=0)[: min(table.shape)]) / pairs**2
    return 1.0 if expected == 1.0 else float((agreed - expected) / (1.0 - expected))


def _together(first: Modules, second: Modules, pairs: int) -> NDArray[np.float64]:
    """Count the pairs of nodes that are together `i` times in the first cover and `j` times in the second."""
    left, right = membership_matrix(first).astype(np.int64), membership_matrix(second).astype(np.int64)
    most = (int(first.homes.max(initial=0)) + 1, int(second.homes.max(initial=0)) + 1)
    counts = np.zeros(most[0] * most[1], np.int64)
    for start in range(0, first.node_count, ROWS_AT_A_TIME):
        stop = min(start + ROWS_AT_A_TIME, first.node_count)
        both = (left[start:stop] @ left.T * most[1] + right[start:stop] @ right.T).tocoo()
        later = both.col > both.row + start
        counts += np.bincount(both.data[later], minlength=len(counts))
    counts[0] = pairs - counts[1:].sum()
    table: NDArray[np.float64] = counts.reshape(most).astype(np.float64)
    return table


def _lack(cover: Modules, other: Modules) -> float:
    """Mean over modules of the share of their entropy that the other cover leaves."""
    matrix, others = membership_matrix(cover), membership_matrix(other)
    own = _binary(cover.sizes / cover.node_count)
    lacks = []
    for start in range(0, len(cover), ROWS_AT_A_TIME):
        block = slice(start, start + ROWS_AT_A_TIME)
        shared = np.asarray((matrix[:, block].T @ others).todense(), np.float64)
        lacks.append(_least_left(shared, cover.sizes[block], other.sizes, cover.node_count))
    left = np.concatenate(lacks)
    whole = np.flatnonzero(own == 0)
    share = np.divide(np.minimum(left, own), own, out=np.zeros(len(own)), where=own > 0)
    share[whole] = 0.0 if bool((other.sizes == cover.node_count).any()) else 1.0
    return float(share.mean())


def _least_left(shared: FloatArray, sizes: NDArray[Any], other_sizes: NDArray[Any], nodes: int) -> FloatArray:
    """Return the least conditional entropy of each module, infinite where no module of the other cover is admitted."""
    rows, columns = sizes[:, None].astype(np.float64), other_sizes[None, :].astype(np.float64)
    same = _term(shared / nodes) + _term((nodes - rows - columns + shared) / nodes)
    apart = _term((rows - shared) / nodes) + _term((columns - shared) / nodes)
    left = same + apart - _binary(columns / nodes)
    least: FloatArray = np.where(same >= apart, np.maximum(left, 0.0), np.inf).min(axis=1)
    return least


def _term(share: NDArray[Any]) -> FloatArray:
    """Return ``−p ln p``."""
    terms: FloatArray = np.zeros(share.shape)
    positive = share > 0
    terms[positive] = -share[positive] * np.log(share[positive])
    return terms


def _binary(share: NDArray[Any]) -> FloatArray:
    return _term(share) + _term(1.0 - share)
