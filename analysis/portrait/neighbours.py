"""Neighbours in compressed rows, as the compiled loops take them."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import NDArray

from analysis.network import IntArray, Network


def neighbour_rows(network: Network) -> tuple[IntArray, IntArray]:
    """Return `indptr`, shape (nodes + 1,), and `indices`, shape (2 · edges,): the neighbours of each node."""
    matrix = network.adjacency
    return matrix.indptr.astype(np.int32), matrix.indices.astype(np.int32)


def renumbered_rows(network: Network, place: NDArray[Any]) -> tuple[IntArray, IntArray]:
    """Return the same with the nodes in another order: node `n` is at `place[n]`."""
    from scipy.sparse import csr_array

    first, second = place[network.sources], place[network.targets]
    rows, columns = np.concatenate([first, second]), np.concatenate([second, first])
    shape = (network.node_count, network.node_count)
    matrix = csr_array((np.ones(len(rows), np.int8), (rows, columns)), shape=shape)
    return matrix.indptr.astype(np.int32), matrix.indices.astype(np.int32)


def giant_nodes(network: Network) -> NDArray[np.int64]:
    """Return the nodes of the largest connected component, in order."""
    return np.flatnonzero(network.components == 0)
