"""The network: canonical whatever the order of its rows, and the same to networkx and igraph."""

from __future__ import annotations

import hashlib
import pickle

import networkx as nx
import numpy as np
import pytest

from analysis.network import Network
from tests.graphs import lettered, named_edges, random_network, shuffled, to_networkx
from tests.planted import from_networkx


@pytest.fixture(scope="module")
def weighted() -> Network:
    return from_networkx(nx.les_miserables_graph(), weight="weight")


# Canonical order


def test_nodes_are_sorted_by_name_and_each_edge_runs_forwards():
    network = Network.from_edges([("d", "a"), ("b", "c"), ("c", "a")], [3.0, 1.0, 2.0], nodes=["z", "a"])
    assert network.names == ("a", "b", "c", "d", "z")
    assert named_edges(network) == [("a", "c"), ("a", "d"), ("b", "c")]
    assert network.weights is not None
    assert network.weights.tolist() == [2.0, 3.0, 1.0]
    assert (network.node_count, network.edge_count) == (5, 3)
    assert network.index == {"a": 0, "b": 1, "c": 2, "d": 3, "z": 4}


@pytest.mark.parametrize("seed", range(5))
def test_order_of_rows_and_columns_changes_nothing(weighted, seed):
    again = shuffled(weighted, seed)
    assert again == weighted
    assert hash(again) == hash(weighted)
    assert again.fingerprint == weighted.fingerprint
    assert again.sources.tobytes() == weighted.sources.tobytes()
    assert again.targets.tobytes() == weighted.targets.tobytes()
    assert again.weights.tobytes() == weighted.weights.tobytes()


def test_names_of_any_script_sort_by_code_point():
    network = Network.from_edges([("β-catenin", "a"), ("Z", "é"), ("ADE5,7", "β-catenin")])
    assert network.names == ("ADE5,7", "Z", "a", "é", "β-catenin")


# Fingerprint


def test_the_fingerprint_is_the_digest_that_its_docstring_states():
    network = lettered("ab bc", [0.5, 2.0])
    digest = hashlib.sha256(b"a\nb\nc\0")
    digest.update(np.array([0, 1], "<i4").tobytes() + np.array([1, 2], "<i4").tobytes())
    digest.update(b"weights" + np.array([0.5, 2.0], "<f8").tobytes())
    assert network.fingerprint == digest.hexdigest()


def test_the_fingerprint_knows_names_edges_weights_and_lone_nodes():
    networks = [
        lettered("ab bc"),
        lettered("ab bd"),
        lettered("ab ac"),
        lettered("ab bc", nodes="z"),
        lettered("ab bc", [1.0, 1.0]),
        lettered("ab bc", [1.0, 2.0]),
        lettered("ab bc", [2.0, 1.0]),
        lettered("ab bc", [1.0, np.nextafter(2.0, 3.0)]),
    ]
    assert len({network.fingerprint for network in networks}) == len(networks)
    assert len(set(networks)) == len(networks)


def test_label_and_provenance_are_no_part_of_it():
    plain = lettered("ab bc")
    named = Network.from_edges([("a", "b"), ("b", "c")], label="moss", provenance={"file": "moss.tsv"})
    assert named == plain
    assert named.provenance == {"file": "moss.tsv"}
    assert plain != "a network"


# What is refused


@pytest.mark.parametrize(
    ("ends", "weights", "message"),
    [
        ([("a", "a")], None, "self-loops"),
        ([("a", "b"), ("a", "b")], None, "twice"),
        ([("a", "b"), ("c", "d"), ("b", "a")], None, "twice"),
        ([("a", "b")], [0.0], "positive"),
        ([("a", "b")], [-1.0], "positive"),
        ([("a", "b")], [float("nan")], "finite"),
        ([("a", "b")], [float("inf")], "finite"),
    ],
)
def test_what_is_no_simple_network_is_refused(ends, weights, message):
    with pytest.raises(ValueError, match=message):
        Network.from_edges(ends, weights)


@pytest.mark.parametrize("names", [("b", "a"), ("a", "a")])
def test_names_by_index_must_be_sorted_and_unique(names):
    with pytest.raises(ValueError, match="sorted and unique"):
        Network.from_indices(names, np.array([[0, 1]]))


# Against networkx


@pytest.mark.parametrize("seed", range(4))
def test_degree_strength_and_adjacency_are_those_of_networkx(seed):
    network = random_network(seed, weighted=seed % 2 == 1)
    graph = to_networkx(network)
    nodes = range(network.node_count)
    assert network.degree.tolist() == [graph.degree(node) for node in nodes]
    assert network.strength == pytest.approx([graph.degree(node, weight="weight") for node in nodes])
    matrix = nx.to_scipy_sparse_array(graph, nodelist=list(nodes), format="csr")
    assert np.array_equal(network.adjacency.toarray(), matrix.toarray())


@pytest.mark.parametrize("seed", range(4))
def test_components_are_those_of_networkx_from_the_largest(seed):
    network = random_network(seed, nodes=60, edges=45)
    found = [frozenset(np.flatnonzero(network.components == label).tolist()) for label in np.unique(network.components)]
    assert set(found) == {frozenset(part) for part in nx.connected_components(to_networkx(network))}
    assert [len(part) for part in found] == sorted((len(part) for part in found), reverse=True)


def test_subnetworks_are_those_of_networkx(weighted):
    nodes = np.array([40, 3, 11, 70, 26, 25, 3, 27])
    part = weighted.subnetwork(nodes)
    assert part.names == tuple(weighted.names[node] for node in sorted(set(nodes.tolist())))
    wanted = to_networkx(weighted).subgraph(nodes.tolist())
    index = weighted.index
    found = {
        frozenset(index[name] for name in pair): w for pair, w in zip(named_edges(part), part.weights, strict=True)
    }
    assert found == {frozenset((a, b)): data["weight"] for a, b, data in wanted.edges(data=True)}
    assert weighted.subnetwork(np.arange(weighted.node_count)) == weighted


def test_igraph_sees_the_same_edges_and_weights(weighted):
    graph = weighted.igraph
    assert graph.vcount() == weighted.node_count
    assert graph.get_edgelist() == list(zip(weighted.sources.tolist(), weighted.targets.tolist(), strict=True))
    assert graph.es["weight"] == weighted.weights.tolist()
    assert "weight" not in weighted.without_weights().igraph.es.attributes()


# Parts and views


def test_without_weights_each_edge_counts_one(weighted):
    plain = weighted.without_weights()
    assert plain.weights is None
    assert np.array_equal(plain.edge_weights, np.ones(254))  # 254 edges: Knuth 1993
    assert np.array_equal(plain.degree, weighted.degree)
    assert np.array_equal(plain.strength, plain.degree)


def test_a_part_of_the_edges_keeps_all_nodes(weighted):
    kept = weighted.edge_weights > 3
    part = weighted.with_edges(kept)
    assert part.names == weighted.names
    assert part.edge_count == kept.sum()
    assert set(named_edges(part)) <= set(named_edges(weighted))
    assert part.weights.min() > 3


def test_the_edge_table_speaks_in_names(weighted):
    table = weighted.edge_table()
    assert list(table.columns) == ["source", "target", "weight"]
    assert list(zip(table["source"], table["target"], strict=True)) == named_edges(weighted)
    assert list(weighted.without_weights().edge_table().columns) == ["source", "target"]


def test_arrays_cannot_be_written(weighted):
    for array in (weighted.sources, weighted.targets, weighted.weights, weighted.degree, weighted.components):
        with pytest.raises(ValueError, match="read-only"):
            array[0] = 1


def test_it_travels_without_its_views(weighted):
    assert weighted.igraph is weighted.igraph  # kept once made
    parcel = pickle.dumps(weighted)
    again = pickle.loads(parcel)  # noqa: S301
    assert again == weighted
    assert again.provenance == weighted.provenance
    assert "igraph" not in vars(again)
    assert len(parcel) < 4 * (weighted.sources.nbytes + weighted.targets.nbytes + weighted.weights.nbytes)


# Next to nothing


def test_a_network_of_nothing():
    nothing = Network.from_edges([])
    assert (nothing.node_count, nothing.edge_count) == (0, 0)
    assert nothing.degree.tolist() == []
    assert nothing.components.tolist() == []
    assert nothing.igraph.vcount() == 0
    assert nothing.fingerprint != lettered("", nodes="a").fingerprint


def test_lone_nodes_alone():
    lone = lettered("", nodes="cab")
    assert lone.names == ("a", "b", "c")
    assert lone.degree.tolist() == [0, 0, 0]
    assert lone.components.tolist() == [0, 1, 2]
    assert lone.subnetwork(np.array([1])).names == ("b",)
