"""Compiled loops over neighbours. Importing this module loads numba: import it inside the function that needs it.

On 20,000 genes and 290,000 edges the breadth-first searches are some forty times faster than igraph's, and a removal
curve some twenty times faster than the same lines in Python.
"""

from __future__ import annotations

from typing import Any

import numpy as np
from numba import njit
from numpy.typing import NDArray

WORD = 64
ZERO, ONE = np.uint64(0), np.uint64(1)


@njit(cache=True)
def spread(indptr: Any, indices: Any, sources: Any, counts: Any, reached: Any) -> None:
    """Search breadth-first from up to 64 sources at once, one bit a source (Then et al. 2014).

    Parameters
    ----------
    indptr, indices : int32 arrays
        Neighbours in compressed rows.
    sources : int32 array, at most 64
    counts : int64 array, shape (nodes + 1,)
        Number of pairs (source, node) at each distance is added here; distance 0 is left out.
    reached : int64 array, shape (2, sources)
        Receives the sum of the distances from each source, and the largest.
    """
    nodes = len(indptr) - 1
    seen = np.zeros(nodes, np.uint64)
    front = np.zeros(nodes, np.uint64)
    coming = np.zeros(nodes, np.uint64)
    for place in range(len(sources)):
        bit = ONE << np.uint64(place)
        seen[sources[place]] |= bit
        front[sources[place]] |= bit
    distance = 0
    moved = True
    while moved:
        moved = False
        distance += 1
        for node in range(nodes):
            bits = front[node]
            if bits != ZERO:
                for position in range(indptr[node], indptr[node + 1]):
                    coming[indices[position]] |= bits
        for node in range(nodes):
            bits = coming[node] & ~seen[node]
            coming[node] = ZERO
            front[node] = bits
            if bits != ZERO:
                seen[node] |= bits
                moved = True
                for place in range(len(sources)):
                    if (bits >> np.uint64(place)) & ONE:
                        counts[distance] += 1
                        reached[0, place] += distance
                        reached[1, place] = distance


@njit(cache=True)
def _root(parent: Any, node: Any) -> Any:
    while parent[node] != node:
        parent[node] = parent[parent[node]]
        node = parent[node]
    return node


@njit(cache=True)
def largest_components(
    indptr: NDArray[np.int32], indices: NDArray[np.int32], order: NDArray[np.int64]
) -> tuple[NDArray[np.int64], NDArray[np.float64]]:
    """Return the size of the largest component, and the mean size of the others, after each removal.

    Nodes are put back from the last removed to the first, and components joined by union-find (Newman & Ziff 2001), so
    that a whole curve costs little more than reading the edges once.

    Parameters
    ----------
    indptr, indices : int32 arrays
        Neighbours in compressed rows.
    order : int64 array, shape (nodes,)
        All nodes, the first to be removed first.

    Returns
    -------
    largest : int64 array, shape (nodes + 1,)
        By the number of nodes removed.
    others : float64 array, shape (nodes + 1,)
        ``Σ s² / n`` over all components but the largest, `n` the nodes that are left; its peak marks where a network
        falls apart (Stauffer & Aharony 1994).
    """
    nodes = len(order)
    parent = np.arange(nodes)
    size = np.ones(nodes, np.int64)
    back = np.zeros(nodes, np.bool_)
    largest = np.zeros(nodes + 1, np.int64)
    others = np.zeros(nodes + 1, np.float64)
    top, squares = 0, 0.0
    for place in range(nodes - 1, -1, -1):
        node = order[place]
        back[node] = True
        squares += 1.0
        root = node
        for position in range(indptr[node], indptr[node + 1]):
            neighbour = indices[position]
            if not back[neighbour]:
                continue
            other = _root(parent, neighbour)
            if other == root:
                continue
            if size[other] > size[root]:
                root, other = other, root
            squares += 2.0 * size[root] * size[other]
            parent[other] = root
            size[root] += size[other]
        top = max(top, size[root])
        largest[place] = top
        others[place] = (squares - float(top) * top) / (nodes - place)
    return largest, others


@njit(cache=True)
def _leave(links: Any, head: Any, node: Any, degree: Any) -> None:
    """Take a node out of the list of its degree; `links` holds the node before and the node after each."""
    before, after = links[0, node], links[1, node]
    if before >= 0:
        links[1, before] = after
    else:
        head[degree] = after
    if after >= 0:
        links[0, after] = before


@njit(cache=True)
def _enter(links: Any, head: Any, node: Any, degree: Any) -> None:
    """Put a node at the beginning of the list of its degree."""
    first = head[degree]
    links[0, node], links[1, node] = -1, first
    if first >= 0:
        links[0, first] = node
    head[degree] = node


@njit(cache=True)
def order_by_degree_left(indptr: NDArray[np.int32], indices: NDArray[np.int32]) -> NDArray[np.int64]:
    """Return all nodes, each the one that has most edges left when those before it are gone.

    Nodes wait in one doubly linked list per degree (bucket queue); of equals, the one that came to its degree last goes
    first, at the start the one that stands first.
    """
    nodes = len(indptr) - 1
    degree = (indptr[1:] - indptr[:-1]).astype(np.int64)
    top = degree.max() if nodes else 0
    head = np.full(top + 1, -1, np.int64)
    links = np.full((2, nodes), -1, np.int64)
    for node in range(nodes - 1, -1, -1):
        _enter(links, head, node, degree[node])
    gone = np.zeros(nodes, np.bool_)
    order = np.empty(nodes, np.int64)
    for place in range(nodes):
        while head[top] < 0:
            top -= 1
        node = head[top]
        _leave(links, head, node, top)
        gone[node] = True
        order[place] = node
        for position in range(indptr[node], indptr[node + 1]):
            neighbour = indices[position]
            if not gone[neighbour]:
                _leave(links, head, neighbour, degree[neighbour])
                degree[neighbour] -= 1
                _enter(links, head, neighbour, degree[neighbour])
    return order
