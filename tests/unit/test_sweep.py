"""The sweep: warm chains, the envelope of partitions, plateaus, the suggestion."""

from __future__ import annotations

import networkx as nx
import numpy as np
import pytest

from analysis.agreement import adjusted_mutual_information
from analysis.compute import InProcess
from analysis.compute_local import LocalProcesses
from analysis.errors import Cancelled, SettingError
from analysis.methods import Leiden
from analysis.modules import Modules
from analysis.network import Network
from analysis.trust.chains import ChainTask, canonical
from analysis.trust.envelope import quality_lines, upper_envelope
from analysis.trust.matching import best_matches, by_product, unbroken_range
from analysis.trust.noise import Noise
from analysis.trust.sweep import (
    Sweep,
    SweepSettings,
    module_ranges,
    preview_points,
    resolution_grid,
    run_sweep,
    stability_over_sweep,
)
from tests.planted import benchmark_network, from_networkx, planted_network, ring_of_cliques


def same(first: Sweep, second: Sweep) -> bool:
    arrays = [[point.labels.tobytes() for point in sweep.points] for sweep in (first, second)]
    return arrays[0] == arrays[1] and first.table().equals(second.table()) and first.suggestion == second.suggestion


@pytest.fixture(scope="module")
def ring() -> Network:
    return ring_of_cliques(30, 5)


@pytest.fixture(scope="module")
def ring_sweep(ring) -> Sweep:
    return run_sweep(ring, SweepSettings(), InProcess())


def cliques_of(ring: Network) -> Modules:
    return Modules.from_labels(np.array([int(name[1:3]) for name in ring.names]))


# Ring of cliques: Fortunato & Barthélemy 2007, PNAS 104:36


def test_modularity_at_one_merges_cliques_and_the_sweep_parts_them(ring, ring_sweep):
    at_one = ring_sweep.nearest(1.0)
    assert at_one.resolution == 1.0
    assert at_one.modules < 30
    assert at_one.modularity > 0.875758  # the 30 cliques apart: 1 − 2/(m(m−1)+2) − 1/n, m = 5, n = 30
    assert at_one.modularity <= 0.887879 + 1e-6  # in pairs: 1 − 1/(m(m−1)+2) − 2/n
    best = ring_sweep.plateaus[0]
    assert best.modules == 30
    middle = ring_sweep.points[best.middle]
    assert adjusted_mutual_information(middle.labels, cliques_of(ring).labels) == pytest.approx(1)
    assert ring_sweep.suggestion.stands_out
    assert ring_sweep.suggestion.resolution == middle.resolution
    assert "30" in ring_sweep.suggestion.reason


def test_the_plateau_begins_where_algebra_says(ring_sweep):
    # Two neighbouring K5 join where 1/W > γ · 2 K²/(2W)², W = 330 edges, K = 22: γ < 2 · 330 / 22² = 1.363636
    assert ring_sweep.plateaus[0].resolution_from == pytest.approx(2 * 330 / 22**2)


def test_tight_groups_find_the_cliques_from_a_density_of_one_in_25(ring):
    # Two neighbouring K5 join in the constant Potts model where 1 > γ · 25 (Traag, Van Dooren & Nesterov 2011)
    sweep = run_sweep(ring, SweepSettings("cpm"), InProcess())
    assert sweep.plateaus[0].resolution_from == pytest.approx(1 / 25)
    assert sweep.plateaus[0].resolution_to == pytest.approx(0.9)  # the end of the grid: a K5 holds up to 1
    assert sweep.suggestion.stands_out


def test_each_clique_holds_over_the_plateau(ring, ring_sweep):
    low, high = module_ranges(cliques_of(ring), ring_sweep)
    best = ring_sweep.plateaus[0]
    first, last = ring_sweep.points[best.first].resolution, ring_sweep.points[best.last].resolution
    assert np.all(low <= first)
    assert np.all(high >= last)
    # a pair of cliques that merged has Jaccard 1/2 with each: dissolved, not held
    assert np.sum(low == first) >= 20


# Published best modularity


@pytest.mark.parametrize(
    ("graph", "weight", "best"),
    [
        (nx.karate_club_graph(), None, 0.419790),  # Brandes et al. 2008, 0.4198, from memory; proved optimal
        (nx.karate_club_graph(), "weight", 0.444904),  # computed with networkx and igraph
        (nx.les_miserables_graph(), None, 0.560008),  # 0.5600 published, from memory; computed with igraph
    ],
)
def test_the_partition_at_one_reaches_the_published_modularity(graph, weight, best):
    sweep = run_sweep(from_networkx(graph, weight=weight), SweepSettings(), InProcess())
    point = sweep.nearest(1.0)
    assert point.resolution == 1.0
    assert point.modularity == pytest.approx(best, abs=1e-6)
    assert point.quality == pytest.approx(point.modularity)


def test_what_is_suggested_is_nearer_to_the_truth_than_resolution_one():
    for mixing in (0.1, 0.2, 0.3, 0.4):
        planted = benchmark_network(mixing)
        for quality in ("modularity", "cpm"):
            sweep = run_sweep(planted.network, SweepSettings(quality, runs=3), InProcess())
            shown = sweep.points[sweep.suggestion.position].labels
            one = Leiden().labels(planted.network, seed=1)
            assert adjusted_mutual_information(shown, planted.labels) > adjusted_mutual_information(one, planted.labels)


# The envelope (CHAMP: Weir et al. 2017)


@pytest.mark.parametrize("seed", range(5))
def test_the_envelope_is_the_highest_line_everywhere(seed):
    random = np.random.default_rng(seed)
    inside, penalty = random.random(60), random.random(60)
    inside[7], penalty[7] = inside[3], penalty[3]  # equal lines
    penalty[11] = penalty[5]  # parallel lines
    winners, ends = upper_envelope(inside, penalty, 0.01, 5.0)
    assert len(ends) == len(winners) + 1
    assert (ends[0], ends[-1]) == (0.01, 5.0)
    assert np.all(np.diff(ends) > 0)
    grid = np.linspace(0.01, 5.0, 20_001)
    values = inside - grid[:, None] * penalty
    held = winners[np.clip(np.searchsorted(ends, grid, side="right") - 1, 0, len(winners) - 1)]
    np.testing.assert_allclose(values[np.arange(len(grid)), held], values.max(axis=1), atol=1e-12)
    assert set(values.argmax(axis=1)) <= set(winners)


@pytest.mark.parametrize("quality", ["modularity", "cpm"])
@pytest.mark.parametrize("weight", [None, "weight"])
def test_the_line_of_a_partition_is_its_quality(quality, weight):
    network = from_networkx(nx.les_miserables_graph(), weight=weight)
    labels = Leiden(quality, 0.3).labels(network, seed=1)
    ((inside, penalty),) = quality_lines(network, labels[None], quality)
    for resolution in (0.05, 1.0, 7.0):
        expected = Leiden(quality, resolution).score(network, labels)
        assert inside - resolution * penalty == pytest.approx(expected)


def test_no_run_is_better_than_the_point_shown():
    network = from_networkx(nx.les_miserables_graph())
    settings = SweepSettings(steps=12, runs=4)
    sweep = run_sweep(network, settings, InProcess())
    for place, point in enumerate(sweep.points):
        assert point.best_from <= point.resolution <= point.best_to
        assert point.quality == pytest.approx(Leiden("modularity", point.resolution).score(network, point.labels))
        assert point.low <= point.modules <= point.high
        cold = Leiden("modularity", point.resolution, 2).labels(network, seed=place)
        assert point.quality >= Leiden("modularity", point.resolution).score(network, cold) - 0.003
    counts = [domain.modules for domain in sweep.domains]
    assert counts == sorted(counts)  # a partition that wins further on is finer: its penalty is smaller
    ends = [(domain.resolution_from, domain.resolution_to) for domain in sweep.domains]
    assert [end for _, end in ends[:-1]] == [start for start, _ in ends[1:]]


# The grid


def test_the_grid_is_even_on_a_log_scale_and_holds_one(ring):
    grid = resolution_grid(ring, "modularity", 25)
    assert len(grid) == 25
    assert np.all(np.diff(grid) > 0)
    assert 1.0 in grid
    tight = resolution_grid(ring, "cpm", 10, low=0.01, high=0.9)
    np.testing.assert_allclose(np.diff(np.log(tight)), np.log(90) / 9)


@pytest.mark.parametrize("quality", ["modularity", "cpm"])
def test_the_automatic_ends_go_from_few_modules_to_nearly_none(quality):
    network = from_networkx(nx.les_miserables_graph())
    points = list(preview_points(network, quality, resolution_grid(network, quality)))
    assert points[0].modules <= {"modularity": 3, "cpm": 15}[quality]  # genes with one edge stay out of tight groups
    assert np.bincount(points[-1].labels).max() <= 10 + 2  # its largest clique has ten nodes (computed with networkx)
    assert points[-1].modules > 30


def test_previews_come_from_the_coarse_end_one_by_one(ring):
    grid = resolution_grid(ring, "modularity")
    previews = preview_points(ring, "modularity", grid)
    first = next(previews)
    assert first.resolution == grid[0]
    assert np.isnan(first.seed_ami)
    assert [point.resolution for point in previews] == grid[1:].tolist()


@pytest.mark.parametrize(("low", "high", "steps"), [(0, 1, 5), (2, 1, 5), (1, 1, 5), (0.1, 1, 1)])
def test_a_grid_out_of_range_is_refused(ring, low, high, steps):
    with pytest.raises(SettingError):
        resolution_grid(ring, "modularity", steps, low, high)


def test_settings_out_of_range_are_refused():
    for wrong in ({"quality": "surprise"}, {"runs": 0}, {"noisy_runs": -1}):
        with pytest.raises(SettingError):
            SweepSettings(**wrong)


# Chains


def test_a_chain_gives_one_partition_for_each_resolution(ring):
    grid = tuple(resolution_grid(ring, "cpm", 8).tolist())
    table = ChainTask("cpm", grid, seed=1).run(ring)
    assert table.shape == (8, ring.node_count)
    assert table.dtype == np.int32
    counts = [len(np.unique(labels)) for labels in table]
    assert counts == sorted(counts)
    noisy = ChainTask("cpm", grid, seed=1, noise=Noise(0.3, 1)).run(ring)
    assert not np.array_equal(noisy, table)
    null = ChainTask("cpm", grid, seed=1, null_seed=2).run(ring)
    assert len(np.unique(null[5])) != 30


def test_warm_chains_are_no_worse_than_cold_runs():
    network = planted_network([20] * 20, inside=0.4, outside_degree=8.0, seed=2).network
    grid = resolution_grid(network, "modularity", 12)
    chains = [ChainTask("modularity", tuple(grid.tolist()), seed).run(network) for seed in range(3)]
    gain = []
    for step, resolution in enumerate(grid.tolist()):
        method = Leiden("modularity", resolution, 2)
        cold = np.mean([method.score(network, method.labels(network, seed=seed)) for seed in range(3)])
        gain.append(np.mean([method.score(network, chain[step]) for chain in chains]) - cold)
    assert np.mean(gain) > -1e-4


def test_canonical_labels_go_from_the_largest_module():
    assert canonical(np.array([5, 2, 2, 7, 7, 9], np.int32)).tolist() == [2, 0, 0, 1, 1, 3]


# The whole


@pytest.mark.parametrize("quality", ["modularity", "cpm"])
def test_one_process_and_two_give_the_same_bytes(quality):
    network = planted_network([12] * 10, seed=3).network
    settings = SweepSettings(quality, steps=8, runs=3, noisy_runs=2)
    here = run_sweep(network, settings, InProcess())
    processes = LocalProcesses(2)
    try:
        assert same(here, run_sweep(network, settings, processes))
    finally:
        processes.close()


def test_points_are_told_early_and_again_with_their_figures(ring):
    told = []
    sweep = run_sweep(ring, SweepSettings(steps=6, runs=2, noisy_runs=1), InProcess(), on_point=told.append)
    assert [point.resolution for point in told[:6]] == sweep.resolutions.tolist()
    assert all(np.isnan(point.seed_ami) for point in told[:6])
    assert told[-6:] == list(sweep.points)


def test_progress_rises_to_one_and_a_stop_is_heard(ring):
    fractions = []
    run_sweep(ring, SweepSettings(steps=5, runs=2), InProcess(), lambda fraction, _: fractions.append(fraction))
    assert fractions == sorted(fractions)
    assert fractions[-1] == 1

    def stop(fraction: float, _phrase: str) -> None:
        if fraction > 0.3:
            raise Cancelled("stopped")

    with pytest.raises(Cancelled):
        run_sweep(ring, SweepSettings(steps=5, runs=2), InProcess(), stop)


def test_the_table_has_one_row_a_resolution(ring_sweep):
    table = ring_sweep.table()
    assert len(table) == 30
    assert {"resolution", "modules", "modules_of_three_or_more", "seed_ami", "noise_ami"} <= set(table.columns)
    assert table["resolution"].is_monotonic_increasing
    assert table["modules"].is_monotonic_increasing
    assert (table.loc[table["plateau"] == 1, "modules"] == 30).all()


def test_a_random_network_has_no_stretch_that_stands_out():
    for seed in (1, 2, 3):
        network = from_networkx(nx.gnm_random_graph(400, 1600, seed=seed))
        for quality in ("modularity", "cpm"):
            suggestion = run_sweep(network, SweepSettings(quality, steps=20, runs=3), InProcess()).suggestion
            assert not suggestion.stands_out
            assert suggestion.reason.startswith("No stretch of resolution stands out")


def test_without_noisy_copies_the_seeds_are_what_is_compared(ring):
    sweep = run_sweep(ring, SweepSettings(runs=3, noisy_runs=0), InProcess())
    assert np.isnan(sweep.points[0].noise_ami)
    assert "other seeds" in sweep.suggestion.reason
    assert sweep.suggestion.stands_out


@pytest.mark.parametrize("quality", ["modularity", "cpm"])
@pytest.mark.parametrize("nodes", [1, 5])
def test_a_network_without_edges_is_told_so(quality, nodes):
    network = Network.from_edges([], nodes=[f"g{i}" for i in range(nodes)])
    sweep = run_sweep(network, SweepSettings(quality, steps=4, runs=2), InProcess())
    assert [point.modules for point in sweep.points] == [nodes] * 4
    assert not sweep.suggestion.stands_out
    assert sweep.suggestion.reason.startswith("Nothing to choose by")


def test_components_are_a_plateau_of_their_own():
    cliques = from_networkx(nx.disjoint_union_all([nx.complete_graph(6)] * 5))
    sweep = run_sweep(cliques, SweepSettings("cpm", runs=2), InProcess())
    assert sweep.plateaus[0].modules == 5
    assert sweep.suggestion.stands_out


# Matching


def plain_best(group: np.ndarray, labels: np.ndarray) -> float:
    mine = set(group.tolist())
    others = [set(np.flatnonzero(labels == label).tolist()) for label in np.unique(labels)]
    return max(len(mine & other) / len(mine | other) for other in others)


def test_best_matches_are_those_of_plain_sets():
    from analysis.trust.matching_compiled import best_of_each

    random = np.random.default_rng(1)
    groups = [np.sort(random.choice(80, size, replace=False)).astype(np.int32) for size in (1, 3, 8, 30, 80)]
    labelings = [random.integers(0, count, 80).astype(np.int32) for count in (1, 4, 25, 80)]
    expected = [[plain_best(group, labels) for labels in labelings] for group in groups]
    np.testing.assert_allclose(best_matches(groups, labelings), expected)
    nodes, starts = np.concatenate(groups), np.cumsum([0, *map(len, groups)])
    for place, labels in enumerate(labelings):
        compiled = np.zeros(len(groups))
        best_of_each(nodes, starts, labels, np.bincount(labels), compiled)
        np.testing.assert_array_equal(compiled, by_product(nodes, starts)(labels))
        np.testing.assert_allclose(compiled, [row[place] for row in expected])


def test_stability_is_the_mean_of_the_best_matches():
    modules = Modules.from_labels(np.array([0, 0, 0, 1, 1, 1]))
    labelings = [np.array(labels, np.int32) for labels in ([0, 0, 0, 1, 1, 1], [0, 0, 1, 1, 1, 1])]
    # by hand: 1 and 2/3 for the first, 1 and 3/4 for the second
    np.testing.assert_allclose(stability_over_sweep(modules, labelings), [(1 + 2 / 3) / 2, (1 + 3 / 4) / 2])


def test_a_range_is_the_unbroken_stretch_around_the_best_match():
    grid = np.array([0.1, 0.2, 0.4, 0.8, 1.6])
    match = np.array(
        [
            [0.9, 0.4, 0.7, 1.0, 0.6],  # broken at 0.2
            [0.1, 0.2, 0.5, 0.2, 0.1],  # nowhere above one half
            [0.6, 0.9, 0.6, 0.6, 0.6],  # everywhere
        ]
    )
    low, high = unbroken_range(match, grid, 0.5)
    np.testing.assert_array_equal(low, [0.4, np.nan, 0.1])
    np.testing.assert_array_equal(high, [1.6, np.nan, 1.6])
