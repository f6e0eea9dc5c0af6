"""Maximal cliques as flat arrays, and the bounds beyond which they are refused."""

from __future__ import annotations

from dataclasses import dataclass
from itertools import chain
from typing import Any

import numpy as np
from numpy.typing import NDArray

from analysis.errors import LimitError
from analysis.network import IntArray, Network

CLIQUE_LIMIT = 1_000_000
WORK_LIMIT, LEVELS_LIMIT = 20_000_000_000, 2_000_000_000
"""Looks at a clique in the list of a node, for one k and for all: some 20 to 40 seconds."""
CLIQUE_SECONDS = 90.0
"""After this time the search for cliques is stopped, where it runs in a worker process."""


@dataclass(frozen=True, eq=False)
class Cliques:
    """Cliques, largest first.

    Attributes
    ----------
    starts : int64 array, shape (cliques + 1,)
    members : int32 array
        Clique `i` has the nodes `members[starts[i]:starts[i + 1]]`.
    node_count : int
        Nodes of the network.
    """

    starts: NDArray[np.int64]
    members: IntArray
    node_count: int

    @classmethod
    def from_groups(cls, groups: list[tuple[int, ...]], node_count: int) -> Cliques:
        """Put cliques, given as tuples of nodes, in order of falling size."""
        sizes = np.fromiter(map(len, groups), np.int64, len(groups))
        flat = np.fromiter(chain.from_iterable(groups), np.int32, int(sizes.sum()))
        order = np.argsort(-sizes, kind="stable")
        begin = (np.cumsum(sizes) - sizes)[order]
        starts = np.concatenate([[0], np.cumsum(sizes[order])]).astype(np.int64)
        places = np.repeat(begin - starts[:-1], sizes[order]) + np.arange(len(flat))
        return cls(starts, flat[places], node_count)

    def __len__(self) -> int:
        return len(self.starts) - 1

    @property
    def sizes(self) -> NDArray[np.int64]:
        """Nodes of each clique."""
        return np.diff(self.starts)

    def by_node(self) -> tuple[NDArray[np.int64], IntArray]:
        """Return the cliques of each node, ascending: where each node's list begins, and all lists."""
        owners = np.repeat(np.arange(len(self), dtype=np.int32), self.sizes)
        order = np.argsort(self.members, kind="stable")
        counts = np.bincount(self.members, minlength=self.node_count)
        return np.concatenate([[0], np.cumsum(counts)]).astype(np.int64), owners[order]

    @property
    def work(self) -> int:
        """Looks that it takes to count every overlap: the sum over nodes of the squared number of cliques, halved."""
        counts = np.bincount(self.members, minlength=self.node_count).astype(np.float64)
        return int((counts**2).sum() / 2)


def maximal_cliques(network: Network, smallest: int, limit: int = CLIQUE_LIMIT) -> Cliques:
    """Return all maximal cliques of at least `smallest` nodes (Eppstein, Löffler & Strash 2010, by igraph).

    Raises
    ------
    LimitError
        Where there are more than `limit`; never a cut-off answer.
    """
    found = network.igraph.maximal_cliques(min=smallest, max_results=limit + 1)
    if len(found) > limit:
        raise LimitError(
            f"the network has more than {limit:,} maximal cliques of {smallest} or more nodes, too many to join; "
            "raise k, or leave out weak edges with --min-weight"
        )
    return Cliques.from_groups(found, network.node_count)


def too_much_work(k: int, remedy: str = "raise k") -> LimitError:
    """Return the error for cliques that overlap too much to be joined."""
    return LimitError(
        f"the cliques of {k} or more nodes overlap so much that joining them would take too long; "
        f"{remedy}, or leave out weak edges with --min-weight"
    )


def too_long(k: int) -> LimitError:
    """Return the error for a search that has not ended in time."""
    return LimitError(
        f"the cliques of {k} or more nodes were not all found in {CLIQUE_SECONDS:.0f} s; "
        "raise k, or leave out weak edges with --min-weight"
    )


def forward_lists(network: Network) -> tuple[NDArray[np.int64], IntArray, IntArray]:
    """Return each node's later neighbours, nodes taken by rising degree so that no list is long; for triangles.

    Returns
    -------
    starts : int64 array, shape (nodes + 1,)
    ends, edges : int32 arrays, shape (edges,)
        Neighbours as ranks, ascending, and the edge to each.
    """
    rank = np.empty(network.node_count, np.int32)
    rank[np.argsort(network.degree, kind="stable")] = np.arange(network.node_count, dtype=np.int32)
    first, second = rank[network.sources], rank[network.targets]
    low, high = np.minimum(first, second), np.maximum(first, second)
    order = np.lexsort((high, low))
    counts: NDArray[Any] = np.bincount(low, minlength=network.node_count)
    return np.concatenate([[0], np.cumsum(counts)]).astype(np.int64), high[order], order.astype(np.int32)
