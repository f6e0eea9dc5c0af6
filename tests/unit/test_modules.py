"""Modules and their figures: order, labels, modularity, conductance, evidence, the resolution limit."""

from __future__ import annotations

import math

import networkx as nx
import numpy as np
import pytest

from analysis.modules import (
    NO_MODULE,
    Modules,
    evidence_per_member,
    extended_modularity,
    modularity,
    module_table,
    score_modules,
    standard_modularity,
)
from analysis.network import Network
from tests.graphs import groups_of, lettered, random_labels, random_network, to_networkx
from tests.planted import from_networkx, planted_network, ring_of_cliques

TRIANGLES = "ab bc ac de ef df cd"  # two triangles joined by an edge
BOW_TIE = "ab bc ac cd ce de"  # two triangles that share c


def lettered_modules(network: Network, *groups: str) -> Modules:
    """Return the modules whose members are the letters of each word."""
    return Modules.from_members(
        network.node_count, [np.array([network.index[letter] for letter in group]) for group in groups]
    )


def shen(network: Network, modules: Modules) -> float:
    """Equation 2 of Shen, Cheng, Cai & Hu 2009 as it stands: a sum over all pairs of nodes of each module."""
    adjacency = network.adjacency.toarray()
    total = adjacency.sum()
    groups = [*groups_of(modules), *({node} for node in np.flatnonzero(modules.homes == 0).tolist())]
    homes = np.maximum(modules.homes, 1)
    terms = [
        (adjacency[v, w] - network.strength[v] * network.strength[w] / total) / (homes[v] * homes[w])
        for group in groups
        for v in group
        for w in group
    ]
    return float(sum(terms) / total)


# The object


def test_the_largest_comes_first_and_ties_go_to_the_first_node():
    modules = Modules.from_labels(np.array([7, 2, 2, 7, 5, 9, 9, 9]))
    assert [group.tolist() for group in modules.members] == [[5, 6, 7], [0, 3], [1, 2], [4]]
    assert modules.numbers == ["M1", "M2", "M3", "M4"]
    assert modules.sizes.tolist() == [3, 2, 2, 1]
    assert modules.labels.tolist() == [1, 2, 2, 1, 3, 0, 0, 0]
    assert not modules.is_cover
    assert len(modules) == 4


def test_the_numbers_of_labels_do_not_matter():
    labels = random_labels(3, 50, 9)
    renamed = np.random.default_rng(1).permutation(9)[labels] * 10 + 3
    first, second = Modules.from_labels(labels), Modules.from_labels(renamed)
    assert [group.tolist() for group in first.members] == [group.tolist() for group in second.members]


def test_negative_labels_are_in_no_module():
    modules = Modules.from_labels(np.array([-1, 0, 0, -1, -2]))
    assert [group.tolist() for group in modules.members] == [[1, 2]]
    assert modules.labels.tolist() == [NO_MODULE, 0, 0, NO_MODULE, NO_MODULE]
    assert modules.full_labels.tolist() == [1, 0, 0, 2, 3]
    assert modules.left_out == 3


def test_a_cover_knows_every_home():
    modules = Modules.from_members(
        6, [np.array([3, 4]), np.array([2, 0, 1, 3]), np.array([], int), np.array([4, 4, 1])]
    )
    assert [group.tolist() for group in modules.members] == [[0, 1, 2, 3], [1, 4], [3, 4]]
    nodes, owners = modules.memberships
    assert list(zip(nodes.tolist(), owners.tolist(), strict=True)) == [
        (0, 0), (1, 0), (1, 1), (2, 0), (3, 0), (3, 2), (4, 1), (4, 2)
    ]  # fmt: skip
    assert modules.homes.tolist() == [1, 2, 1, 2, 2, 0]
    assert modules.is_cover
    assert modules.labels.tolist() == [0, 0, 0, 0, 1, NO_MODULE]  # of several, the largest
    assert modules.left_out == 1


@pytest.mark.parametrize("labels", [np.array([], np.int32), np.array([-1, -1])])
def test_no_module_at_all(labels):
    modules = Modules.from_labels(labels)
    assert len(modules) == 0
    assert modules.memberships[0].tolist() == []
    assert modules.left_out == len(labels)
    assert not modules.is_cover
    assert modules.full_labels.tolist() == list(range(len(labels)))
    assert score_modules(lettered("ab"), Modules.from_members(2, [])).size.tolist() == []


def test_settings_of_the_run_stay_with_the_modules():
    modules = Modules.from_labels(np.array([0, 0]), method="leiden", settings={"resolution": 2.0}, quality=0.5, seed=7)
    assert (modules.method, modules.settings, modules.quality, modules.seed) == ("leiden", {"resolution": 2.0}, 0.5, 7)


def test_arrays_of_members_cannot_be_written():
    modules = Modules.from_labels(np.array([0, 0, 1]))
    for array in (modules.members[0], modules.labels, modules.sizes, modules.homes):
        with pytest.raises(ValueError, match="read-only"):
            array[0] = 1


# Modularity


def test_two_triangles_by_hand():
    network = lettered(TRIANGLES)
    # W = 7, inside 3 + 3, K = 7 each: 6/7 − 2 (7/14)² = 5/14
    assert modularity(network, np.array([0, 0, 0, 1, 1, 1])) == pytest.approx(5 / 14)
    # at resolution 2 the second term counts twice: 6/7 − 1
    assert modularity(network, np.array([0, 0, 0, 1, 1, 1]), 2.0) == pytest.approx(-1 / 7)
    assert modularity(network, np.zeros(6, int)) == pytest.approx(0)
    # each node alone: −Σ k²/(2W)² = −(4·4 + 2·9)/196
    assert modularity(network, np.arange(6)) == pytest.approx(-34 / 196)


def test_two_cliques_of_five_by_hand():
    ends = [(f"{side}{i}", f"{side}{j}") for side in "ab" for i in range(5) for j in range(i + 1, 5)]
    network = Network.from_edges([*ends, ("a0", "b0")])
    labels = np.array([0] * 5 + [1] * 5)
    assert modularity(network, labels) == pytest.approx(20 / 21 - 0.5)  # 0.452381
    assert not score_modules(network, Modules.from_labels(labels)).below_resolution_limit.any()  # 10 ≥ √42


@pytest.mark.parametrize(
    ("weight", "wanted"),
    [(None, 0.358235), ("weight", 0.391438)],  # computed with networkx
)
def test_the_two_factions_of_the_karate_club(weight, wanted):
    graph = nx.karate_club_graph()
    network = from_networkx(graph, weight=weight)
    factions = np.array([int(graph.nodes[node]["club"] == "Officer") for node in range(34)])  # Zachary 1977
    assert modularity(network, factions) == pytest.approx(wanted, abs=1e-6)


@pytest.mark.parametrize("resolution", [0.3, 1.0, 2.5])
@pytest.mark.parametrize("seed", range(4))
def test_modularity_is_that_of_networkx(seed, resolution):
    network = random_network(seed, weighted=seed % 2 == 1)
    modules = Modules.from_labels(random_labels(seed, network.node_count, 6))
    wanted = nx.community.modularity(to_networkx(network), groups_of(modules), weight="weight", resolution=resolution)
    assert modularity(network, modules.labels, resolution) == pytest.approx(wanted, abs=1e-12)


def test_without_edges_there_is_nothing_to_compare():
    lone = lettered("", nodes="abc")
    assert modularity(lone, np.arange(3)) == 0
    assert extended_modularity(lone, lettered_modules(lone, "ab")) == 0
    assert score_modules(lone, lettered_modules(lone, "ab", "c")).evidence.tolist() == [0, 0]


# Extended modularity


def test_a_cover_by_hand():
    network = lettered(BOW_TIE)
    modules = lettered_modules(network, "abc", "cde")
    # 2W = 12, c has two homes. In each triangle: edges 2 (1 + ½ + ½) = 4, strengths 2 + 2 + 4/2 = 6:
    # EQ = 2 (4 − 36/12) / 12 = 1/6
    assert extended_modularity(network, modules) == pytest.approx(1 / 6)
    assert standard_modularity(network, modules) == pytest.approx(1 / 6)


@pytest.mark.parametrize("seed", range(4))
def test_it_is_modularity_for_a_partition(seed):
    network = random_network(seed, weighted=seed % 2 == 1)
    labels = random_labels(seed, network.node_count, 5) - (seed // 2)  # in two of the four, some in no module
    modules = Modules.from_labels(labels)
    wanted = modularity(network, modules.full_labels)
    assert extended_modularity(network, modules) == pytest.approx(wanted, abs=1e-12)
    assert standard_modularity(network, modules) == pytest.approx(wanted, abs=1e-12)


@pytest.mark.parametrize("seed", range(4))
def test_it_is_the_published_sum_for_a_cover(seed):
    network = random_network(seed, nodes=25, edges=60, weighted=seed % 2 == 1)
    random = np.random.default_rng(seed)
    modules = Modules.from_members(25, [random.choice(25, 7, replace=False) for _ in range(4)])
    assert modules.is_cover
    assert modules.left_out > 0
    assert extended_modularity(network, modules) == pytest.approx(shen(network, modules), abs=1e-12)


def test_a_gene_in_no_module_counts_as_one_alone():
    network = lettered(TRIANGLES)
    assert extended_modularity(network, lettered_modules(network, "abc")) == pytest.approx(
        modularity(network, np.array([0, 0, 0, 1, 2, 3]))
    )
    assert extended_modularity(network, Modules.from_members(6, [])) == pytest.approx(modularity(network, np.arange(6)))


# Figures of a module


def test_figures_by_hand():
    network = lettered("ab bc cd ad ae ef fg eg", nodes="z")  # a square, a triangle hung on it, a lone node
    figures = score_modules(network, lettered_modules(network, "abcd", "efg", "z"))
    assert figures.size.tolist() == [4, 3, 1]
    assert figures.internal_edges.tolist() == [4, 3, 0]
    assert figures.cut_edges.tolist() == [1, 1, 0]
    assert figures.internal_weight.tolist() == [4, 3, 0]
    assert figures.strength.tolist() == [9, 7, 0]
    assert figures.internal_density == pytest.approx([4 / 6, 1, 0])
    assert figures.conductance == pytest.approx([1 / 7, 1 / 7, 0])  # the smaller side: 16 − 9
    assert figures.below_resolution_limit.tolist() == [False, True, True]  # √16 = 4 edges


def test_figures_of_a_cover_by_hand():
    network = lettered("ab ac bc cd ce de", [1.0, 2.0, 3.0, 4.0, 5.0, 6.0])
    figures = score_modules(network, lettered_modules(network, "abc", "cde"))
    assert figures.internal_edges.tolist() == [3, 3]
    assert figures.internal_weight == pytest.approx([6, 15])
    assert figures.cut_edges.tolist() == [2, 2]
    assert figures.strength == pytest.approx([3 + 4 + 14, 14 + 10 + 11])
    assert figures.conductance == pytest.approx([9 / 21, 5 / 7])  # cut 21 − 12, 35 − 30; 2W = 42
    assert figures.internal_density == pytest.approx([1, 1])


@pytest.mark.parametrize("seed", range(6))
def test_conductance_and_edges_are_those_of_networkx(seed):
    network = random_network(seed, weighted=seed % 2 == 1)
    graph = to_networkx(network)
    if seed < 3:
        modules = Modules.from_labels(random_labels(seed, network.node_count, 5))
    else:
        random = np.random.default_rng(seed)
        modules = Modules.from_members(40, [random.choice(40, size, replace=False) for size in (4, 9, 15)])
    figures = score_modules(network, modules)
    for number, group in enumerate(groups_of(modules)):
        inside = graph.subgraph(group)
        assert figures.internal_edges[number] == inside.number_of_edges()
        assert figures.internal_weight[number] == pytest.approx(inside.size(weight="weight"))
        assert figures.cut_edges[number] == nx.cut_size(graph, group)
        assert figures.strength[number] == pytest.approx(nx.volume(graph, group, weight="weight"))
        assert figures.internal_density[number] == pytest.approx(nx.density(inside))
        assert figures.conductance[number] == pytest.approx(nx.conductance(graph, group, weight="weight"))


def test_a_whole_component_cuts_nothing():
    network = lettered("ab bc ac xy", [0.1, 0.2, 0.3, 0.7])
    figures = score_modules(network, lettered_modules(network, "abc", "xy"))
    assert figures.cut_edges.tolist() == [0, 0]
    assert figures.conductance.tolist() == [0, 0]
    whole = score_modules(lettered(TRIANGLES), Modules.from_labels(np.zeros(6, int)))
    assert whole.conductance.tolist() == [0]


def test_the_table_holds_the_figures():
    network = lettered(TRIANGLES)
    modules = lettered_modules(network, "abc", "def")
    table = module_table(network, modules)
    figures = score_modules(network, modules)
    assert table["module"].tolist() == ["M1", "M2"]
    for column in table.columns.drop("module"):
        assert table[column].tolist() == getattr(figures, column).tolist()


# The resolution limit: Fortunato & Barthélemy 2007, PNAS 104:36


def test_the_ring_of_cliques_has_the_published_modularity_and_is_flagged():
    ring = ring_of_cliques(30, 5)
    single = np.array([int(name[1:3]) for name in ring.names])
    # n cliques of m nodes apart: 1 − 2/(m(m−1)+2) − 1/n; in pairs: 1 − 1/(m(m−1)+2) − 2/n
    assert modularity(ring, single) == pytest.approx(1 - 2 / 22 - 1 / 30)
    assert modularity(ring, single // 2) == pytest.approx(1 - 1 / 22 - 2 / 30)
    assert modularity(ring, single // 2) > modularity(ring, single)
    # l < √(2L): 10 edges in a clique, 21 in a pair, √660 = 25.7
    for labels in (single, single // 2):
        assert score_modules(ring, Modules.from_labels(labels)).below_resolution_limit.all()
    assert not score_modules(ring, Modules.from_labels(single // 3)).below_resolution_limit.any()  # 32 edges


# Evidence per member


def test_evidence_of_a_triangle_by_hand():
    network = lettered(TRIANGLES)
    # W = 7, K = 7, N = 3: q = 1, p = 49/28/3 = 7/12, so T = 3/3 · ln(12/7)
    evidence = score_modules(network, lettered_modules(network, "abc", "def")).evidence
    assert evidence == pytest.approx([math.log(12 / 7)] * 2, rel=1e-9)
    assert evidence[0] == pytest.approx(0.538997, abs=1e-6)


def test_evidence_of_a_square_by_hand():
    network = lettered("ab bc cd ad ae ef fg eg")
    # W = 8, K = 9, N = 6: q = 4/6, p = 81/32/6 = 27/64, 1 − p = 37/64
    # T = 6/4 [2/3 ln(128/81) + 1/3 ln(64/111)] = 1.5 [0.305054 − 0.183549]
    evidence = score_modules(network, lettered_modules(network, "abcd")).evidence
    assert evidence == pytest.approx([1.5 * (2 / 3 * math.log(128 / 81) + 1 / 3 * math.log(64 / 111))])
    assert evidence[0] == pytest.approx(0.182257, abs=2e-6)


def test_evidence_with_weights_by_hand():
    network = lettered("ab ac bc cd de df ef", [2.0, 2.0, 2.0, 1.0, 1.0, 1.0, 1.0])
    # Σw = 10, Σw² = 16, c = 5/8. def: W_in = 3, K = 7, N = 3: q = 5/8, p = 5/8 · 49/40 / 3 = 49/192
    # T = 3/3 [5/8 ln(5/8 · 192/49) + 3/8 ln(3/8 · 192/143)]
    evidence = score_modules(network, lettered_modules(network, "abc", "def")).evidence
    assert evidence[1] == pytest.approx(5 / 8 * math.log(120 / 49) + 3 / 8 * math.log(72 / 143))
    # abc: W_in = 6, c W_in = 3.75 of 3 pairs: held at 1; p = 5/8 · 169/40 / 3 = 845/960
    assert evidence[0] == pytest.approx(math.log(960 / 845), rel=1e-9)


@pytest.mark.parametrize(
    ("edges", "group"),
    [
        ("ab bc ac de ef df cd", "ae"),  # no edge inside
        ("ab ac ad ae af", "ab"),  # a star's centre with one leaf: 1 edge, 36/20 expected
        ("ab bc cd ad ae ef fg eg", "abcdefg"),  # the whole network: exactly what is expected
        ("ab bc ac", "a"),  # one gene has no pair
        ("ab bc ac", ""),
    ],
)
def test_no_evidence_where_a_module_is_no_denser_than_expected(edges, group):
    network = lettered(edges, nodes="z")
    modules = lettered_modules(network, group) if group else lettered_modules(network, "z")
    assert score_modules(network, modules).evidence.tolist() == [0]


def test_the_unit_of_the_weights_changes_no_evidence():
    network = random_network(3, weighted=True)
    modules = Modules.from_labels(random_labels(3, 40, 8))
    scaled = Network(network.names, network.sources, network.targets, network.weights * 1000)
    alike = Network(network.names, network.sources, network.targets, np.full(network.edge_count, 7.0))
    assert score_modules(scaled, modules).evidence == pytest.approx(score_modules(network, modules).evidence)
    plain = score_modules(network.without_weights(), modules).evidence
    assert score_modules(alike, modules).evidence == pytest.approx(plain)


def test_planted_modules_have_more_evidence_than_chance_groups_of_their_sizes():
    planted = planted_network([8] * 10 + [30] * 4, seed=11)
    shuffled = Modules.from_labels(np.random.default_rng(1).permutation(planted.labels))
    real = score_modules(planted.network, planted.modules)
    chance = score_modules(planted.network, shuffled)
    assert real.size.tolist() == chance.size.tolist()
    assert real.evidence.min() > 10 * chance.evidence.max()
    assert np.all(chance.evidence >= 0)


def test_evidence_needs_no_clustering_around_it():
    network = lettered(TRIANGLES)
    evidence = evidence_per_member(network, np.array([3, 6]), np.array([3.0, 7.0]), np.array([7.0, 14.0]))
    assert evidence == pytest.approx([math.log(12 / 7), 0], rel=1e-9)
