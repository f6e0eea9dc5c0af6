"""The network as a whole, and the random networks beside it."""

from __future__ import annotations

import networkx as nx
import numpy as np
import pytest

from analysis.network import Network
from analysis.portrait import PortraitSettings, run_portrait
from analysis.portrait.summary import (
    DEGREES,
    UNIFORM,
    FiguresTask,
    OwnFiguresTask,
    assortativity,
    core_numbers,
    gather_nulls,
    local_clustering,
)
from analysis.portrait.uniform_network import uniform_network
from tests.graphs import lettered, random_network, to_networkx

# Computed with networkx; both have a diameter of 5.
KNOWN = {
    "karate": {"transitivity": 0.25568, "clustering": 0.57064, "mean_path": 2.40820, "assortativity": -0.47561},
    "les_miserables": {"transitivity": 0.49893, "clustering": 0.57314, "mean_path": 2.64115},
}
DIAMETER = 5


@pytest.mark.parametrize("name", KNOWN)
def test_published_networks_have_their_known_figures(request: pytest.FixtureRequest, name: str):
    portrait = run_portrait(request.getfixturevalue(name), PortraitSettings(nulls=0, draws=1, samples=0))
    assert portrait.summary is not None
    assert portrait.distances is not None
    for figure, value in KNOWN[name].items():
        assert getattr(portrait.summary.figures, figure) == pytest.approx(value, abs=5e-6)
    assert (portrait.distances.diameter_low, portrait.distances.diameter_high) == (DIAMETER, DIAMETER)


@pytest.mark.parametrize("seed", range(8))
def test_every_figure_agrees_with_networkx(seed: int):
    network = random_network(seed, nodes=60, edges=40 + 25 * seed, weighted=seed % 2 == 1)
    graph = to_networkx(network)
    measured = OwnFiguresTask().run(network)
    figures = measured.figures
    pieces = sorted(map(len, nx.connected_components(graph)), reverse=True)
    degrees = np.array([degree for _, degree in graph.degree])
    assert (figures.nodes, figures.edges) == (graph.number_of_nodes(), graph.number_of_edges())
    assert figures.density == pytest.approx(nx.density(graph))
    assert (figures.components, figures.giant_share) == (len(pieces), pieces[0] / 60)
    assert (figures.mean_degree, figures.degree_sd) == pytest.approx((degrees.mean(), degrees.std()))
    assert (figures.median_degree, figures.highest_degree) == (np.median(degrees), degrees.max())
    strengths = [strength for _, strength in graph.degree(weight="weight")]
    assert (figures.mean_strength, figures.highest_strength) == pytest.approx((np.mean(strengths), max(strengths)))
    assert figures.assortativity == pytest.approx(nx.degree_pearson_correlation_coefficient(graph))
    assert figures.transitivity == pytest.approx(nx.transitivity(graph))
    assert figures.clustering == pytest.approx(nx.average_clustering(graph))
    np.testing.assert_array_equal(measured.core, list(nx.core_number(graph).values()))
    np.testing.assert_allclose(measured.local, list(nx.clustering(graph).values()))


def test_figures_that_are_not_defined_are_missing():
    ring = lettered("ab bc cd da")
    assert np.isnan(assortativity(ring))
    pair = OwnFiguresTask().run(lettered("ab")).figures
    assert np.isnan(pair.transitivity)
    assert (pair.core, pair.clustering) == (1, 0.0)


@pytest.mark.parametrize("edges", [0, 1, 30, 700, 780])
def test_a_uniform_network_keeps_the_numbers_and_nothing_else(edges: int):
    network = random_network(3, nodes=40, edges=edges, weighted=True)
    drawn = uniform_network(network, 7)
    assert (drawn.names, drawn.edge_count, drawn.weights) == (network.names, edges, None)
    assert Network.from_indices(drawn.names, np.column_stack([drawn.sources, drawn.targets])) == drawn
    assert uniform_network(network, 7) == drawn
    assert edges in {0, 780} or uniform_network(network, 8) != drawn


def test_uniform_networks_give_every_pair_alike():
    network = random_network(1, nodes=8, edges=5)
    counts = np.zeros((8, 8))
    for seed in range(2_000):
        drawn = uniform_network(network, seed)
        counts[drawn.sources, drawn.targets] += 1
    seen = counts[np.triu_indices(8, 1)]
    expected = 2_000 * 5 / 28
    # χ² with 27 degrees of freedom lies below 55.5 in 99.9 % of cases (from memory; without-replacement makes it less)
    assert ((seen - expected) ** 2 / expected).sum() < 55.5


def test_nulls_keep_what_they_must_and_tell_mean_and_spread(karate: Network):
    found = [FiguresTask(kind, seed).run(karate) for seed in range(5) for kind in (DEGREES, UNIFORM)]
    for each in found:
        assert each.figures.edges == 78
        if each.kind == DEGREES:
            assert each.figures.highest_degree == 17
    nulls = gather_nulls(found, DEGREES)
    values = [each.figures.clustering for each in found if each.kind == DEGREES]
    assert nulls["clustering"].mean == pytest.approx(np.mean(values))
    assert nulls["clustering"].z(0.57) == pytest.approx((0.57 - np.mean(values)) / np.std(values, ddof=1))
    assert "highest_degree" not in nulls
    assert "highest_degree" in gather_nulls(found, UNIFORM)


def test_a_random_network_is_like_its_nulls():
    """Clustering of an Erdős–Rényi network is its density, whatever null it stands beside."""
    network = random_network(5, nodes=300, edges=1_500)
    found = [FiguresTask(kind, seed).run(network) for seed in range(12) for kind in (DEGREES, UNIFORM)]
    value = float(local_clustering(network).mean())
    for kind in (DEGREES, UNIFORM):
        assert abs(gather_nulls(found, kind)["clustering"].z(value)) < 4
    assert int(core_numbers(network).max()) == pytest.approx(gather_nulls(found, UNIFORM)["core"].mean, abs=1.5)
