"""The steps of the harvest that need no clustering: taking modules, comparing with chance, adding genes."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from analysis.network import FloatArray, IntArray, Network

SIZE_EXPONENT = 0.1
TAKEN_SHARE = 0.25
EDGES_EXCEED = 0.05
DENSITY_SHARE = 0.4


def order_score(support: FloatArray, sizes: NDArray[np.int64]) -> FloatArray:
    """Return ``support · size^0.1``, down which modules are taken: of equal support the larger goes first."""
    score: FloatArray = support * sizes.astype(np.float64) ** SIZE_EXPONENT
    return score


def take(members: Sequence[IntArray], support: FloatArray, node_count: int) -> NDArray[np.int64]:
    """Return the positions of the modules taken, best first; see `analysis.trust.harvest.run_harvest`, step 4.

    Modules without support are not taken. Of equal ones the first goes first.
    """
    score = order_score(support, np.array([len(group) for group in members], np.int64))
    order = np.argsort(-score, kind="stable")
    used = np.zeros(node_count, bool)
    taken = []
    for module in order[support[order] > 0].tolist():
        group = members[module]
        if np.count_nonzero(used[group]) <= TAKEN_SHARE * len(group):
            used[group] = True
            taken.append(module)
    return np.array(taken, np.int64)


def chance_shares(scores: FloatArray, null_scores: Sequence[FloatArray]) -> FloatArray:
    """Return the nominal share of chance modules among those of at least each module's score, shape (modules,).

    ``min over t ≤ s of [mean number of null modules with score ≥ t] / [number of modules with score ≥ t]``, at most 1.

    Parameters
    ----------
    scores : float64 array, shape (modules,)
    null_scores : sequence of float64 arrays
        Scores of the modules taken from each null network.
    """
    order = np.argsort(scores, kind="stable")
    ascending = scores[order]
    nulls = np.sort(np.concatenate([*null_scores, np.zeros(0)]))
    by_chance = (len(nulls) - np.searchsorted(nulls, ascending, side="left")) / max(len(null_scores), 1)
    found = len(ascending) - np.searchsorted(ascending, ascending, side="left")
    shares = np.empty(len(scores))
    shares[order] = np.minimum(np.minimum.accumulate(by_chance / np.maximum(found, 1)), 1.0)
    return shares


def add_genes(network: Network, members: Sequence[IntArray]) -> list[IntArray]:
    """Return the modules with the genes that belong to them beside their own; see `run_harvest`, step 6."""
    from scipy.sparse import csr_array
    from scipy.special import betainc

    if not members:
        return []
    sizes = np.array([len(group) for group in members])
    owners = np.repeat(np.arange(len(members)), sizes)
    nodes = np.concatenate(members)
    shape = (network.node_count, len(members))
    member = csr_array((np.ones(len(nodes)), (nodes, owners)), shape=shape)
    edges = network.adjacency.copy()
    edges.data = np.ones_like(edges.data)
    into = (edges @ member).tocoo()
    own = np.asarray(member[into.row, into.col]).ravel() > 0
    internal = np.bincount(into.col[own], into.data[own], len(members)) / 2
    gene, module, links = into.row[~own], into.col[~own], into.data[~own]
    density = internal / (sizes * (sizes - 1) / 2)
    chance = np.bincount(owners, network.degree[nodes], len(members))[module] / (2 * network.edge_count)
    # P[Bin(k, p) ≥ x] is the incomplete beta function I_p(x, k − x + 1) (Abramowitz & Stegun 1964, eq. 26.5.24).
    exceeds = network.node_count * betainc(links, network.degree[gene] - links + 1, chance) < EDGES_EXCEED
    added = exceeds & (links >= DENSITY_SHARE * density[module] * sizes[module])
    order = np.argsort(module[added], kind="stable")
    parts = np.split(gene[added][order], np.cumsum(np.bincount(module[added], minlength=len(members)))[:-1])
    return [np.union1d(group, part).astype(np.int32) for group, part in zip(members, parts, strict=True)]
