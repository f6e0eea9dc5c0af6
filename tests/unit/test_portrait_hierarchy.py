"""Clustering against degree."""

from __future__ import annotations

import networkx as nx
import numpy as np
import pytest

from analysis.network import Network
from analysis.portrait.hierarchy import hierarchy
from analysis.portrait.summary import OwnFiguresTask
from tests.graphs import lettered, random_network, to_networkx


def hierarchical_model(levels: int) -> Network:
    """Five genes all joined; four copies around them, whose outer genes join the first centre; and again.

    The five-node version of Ravasz & Barabási (2003).
    """
    edges = [(a, b) for a in range(5) for b in range(a + 1, 5)]
    outer, size = [1, 2, 3, 4], 5
    for _ in range(levels - 1):
        copies = [(a + size * copy, b + size * copy) for copy in range(5) for a, b in edges]
        rim = [node + size * copy for copy in range(1, 5) for node in outer]
        edges, outer, size = [*copies, *((0, node) for node in rim)], rim, 5 * size
    names = tuple(f"g{node:05d}" for node in range(size))
    return Network.from_indices(names, np.array(edges))


# Edges and mean clustering computed with networkx on the published construction.
@pytest.mark.parametrize(
    ("levels", "edges", "clustering"), [(1, 10, 1.0), (2, 66, 0.902316), (3, 394, 0.850142), (4, 2226, 0.814990)]
)
def test_the_hierarchical_model_has_its_figures(levels: int, edges: int, clustering: float):
    measured = OwnFiguresTask().run(hierarchical_model(levels))
    assert measured.figures.edges == edges
    assert measured.figures.clustering == pytest.approx(clustering, abs=5e-7)


def test_centres_of_the_hierarchical_model_have_exactly_3_over_k_minus_1():
    """Ravasz & Barabási 2003: the centre of each level, of degree 20, 84, 340, has C(k) = 3/(k − 1)."""
    network = hierarchical_model(4)
    section = hierarchy(network, OwnFiguresTask().run(network).local, 1)
    by_degree = dict(zip(section.degrees.tolist(), section.clustering.tolist(), strict=True))
    for degree in (20, 84, 340):
        assert by_degree[degree] == pytest.approx(3 / (degree - 1), rel=1e-12)
    assert section.slope_low <= section.slope <= section.slope_high < -0.5
    assert "falls" in section.sentence()


@pytest.mark.parametrize("seed", range(3))
def test_means_by_degree_agree_with_networkx(seed: int):
    network = random_network(seed, nodes=80, edges=300)
    section = hierarchy(network, OwnFiguresTask().run(network).local, 1)
    graph = to_networkx(network)
    local = nx.clustering(graph)
    for degree, genes, value in zip(section.degrees, section.genes, section.clustering, strict=True):
        nodes = [node for node, each in graph.degree if each == degree]
        assert genes == len(nodes)
        assert value == pytest.approx(np.mean([local[node] for node in nodes]))


def test_a_random_network_has_no_slope_and_lies_at_its_density():
    network = random_network(4, nodes=1_000, edges=30_000)
    section = hierarchy(network, OwnFiguresTask().run(network).local, 1)
    assert abs(section.slope) < 0.1
    assert section.flat == pytest.approx(30_000 / (1_000 * 999 / 2))
    np.testing.assert_allclose(section.bin_clustering, section.flat, rtol=0.15)


def test_without_joined_partners_there_is_no_slope():
    tree = lettered("ab bc cd ce")
    section = hierarchy(tree, OwnFiguresTask().run(tree).local, 1)
    assert np.isnan(section.slope)
    assert "Too few" in section.sentence()
    pair = lettered("ab")
    assert len(hierarchy(pair, np.zeros(2), 1).degrees) == 0
