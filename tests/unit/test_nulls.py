"""Null networks keep degrees and simplicity, move nearly all edges, and draw all networks alike."""

from __future__ import annotations

import itertools
import subprocess
import sys
from collections import Counter

import networkx
import numpy as np
import pytest
from scipy import stats

from analysis.errors import SettingError
from analysis.network import Network
from analysis.trust.nulls import edges_in_place, rewire, rewire_share


def network_of(graph: networkx.Graph, weights: np.ndarray | None = None) -> Network:
    size = graph.number_of_nodes()
    pairs = np.array(list(graph.edges), np.int64).reshape(-1, 2)
    return Network.from_indices(tuple(f"g{node:05d}" for node in range(size)), pairs, weights)


def assert_canonical(network: Network) -> None:
    """Every rule of `Network.from_indices` holds: no self-loop, no edge twice, sorted."""
    pairs = np.column_stack([network.sources, network.targets])
    again = Network.from_indices(network.names, pairs, network.weights)
    assert again == network
    assert again.sources.tobytes() == network.sources.tobytes()
    assert again.targets.tobytes() == network.targets.tobytes()


GRAPHS = {
    "fat tail": networkx.barabasi_albert_graph(2000, 5, seed=1),
    "random": networkx.gnm_random_graph(1500, 9000, seed=2),
    "ring": networkx.watts_strogatz_graph(1000, 10, 0.0, seed=3),
}


@pytest.mark.parametrize("kind", GRAPHS)
def test_degrees_and_simplicity_are_kept_and_nearly_every_edge_moves(kind: str) -> None:
    network = network_of(GRAPHS[kind])
    null = rewire(network, seed=7)
    assert_canonical(null)
    assert np.array_equal(null.degree, network.degree)
    # by chance alone an edge of the network recurs with probability k·k'/2m, here below 5 % on average
    assert edges_in_place(network, null) < 0.05


def test_no_more_edges_recur_than_chance_alone_explains() -> None:
    # In random networks of these degrees an edge (u, v) recurs with probability about k_u·k_v / 2m
    network = network_of(GRAPHS["random"])
    expected = (network.degree[network.sources] * network.degree[network.targets] / (2 * network.edge_count)).mean()
    # 5 trials an edge touch each edge ten times; all but about exp(−10) are swapped at least once
    assert (
        edges_in_place(network, rewire(network, seed=3)) < expected + 4 * np.sqrt(expected / network.edge_count) + 1e-3
    )


@pytest.mark.parametrize("graph", [networkx.karate_club_graph(), networkx.complete_graph(6), networkx.star_graph(5)])
def test_small_and_full_networks(graph: networkx.Graph) -> None:
    network = network_of(graph)
    null = rewire(network, seed=1)
    assert_canonical(null)
    assert np.array_equal(null.degree, network.degree)


def test_a_network_that_leaves_no_swap_comes_back_as_it_is() -> None:
    for graph in (networkx.complete_graph(5), networkx.star_graph(4), networkx.empty_graph(3), networkx.path_graph(2)):
        network = network_of(graph)
        assert rewire(network, seed=1) == network
        assert rewire_share(network, 0.5, seed=1) == network


def two_regular_graphs_on_six_nodes() -> set[frozenset[tuple[int, int]]]:
    """All 70 of them: 60 hexagons (5!/2) and 10 pairs of triangles (C(6,3)/2), counted by hand."""
    pairs = list(itertools.combinations(range(6), 2))
    found = set()
    for edges in itertools.combinations(pairs, 6):
        if (
            all(count == 2 for count in Counter(itertools.chain(*edges)).values())
            and len(set(itertools.chain(*edges))) == 6
        ):
            found.add(frozenset(edges))
    return found


def test_every_network_of_the_degrees_is_equally_likely() -> None:
    # Fosdick, Larremore, Nishimura & Ugander 2018: swaps with rejected trials counted sample simple graphs uniformly
    everything = two_regular_graphs_on_six_nodes()
    assert len(everything) == 70
    network = network_of(networkx.cycle_graph(6))
    draws: Counter[frozenset[tuple[int, int]]] = Counter()
    for seed in range(7000):
        null = rewire(network, seed, trials_per_edge=20)
        draws[frozenset(zip(null.sources.tolist(), null.targets.tolist(), strict=True))] += 1
    assert set(draws) == everything
    assert stats.chisquare(list(draws.values())).pvalue > 1e-3


def test_a_null_of_a_null_looks_the_same() -> None:
    network = network_of(GRAPHS["ring"])
    once = [networkx.transitivity(graph_of(rewire(network, seed))) for seed in range(20)]
    first = rewire(network, 100)
    twice = [networkx.transitivity(graph_of(rewire(first, seed))) for seed in range(20, 40)]
    assert networkx.transitivity(graph_of(network)) == pytest.approx(2 / 3)  # Watts & Strogatz 1998: 3(K−2)/(4(K−1))
    assert stats.ks_2samp(once, twice).pvalue > 1e-3


def graph_of(network: Network) -> networkx.Graph:
    graph = networkx.empty_graph(network.node_count)
    graph.add_edges_from(zip(network.sources.tolist(), network.targets.tolist(), strict=True))
    return graph


def test_weights_are_shuffled_over_the_edges() -> None:
    graph = GRAPHS["random"]
    weights = np.random.default_rng(5).uniform(0.1, 1.0, graph.number_of_edges())
    network = network_of(graph, weights)
    null = rewire(network, seed=11)
    assert_canonical(null)
    assert np.array_equal(np.sort(null.weights), np.sort(weights))
    # no bond is left between an edge's weight and its place in the canonical order
    assert abs(np.corrcoef(null.weights, network.weights)[0, 1]) < 4 / np.sqrt(len(weights))


@pytest.mark.parametrize("share", [0.02, 0.1, 0.4])
def test_a_share_of_the_edges_is_rewired(share: float) -> None:
    graph = GRAPHS["fat tail"]
    weights = np.random.default_rng(5).uniform(0.1, 1.0, graph.number_of_edges())
    network = network_of(graph, weights)
    noisy = rewire_share(network, share, seed=4)
    assert_canonical(noisy)
    assert np.array_equal(noisy.degree, network.degree)
    assert 1 - edges_in_place(network, noisy) == pytest.approx(share, rel=0.1)
    assert np.array_equal(np.sort(noisy.weights), np.sort(network.weights))
    before = dict(zip(zip(network.sources, network.targets, strict=True), network.weights, strict=True))
    after = dict(zip(zip(noisy.sources, noisy.targets, strict=True), noisy.weights, strict=True))
    same = sum(after.get(edge) == weight for edge, weight in before.items())
    assert same / len(before) == pytest.approx(1 - share, abs=0.05)


def test_share_of_nothing_and_of_everything() -> None:
    network = network_of(GRAPHS["random"])
    assert rewire_share(network, 0.0, seed=1) == network
    assert edges_in_place(network, rewire_share(network, 1.0, seed=1)) < 0.05


@pytest.mark.parametrize("share", [-0.1, 1.1, float("nan")])
def test_a_share_out_of_range_is_refused(share: float) -> None:
    with pytest.raises(SettingError, match="from 0 to 1"):
        rewire_share(network_of(networkx.karate_club_graph()), share, seed=1)


def test_the_seed_decides_everything() -> None:
    network = network_of(GRAPHS["fat tail"])
    assert rewire(network, 5).fingerprint == rewire(network, 5).fingerprint
    assert rewire(network, 5) != rewire(network, 6)


def test_importing_the_module_does_not_load_numba() -> None:
    code = "import sys, analysis.trust.nulls; sys.exit('numba' in sys.modules)"
    assert subprocess.run([sys.executable, "-c", code], check=False).returncode == 0
