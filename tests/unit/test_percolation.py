"""Clique percolation for every k at once (Palla, Derényi, Farkas & Vicsek 2005)."""

from __future__ import annotations

import math

import networkx as nx
import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from analysis.errors import LimitError, SettingError
from analysis.methods import CliquePercolation
from analysis.network import Network
from analysis.overlap.cliques import Cliques, maximal_cliques
from analysis.overlap.percolation import Percolation, communities, critical_density, join_cliques, percolate
from tests.graphs import lettered, random_network, to_networkx


@pytest.fixture(scope="module")
def karate() -> Network:
    return from_networkx(nx.karate_club_graph())


def from_networkx(graph: nx.Graph) -> Network:
    numbered = nx.convert_node_labels_to_integers(graph)
    names = tuple(f"g{node:05d}" for node in range(numbered.number_of_nodes()))
    pairs = [sorted(pair) for pair in numbered.edges() if pair[0] != pair[1]]
    return Network.from_indices(names, np.array(pairs, int).reshape(-1, 2))


def as_sets(groups: object) -> set[frozenset[int]]:
    return {frozenset(group.tolist()) for group in groups}  # type: ignore[attr-defined]


def by_networkx(network: Network, k: int) -> set[frozenset[int]]:
    return {frozenset(group) for group in nx.community.k_clique_communities(to_networkx(network), k)}


def assert_equal_for_every_k(network: Network) -> Percolation:
    found = percolate(network)
    for k in range(2, found.largest_k + 2):
        assert as_sets(found.at(k).members) == by_networkx(network, k)
        assert as_sets(communities(network, k)) == as_sets(found.at(k).members)
    return found


def assert_nested(found: Percolation) -> None:
    for level in found.levels[1:]:
        below = found.at(level.k - 1)
        for group, parent in zip(level.members, level.parents, strict=True):
            assert set(group.tolist()) <= set(below.members[parent].tolist())


@pytest.mark.parametrize(
    "make",
    [nx.karate_club_graph, nx.les_miserables_graph, nx.davis_southern_women_graph, nx.florentine_families_graph],
    ids=lambda make: make.__name__,
)
def test_published_networks_as_networkx_finds_them(make):
    assert_nested(assert_equal_for_every_k(from_networkx(make())))


@given(seed=st.integers(0, 10**6), nodes=st.integers(2, 22), share=st.floats(0.02, 0.7))
@settings(max_examples=200, deadline=None)
def test_random_networks_as_networkx_finds_them(seed: int, nodes: int, share: float):
    network = random_network(seed, nodes=nodes, edges=max(1, int(share * nodes * (nodes - 1) / 2)))
    assert_nested(assert_equal_for_every_k(network))


def test_community_sizes_of_the_karate_club(karate):
    # computed with networkx
    found = percolate(karate)
    assert found.at(3).sizes == [25, 6, 3]
    assert as_sets(found.at(4).members) == {
        frozenset({0, 1, 2, 3, 7, 13}), frozenset({8, 30, 32, 33}), frozenset({23, 29, 32, 33}),
    }  # fmt: skip
    assert as_sets(found.at(5).members) == {frozenset({0, 1, 2, 3, 7, 13})}
    assert found.largest_k == 5
    assert found.at(6).members == ()


def test_two_groups_of_four_that_share_an_edge():
    # Palla et al. 2005, the definition: joined at k = 3 (they share two nodes), apart at k = 4
    network = lettered("ab ac ad bc bd cd ce cf de df ef")
    found = percolate(network)
    assert found.at(3).sizes == [6]
    assert found.at(4).sizes == [4, 4]
    assert found.at(4).parents.tolist() == [0, 0]
    assert found.modules(4).homes.tolist() == [1, 1, 2, 2, 1, 1]


def test_the_method_takes_the_same_way(karate):
    for k in (2, 3, 4, 5, 6):
        groups = CliquePercolation(k=k).find(karate).members
        assert [group.tolist() for group in groups] == [group.tolist() for group in percolate(karate).at(k).members]


def test_no_edges_and_no_triangles():
    assert percolate(Network.from_edges([], nodes=["a", "b"])).levels == ()
    ring = from_networkx(nx.cycle_graph(6))
    assert [level.k for level in percolate(ring).levels] == [2]
    assert communities(ring, 3) == []


@pytest.mark.parametrize("edges", [0, 20, 150])
def test_it_can_be_kept(edges: int):
    found = percolate(random_network(1, nodes=30, edges=edges))
    again = Percolation.from_arrays(found.to_arrays())
    assert again.node_count == 30
    assert [level.k for level in again.levels] == [level.k for level in found.levels]
    for one, other in zip(again.levels, found.levels, strict=True):
        assert [group.tolist() for group in one.members] == [group.tolist() for group in other.members]
        assert one.parents.tolist() == other.parents.tolist()


def test_k_below_two_is_refused(karate):
    with pytest.raises(SettingError, match="at least 2"):
        percolate(karate).at(1)
    with pytest.raises(SettingError, match="at least 2"):
        communities(karate, 1)


@pytest.mark.parametrize(("k", "density"), [(3, 0.031623), (4, 0.087358)])
def test_the_published_percolation_point(k: int, density: float):
    # Derényi, Palla & Vicsek 2005, N = 500, as computed from their formula by hand
    assert critical_density(k, 500) == pytest.approx(density, abs=1e-6)


def test_maximal_cliques_of_the_karate_club(karate):
    cliques = maximal_cliques(karate, 1)
    assert len(cliques) == 36  # computed with networkx
    assert cliques.sizes.max() == 5
    parts = np.split(cliques.members, cliques.starts[1:-1])
    assert as_sets(parts) == {frozenset(clique) for clique in nx.find_cliques(to_networkx(karate))}
    assert np.all(np.diff(cliques.sizes) <= 0)


def test_too_many_cliques_are_refused_with_a_remedy(karate):
    assert len(maximal_cliques(karate, 1, limit=36)) == 36
    with pytest.raises(LimitError, match=r"more than 35 maximal cliques of 1 or more nodes.*--min-weight"):
        maximal_cliques(karate, 1, limit=35)


def test_too_much_overlap_is_refused_with_a_remedy(karate):
    with pytest.raises(LimitError, match=r"too long; raise k, or leave out weak edges"):
        join_cliques(maximal_cliques(karate, 3), 3, limit=10)


def test_dense_blocks_end_in_a_message_at_once():
    # five blocks of 80 nodes at density 0.8 hold more maximal cliques than could ever be listed
    rng = np.random.default_rng(1)
    first, second = np.triu_indices(80, 1)
    pairs = [np.column_stack([first, second])[rng.random(len(first)) < 0.8] + 80 * block for block in range(5)]
    network = Network.from_indices(tuple(f"g{node:05d}" for node in range(400)), np.concatenate(pairs))
    with pytest.raises(LimitError, match="raise k, or leave out weak edges"):
        percolate(network)
    assert [len(group) for group in communities(network, 3)] == [80] * 5  # triangles need no cliques


def test_no_clique_gives_no_group():
    assert join_cliques(Cliques.from_groups([], 5), 3) == []


def test_work_is_what_counting_overlaps_takes():
    cliques = Cliques.from_groups([(0, 1), (1, 2, 3)], 4)
    assert cliques.members.tolist() == [1, 2, 3, 0, 1]
    assert cliques.work == math.floor((1 + 4 + 1 + 1) / 2)
