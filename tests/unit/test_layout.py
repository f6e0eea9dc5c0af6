"""The layout: deterministic, nothing on top of anything, components apart, modules together."""

from __future__ import annotations

import time

import numpy as np
import pytest
from scipy.spatial import cKDTree

from analysis.errors import Cancelled
from analysis.layout import layout
from analysis.methods.randomness import igraph_seed
from analysis.network import Network
from tests.graphs import lettered, named_edges, random_network
from tests.planted import Planted, planted_network, ring_of_cliques


def least_distance(positions: np.ndarray) -> float:
    return float(cKDTree(positions).query(positions, k=2)[0][:, 1].min())


@pytest.fixture(scope="module")
def planted() -> Planted:
    return planted_network([40] * 12 + [20] * 10, seed=5)


@pytest.fixture(scope="module")
def scattered() -> Network:
    """Return a large component with smaller ones of all sizes, pairs and single nodes around it."""
    ends = named_edges(ring_of_cliques(20, 5))
    for number, size in enumerate([30, 20, 12, 9, 8, 7, 6, 5, 5, 4, 4, 3, 3, 3]):
        part = random_network(number, nodes=size, edges=size * (size - 1) // 2 if size < 8 else 4 * size)
        ends += [(f"{number}-{a}", f"{number}-{b}") for a, b in named_edges(part)]
    ends += [(f"pair{i:03d}", f"riap{i:03d}") for i in range(120)]
    return Network.from_edges(ends, nodes=[f"single{i:03d}" for i in range(80)])


def test_it_is_the_same_every_time(planted):
    first = layout(planted.network, seed=3)
    assert np.array_equal(layout(planted.network, seed=3), first)
    assert first.shape == (planted.network.node_count, 2)
    assert np.all(np.isfinite(first))


def test_no_two_nodes_lie_at_one_place(planted, scattered, karate, les_miserables):
    for network in (planted.network, scattered, karate, les_miserables, random_network(1, nodes=1000, edges=4000)):
        positions = layout(network)
        assert np.all(np.isfinite(positions))
        assert least_distance(positions) > 0.2  # of about one unit


def test_components_lie_apart(scattered):
    positions, components = layout(scattered), scattered.components
    tree = cKDTree(positions)
    for label in range(1, components.max() + 1):
        points = np.flatnonzero(components == label)
        middle = (positions[points].min(axis=0) + positions[points].max(axis=0)) / 2
        reach = np.hypot(*(positions[points] - middle).T).max()
        # nobody else's node within its circle, nor within half a unit of its nodes
        near = set(tree.query_ball_point(middle, max(reach, 0.5) - 1e-9))
        near.update(*tree.query_ball_point(positions[points], 0.5))
        assert near <= set(points.tolist())
    # the giant component lies in the middle, all others outside the circle around it
    giant = np.hypot(*positions[components == 0].T).max()
    assert np.hypot(*positions[components != 0].T).min() > giant


def test_the_giant_component_is_in_the_middle(scattered):
    giant = layout(scattered)[scattered.components == 0]
    assert giant.mean(axis=0) == pytest.approx([0, 0], abs=1e-9)


def test_modules_lie_together(planted):
    """Of the ten nearest drawn neighbours nine in ten share a node's module; forces alone do not reach that."""

    def share(positions: np.ndarray) -> float:
        nearest = cKDTree(positions).query(positions, k=11)[1][:, 1:]
        return float((planted.labels[nearest] == planted.labels[:, None]).mean())

    with igraph_seed(1):
        forces = planted.network.igraph.layout_fruchterman_reingold(niter=50)
    assert share(layout(planted.network)) >= 0.9
    assert share(layout(planted.network)) > share(np.array(forces.coords))


def test_nodes_are_about_one_unit_apart(planted):
    positions = layout(planted.network)
    assert 0.4 < np.median(cKDTree(positions).query(positions, k=2)[0][:, 1]) < 1.6


@pytest.mark.parametrize(
    ("edges", "nodes", "count"),
    [("", "", 0), ("", "a", 1), ("", "ab", 2), ("ab", "", 2), ("ab", "xyz", 5), ("ab cd", "", 4), ("ab bc ac", "z", 4)],
)
def test_small_networks(edges, nodes, count):
    positions = layout(lettered(edges, nodes=nodes))
    assert positions.shape == (count, 2)
    assert np.all(np.isfinite(positions))
    if count > 1:
        assert least_distance(positions) > 0.2


@pytest.mark.parametrize("shape", ["star", "path", "clique"])
def test_plain_shapes(shape):
    ends = {
        "star": [("hub", f"n{i:03d}") for i in range(300)],
        "path": [(f"n{i:03d}", f"n{i + 1:03d}") for i in range(300)],
        "clique": [(f"n{i:03d}", f"n{j:03d}") for i in range(80) for j in range(i)],
    }[shape]
    positions = layout(Network.from_edges(ends))
    assert np.all(np.isfinite(positions))
    assert least_distance(positions) > 0.2


def test_weights_may_be_of_any_size(planted):
    network = planted.network
    for unit in (1e-9, 1e9):
        weights = np.random.default_rng(1).uniform(0.5, 1, network.edge_count) * unit
        positions = layout(Network(network.names, network.sources, network.targets, weights))
        assert np.all(np.isfinite(positions))
        assert least_distance(positions) > 0.2


def test_progress_runs_to_its_end_and_may_stop_the_work(planted):
    fractions: list[float] = []
    layout(planted.network, progress=lambda fraction, _phrase: fractions.append(fraction))
    assert fractions == sorted(fractions)
    assert fractions[-1] == 1.0

    def stop(_fraction: float, _phrase: str) -> None:
        raise Cancelled

    with pytest.raises(Cancelled):
        layout(planted.network, progress=stop)


def test_time_grows_no_faster_than_the_network(planted):
    """Five thousand nodes cost at most some twenty times what seven hundred cost: near-linear, with room for noise."""
    large = planted_network([50] * 100, seed=5, inside=0.3).network

    def seconds(network: Network) -> float:
        start = time.process_time()
        layout(network)
        return time.process_time() - start

    small = min(seconds(planted.network) for _ in range(3))
    assert seconds(large) < 30 * small
