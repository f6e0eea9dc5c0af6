"""Compiled searches between modules. Importing this module loads numba: import it inside the function that needs it."""

from __future__ import annotations

from typing import Any

import numpy as np
from numba import njit

ZERO, ONE = np.uint64(0), np.uint64(1)
FARTHEST = 62
"""Longer paths count as this long."""


@njit(cache=True)
def search_between(rows: Any, masks: Any, sources: Any, homes: Any, table: Any) -> Any:
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
    table : int64 array, shape (FARTHEST + 1, groups, groups)
        Pairs (source, node) at each distance, by group, are added here; those within one module too.

    Returns
    -------
    float
        The sum of ``1 / distance`` over pairs in different modules.
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
    near, distance, moved = 0.0, 0, True
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
                apart = _count(bits, sources, homes, node, table[min(distance, FARTHEST)])
                near += apart / distance
    return near


@njit(cache=True)
def _pass_on(rows: Any, front: Any, coming: Any) -> None:
    for node in range(len(front)):
        bits = front[node]
        if bits != ZERO:
            for place in range(rows[0][node], rows[0][node + 1]):
                coming[rows[1][place]] |= bits


@njit(cache=True)
def _count(bits: Any, sources: Any, homes: Any, node: int, table: Any) -> int:
    """Add the sources that have reached a node to the table; return how many are of another module."""
    apart = 0
    for place in range(len(sources)):
        if (bits >> np.uint64(place)) & ONE:
            source = sources[place]
            table[homes[1][source], homes[1][node]] += 1
            apart += homes[0][source] != homes[0][node]
    return apart
