"""Compiled loops of clique percolation. Importing this module loads numba: import it inside the function that needs it.

Items (cliques, or edges) are given as `starts` and `members`: item `i` has the nodes `members[starts[i]:starts[i+1]]`.
"""

from __future__ import annotations

from typing import Any

import numpy as np
from numba import njit


@njit(cache=True)
def _root(parents: Any, base: int, item: int) -> int:
    """Return the root of an item in the forest that begins at `base`, halving the way there."""
    while parents[base + item] != item:
        parents[base + item] = parents[base + parents[base + item]]
        item = parents[base + item]
    return item


@njit(cache=True)
def _count_shared(nodes: Any, lists: Any, clique: int, shared: Any, touched: Any) -> int:
    """Count in `shared` the nodes that earlier cliques have in common with one; return how many cliques were met."""
    node_starts, node_cliques = lists
    found = 0
    for node in nodes:
        for spot in range(node_starts[node], node_starts[node + 1]):
            other = node_cliques[spot]
            if other >= clique:
                break
            if shared[other] == 0:
                touched[found] = other
                found += 1
            shared[other] += 1
    return found


@njit(cache=True)
def _join_downwards(parents: Any, bases: Any, pair: Any, level: int, least: int) -> None:
    """Join two cliques at a level and below, down to where they are joined already."""
    while level >= least:
        first, second = _root(parents, bases[level], pair[0]), _root(parents, bases[level], pair[1])
        if first == second:
            break
        parents[bases[level] + max(first, second)] = min(first, second)
        level -= 1


@njit(cache=True)
def join_levels(starts: Any, members: Any, lists: Any, bases: Any, least: int) -> Any:
    """Join maximal cliques at every k at once; return one root per level and clique.

    Cliques come largest first, so that level `k` holds the first few, at `bases[k]` of the answer. Each overlap is
    counted once; two cliques that are joined at k are joined at every lower k, where the loop stops.
    """
    count = len(starts) - 1
    parents = np.empty(bases[-1], np.int32)
    for level in range(least, len(bases) - 1):
        for item in range(bases[level + 1] - bases[level]):
            parents[bases[level] + item] = item
    shared = np.zeros(count, np.int32)
    touched = np.empty(count, np.int32)
    for clique in range(count):
        found = _count_shared(members[starts[clique] : starts[clique + 1]], lists, clique, shared, touched)
        for place in range(found):
            other = touched[place]
            _join_downwards(parents, bases, (clique, other), shared[other] + 1, least)
            shared[other] = 0
    for level in range(least, len(bases) - 1):
        for item in range(bases[level + 1] - bases[level]):
            parents[bases[level] + item] = _root(parents, bases[level], item)
    return parents


@njit(cache=True)
def _count_unreached(nodes: Any, lists: Any, labels: Any, shared: Any, touched: Any) -> Any:
    """Count in `shared` the nodes that cliques without a label have in common with one; drop the others from the lists.

    Returns how many cliques were met, and how many looks it took.
    """
    node_starts, node_ends, node_cliques = lists
    found, work = 0, 0
    for node in nodes:
        write = node_starts[node]
        work += node_ends[node] - write
        for spot in range(node_starts[node], node_ends[node]):
            other = node_cliques[spot]
            if labels[other] >= 0:
                continue
            node_cliques[write] = other
            write += 1
            if shared[other] == 0:
                touched[found] = other
                found += 1
            shared[other] += 1
        node_ends[node] = write
    return found, work


@njit(cache=True)
def join_one(starts: Any, members: Any, lists: Any, k: int, limit: int) -> Any:
    """Join cliques that share `k − 1` nodes or more; return one label per clique, or labels of −1 beyond the limit.

    A clique that has been reached leaves the lists of its nodes, so that it is met no more.
    """
    count = len(starts) - 1
    own_lists = (lists[0], lists[0][1:].copy(), lists[1].copy())
    labels = np.full(count, -1, np.int32)
    shared = np.zeros(count, np.int32)
    touched = np.empty(count, np.int32)
    stack = np.empty(count, np.int32)
    work = 0
    for seed in range(count):
        if labels[seed] >= 0:
            continue
        labels[seed] = seed
        stack[0] = seed
        height = 1
        while height > 0:
            height -= 1
            nodes = members[starts[stack[height]] : starts[stack[height] + 1]]
            found, looks = _count_unreached(nodes, own_lists, labels, shared, touched)
            for other in touched[:found]:
                if shared[other] >= k - 1:
                    labels[other] = seed
                    stack[height] = other
                    height += 1
                shared[other] = 0
            work += looks
            if work > limit:
                labels[:] = -1
                return labels
    return labels


@njit(cache=True)
def join_triangles(starts: Any, ends: Any, edges: Any, edge_count: int) -> Any:
    """Join edges through triangles; return one root per edge, −1 for edges in no triangle.

    `ends` holds the later neighbours of each node in ascending order, each edge once; `edges` the edge to each.
    """
    parents = np.empty(edge_count, np.int32)
    for edge in range(edge_count):
        parents[edge] = edge
    used = np.zeros(edge_count, np.bool_)
    for node in range(len(starts) - 1):
        for place in range(starts[node], starts[node + 1]):
            other = ends[place]
            first, second = starts[node], starts[other]
            while first < starts[node + 1] and second < starts[other + 1]:
                if ends[first] < ends[second]:
                    first += 1
                elif ends[first] > ends[second]:
                    second += 1
                else:
                    own, left, right = (
                        _root(parents, 0, edges[place]),
                        _root(parents, 0, edges[first]),
                        _root(parents, 0, edges[second]),
                    )
                    least = min(own, left, right)
                    parents[own] = parents[left] = parents[right] = least
                    used[edges[place]] = used[edges[first]] = used[edges[second]] = True
                    first += 1
                    second += 1
    for edge in range(edge_count):
        parents[edge] = _root(parents, 0, edge) if used[edge] else -1
    return parents


@njit(cache=True)
def distinct_members(order: Any, labels: Any, starts: Any, members: Any, node_count: int) -> Any:
    """Return the nodes of each group of items, each node once: all nodes, and where each group begins.

    `order` sorts the items by label.
    """
    total = 0
    for item in order:
        total += starts[item + 1] - starts[item]
    nodes = np.empty(total, np.int32)
    begins = np.empty(len(order) + 1, np.int64)
    seen = np.full(node_count, -1, np.int32)
    groups, filled = 0, 0
    for place in range(len(order)):
        item = order[place]
        if place == 0 or labels[item] != labels[order[place - 1]]:
            begins[groups] = filled
            groups += 1
        for spot in range(starts[item], starts[item + 1]):
            node = members[spot]
            if seen[node] != groups:
                seen[node] = groups
                nodes[filled] = node
                filled += 1
    begins[groups] = filled
    return nodes[:filled], begins[: groups + 1]
