"""Clique percolation: the communities of one k, or of every k at once as a tree."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from functools import cached_property
from typing import Any

import numpy as np
from numpy.typing import NDArray

from analysis.errors import SettingError
from analysis.modules import Modules
from analysis.network import IntArray, Network, locked
from analysis.overlap.cliques import (
    LEVELS_LIMIT,
    WORK_LIMIT,
    Cliques,
    forward_lists,
    maximal_cliques,
    too_much_work,
)

LEAST = 4
"""The least k for which cliques are needed; communities of two and three come from edges and triangles."""


@dataclass(frozen=True, eq=False)
class Level:
    """The communities of one k.

    Attributes
    ----------
    k : int
    members : tuple of int32 arrays
        Node indices of each community, ascending; largest community first, as in `Modules`.
    parents : int32 array, shape (communities,)
        The community of `k − 1` in which each lies; −1 at k = 2.
    """

    k: int
    members: tuple[IntArray, ...]
    parents: IntArray

    @property
    def sizes(self) -> list[int]:
        """Nodes of each community."""
        return [len(group) for group in self.members]


@dataclass(frozen=True, eq=False)
class Percolation:
    """The communities of every k, nested: each lies in one of the next lower k.

    Attributes
    ----------
    node_count : int
    levels : tuple of Level
        From k = 2 (connected components) to the largest clique.
    """

    node_count: int
    levels: tuple[Level, ...]

    @cached_property
    def largest_k(self) -> int:
        """Nodes of the largest clique; 1 for a network without edges."""
        return self.levels[-1].k if self.levels else 1

    def at(self, k: int) -> Level:
        """Return the communities of one k; none above the largest clique."""
        if k < 2:
            raise SettingError(f"k is {k}; it must be at least 2")
        return self.levels[k - 2] if k <= self.largest_k else Level(k, (), locked(np.zeros(0, np.int32)))

    def modules(self, k: int) -> Modules:
        """Return the communities of one k as a cover."""
        return Modules.from_members(self.node_count, self.at(k).members)

    def to_arrays(self) -> dict[str, NDArray[Any]]:
        """Return it as four flat arrays, to be kept."""
        groups = [group for level in self.levels for group in level.members]
        return {
            "nodes": np.array([self.node_count]),
            "k": np.repeat([level.k for level in self.levels], [len(level.members) for level in self.levels]),
            "sizes": np.array([len(group) for group in groups], np.int64),
            "members": np.concatenate([np.zeros(0, np.int32), *groups]),
            "parents": np.concatenate([np.zeros(0, np.int32), *[level.parents for level in self.levels]]),
        }

    @classmethod
    def from_arrays(cls, arrays: Mapping[str, NDArray[Any]]) -> Percolation:
        """Return it again."""
        groups = np.split(arrays["members"], np.cumsum(arrays["sizes"])[:-1])
        levels = []
        for k in np.unique(arrays["k"]).tolist():
            places = np.flatnonzero(arrays["k"] == k)
            levels.append(_level(k, [groups[place] for place in places], arrays["parents"][places]))
        return cls(int(arrays["nodes"][0]), tuple(levels))


@dataclass(frozen=True, slots=True)
class FindEveryK:
    """Task: the communities of every k, in a worker process so that it can be stopped."""

    def run(self, network: Network) -> Percolation:
        """Find them."""
        return percolate(network)


def percolate(network: Network) -> Percolation:
    """Find the k-clique communities of every k at once (Palla, Derényi, Farkas & Vicsek 2005), exactly.

    Two k-cliques are adjacent where they share `k − 1` nodes; a community is the union of the k-cliques that reach one
    another. Maximal cliques that share `w` nodes are joined at every `k ≤ w + 1`; so each overlap is counted once, and
    one forest per k keeps what is joined. At k = 2 the communities are the connected components, at k = 3 what
    triangles join.

    Raises
    ------
    LimitError
        Where there are too many cliques, or they overlap too much; the message offers a remedy.
    """
    levels: list[Level] = []
    pairs = _components(network)
    if not pairs:
        return Percolation(network.node_count, ())
    labels = np.full(network.node_count, -1, np.int32)
    for position, group in enumerate(pairs):
        labels[group] = position
    levels.append(_level(2, pairs, np.full(len(pairs), -1, np.int32)))
    triangles, edge_groups = _triangles(network)
    if triangles:
        levels.append(_level(3, triangles, labels[[group[0] for group in triangles]]))
        levels += _clique_levels(network, edge_groups)
    return Percolation(network.node_count, tuple(levels))


def communities(network: Network, k: int) -> list[IntArray]:
    """Return the k-clique communities of one k, in the order of `Modules`; see `percolate`."""
    if k < 2:
        raise SettingError(f"k is {k}; it must be at least 2")
    if k == 2:
        return _components(network)
    if k == 3:
        return _triangles(network)[0]
    return join_cliques(maximal_cliques(network, k), k)


def join_cliques(cliques: Cliques, k: int, limit: int = WORK_LIMIT) -> list[IntArray]:
    """Join cliques that share `k − 1` nodes or more; return the nodes of each group, in the order of `Modules`."""
    from analysis.overlap.compiled import join_one

    if not len(cliques):
        return []
    labels = join_one(cliques.starts, cliques.members, cliques.by_node(), k, limit)
    if labels[0] < 0:
        raise too_much_work(k)
    return _groups(labels, cliques.starts, cliques.members, cliques.node_count)[0]


def critical_density(k: int, nodes: int) -> float:
    """Return the density at which k-cliques of a random network percolate: ``[(k − 1) N]^(−1/(k − 1))``.

    Derényi, Palla & Vicsek 2005 (Physical Review Letters 94:160202, eq. 1). A random network that is denser has a giant
    k-clique community by chance alone.
    """
    return float(((k - 1) * nodes) ** (-1.0 / (k - 1)))


def _components(network: Network) -> list[IntArray]:
    """Return the connected components of two nodes and more."""
    labels = network.components
    connected = np.flatnonzero(network.degree > 0)
    order = connected[np.argsort(labels[connected], kind="stable")]
    parts = np.split(order, np.flatnonzero(np.diff(labels[order])) + 1)
    return _in_order([part for part in parts if len(part)])[0]


def _triangles(network: Network) -> tuple[list[IntArray], NDArray[np.int32]]:
    """Return the communities of k = 3, and the position of that of each edge (−1 for none)."""
    from analysis.overlap.compiled import join_triangles

    roots = join_triangles(*forward_lists(network), network.edge_count)
    kept = np.flatnonzero(roots >= 0)
    if not len(kept):
        return [], roots
    ends = np.column_stack([network.sources[kept], network.targets[kept]]).ravel().astype(np.int32)
    starts = 2 * np.arange(len(kept) + 1, dtype=np.int64)
    groups, positions = _groups(roots[kept], starts, ends, network.node_count)
    roots[kept] = positions
    return groups, roots


def _clique_levels(network: Network, edge_groups: NDArray[np.int32]) -> list[Level]:
    """Return the levels from k = 4."""
    from analysis.overlap.compiled import join_levels

    cliques = maximal_cliques(network, LEAST)
    if not len(cliques):
        return []
    if cliques.work > LEVELS_LIMIT:
        raise too_much_work(LEAST, "choose a single k")
    sizes = cliques.sizes
    largest = int(sizes[0])
    held = np.array([0] * LEAST + [int((sizes >= k).sum()) for k in range(LEAST, largest + 1)])
    bases = np.concatenate([[0], np.cumsum(held)]).astype(np.int64)
    roots = join_levels(cliques.starts, cliques.members, cliques.by_node(), bases, LEAST)
    first, second = cliques.members[cliques.starts[:-1]], cliques.members[cliques.starts[:-1] + 1]
    below = edge_groups[_edge_between(network, first, second)]
    levels = []
    for k in range(LEAST, largest + 1):
        labels = roots[bases[k] : bases[k + 1]]
        groups, positions = _groups(labels, cliques.starts, cliques.members, cliques.node_count)
        parents = np.empty(len(groups), np.int32)
        parents[positions] = below[: len(labels)]
        levels.append(_level(k, groups, parents))
        below = positions
    return levels


def _edge_between(network: Network, first: NDArray[Any], second: NDArray[Any]) -> NDArray[np.int64]:
    """Return the edge that joins each pair of neighbours."""
    key = network.sources.astype(np.int64) * network.node_count + network.targets
    low, high = np.minimum(first, second).astype(np.int64), np.maximum(first, second)
    found: NDArray[np.int64] = np.searchsorted(key, low * network.node_count + high)
    return found


def _groups(
    labels: NDArray[Any], starts: NDArray[np.int64], members: NDArray[Any], node_count: int
) -> tuple[list[IntArray], NDArray[np.int32]]:
    """Return the nodes of each group of items of one label, and the position of each item's group."""
    from analysis.overlap.compiled import distinct_members

    order = np.argsort(labels, kind="stable")
    nodes, begins = distinct_members(order, labels, starts, members, node_count)
    groups, places = _in_order(np.split(nodes, begins[1:-1]))
    rank = np.empty(len(groups), np.int32)
    rank[places] = np.arange(len(groups), dtype=np.int32)
    positions = np.empty(len(labels), np.int32)
    positions[order] = rank[np.cumsum(np.diff(labels[order], prepend=labels[order[0]]) != 0)]
    return groups, positions


def _in_order(groups: list[NDArray[Any]]) -> tuple[list[IntArray], list[int]]:
    """Return the groups in the order of `Modules`, and the place that each had before."""
    found = [np.sort(group).astype(np.int32) for group in groups]
    places = sorted(range(len(found)), key=lambda place: (-len(found[place]), found[place].tolist()))
    return [found[place] for place in places], places


def _level(k: int, groups: list[IntArray], parents: NDArray[Any]) -> Level:
    return Level(k, tuple(locked(group) for group in groups), locked(parents.astype(np.int32)))
