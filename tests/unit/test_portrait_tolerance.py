"""Removal of genes."""

from __future__ import annotations

import itertools

import networkx as nx
import numpy as np
import pytest

from analysis.network import Network
from analysis.portrait.compiled import largest_components
from analysis.portrait.neighbours import neighbour_rows
from analysis.portrait.tolerance import (
    BETWEENNESS,
    DEGREE,
    RANDOM,
    RECOMPUTED,
    RemovalTask,
    gather_curves,
    removal_order,
)
from tests.graphs import random_network, to_networkx
from tests.planted import from_networkx


def sizes(network: Network, strategy: str, seed: int = 1) -> np.ndarray:
    return RemovalTask(strategy, seed).run(network).sizes


def random_graph(nodes: int, mean_degree: float, seed: int = 1) -> Network:
    return from_networkx(nx.gnm_random_graph(nodes, round(nodes * mean_degree / 2), seed=seed))


@pytest.mark.parametrize("seed", range(6))
@pytest.mark.parametrize("strategy", [RANDOM, DEGREE, RECOMPUTED, BETWEENNESS])
def test_curves_agree_with_brute_force(seed: int, strategy: str):
    network = random_network(seed, nodes=35, edges=30 + 12 * seed)
    order = removal_order(network, strategy, seed)
    assert sorted(order.tolist()) == list(range(35))
    found, others = largest_components(*neighbour_rows(network), order)
    graph = to_networkx(network)
    for gone in range(36):
        pieces = sorted((len(piece) for piece in nx.connected_components(graph)), reverse=True)
        assert found[gone] == (pieces[0] if pieces else 0)
        rest = pieces[1:]
        assert others[gone] == pytest.approx(sum(s * s for s in rest) / (35 - gone) if rest else 0)
        if gone < 35:
            graph.remove_node(int(order[gone]))


@pytest.mark.parametrize("seed", range(5))
def test_orders_take_the_best_connected_first(seed: int):
    network = random_network(seed, nodes=50, edges=150)
    assert np.all(np.diff(network.degree[removal_order(network, DEGREE, seed)]) <= 0)
    graph = to_networkx(network)
    for node in removal_order(network, RECOMPUTED, seed).tolist():
        assert graph.degree(node) == max(degree for _, degree in graph.degree)
        graph.remove_node(node)
    order = removal_order(network, BETWEENNESS, seed)
    between = nx.betweenness_centrality(to_networkx(network))
    values = [between[node] for node in order.tolist()]
    assert all(before >= after - 1e-12 for before, after in itertools.pairwise(values))


def test_chance_decides_among_equals():
    network = from_networkx(nx.cycle_graph(40))
    for strategy in (DEGREE, RECOMPUTED):
        assert removal_order(network, strategy, 1).tolist() == removal_order(network, strategy, 1).tolist()
        assert removal_order(network, strategy, 1).tolist() != removal_order(network, strategy, 2).tolist()


def test_robustness_of_a_complete_network_and_of_a_star():
    """By hand (Schneider et al. 2011): S(q) = (N − q)/N gives R = (N − 1)/2N; a star without its centre has singles."""
    complete = from_networkx(nx.complete_graph(21))
    found = gather_curves(complete, [RemovalTask(DEGREE, 1).run(complete)]).curves[0]
    assert found.robustness == pytest.approx(20 / 42)
    star = from_networkx(nx.star_graph(20))
    found = gather_curves(star, [RemovalTask(DEGREE, 1).run(star)]).curves[0]
    assert found.robustness == pytest.approx((20 * 1 / 21) / 21)


# Giant share of random networks: S = 1 − exp(−⟨k⟩S) (Erdős & Rényi 1960).
@pytest.mark.parametrize(("mean_degree", "share"), [(1.5, 0.582812), (2.0, 0.796812), (3.0, 0.940480)])
def test_random_networks_have_the_giant_component_of_theory(mean_degree: float, share: float):
    network = random_graph(20_000, mean_degree)
    assert sizes(network, RANDOM)[0] / 20_000 == pytest.approx(share, abs=0.02)


def test_random_failure_parts_a_random_network_near_the_critical_share():
    """Cohen et al. 2000: 1 − 1/⟨k⟩ for Erdős–Rényi networks; finite ones come out a little lower."""
    network = random_graph(20_000, 4.0)
    tolerance = gather_curves(network, [RemovalTask(RANDOM, seed).run(network) for seed in range(5)])
    assert tolerance.random_critical == pytest.approx(0.75, abs=0.005)
    assert tolerance.kappa == pytest.approx(5.0, abs=0.1)
    curve = tolerance.curve(RANDOM)
    assert curve is not None
    assert 0.68 < curve.critical < 0.77
    assert curve.at(0.8) < 0.03
    assert np.all(curve.low <= curve.giant)
    assert np.all(curve.giant <= curve.high)


def test_hubs_hold_a_network_of_preferential_attachment_together():
    """Barabási & Albert 1999, three edges a newcomer; the curve's points computed with networkx, in the same order."""
    network = from_networkx(nx.barabasi_albert_graph(4_000, 3, seed=2))
    curve = gather_curves(network, [RemovalTask(DEGREE, 1).run(network)]).curves[0]
    order, graph = removal_order(network, DEGREE, 1), to_networkx(network)
    for before, share in ((0.0, 0.05), (0.05, 0.2), (0.2, 0.3)):
        graph.remove_nodes_from(order[round(4_000 * before) : round(4_000 * share)].tolist())
        assert curve.at(share) == max(map(len, nx.connected_components(graph))) / 4_000
    anew = gather_curves(network, [RemovalTask(RECOMPUTED, 1).run(network)]).curves[0]
    assert anew.robustness <= curve.robustness
    alike = gather_curves(network, [RemovalTask(RANDOM, 1).run(network)]).curves[0]
    assert curve.robustness < alike.robustness / 1.5
    assert curve.critical < 0.35
    assert alike.critical > 0.8


def test_no_critical_share_where_there_is_no_giant_component():
    """Molloy & Reed 1995: κ = 1 for single pairs, below 2."""
    pairs = Network.from_edges([(f"a{n}", f"b{n}") for n in range(10)])
    tolerance = gather_curves(pairs, [RemovalTask(RANDOM, 1).run(pairs)])
    assert tolerance.kappa == 1
    assert np.isnan(tolerance.random_critical)
