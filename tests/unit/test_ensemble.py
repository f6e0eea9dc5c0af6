"""Ensembles: what comes back, second homes, consensus."""

from __future__ import annotations

from dataclasses import replace

import networkx as nx
import numpy as np
import pytest

from analysis.agreement import adjusted_mutual_information, normalised_mutual_information
from analysis.methods import CliquePercolation, Leiden, Louvain
from analysis.modules import Modules
from analysis.network import Network
from analysis.trust.ensemble import (
    FindLabels,
    FindOnNoisyCopy,
    Recurrence,
    consensus,
    noise_tasks,
    score_recurrence,
    seed_tasks,
    standing,
)
from tests.graphs import lettered, named_groups, random_labels, random_network
from tests.planted import benchmark_network, from_networkx, planted_network


def groups(*members: list[int], nodes: int) -> Modules:
    return Modules.from_members(nodes, [np.array(group) for group in members])


def pairs(reference: Modules, recurrence: Recurrence) -> dict[tuple[int, int], tuple[float, int, float]]:
    """Return (confidence, second home, its share) of each (node, module) pair."""
    nodes, owners = reference.memberships
    figures = zip(recurrence.confidence, recurrence.second, recurrence.second_confidence, strict=True)
    return {
        (int(node), int(owner)): (float(own), int(second), float(share))
        for node, owner, (own, second, share) in zip(nodes, owners, figures, strict=True)
    }


REFERENCE = groups([0, 1, 2], [3, 4, 5], nodes=6)


# By hand


def test_runs_like_the_reference_are_certain():
    recurrence = score_recurrence(REFERENCE, [REFERENCE] * 4)
    assert recurrence.runs == 4
    assert recurrence.confidence.tolist() == [1] * 6
    assert recurrence.stability.tolist() == [1, 1]
    assert recurrence.second.tolist() == [-1] * 6
    assert recurrence.second_confidence.tolist() == [0] * 6


def test_a_gene_that_moves_in_one_of_three_runs():
    moved = groups([0, 1], [2, 3, 4, 5], nodes=6)
    recurrence = score_recurrence(REFERENCE, [REFERENCE, moved, REFERENCE])
    found = pairs(REFERENCE, recurrence)
    assert found[2, 0] == (pytest.approx(2 / 3), 1, pytest.approx(1 / 3))
    assert all(found[node, node // 3] == (1, -1, 0) for node in (0, 1, 3, 4, 5))
    assert recurrence.jaccard == pytest.approx(np.array([[1, 1], [2 / 3, 3 / 4], [1, 1]]))
    assert recurrence.stability == pytest.approx([8 / 9, 11 / 12])


def test_the_second_home_is_the_commonest_of_several():
    reference = groups([0, 1, 2], [3, 4, 5], [6, 7, 8], nodes=9)
    to_second = groups([0, 1], [2, 3, 4, 5], [6, 7, 8], nodes=9)
    to_third = groups([0, 1], [3, 4, 5], [2, 6, 7, 8], nodes=9)
    recurrence = score_recurrence(reference, [to_third, to_second, to_third, reference, reference])
    assert pairs(reference, recurrence)[2, 0] == (pytest.approx(2 / 5), 2, pytest.approx(2 / 5))
    even = score_recurrence(reference, [to_third, to_second])
    assert pairs(reference, even)[2, 0] == (0, 1, 0.5)  # as often in both: the one that is numbered first


def test_modules_that_merge_keep_their_genes_but_not_their_outline():
    merged = groups([0, 1, 2, 3, 4, 5], nodes=6)
    recurrence = score_recurrence(REFERENCE, [merged, merged])
    assert recurrence.confidence.tolist() == [1] * 6
    assert recurrence.second.tolist() == [-1] * 6
    assert recurrence.stability.tolist() == [0.5, 0.5]  # 3 of 6: by Hennig 2007 no better than dissolved


def test_modules_that_split_keep_the_larger_part():
    split = groups([0, 1], [2], [3, 4, 5], nodes=6)
    found = pairs(REFERENCE, score_recurrence(REFERENCE, [split]))
    assert found[0, 0] == (1, -1, 0)
    assert found[2, 0] == (0, -1, 0)  # alone: that is away, but no second home


def test_genes_in_no_module_of_a_run_are_away():
    fewer = groups([0, 1], [3, 4, 5], nodes=6)
    found = pairs(REFERENCE, score_recurrence(REFERENCE, [fewer, REFERENCE]))
    assert found[2, 0] == (0.5, -1, 0)


def test_a_module_that_vanishes():
    gone = groups([3, 4, 5], nodes=6)
    recurrence = score_recurrence(REFERENCE, [gone])
    assert recurrence.confidence.tolist() == [0, 0, 0, 1, 1, 1]
    assert recurrence.stability.tolist() == [0, 1]


def test_covers_are_scored_pair_by_pair():
    cover = groups([0, 1, 2, 3], [3, 4, 5, 6], nodes=7)
    assert score_recurrence(cover, [cover, cover]).confidence.tolist() == [1] * 8
    apart = groups([0, 1, 2, 3], [4, 5, 6], nodes=7)  # 3 lost its second module
    found = pairs(cover, score_recurrence(cover, [cover, apart]))
    assert found[3, 0] == (1, -1, 0)
    assert found[3, 1] == (0.5, 0, 0.5)
    assert score_recurrence(cover, [cover, apart]).stability == pytest.approx([1, 7 / 8])
    assert pairs(apart, score_recurrence(apart, [cover]))[3, 0] == (1, -1, 0)


def test_nothing_to_compare():
    empty = Modules.from_members(3, [])
    recurrence = score_recurrence(empty, [groups([0, 1], nodes=3)])
    assert recurrence.confidence.tolist() == []
    assert recurrence.stability.tolist() == []
    none = score_recurrence(REFERENCE, [])
    assert none.runs == 0
    assert none.confidence.tolist() == [0] * 6
    assert none.second.tolist() == [-1] * 6


def test_results_cannot_be_written():
    recurrence = score_recurrence(REFERENCE, [REFERENCE])
    with pytest.raises(ValueError, match="read-only"):
        recurrence.confidence[0] = 0


@pytest.mark.parametrize("seed", range(4))
def test_random_runs_counted_out(seed):
    nodes = 40
    reference = Modules.from_labels(random_labels(seed, nodes, 5))
    runs = [Modules.from_labels(random_labels(seed + 10 * i, nodes, 4) - (i % 2)) for i in range(1, 7)]
    recurrence = score_recurrence(reference, runs)
    sets = [[set(group.tolist()) for group in modules.members] for modules in (reference, *runs)]
    stays, jaccard = np.zeros(nodes), np.zeros((len(runs), len(reference)))
    for run, others in enumerate(sets[1:]):
        for number, group in enumerate(sets[0]):
            overlaps = [len(group & other) / len(group | other) for other in others]
            jaccard[run, number] = max(overlaps)
            stays[list(group & others[int(np.argmax(overlaps))])] += 1
    assert recurrence.jaccard == pytest.approx(jaccard)
    assert recurrence.confidence == pytest.approx(stays / len(runs))
    assert np.all(recurrence.confidence + recurrence.second_confidence <= 1 + 1e-12)


def test_standing_in_words():
    words = standing(np.array([1.0, 0.9, 0.89, 0.5, 0.49, 1.0]), np.array([1, 1, 1, 1, 1, 2]))
    assert words == ["core", "core", "rim", "rim", "shared", "shared"]


# Tasks


def test_the_first_tasks_do_not_depend_on_how_many_there_are():
    method = Leiden()
    assert seed_tasks(method, 5, 3) == seed_tasks(method, 50, 3)[:5]
    assert noise_tasks(method, 0.1, 5, 3) == noise_tasks(method, 0.1, 20, 3)[:5]
    assert not {task.seed for task in seed_tasks(method, 50, 3)} & {
        task.seed for task in noise_tasks(method, 0.1, 50, 3)
    }


def test_a_task_is_one_run(les_miserables):
    labels = FindLabels(Leiden(), 8).run(les_miserables)
    assert np.array_equal(labels, Leiden().labels(les_miserables, seed=8))
    noisy = FindOnNoisyCopy(CliquePercolation(k=3), 0.0, 8).run(les_miserables)
    assert noisy.sizes.tolist() == [46, 8, 4, 3]  # nothing left out; computed with networkx
    first, second = (FindOnNoisyCopy(Leiden(), 0.3, 8).run(les_miserables) for _ in range(2))
    assert np.array_equal(first.labels, second.labels)
    assert first.node_count == les_miserables.node_count


# Consensus


METHODS = [
    Leiden(),
    Leiden(resolution=0.2),
    Leiden(resolution=0.5),
    Leiden(resolution=2.0),
    Leiden(quality="cpm", resolution=0.02),
    Leiden(quality="cpm", resolution=0.05),
    Louvain(resolution=0.5),
]


@pytest.mark.parametrize("method", METHODS, ids=repr)
def test_the_consensus_of_runs_that_agree_is_what_they_agree_on(karate, les_miserables, method):
    for network in (karate, les_miserables, from_networkx(nx.karate_club_graph(), weight="weight")):
        # Louvain's optimum is found by Leiden, so that there is nothing left to improve
        finder = Leiden(resolution=method.resolution) if isinstance(method, Louvain) else method
        best = max((finder.labels(network, seed=seed) for seed in range(50)), key=lambda x: method.score(network, x))
        found = consensus(network, [best] * 5, method, seed=1)
        assert found.quality >= method.score(network, best) - 1e-9
        assert adjusted_mutual_information(found.full_labels, best) == pytest.approx(1)


def test_the_consensus_names_its_method_and_its_runs(karate):
    runs = [Louvain().labels(karate, seed=seed) for seed in range(7)]
    found = consensus(karate, runs, Louvain(), seed=5)
    assert (found.method, found.settings, found.seed) == ("louvain", {"consensus_of": 7}, 5)
    assert found.quality == pytest.approx(Louvain().score(karate, found.labels))
    assert np.array_equal(consensus(karate, runs, Louvain(), seed=5).labels, found.labels)


@pytest.mark.parametrize("method", [Leiden(), Leiden(quality="cpm", resolution=0.2), Louvain()], ids=repr)
def test_planted_modules_are_agreed_on(method):
    planted = planted_network([30, 25, 20, 15, 10], seed=6)
    runs = [method.labels(planted.network, seed=seed) for seed in range(15)]
    found = consensus(planted.network, runs, method, seed=1)
    assert np.array_equal(found.labels, planted.modules.labels)


def test_one_run_of_five_is_outvoted():
    planted = planted_network([20, 20, 20], seed=6)
    merged = np.where(planted.labels == 2, 1, planted.labels)
    found = consensus(planted.network, [planted.labels] * 4 + [merged], Leiden(), seed=1)
    assert np.array_equal(found.labels, planted.modules.labels)


def test_edges_that_no_run_joins_do_not_join():
    network = lettered("ab bc ac cd de ef df")
    apart = np.array([0, 0, 0, 1, 1, 1])
    found = consensus(network, [apart] * 3, Leiden(resolution=1e-3), seed=1)
    assert named_groups(network, found) == {frozenset("abc"), frozenset("def")}


@pytest.mark.parametrize("asked", [0.1, 0.2, 0.3, 0.4])
def test_on_the_lfr_benchmark_it_is_at_least_as_good_as_the_best_run(asked):
    # Lancichinetti & Fortunato 2012: the consensus is at least as accurate as the runs; mixing 0.16 to 0.6
    planted = benchmark_network(asked)
    method = replace(Leiden(), iterations=2)
    runs = [method.labels(planted.network, seed=seed) for seed in range(30)]
    best = max(runs, key=lambda labels: method.score(planted.network, labels))
    found = consensus(planted.network, runs, method, seed=1)
    one = normalised_mutual_information(planted.labels, best)
    assert normalised_mutual_information(planted.labels, found.full_labels) >= one - 1e-9


@pytest.mark.parametrize("nodes", [0, 3])
def test_without_edges_every_gene_is_alone(nodes):
    network: Network = random_network(1, nodes=nodes, edges=0) if nodes else lettered("")
    found = consensus(network, [np.arange(nodes)] * 3, Leiden(), seed=1)
    assert found.sizes.tolist() == [1] * nodes
