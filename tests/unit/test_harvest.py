"""The harvest and support: both sizes found, planted modules above chance ones, the rule by hand."""

from __future__ import annotations

import networkx as nx
import numpy as np
import pytest
from scipy.stats import binom
from sklearn.metrics import roc_auc_score

from analysis.agreement import best_match_jaccard
from analysis.compute import InProcess, run_all
from analysis.compute_local import LocalProcesses
from analysis.errors import Cancelled, SettingError
from analysis.methods import Leiden
from analysis.modules import Modules, evidence_per_member, score_modules
from analysis.network import Network
from analysis.trust.gathering import add_genes, chance_shares, order_score, take
from analysis.trust.harvest import FULL, QUICK, Harvest, HarvestSettings, harvest_tasks, run_harvest
from analysis.trust.matching import best_matches
from analysis.trust.module_pool import pool_modules
from analysis.trust.support import CopySettings, copy_tasks, run_tasks, score_support
from analysis.trust.sweep import SweepSettings, run_sweep
from tests.planted import Planted, benchmark_network, from_networkx, planted_network, ring_of_cliques

FOUND = 0.5


def groups(*members: list[int]) -> list[np.ndarray]:
    return [np.array(group, np.int32) for group in members]


# Evidence per member, by hand


def test_evidence_of_two_triangles_joined_by_an_edge():
    network = from_networkx(nx.Graph([(0, 1), (0, 2), (1, 2), (3, 4), (3, 5), (4, 5), (2, 3)]))
    modules = Modules.from_labels(np.array([0, 0, 0, 1, 1, 1]))
    # Each triangle: s = 3, N = 3 pairs, 3 edges inside, so q = 1; K = 7, W = 7: expected K²/4W = 7/4, p = 7/12.
    # T = (3/3) · ln(12/7).
    np.testing.assert_allclose(score_modules(network, modules).evidence, np.log(12 / 7), rtol=1e-9)


def test_evidence_of_a_path_of_four_cut_in_the_middle_and_of_one_with_weights():
    path = from_networkx(nx.path_graph(4))
    modules = Modules.from_labels(np.array([0, 0, 1, 1]))
    # Each half: s = 2, N = 1, one edge, q = 1; K = 3, W = 3: p = 9/12. T = (1/2) ln(4/3).
    np.testing.assert_allclose(score_modules(path, modules).evidence, np.log(4 / 3) / 2, rtol=1e-9)
    weighted = Network.from_edges([("a", "b"), ("b", "c"), ("c", "d")], [2.0, 1.0, 2.0])
    # c = Σw/Σw² = 5/9; q = 10/9, held below 1; K = 5, W = 5: p = (5/9)(25/20) = 25/36. T = (1/2) ln(36/25).
    np.testing.assert_allclose(score_modules(weighted, modules).evidence, np.log(36 / 25) / 2, rtol=1e-6)


def test_no_evidence_for_a_module_no_denser_than_expected():
    square = from_networkx(nx.cycle_graph(4))
    opposite = Modules.from_labels(np.array([0, 1, 0, 1]))
    assert score_modules(square, opposite).evidence.tolist() == [0, 0]
    complete = from_networkx(nx.complete_graph(6))
    whole = evidence_per_member(complete, np.array([6]), np.array([15.0]), np.array([30.0]))
    # expected inside K²/4W = 900/60 = 15, as found: nothing to wonder at
    assert whole.tolist() == [0]


# The steps of the rule


def test_modules_are_taken_down_the_order_with_a_quarter_of_overlap():
    members = groups([0, 1, 2, 3], [3, 4, 5, 6], [5, 6, 7, 8], [9, 10, 11], [0, 9, 12, 13])
    support = np.array([5.0, 4.0, 3.0, 0.0, 2.0])
    # the second shares one of four with the first; the third two of four with the second; the fourth has no support;
    # the fifth shares one of four with the first
    assert take(members, support, 14).tolist() == [0, 1, 4]


def test_of_equal_support_the_larger_goes_first():
    assert order_score(np.array([2.0]), np.array([1024]))[0] == pytest.approx(2.0 * 2.0)  # 1024^0.1 = 2
    assert take(groups([0, 1, 2], [0, 1, 2, 3, 4]), np.array([2.0, 2.0]), 5).tolist() == [1]


def test_the_share_of_chance_modules_by_hand():
    scores = np.array([5.0, 4.0, 3.0, 2.0, 1.0])
    nulls = [np.array([2.5, 1.5]), np.array([4.5, 0.5])]
    # mean null counts at 5, 4, 3, 2, 1: 0, 1/2, 1/2, 1, 3/2; over 1, 2, 3, 4, 5: 0, 1/4, 1/6, 1/4, 3/10; then the
    # least of each and of those below it
    np.testing.assert_allclose(chance_shares(scores, nulls), [0, 1 / 6, 1 / 6, 1 / 4, 3 / 10])
    assert chance_shares(np.zeros(0), nulls).tolist() == []
    assert chance_shares(scores, [np.zeros(0)]).tolist() == [0] * 5


def test_a_gene_is_added_where_its_edges_exceed_chance_and_are_dense_enough():
    planted = planted_network([12] * 15, inside=0.8, outside_degree=4.0, seed=5)
    network, whole = planted.network, planted.modules
    cut = [group[:-2] for group in whole.members]  # two genes short each
    grown = add_genes(network, cut)
    matrix = network.adjacency.toarray() > 0
    for core, group in zip(cut, grown, strict=True):
        inside = matrix[np.ix_(core, core)].sum() / 2
        density = inside / (len(core) * (len(core) - 1) / 2)
        chance = network.degree[core].sum() / (2 * network.edge_count)
        for gene in np.setdiff1d(np.arange(network.node_count), core):
            links = int(matrix[gene, core].sum())
            rare = network.node_count * binom.sf(links - 1, network.degree[gene], chance) < 0.05
            assert (gene in group) == (rare and links >= 0.4 * density * len(core))
    regained = [np.isin(group, grown_group).mean() for group, grown_group in zip(whole.members, grown, strict=True)]
    assert np.mean(regained) > 0.95


def test_the_pool_holds_each_module_once():
    network = ring_of_cliques(6, 5)
    pairs = np.array([int(name[1:3]) // 2 for name in network.names], np.int32)
    singles = np.array([int(name[1:3]) for name in network.names], np.int32)
    alone = np.arange(30, dtype=np.int32)
    table = np.array([pairs, singles, alone])
    pool = pool_modules(network, [table, table], np.array([0.01, 0.1, 0.9]))
    assert sorted(len(group) for group in pool.members) == [5] * 6 + [10] * 3  # single genes are no modules
    np.testing.assert_allclose(pool.resolution[pool.sizes == 5], 0.1)
    modules = Modules.from_members(30, pool.members)
    figures = score_modules(network, modules)
    np.testing.assert_allclose(np.sort(pool.internal_weight), np.sort(figures.internal_weight))
    np.testing.assert_allclose(np.sort(pool.strength), np.sort(figures.strength))
    np.testing.assert_allclose(np.sort(pool.evidence(network)), np.sort(figures.evidence))


def test_the_numbers_of_runs_are_those_of_the_rule():
    assert (QUICK.runs, FULL.runs) == (288, 744)
    for settings in (QUICK, FULL):
        tasks = harvest_tasks(settings)
        assert sum(len(task.resolutions) for task in tasks) == settings.runs
        own = [task for task in tasks if task.null_seed is None]
        kinds = [task.noise.kind for task in own if task.noise is not None]
        assert (kinds.count("left out"), kinds.count("rewired")) == (settings.copies * 3 // 5, settings.copies * 2 // 5)


# Whole harvests


def test_all_thirty_cliques_of_the_ring_are_harvested():
    ring = ring_of_cliques(30, 5)
    harvest = run_harvest(ring, QUICK, InProcess())
    cliques = Modules.from_labels(np.array([int(name[1:3]) for name in ring.names]))
    assert np.all(best_match_jaccard(cliques, harvest.modules) == 1)
    assert len(harvest.modules) == 30
    assert harvest.left_out == 0
    # found where the constant Potts model parts them: above a density of 1/25
    assert np.all(harvest.resolution > 1 / 25)
    assert np.all(harvest.figures.resolution_from < harvest.figures.resolution_to)


def both_sizes(seed: int) -> Planted:
    density = [0.95] * 40 + [0.1] * 4
    return planted_network([5] * 40 + [100] * 4, inside=density, regions=[(1000, 1.0)], outside_degree=6.0, seed=seed)


def recall(planted: Planted, modules: Modules) -> tuple[float, float]:
    """Share of the planted modules of 5 and of 100 genes that are found, with a Jaccard index above one half."""
    found = best_match_jaccard(planted.modules, modules) > FOUND
    small = planted.modules.sizes == 5
    return float(found[small].mean()), float(found[~small].mean())


@pytest.mark.parametrize("seed", [1, 2])
def test_modules_of_5_and_of_100_are_harvested_where_no_one_resolution_finds_both(seed):
    planted = both_sizes(seed)
    assert planted.mixing > 0.6
    harvest = run_harvest(planted.network, QUICK, InProcess())
    found = min(recall(planted, harvest.modules))
    assert found >= 0.95
    for quality in ("cpm", "modularity"):
        sweep = run_sweep(planted.network, SweepSettings(quality, runs=3, noisy_runs=0), InProcess())
        single = [min(recall(planted, Modules.from_labels(point.labels))) for point in sweep.points]
        assert max(single) < found - 0.05


CHANCE_REGIONS = [
    {
        "sizes": [5] * 30 + [10] * 20 + [30] * 5 + [80] * 2,
        "inside": 0.4,
        "regions": [(200, 10.0)],
        "outside_degree": 8.0,
    },
    {
        "sizes": [6] * 20 + [12] * 20 + [30] * 5,
        "inside": 0.5,
        "regions": [(200, 10.0), (200, 5.0)],
        "outside_degree": 10.0,
        "spread": 2.2,
    },
    {"sizes": [8] * 30 + [20] * 10, "inside": 0.35, "regions": [(300, 9.0)], "outside_degree": 6.0},
]


def areas(planted: Planted) -> dict[str, float]:
    """Area under the ROC curve of each score over a whole sweep's modules: planted ones against chance ones.

    A module found is a planted one where its Jaccard index with one is above one half, and a chance one where no
    planted module holds half of it. Pieces and unions of planted modules are neither.
    """
    network, settings = planted.network, CopySettings()
    tables = run_all(InProcess(), network, run_tasks(settings, 1))
    pool = pool_modules(network, tables, settings.resolutions)
    copies = run_all(InProcess(), network, copy_tasks(settings))
    modules = Modules.from_members(network.node_count, pool.members)
    support = score_support(network, modules, copies, settings.resolutions)
    figures = score_modules(network, modules)
    real = best_matches(modules.members, [planted.modules.full_labels]).ravel() > FOUND
    own = [planted.labels[group][planted.labels[group] >= 0] for group in modules.members]
    most = np.array([np.bincount(labels, minlength=1).max() for labels in own]) / modules.sizes
    told = real | (most < 0.5)
    scores = {
        "support": support.support,
        "stability": support.stability,
        "size": modules.sizes,
        "conductance": -figures.conductance,
    }
    return {name: float(roc_auc_score(real[told], score[told])) for name, score in scores.items()}


def test_support_tells_planted_modules_from_chance_ones_better_than_its_rivals():
    found = [areas(planted_network(**setting, seed=seed)) for setting in CHANCE_REGIONS for seed in (1, 2)]
    assert min(each["support"] for each in found) > 0.9
    mean = {name: np.mean([each[name] for each in found]) for name in found[0]}
    for rival in ("stability", "size", "conductance"):
        assert mean["support"] > mean[rival]
        assert np.mean([each["support"] >= each[rival] for each in found]) > 0.5


@pytest.mark.parametrize("seed", range(4))
def test_little_is_harvested_from_networks_without_modules(seed):
    random = from_networkx(nx.gnm_random_graph(300, 1200, seed=seed))
    harvest = run_harvest(random, QUICK, InProcess())
    assert len(harvest.modules) <= 1
    assert harvest.held > 20
    assert harvest.left_out >= 290
    hubs = from_networkx(nx.barabasi_albert_graph(300, 3, seed=seed))
    assert len(run_harvest(hubs, QUICK, InProcess()).modules) <= 1


def agreement(found: Modules, true: Modules) -> float:
    """F measure of the modules of three genes or more that match with a Jaccard index of one half."""
    large = Modules.from_members(found.node_count, [group for group in found.members if len(group) >= 3])
    precision = np.mean(best_match_jaccard(large, true) >= FOUND)
    recalled = np.mean(best_match_jaccard(true, large) >= FOUND)
    return float(2 * precision * recalled / (precision + recalled))


@pytest.mark.parametrize(("asked", "realised"), [(0.1, 0.16), (0.2, 0.32), (0.3, 0.47), (0.4, 0.60)])
def test_the_harvest_matches_more_modules_than_one_run_at_resolution_one(asked, realised):
    planted = benchmark_network(asked)
    assert planted.mixing == pytest.approx(realised, abs=0.02)
    harvest = run_harvest(planted.network, QUICK, InProcess())
    single = [agreement(Leiden().find(planted.network, seed=seed), planted.modules) for seed in range(5)]
    assert agreement(harvest.modules, planted.modules) > max(single)


def test_about_one_in_six_is_wrong_at_most():
    wrong, total = 0, 0
    for setting in CHANCE_REGIONS[:2]:
        planted = planted_network(**setting, seed=3)
        harvest = run_harvest(planted.network, QUICK, InProcess())
        match = best_match_jaccard(harvest.modules, planted.modules)
        wrong, total = wrong + int((match < FOUND).sum()), total + len(match)
    # 1/6 of them, and three standard deviations of a binomial
    assert wrong <= total / 6 + 3 * np.sqrt(total * 5 / 36)


@pytest.fixture(scope="module")
def planted() -> Planted:
    return planted_network([8] * 25 + [30] * 5, regions=[(150, 8.0)], seed=7)


@pytest.fixture(scope="module")
def harvest(planted) -> Harvest:
    return run_harvest(planted.network, QUICK, InProcess())


def test_figures_stand_in_the_order_of_the_modules(planted, harvest):
    modules = harvest.modules
    assert list(modules.sizes) == sorted(modules.sizes, reverse=True)
    assert modules.method == "harvest"
    for core, group in zip(harvest.cores, modules.members, strict=True):
        assert set(core.tolist()) <= set(group.tolist())
    cores = Modules.from_members(planted.network.node_count, harvest.cores)
    tables = run_all(InProcess(), planted.network, copy_tasks(CopySettings()))
    again = score_support(planted.network, cores, tables, CopySettings().resolutions)
    place = {group.tobytes(): position for position, group in enumerate(cores.members)}
    order = [place[core.tobytes()] for core in harvest.cores]
    np.testing.assert_allclose(again.support[order], harvest.figures.support)
    np.testing.assert_allclose(harvest.figures.support, harvest.figures.stability * harvest.figures.evidence)
    assert sorted(harvest.rank) == list(range(1, len(modules) + 1))
    score = order_score(harvest.figures.support, np.array([len(core) for core in harvest.cores]))
    assert np.all(np.diff(score[np.argsort(harvest.rank)]) <= 0)
    assert np.all(np.diff(harvest.chance_share[np.argsort(harvest.rank)]) >= 0)


def test_genes_in_no_module_are_counted(planted, harvest):
    inside = set(np.concatenate(harvest.modules.members).tolist())
    assert harvest.left_out == planted.network.node_count - len(inside)
    assert harvest.left_out > 0
    assert harvest.level_sentence.startswith("About one in six")


def test_without_the_cut_all_that_hold_are_kept(planted, harvest):
    everything = run_harvest(planted.network, HarvestSettings(cut=False), InProcess())
    assert len(everything.modules) >= len(harvest.modules)
    assert everything.held == harvest.held
    assert everything.level_sentence.startswith("All ")
    best = everything.chance_share <= QUICK.level
    assert best.sum() == pytest.approx(len(harvest.modules), abs=1)
    plain = run_harvest(planted.network, HarvestSettings(cut=False, nulls=0), InProcess())
    assert np.all(np.isnan(plain.chance_share))
    assert "No null networks" in plain.level_sentence
    assert [group.tolist() for group in plain.modules.members] == [g.tolist() for g in everything.modules.members]


def test_the_table_goes_by_rank(harvest):
    table = harvest.table()
    assert table["rank"].tolist() == list(range(1, len(table) + 1))
    assert {"module", "resolution", "resolution_from", "stability", "evidence", "support"} <= set(table.columns)


def test_one_process_and_two_give_the_same_bytes(planted, harvest):
    processes = LocalProcesses(2)
    try:
        again = run_harvest(planted.network, QUICK, processes)
    finally:
        processes.close()
    assert [group.tobytes() for group in again.modules.members] == [g.tobytes() for g in harvest.modules.members]
    assert again.table().equals(harvest.table())


def test_weights_count_and_their_unit_does_not():
    network = from_networkx(nx.les_miserables_graph(), weight="weight")
    thousandfold = Network(network.names, network.sources, network.targets, network.weights * 1024)
    first, second = (run_harvest(each, QUICK, InProcess()) for each in (network, thousandfold))
    assert [g.tolist() for g in first.modules.members] == [g.tolist() for g in second.modules.members]
    np.testing.assert_allclose(first.figures.support, second.figures.support)


@pytest.mark.parametrize("edges", [[], [("a", "b")], [("a", "b"), ("b", "c"), ("a", "c")]])
def test_tiny_networks_give_an_empty_harvest_with_a_sentence(edges):
    network = Network.from_edges(edges, nodes=["a", "b", "c", "d"])
    harvest = run_harvest(network, QUICK, InProcess())
    assert len(harvest.modules) <= 1
    assert harvest.left_out == 4 - 3 * len(harvest.modules)
    assert harvest.level_sentence.endswith(".")
    assert len(harvest.table()) == len(harvest.modules)


def test_progress_rises_to_one_and_a_stop_is_heard(planted):
    fractions = []
    run_harvest(planted.network, QUICK, InProcess(), lambda fraction, _: fractions.append(fraction))
    assert fractions == sorted(fractions)
    assert fractions[-1] == pytest.approx(1)

    def stop(fraction: float, _phrase: str) -> None:
        if fraction > 0.2:
            raise Cancelled("stopped")

    with pytest.raises(Cancelled):
        run_harvest(planted.network, QUICK, InProcess(), stop)


@pytest.mark.parametrize("wrong", [{"seeds": 0}, {"nulls": -1}, {"nulls": 0}, {"level": 0.0}, {"level": 1.0}])
def test_settings_out_of_range_are_refused(wrong):
    with pytest.raises(SettingError):
        HarvestSettings(**wrong)
