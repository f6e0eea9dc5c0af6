"""Shortest paths and the small world."""

from __future__ import annotations

from collections import Counter

import networkx as nx
import numpy as np
import pytest

from analysis.network import Network
from analysis.portrait.distances import SearchTask, chosen_sources, gather_distances, search, small_world
from analysis.portrait.summary import OwnFiguresTask
from tests.graphs import joined, lettered, random_network, to_networkx
from tests.planted import from_networkx


def ring(nodes: int, partners: int) -> Network:
    return from_networkx(nx.watts_strogatz_graph(nodes, partners, 0))


def all_pairs(network: Network):
    return gather_distances(network, [SearchTask(0, 1).run(network)])


def test_the_ring_has_its_closed_forms():
    """Watts & Strogatz 1998: C = 3(K − 2)/(4(K − 1)); the mean path counted by hand: 50.450450 at n = 1000, K = 10."""
    network = ring(1_000, 10)
    assert OwnFiguresTask().run(network).figures.clustering == pytest.approx(2 / 3)
    found = all_pairs(network)
    assert found.mean == pytest.approx(50.450450, abs=5e-7)
    assert (found.diameter_low, found.diameter_high, found.exact) == (100, 100, True)


@pytest.mark.parametrize("seed", range(6))
def test_distances_agree_with_networkx(seed: int):
    network = random_network(seed, nodes=130, edges=90 + 40 * seed)
    graph = to_networkx(network)
    giant = graph.subgraph(max(nx.connected_components(graph), key=len))
    pairs = Counter(steps for _, row in nx.all_pairs_shortest_path_length(giant) for steps in row.values())
    found = all_pairs(network)
    assert found.genes == len(giant)
    assert found.mean == pytest.approx(nx.average_shortest_path_length(giant))
    assert found.diameter_low == nx.diameter(giant)
    total = len(giant) * (len(giant) - 1)
    np.testing.assert_allclose(found.shares, [0, *(pairs[steps] / total for steps in range(1, max(pairs) + 1))])


def test_parts_give_the_whole():
    network = random_network(2, nodes=200, edges=420)
    parts = [SearchTask(0, 1, part, 3).run(network) for part in range(3)]
    whole, pieced = all_pairs(network), gather_distances(network, parts)
    assert pieced.mean == pytest.approx(whole.mean)
    np.testing.assert_array_equal(pieced.shares, whole.shares)


def test_a_sample_s_interval_holds_the_truth_about_as_often_as_it_says():
    network = random_network(9, nodes=400, edges=700)
    truth = all_pairs(network)
    held = 0
    for seed in range(60):
        found = gather_distances(network, [search(network, chosen_sources(network, 64, seed))])
        held += found.mean_low <= truth.mean <= found.mean_high
        assert found.diameter_low <= truth.diameter_low <= found.diameter_high
    assert held >= 50  # 57 are expected of 95 %; fewer than 50 in one of 10,000 (binomial)


def test_small_networks_and_several_pieces():
    two = joined(lettered("ab bc cd"), lettered("xy"))
    found = all_pairs(two)
    assert (found.genes, found.share) == (4, pytest.approx(4 / 6))
    assert found.mean == pytest.approx(10 / 6)  # a path of four: 3 at one step, 2 at two, 1 at three
    assert "no distance" in all_pairs(Network.from_edges([], nodes=["a", "b"])).sentence()


def test_small_world_coefficient():
    """Humphries & Gurney 2008: 1 for a random network, large for a ring with a few short cuts."""
    assert small_world(0.5, 3.0, 0.1, 2.5) == pytest.approx(5 / 1.2)
    assert np.isnan(small_world(0.5, 3.0, 0.0, 2.5))
