"""From a partition to a cover: second homes of genes, by their edges or by further runs, and a threshold."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from analysis.agreement import membership_matrix
from analysis.modules import Modules
from analysis.network import FloatArray, IntArray, Network, locked

LEAST_EDGES = 2


@dataclass(frozen=True, eq=False)
class SecondHomes:
    """Modules beside its own in which a gene could be counted; one row per gene and such module.

    Attributes
    ----------
    nodes, modules : int32 arrays, shape (rows,)
    share : float64 array, shape (rows,)
        How much speaks for it, from 0 to 1.
    """

    nodes: IntArray
    modules: IntArray
    share: FloatArray

    def above(self, threshold: float) -> SecondHomes:
        """Return the rows of this share or more, largest share first."""
        kept = np.flatnonzero(self.share >= threshold)
        kept = kept[np.lexsort((self.modules[kept], self.nodes[kept], -self.share[kept]))]
        return SecondHomes(locked(self.nodes[kept]), locked(self.modules[kept]), locked(self.share[kept]))


def second_homes_by_edges(network: Network, modules: Modules) -> SecondHomes:
    """Return, for each gene and each module that is not its own, the share of its strength that leads there.

    A single edge says too little: two at least are asked for. A gene in no module has no second home.
    """
    member = membership_matrix(modules).astype(np.float64)
    weight = (network.adjacency @ member).tocoo()
    edges = (network.without_weights().adjacency @ member).tocsr()
    rows, columns = weight.row.astype(np.int32), weight.col.astype(np.int32)
    number = np.asarray(edges[rows, columns]).ravel() if len(rows) else np.zeros(0)
    own = np.asarray(member[rows, columns]).ravel() > 0 if len(rows) else np.zeros(0, bool)
    kept = (number >= LEAST_EDGES) & ~own & (modules.homes[rows] > 0)
    share = weight.data[kept] / network.strength[rows[kept]]
    return SecondHomes(locked(rows[kept]), locked(columns[kept]), locked(share))


def second_homes_by_runs(modules: Modules, second: NDArray[Any], confidence: NDArray[Any]) -> SecondHomes:
    """Return the module in which each gene was found most often otherwise, and in what share of the runs.

    `second` (−1 for none) and `confidence` are given per (node, module) pair of `Modules.memberships`, as an ensemble
    over seeds or noisy copies gives them.
    """
    nodes, _ = modules.memberships
    known = np.asarray(second) >= 0
    return SecondHomes(
        locked(nodes[known]),
        locked(np.asarray(second)[known].astype(np.int32)),
        locked(np.asarray(confidence, np.float64)[known]),
    )


def cover_from(modules: Modules, homes: SecondHomes, threshold: float) -> Modules:
    """Add every second home of at least the threshold's share; return the cover (modules are numbered anew by size)."""
    added = homes.above(threshold)
    groups = [
        np.concatenate([group, added.nodes[added.modules == position]])
        for position, group in enumerate(modules.members)
    ]
    settings = {**modules.settings, "second_home": threshold}
    return Modules.from_members(modules.node_count, groups, method=modules.method, settings=settings, seed=modules.seed)
