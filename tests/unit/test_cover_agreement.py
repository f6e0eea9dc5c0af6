"""Agreement of covers, second homes and clique intensity."""

from __future__ import annotations

import itertools
import math

import numpy as np
import pytest

from analysis.agreement import adjusted_rand_index
from analysis.modules import Modules
from analysis.network import Network
from analysis.overlap.agreement import omega_index, overlapping_information
from analysis.overlap.choice import chance_sentence, suggest_k
from analysis.overlap.intensity import intense_communities
from analysis.overlap.percolation import communities, percolate
from analysis.overlap.second_homes import cover_from, second_homes_by_edges, second_homes_by_runs
from tests.graphs import lettered, random_labels, random_network


def cover(nodes: int, *groups: list[int]) -> Modules:
    return Modules.from_members(nodes, [np.array(group) for group in groups])


def random_cover(seed: int, nodes: int = 20, groups: int = 5) -> Modules:
    random = np.random.default_rng(seed)
    return cover(nodes, *[random.choice(nodes, random.integers(2, 9), replace=False).tolist() for _ in range(groups)])


def h(share: float) -> float:
    return -share * math.log(share) if share > 0 else 0.0


def information_by_hand(first: Modules, second: Modules) -> float:
    """Lancichinetti, Fortunato & Kertész 2009, appendix B, read off with sets."""
    nodes = first.node_count

    def lack(these: Modules, those: Modules) -> float:
        shares = []
        for one in ({*group.tolist()} for group in these.members):
            own = h(len(one) / nodes) + h(1 - len(one) / nodes)
            left = own
            for other in ({*group.tolist()} for group in those.members):
                both, mine, theirs = len(one & other), len(one - other), len(other - one)
                neither = nodes - both - mine - theirs
                if h(both / nodes) + h(neither / nodes) >= h(mine / nodes) + h(theirs / nodes):
                    joint = sum(h(count / nodes) for count in (both, mine, theirs, neither))
                    left = min(left, joint - h(len(other) / nodes) - h(1 - len(other) / nodes))
            shares.append(left / own)
        return sum(shares) / len(shares)

    return 1 - (lack(first, second) + lack(second, first)) / 2


def omega_by_hand(first: Modules, second: Modules) -> float:
    """Collins & Dent 1988, pair by pair."""
    pairs = list(itertools.combinations(range(first.node_count), 2))

    def together(modules: Modules) -> list[int]:
        return [sum({a, b} <= set(group.tolist()) for group in modules.members) for a, b in pairs]

    left, right = together(first), together(second)
    agreed = sum(a == b for a, b in zip(left, right, strict=True)) / len(pairs)
    chance = sum(left.count(j) * right.count(j) for j in range(10)) / len(pairs) ** 2
    return (agreed - chance) / (1 - chance)


@pytest.mark.parametrize("seed", range(12))
def test_two_ways_to_the_same_value(seed: int):
    first, second = random_cover(seed), random_cover(seed + 100)
    assert overlapping_information(first, second) == pytest.approx(information_by_hand(first, second))
    assert omega_index(first, second) == pytest.approx(omega_by_hand(first, second))
    assert overlapping_information(second, first) == pytest.approx(overlapping_information(first, second))
    assert omega_index(second, first) == pytest.approx(omega_index(first, second))


@pytest.mark.parametrize("seed", range(4))
def test_equal_covers_agree_fully(seed: int):
    found = random_cover(seed)
    assert overlapping_information(found, found) == pytest.approx(1.0)
    assert omega_index(found, found) == pytest.approx(1.0)


def test_the_order_of_modules_and_nodes_does_not_matter():
    first, second = random_cover(1), random_cover(2)
    turn = np.random.default_rng(3).permutation(20)
    turned = [Modules.from_members(20, [turn[group] for group in each.members[::-1]]) for each in (first, second)]
    assert overlapping_information(*turned) == pytest.approx(overlapping_information(first, second))
    assert omega_index(*turned) == pytest.approx(omega_index(first, second))


@pytest.mark.parametrize("seed", range(4))
def test_omega_of_partitions_is_the_adjusted_rand_index(seed: int):
    # Collins & Dent 1988: for partitions the index reduces to that of Hubert & Arabie 1985
    first, second = random_labels(seed, 40, 4), random_labels(seed + 9, 40, 6)
    found = omega_index(Modules.from_labels(first), Modules.from_labels(second))
    assert found == pytest.approx(adjusted_rand_index(first, second))


def test_omega_worked_by_hand():
    # six pairs; {012},{123}: pair 12 twice, 01 02 13 23 once, 03 never; {012},{3}: 01 02 12 once, the rest never
    # agreed: 01, 02, 03 = 1/2; chance: (1·3 + 4·3 + 1·0) / 36 = 15/36; omega = (18 − 15) / (36 − 15) = 1/7
    assert omega_index(cover(4, [0, 1, 2], [1, 2, 3]), cover(4, [0, 1, 2], [3])) == pytest.approx(1 / 7)


def test_information_worked_by_hand():
    # {01},{23} against {02},{13}: every table is 1 1 1 1, so h(P11) + h(P00) = h(P01) + h(P10) and nothing is learnt
    assert overlapping_information(cover(4, [0, 1], [2, 3]), cover(4, [0, 2], [1, 3])) == pytest.approx(0.0)


def test_covers_without_modules():
    nothing, something = cover(4), cover(4, [0, 1])
    assert overlapping_information(nothing, nothing) == 1.0
    assert overlapping_information(nothing, something) == 0.0
    assert omega_index(nothing, nothing) == 1.0
    assert overlapping_information(cover(4, [0, 1, 2, 3]), cover(4, [0, 1, 2, 3])) == 1.0


def test_second_homes_by_edges():
    network = lettered("ab ac bc de df ef cd ce")
    modules = Modules.from_labels(np.array([0, 0, 0, 1, 1, 1]))
    homes = second_homes_by_edges(network, modules)
    # c has two of its four edges to d and e; d and e have one edge each to the first module: too few
    assert [(network.names[node], module, share) for node, module, share in zip(
        homes.nodes, homes.modules, homes.share, strict=True)] == [("c", 1, 0.5)]  # fmt: skip
    shared = cover_from(modules, homes, 0.5)
    assert shared.homes.tolist() == [1, 1, 2, 1, 1, 1]
    assert shared.settings["second_home"] == 0.5
    assert not cover_from(modules, homes, 0.51).is_cover


def test_second_homes_by_runs():
    modules = Modules.from_labels(np.array([0, 0, 1, 1]))
    homes = second_homes_by_runs(modules, np.array([-1, 1, -1, 0]), np.array([0.0, 0.4, 0.0, 0.1]))
    assert homes.above(0.3).nodes.tolist() == [1]
    assert cover_from(modules, homes, 0.3).homes.tolist() == [1, 2, 1, 1]


def test_planted_overlap_is_found_better_than_by_any_partition():
    # two groups of six, all joined, that share two nodes: no partition can hold both whole
    truth = cover(10, [0, 1, 2, 3, 4, 5], [4, 5, 6, 7, 8, 9])
    pairs = {pair for group in truth.members for pair in itertools.combinations(group.tolist(), 2)}
    network = Network.from_indices(tuple("abcdefghij"), np.array(sorted(pairs)))
    found = Modules.from_members(10, communities(network, 4))
    assert omega_index(found, truth) == pytest.approx(1.0)
    for labels in itertools.product([0, 1], repeat=10):
        split = Modules.from_labels(np.array(labels))
        assert omega_index(split, truth) < 1
        assert overlapping_information(split, truth) < 1


@pytest.mark.parametrize("k", [3, 4])
def test_clique_intensity_at_zero_is_plain_percolation(k: int):
    network = random_network(5, nodes=25, edges=120, weighted=True)
    plain = [group.tolist() for group in communities(network, k)]
    assert [group.tolist() for group in intense_communities(network, k, 0.0)] == plain


def test_clique_intensity_is_the_geometric_mean():
    # weights 1, 2, 4: the geometric mean is 2
    network = lettered("ab ac bc", [1.0, 2.0, 4.0])
    assert len(intense_communities(network, 3, 1.999)) == 1
    assert intense_communities(network, 3, 2.001) == []


def test_the_hint_for_k():
    # les misérables, computed with networkx: k = 3: 46, 8; k = 4: 33, 8; k = 5: 14, 13
    import networkx as nx

    graph = nx.convert_node_labels_to_integers(nx.les_miserables_graph())
    pairs = np.array([sorted(pair) for pair in graph.edges()])
    network = Network.from_indices(tuple(f"g{node:02d}" for node in range(77)), pairs)
    hint = suggest_k(percolate(network))
    assert hint.k == 5
    assert "14 and 13 genes" in hint.reason
    assert suggest_k(percolate(lettered("ab ac bc"))).k is None
    assert "would have no giant community" in chance_sentence(network, 8) or "by chance alone" in chance_sentence(
        network, 8
    )
