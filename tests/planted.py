"""Networks with planted modules, for tests and benchmarks: a degree-corrected planted partition in numpy."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from analysis.modules import Modules
from analysis.network import Network


@dataclass(frozen=True, eq=False)
class Planted:
    """A network, the modules planted in it, and the mixing it came out with.

    Attributes
    ----------
    labels : int array, shape (nodes,)
        Planted module of each node; −1 for nodes in none.
    mixing : float
        Share of edges that join two different modules, or touch a node in none.
    """

    network: Network
    modules: Modules
    labels: NDArray[np.int64]
    mixing: float


def planted_network(
    sizes: Sequence[int],
    *,
    seed: int,
    inside: float | Sequence[float] = 0.6,
    outside_degree: float = 4.0,
    regions: Sequence[tuple[int, float]] = (),
    spread: float = 2.5,
) -> Planted:
    """Draw a network with modules, random edges between all nodes, and regions without modules.

    Every node has a propensity from a Pareto law (exponent `spread`, mean 1, held below 8): its expected number of
    random edges follows it (degree-corrected block model, Karrer & Newman 2011).

    Parameters
    ----------
    sizes : sequence of int
        Size of each planted module.
    inside : float or sequence of float
        Probability of each edge inside a module; one for all, or one for each.
    outside_degree : float
        Mean number of random edges of a node, over the whole network.
    regions : sequence of (int, float)
        Size and mean inner degree of regions whose inner edges are random too: denser than their surroundings,
        without modules in them.
    """
    random = np.random.default_rng(seed)
    labels = np.repeat(np.arange(len(sizes)), sizes)
    blocks = np.concatenate([labels, *(np.full(size, len(sizes) + i) for i, (size, _) in enumerate(regions))])
    count = len(blocks)
    labels = np.concatenate([labels, np.full(count - len(labels), -1)])
    propensity = np.minimum((random.pareto(spread - 1, count) + 1) * (spread - 2) / (spread - 1), 8.0)
    density = np.broadcast_to(inside, len(sizes))
    pairs = [_within(np.flatnonzero(blocks == block), density[block], random) for block in range(len(sizes))]
    for index, (size, degree) in enumerate(regions):
        nodes = np.flatnonzero(blocks == len(sizes) + index)
        pairs.append(nodes[_random_pairs(propensity[nodes], round(size * degree / 2), random)])
    pairs.append(_random_pairs(propensity, round(count * outside_degree / 2), random))
    edges = np.unique(np.sort(np.concatenate(pairs), axis=1), axis=0)
    shuffled = random.permutation(count)  # so that no order of names gives the modules away
    names = tuple(f"g{position:06d}" for position in range(count))
    network = Network.from_indices(names, shuffled[edges])
    placed = np.empty(count, np.int64)
    placed[shuffled] = labels
    own = placed[network.sources]
    crossing = (own != placed[network.targets]) | (own < 0)
    return Planted(network, Modules.from_labels(placed), placed, float(crossing.mean()))


def benchmark_network(mixing: float, *, nodes: int = 500, seed: int = 3) -> Planted:
    """LFR benchmark by networkx (Lancichinetti, Fortunato & Radicchi 2008), mean degree 15, modules of 10 to 50.

    It realises more mixing than asked: 0.16, 0.32, 0.47, 0.60 for 0.1, 0.2, 0.3, 0.4 (measured on seed 3).
    """
    import networkx as nx

    graph = nx.LFR_benchmark_graph(
        nodes, 3, 1.5, mixing, average_degree=15, max_degree=40, min_community=10, max_community=50, seed=seed
    )
    graph.remove_edges_from(list(nx.selfloop_edges(graph)))
    network = from_networkx(graph)
    communities = sorted({tuple(sorted(graph.nodes[node]["community"])) for node in graph})
    labels = np.empty(nodes, np.int64)
    for number, community in enumerate(communities):
        labels[list(community)] = number
    crossing = labels[network.sources] != labels[network.targets]
    return Planted(network, Modules.from_labels(labels), labels, float(crossing.mean()))


def ring_of_cliques(cliques: int = 30, size: int = 5) -> Network:
    """Complete graphs in a ring, one edge from each to the next (Fortunato & Barthélemy 2007)."""
    ends = [(f"c{c:02d}-{i}", f"c{c:02d}-{j}") for c in range(cliques) for i in range(size) for j in range(i + 1, size)]
    ends += [(f"c{c:02d}-0", f"c{(c + 1) % cliques:02d}-1") for c in range(cliques)]
    return Network.from_edges(ends)


def from_networkx(graph: object, *, weight: str | None = None) -> Network:
    """Take over a networkx graph, with the names as text; zero-padded numbers keep their order."""
    names = {node: f"{node:03d}" if isinstance(node, int) else str(node) for node in graph.nodes}
    ends = [(names[a], names[b]) for a, b in graph.edges]
    weights = None if weight is None else [float(data[weight]) for _, _, data in graph.edges(data=True)]
    return Network.from_edges(ends, weights)


def _within(nodes: NDArray[np.int64], probability: float, random: np.random.Generator) -> NDArray[np.int64]:
    first, second = np.triu_indices(len(nodes), 1)
    drawn = random.random(len(first)) < probability
    return np.column_stack([nodes[first[drawn]], nodes[second[drawn]]])


def _random_pairs(propensity: NDArray[np.float64], count: int, random: np.random.Generator) -> NDArray[np.int64]:
    chance = propensity / propensity.sum()
    pairs = random.choice(len(propensity), size=(count, 2), p=chance)
    return pairs[pairs[:, 0] != pairs[:, 1]]
