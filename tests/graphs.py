"""Networks for checks against networkx: random ones, and the way there and back."""

from __future__ import annotations

from collections.abc import Sequence

import networkx as nx
import numpy as np
from numpy.typing import NDArray

from analysis.modules import Modules
from analysis.network import Network


def to_networkx(network: Network) -> nx.Graph:
    """Return the network as a networkx graph over node indices, with the edge attribute `weight`."""
    graph = nx.Graph()
    graph.add_nodes_from(range(network.node_count))
    ends = zip(network.sources.tolist(), network.targets.tolist(), network.edge_weights.tolist(), strict=True)
    graph.add_weighted_edges_from(ends)
    return graph


def random_network(seed: int, *, nodes: int = 40, edges: int = 100, weighted: bool = False) -> Network:
    """Draw a network with so many distinct edges between so many nodes (Erdős & Rényi 1959)."""
    random = np.random.default_rng(seed)
    first, second = np.triu_indices(nodes, 1)
    drawn = random.choice(len(first), min(edges, len(first)), replace=False)
    names = tuple(f"g{position:05d}" for position in range(nodes))
    weights = random.uniform(0.1, 5.0, len(drawn)) if weighted else None
    return Network.from_indices(names, np.column_stack([first[drawn], second[drawn]]), weights)


def random_labels(seed: int, nodes: int, modules: int) -> NDArray[np.int32]:
    """Draw one of so many labels for each node."""
    return np.random.default_rng(seed).integers(0, modules, nodes).astype(np.int32)


def groups_of(modules: Modules) -> list[set[int]]:
    """Return the members of each module, as networkx takes them."""
    return [set(group.tolist()) for group in modules.members]


def named_groups(network: Network, modules: Modules) -> set[frozenset[str]]:
    """Return the modules as sets of names, in no order."""
    return {frozenset(network.names[node] for node in group) for group in modules.members}


def joined(first: Network, second: Network) -> Network:
    """Return the union of two networks, with the names of each marked so that none is shared."""
    ends = [(f"a-{x}", f"a-{y}") for x, y in named_edges(first)] + [
        (f"b-{x}", f"b-{y}") for x, y in named_edges(second)
    ]
    nodes = [f"a-{name}" for name in first.names] + [f"b-{name}" for name in second.names]
    weights = None
    if first.weights is not None or second.weights is not None:
        weights = [*first.edge_weights.tolist(), *second.edge_weights.tolist()]
    return Network.from_edges(ends, weights, nodes=nodes)


def named_edges(network: Network) -> list[tuple[str, str]]:
    """Return the ends of each edge by name."""
    pairs = zip(network.sources.tolist(), network.targets.tolist(), strict=True)
    return [(network.names[a], network.names[b]) for a, b in pairs]


def shuffled(network: Network, seed: int) -> Network:
    """Return the network from its edges in another order, the ends of half of them swapped."""
    random = np.random.default_rng(seed)
    order = random.permutation(network.edge_count)
    swapped = random.random(network.edge_count) < 0.5
    ends = named_edges(network)
    mixed = [ends[place][::-1] if swapped[place] else ends[place] for place in order]
    weights = None if network.weights is None else [float(network.weights[place]) for place in order]
    return Network.from_edges(mixed, weights, nodes=random.permutation(network.names).tolist())


def edges_of(text: str) -> Sequence[tuple[str, str]]:
    """Read `ab bc` as the edges a–b and b–c; one letter a node."""
    return [(pair[0], pair[1]) for pair in text.split()]


def lettered(text: str, weights: Sequence[float] | None = None, nodes: str = "") -> Network:
    """Return the network of `edges_of`."""
    return Network.from_edges(edges_of(text), weights, nodes=list(nodes))
