"""Clique percolation for one k, exact."""

from __future__ import annotations

from dataclasses import dataclass
from typing import ClassVar

import numpy as np

from analysis.errors import LimitError
from analysis.methods.settings import check_settings, setting, settings_of
from analysis.modules import Modules, extended_modularity
from analysis.network import IntArray, Network

CLIQUE_LIMIT = 2_000_000


@dataclass(frozen=True, slots=True)
class CliquePercolation:
    """k-clique communities (Palla, Derényi, Farkas & Vicsek 2005): a cover, exact, without random numbers.

    Two k-cliques are adjacent where they share `k − 1` nodes; a community is the union of the k-cliques that reach one
    another. Equivalently, maximal cliques of `k` or more nodes are joined where they share `k − 1` nodes or more.
    Weights are not used; cut the network by weight first. The quality is the extended modularity (Shen et al. 2009).
    """

    key: ClassVar[str] = "clique-percolation"

    k: int = setting(4, label="k", low=2, high=1000)

    def __post_init__(self) -> None:
        check_settings(self)

    def find(self, network: Network, *, seed: int = 0) -> Modules:
        """Return the communities; the seed is recorded and not used.

        Raises
        ------
        LimitError
            Where the network has more maximal cliques than can be held; never a cut-off answer.
        """
        cliques = maximal_cliques(network, self.k)
        groups = join_cliques(cliques, network.node_count, self.k)
        modules = Modules.from_members(
            network.node_count, groups, method=self.key, settings=settings_of(self), seed=seed
        )
        quality = extended_modularity(network, modules)
        return Modules(modules.node_count, modules.members, self.key, modules.settings, quality, seed)


def maximal_cliques(network: Network, smallest: int, limit: int = CLIQUE_LIMIT) -> list[IntArray]:
    """Return all maximal cliques of at least `smallest` nodes (Eppstein, Löffler & Strash 2010, by igraph)."""
    found = network.igraph.maximal_cliques(min=smallest, max_results=limit + 1)
    if len(found) > limit:
        raise LimitError(
            f"the network has more than {limit:,} maximal cliques of {smallest} or more nodes, too many to join; "
            "raise k, or leave out weak edges with --min-weight"
        )
    return [np.array(sorted(clique), np.int32) for clique in found]


def join_cliques(cliques: list[IntArray], node_count: int, k: int) -> list[IntArray]:
    """Join cliques that share `k − 1` nodes or more; return the node sets of the groups."""
    from scipy.sparse import csr_array
    from scipy.sparse.csgraph import connected_components

    if not cliques:
        return []
    sizes = np.array([len(clique) for clique in cliques])
    rows = np.repeat(np.arange(len(cliques)), sizes)
    shape = (len(cliques), node_count)
    member = csr_array((np.ones(int(sizes.sum()), np.int32), (rows, np.concatenate(cliques))), shape=shape)
    overlap = (member @ member.T).tocoo()
    joined = overlap.data >= k - 1
    graph = csr_array(
        (np.ones(int(joined.sum()), np.int8), (overlap.row[joined], overlap.col[joined])),
        shape=(len(cliques), len(cliques)),
    )
    count, group = connected_components(graph, directed=False)
    order = np.argsort(group, kind="stable")
    parts = np.split(order, np.searchsorted(group[order], np.arange(1, count)))
    return [np.unique(np.concatenate([cliques[index] for index in part])) for part in parts]
