"""Compiled searches between modules. Importing this module loads numba: import it inside the function that needs it."""

from __future__ import annotations

from typing import Any

import numpy as np
from numba import njit

ZERO, ONE = np.uint64(0), np.uint64(1)
FARTHEST = 62
"""Longer paths count as this long."""


@njit(cache=True)
def search_between(rows: Any, masks: Any, sources: Any, homes: Any, sums: Any) -> None:
    """Search breadth-first from up to 64 sources at once, one bit a source (Then et al. 2014).

    Parameters
    ----------
    rows : pair of int32 arrays
        Neighbours in compressed rows.
    masks : pair of bool arrays, shape (nodes,)
        Blocked nodes, that nothing passes; silent nodes, that are passed but not counted.
    sources : int32 array, at most 64
        None of them blocked or silent.
    homes : pair of int32 arrays, shape (nodes,)
        Module of each node; its position in the table.
    sums : triple of arrays, to which is added
        Pairs (source, node) at each distance, by group, those within one module too: int64, shape
        (FARTHEST + 1, groups, groups). Sum of ``1 / distance`` over pairs in different modules, by node and by source:
        float64, shape (nodes,) each.
    """
    blocked, silent = masks
    nodes = len(rows[0]) - 1
    seen, front, coming = np.zeros(nodes, np.uint64), np.zeros(nodes, np.uint64), np.zeros(nodes, np.uint64)
    for node in range(nodes):
        if blocked[node]:
            seen[node] = ~ZERO
    for place in range(len(sources)):
        bit = ONE << np.uint64(place)
        seen[sources[place]] |= bit
        front[sources[place]] |= bit
    distance, moved = 0, True
    while moved:
        distance += 1
        _pass_on(rows, front, coming)
        moved = False
        for node in range(nodes):
            bits = coming[node] & ~seen[node]
            coming[node] = ZERO
            front[node] = bits
            if bits == ZERO:
                continue
            seen[node] |= bits
            moved = True
            if not silent[node]:
                _count(bits, sources, homes, (node, distance), sums)


@njit(cache=True)
def _pass_on(rows: Any, front: Any, coming: Any) -> None:
    for node in range(len(front)):
        bits = front[node]
        if bits != ZERO:
            for place in range(rows[0][node], rows[0][node + 1]):
                coming[rows[1][place]] |= bits


@njit(cache=True)
def _count(bits: Any, sources: Any, homes: Any, where: Any, sums: Any) -> None:
    """Add the pairs of a node with the sources that have reached it."""
    modules, groups = homes
    table, by_node, by_source = sums
    node, distance = where
    level = min(distance, FARTHEST)
    for place in range(len(sources)):
        if (bits >> np.uint64(place)) & ONE:
            source = sources[place]
            table[level, groups[source], groups[node]] += 1
            if modules[source] != modules[node]:
                by_node[node] += 1.0 / distance
                by_source[source] += 1.0 / distance
