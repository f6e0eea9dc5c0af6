"""Random networks with nothing of a network but its number of genes and of edges."""

from __future__ import annotations

import numpy as np

from analysis.network import Network, locked


def uniform_network(network: Network, seed: int) -> Network:
    """Return a network drawn evenly from all with as many nodes and edges (Erdős & Rényi 1959), without weights.

    Parameters
    ----------
    network : Network
        Gives the names of the nodes and the number of edges.
    seed : int
        Seed, at least 0; the same one gives the same network in every process.
    """
    random = np.random.default_rng(seed)
    nodes, edges = network.node_count, network.edge_count
    pairs = nodes * (nodes - 1) // 2
    if 4 * edges > pairs:
        first, second = np.triu_indices(nodes, 1)
        drawn = np.sort(random.choice(pairs, edges, replace=False))
        keys = first[drawn].astype(np.int64) * nodes + second[drawn]
    else:
        keys = np.zeros(0, np.int64)
        while len(keys) < edges:
            one, other = random.integers(0, nodes, (2, edges - len(keys) + edges // 8 + 8))
            apart = one != other
            low, high = np.minimum(one, other)[apart], np.maximum(one, other)[apart]
            keys = np.unique(np.concatenate([keys, low * nodes + high]))
        if len(keys) > edges:
            keys = np.sort(random.choice(keys, edges, replace=False))
    sources, targets = (keys // max(nodes, 1)).astype(np.int32), (keys % max(nodes, 1)).astype(np.int32)
    return Network(network.names, locked(sources), locked(targets), None, network.label, network.provenance)
