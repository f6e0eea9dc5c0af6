"""Modules against chance: honest on random networks, clear on planted ones, by hand on small cases."""

from __future__ import annotations

from dataclasses import replace

import networkx
import numpy as np
import pytest
from scipy import stats

from analysis.compute import InProcess, LocalProcesses
from analysis.errors import Cancelled, SettingError
from analysis.methods import Leiden, Louvain, Method
from analysis.methods.clique_percolation import CliquePercolation
from analysis.methods.randomness import child_seeds
from analysis.modules import Modules, standard_modularity
from analysis.network import Network
from analysis.statistics import benjamini_hochberg
from analysis.study import NullDraws
from analysis.trust.chance import NullTask, ObservedTask, bounded, compare_with_chance, fair_runs
from analysis.trust.chance_scale import ChanceModules, ChanceScale
from analysis.trust.nulls import rewire
from analysis.trust.significance import Significance, against_nulls, verdict

LEVEL = 0.05
NETWORKS = 50
# At most so many of 50 honest tests fall below the level, but for one time in a thousand (binomial)
BOUND = int(stats.binom.ppf(0.999, NETWORKS, LEVEL))


def network_of(graph: networkx.Graph, weights: np.ndarray | None = None) -> Network:
    pairs = np.array(list(graph.edges), np.int64).reshape(-1, 2)
    return Network.from_indices(tuple(f"g{node:05d}" for node in range(graph.number_of_nodes())), pairs, weights)


def best_of(network: Network, method: Method, runs: int, seed: int) -> Modules:
    found = [method.find(network, seed=child) for child in child_seeds(seed, runs, purpose=99)]
    return max(found, key=lambda modules: modules.quality)


# --- Benjamini & Hochberg


# Benjamini & Hochberg 1995, their 15 p-values (section 3.2) and the adjusted ones, confirmed with scipy
P_VALUES = [0.0001, 0.0004, 0.0019, 0.0095, 0.0201, 0.0278, 0.0298, 0.0344, 0.0459, 0.3240, 0.4262, 0.5719, 0.6528,
            0.7590, 1.0]  # fmt: skip
Q_VALUES = [0.0015, 0.0030, 0.0095, 0.035625, 0.0603, 0.063857, 0.063857, 0.0645, 0.0765, 0.486, 0.581182, 0.714875,
            0.753231, 0.813214, 1]  # fmt: skip


def test_q_values_of_the_published_example() -> None:
    q_values = benjamini_hochberg(np.array(P_VALUES))
    assert np.allclose(q_values, Q_VALUES, atol=5e-7)
    assert int((q_values <= 0.05).sum()) == 4  # their count; Bonferroni's is 3
    shuffled = np.random.default_rng(1).permutation(15)
    assert np.array_equal(benjamini_hochberg(np.array(P_VALUES)[shuffled]), q_values[shuffled])


def test_q_values_agree_with_scipy_and_leave_out_what_was_not_tested() -> None:
    random = np.random.default_rng(3)
    for count in (1, 2, 50, 1000):
        p_values = np.round(random.beta(0.5, 2, count), 3)  # with ties
        assert np.allclose(benjamini_hochberg(p_values), stats.false_discovery_control(p_values), atol=1e-15)
        gaps = np.insert(p_values, 1, np.nan)
        q_values = benjamini_hochberg(gaps)
        assert np.isnan(q_values[1])
        assert np.array_equal(np.delete(q_values, 1), benjamini_hochberg(p_values))
    assert benjamini_hochberg(np.array([])).shape == (0,)
    assert np.isnan(benjamini_hochberg(np.array([np.nan]))).all()
    with pytest.raises(ValueError, match="between 0 and 1"):
        benjamini_hochberg(np.array([0.5, 1.5]))


# --- Calibration


def erdos_renyi(seed: int) -> Network:
    return network_of(networkx.gnm_random_graph(90, 240, seed=seed))


def degree_matched(seed: int) -> Network:
    """Draw a random network with the degrees of preferential attachment: a fat tail and no modules."""
    return rewire(network_of(networkx.barabasi_albert_graph(90, 3, seed=seed)), seed=seed)


@pytest.mark.parametrize("draw", [erdos_renyi, degree_matched])
@pytest.mark.parametrize(
    ("method", "runs"),
    [(Leiden(iterations=2), 3), (Leiden(quality="cpm", resolution=0.2, iterations=2), 1), (CliquePercolation(k=3), 1)],
    ids=["modularity", "constant Potts", "cliques"],
)
def test_chance_is_not_called_significant_more_often_than_the_level(draw, method: Method, runs: int) -> None:
    whole, any_module, modules, below, called = [], 0, 0, 0, 0
    for seed in range(NETWORKS):
        network = draw(seed)
        found = best_of(network, method, runs, seed)
        result = against_nulls(network, method, found, nulls=39, seed=seed, compute=InProcess(), chosen_from=runs)
        whole.append(result.draws.p_value)
        tested = ~np.isnan(result.q_value)
        any_module += bool(np.any(result.q_value[tested] < LEVEL))
        called += int((result.q_value[tested] < LEVEL).sum())
        below += int((result.p_value[tested] <= LEVEL).sum())
        modules += int(tested.sum())
    # the partition: 39 draws make p a multiple of 1/40, so p ≤ 0.05 has exactly probability 0.05 by chance
    assert int((np.array(whole) <= LEVEL).sum()) <= BOUND
    assert np.mean(whole) == pytest.approx(0.5, abs=4 / np.sqrt(12 * NETWORKS))
    # modules: under pure chance a single one called is a false discovery, so networks with any are counted
    assert any_module <= BOUND
    assert modules > 0
    assert called / modules <= LEVEL
    # modules of one network depend on one another; hence the wide bound on their p-values
    assert below / modules <= 2 * LEVEL


def test_what_is_compared_does_not_depend_on_how_the_modules_shown_were_chosen() -> None:
    network = erdos_renyi(1)
    method = Leiden(iterations=2)
    words = {"nulls": 5, "seed": 1, "compute": InProcess(), "chosen_from": 3}
    one, other = (against_nulls(network, method, best_of(network, method, runs, 1), **words) for runs in (1, 50))
    assert one.draws.observed == other.draws.observed
    assert np.array_equal(one.draws.draws, other.draws.draws)


def test_small_networks_get_as_many_runs_on_each_null_large_ones_a_single_run() -> None:
    small, large = erdos_renyi(1), network_of(networkx.gnm_random_graph(500, 11_000, seed=1))
    assert fair_runs(small, 20) == 20
    assert fair_runs(small, 1000) == 41  # 10,000 edges' worth on 240 edges
    assert fair_runs(large, 50) == 1
    assert fair_runs(Network.from_edges([]), 5) == 5
    method = Leiden(iterations=2)
    seeds = child_seeds(3, 4)
    best = max((method.find(small, seed=seed) for seed in seeds), key=lambda modules: modules.quality)
    assert ObservedTask(method, 3, 4).run(small).modularity == standard_modularity(small, best)


def test_leiden_until_stable_is_held_to_ten_passes_on_large_networks_only() -> None:
    small, large = erdos_renyi(1), network_of(networkx.gnm_random_graph(500, 11_000, seed=1))
    assert bounded(Leiden(resolution=0.7), small) == Leiden(resolution=0.7)
    assert bounded(Leiden(resolution=0.7), large) == Leiden(resolution=0.7, iterations=10)
    assert bounded(Leiden(iterations=2), large) == Leiden(iterations=2)
    assert bounded(Louvain(), large) == Louvain()


# --- Power

SIZES = [30, 25, 20, 15, 10, 10, 8, 8]


def planted(seed: int, weights: bool = False) -> tuple[Network, np.ndarray]:
    """Dense blocks (0.7 inside), loosely joined (0.01), and 74 nodes in no block; labels −1 for those."""
    graph = networkx.stochastic_block_model(
        [*SIZES, 74],
        [[0.7 if i == j < len(SIZES) else 0.01 for j in range(9)] for i in range(9)],
        seed=seed,
    )
    labels = np.repeat([*range(len(SIZES)), -1], [*SIZES, 74])
    edge_weights = np.random.default_rng(seed).uniform(0.5, 1, graph.number_of_edges()) if weights else None
    return network_of(graph, edge_weights), labels


@pytest.mark.parametrize("weights", [False, True])
@pytest.mark.parametrize(
    "method",
    [Leiden(), Louvain(), Leiden(quality="cpm", resolution=0.25), CliquePercolation(k=4)],
    ids=["modularity", "Louvain", "constant Potts", "cliques"],
)
def test_planted_modules_are_significant(method: Method, weights: bool) -> None:
    network, labels = planted(1, weights)
    found = method.find(network, seed=1)
    result = against_nulls(network, method, found, nulls=40, seed=2, compute=InProcess())
    assert result.draws.p_value == 1 / 41
    assert result.draws.z > 4
    # modularity joins some of the blocks: what counts is that a module consists of blocks and not of loose nodes
    real = [position for position, group in enumerate(found.members) if (labels[group] >= 0).mean() > 0.6]
    assert len(real) >= 4
    assert np.all(result.q_value[real] < LEVEL)
    assert "This network is more modular than random networks" in verdict(result)


def dominant_share(labels: np.ndarray) -> float:
    placed = labels[labels >= 0]
    return float(np.bincount(placed).max() / len(labels)) if len(placed) else 0.0


def test_modules_beside_the_planted_ones_are_not_called() -> None:
    method = Leiden(quality="cpm", resolution=0.25)
    called = false = 0
    for seed in range(5):
        network, labels = planted(seed)
        found = method.find(network, seed=seed)
        result = against_nulls(network, method, found, nulls=40, seed=seed, compute=InProcess())
        for position in np.flatnonzero(result.q_value < LEVEL):
            called += 1
            false += dominant_share(labels[found.members[position]]) < 0.5
    assert called >= 5 * 6
    assert false / called <= 0.1


# --- By hand


def chance_modules(*nulls: list[tuple[int, float]]) -> ChanceModules:
    """Build chance modules from (size, evidence), one list a null network; all members have strength 1."""
    flat = [(null, size, evidence) for null, pairs in enumerate(nulls) for size, evidence in pairs]
    null, size, evidence = (np.array(column) for column in zip(*flat, strict=True)) if flat else (np.zeros(0),) * 3
    evidence, size = evidence.astype(float), size.astype(int)
    return ChanceModules(len(nulls), null.astype(int), size, size * 1.0, evidence, evidence, evidence)


def judge(sizes: list[int], evidence: list[float], chance: ChanceModules) -> tuple[np.ndarray, np.ndarray, int]:
    """Compare modules whose members all have strength 1, as those of `chance_modules` have."""
    return compare_with_chance(np.array(sizes), np.array(sizes, float), np.array(evidence), chance)


def compared(size: int, evidence: float, chance: ChanceModules) -> tuple[int, int]:
    _, reached, count = judge([size], [evidence], chance)
    return int(reached[0]), count


def test_evidence_is_put_into_standard_deviations_of_like_sized_chance_modules() -> None:
    chance = chance_modules([(10, 1.0)], [(10, 2.0)], [(10, 3.0)])
    # mean 2, standard deviation 1; the chance modules, each against the two others: −2.12, 0, 2.12
    distance, reached, count = judge([10, 10, 10], [4.0, 4.2, 2.0], chance)
    assert np.allclose(distance, [2.0, 2.2, 0.0])
    assert reached.tolist() == [1, 0, 2]
    assert count == 3


def test_only_like_sizes_make_the_scale_and_all_chance_modules_are_counted() -> None:
    small, large = [(10, 1.0), (10, 3.0)] * 30, [(40, 11.0), (40, 13.0)] * 30
    chance = chance_modules(small, large)
    spread = np.sqrt(60 / 59)  # of either kind: deviations of ±1, n − 1
    distance, reached, count = judge([12, 30, 100, 3], [4.0, 4.0, 14.0, 4.0], chance)
    # 12 is measured by those of 10, 30 by those of 40, 100 by the largest there are, 3 by the smallest
    assert np.allclose(distance, [2 / spread, -8 / spread, 2 / spread, 2 / spread])
    assert reached.tolist() == [0, 120, 0, 0]
    assert count == 120


def test_the_nearest_fifty_and_no_more() -> None:
    chance = chance_modules([(10, 1.0)] * 20 + [(10, 3.0)] * 20 + [(11, 5.0)] * 10 + [(13, 99.0)] * 60)
    distance, _, _ = judge([10], [4.0], chance)
    near = [1.0] * 20 + [3.0] * 20 + [5.0] * 10
    assert distance[0] == pytest.approx((4 - np.mean(near)) / np.std(near, ddof=1))


def test_evidence_is_measured_from_a_line_in_the_strength_of_members() -> None:
    random = np.random.default_rng(4)
    x = random.uniform(0, 2, 80)
    y = 5 - 1.5 * x + random.normal(0, 0.3, 80)
    size = np.full(80, 12)
    strength = size * np.exp(x)  # x is the logarithm of the mean strength
    chance = ChanceModules(4, np.repeat(np.arange(4), 20), size, strength, y, y, y)
    fit = stats.linregress(x, y)
    deviation = np.sqrt(((y - fit.intercept - fit.slope * x) ** 2).sum() / 78)
    inside, outside = 1.2, 9.0  # the line is not drawn out beyond the chance modules
    distance, _, _ = compare_with_chance(
        np.array([12, 12]), 12 * np.exp(np.array([inside, outside])), np.array([4.0, 4.0]), chance
    )
    expected = [(4 - fit.intercept - fit.slope * place) / deviation for place in (inside, x.max())]
    assert np.allclose(distance, expected)
    # a chance module is measured from the line through all the others
    scale = ChanceScale.of(chance)
    others = stats.linregress(x[1:], y[1:])
    residuals = y[1:] - others.intercept - others.slope * x[1:]
    alone = (y[0] - others.intercept - others.slope * x[0]) / np.sqrt((residuals**2).sum() / 77)
    assert scale.distance(size, strength, y, own=True)[0] == pytest.approx(alone)


def test_chance_modules_that_do_not_vary() -> None:
    chance = chance_modules([(5, 1.5)] * 4, [(5, 1.5)])
    distance, reached, count = judge([5, 5], [1.5, 1.6], chance)
    assert distance.tolist() == [0.0, np.inf]
    assert reached.tolist() == [5, 0]
    assert count == 5


def test_pairs_and_single_genes_are_not_judged() -> None:
    distance, reached, _ = judge([2, 1], [9.0, 0.0], chance_modules([(3, 1.0)]))
    assert np.isnan(distance).all()
    assert reached.tolist() == [0, 0]


def test_null_networks_without_modules_count_as_not_reached() -> None:
    assert compared(5, 1.0, chance_modules([], [], [])) == (0, 3)
    assert compared(5, 1.0, chance_modules([], [(5, 2.0), (5, 3.0)], [])) == (2, 4)


def significance(observed: float, draws: list[float], q_values: list[float]) -> Significance:
    q_value = np.array(q_values, np.float64)
    nothing = np.zeros(len(q_value), np.int64)
    return Significance(NullDraws(observed, np.array(draws)), q_value, q_value, q_value, nothing, 9, chance_modules([]))


def test_the_verdict_says_the_worst_first() -> None:
    draws = [0.30 + 0.001 * i for i in range(99)]
    assert verdict(significance(0.35, draws, [0.2, 0.3, np.nan])) == (
        "This network is no more modular than random networks with the same degrees (modularity 0.350, by chance "
        "0.349, p = 0.5), and none of its 2 modules of three genes or more is more cohesive than modules of like size "
        "found by chance."
    )
    assert verdict(significance(0.35, draws, [0.01, 0.3])) == (
        "This network is no more modular than random networks with the same degrees (modularity 0.350, by chance "
        "0.349, p = 0.5), though 1 of its 2 modules of three genes or more is more cohesive than modules of like size "
        "found by chance."
    )
    assert verdict(significance(0.5, draws, [0.01, 0.02])) == (
        "This network is more modular than random networks with the same degrees (modularity 0.500, by chance 0.349, "
        "p = 0.01), and 2 of its 2 modules of three genes or more are more cohesive than modules of like size found "
        "by chance."
    )
    assert "p = 0.01), but none of its 1 module of three genes" in verdict(significance(0.5, draws, [0.3]))
    assert "but it has no module of three genes or more to judge" in verdict(significance(0.5, draws, [np.nan]))
    few = verdict(significance(0.5, draws[:9], [0.3]))
    assert few.startswith("This network is more modular than all 9 random networks with its degrees, too few to tell")


# --- Manners


def test_the_seed_decides_everything_and_two_processes_change_nothing() -> None:
    network, _ = planted(3, weights=True)
    method = Leiden(iterations=2)
    found = method.find(network, seed=1)
    here = against_nulls(network, method, found, nulls=6, seed=5, compute=InProcess())
    compute = LocalProcesses(2)
    there = against_nulls(network, method, found, nulls=6, seed=5, compute=compute)
    compute.close()
    for name in ("p_value", "q_value", "distance", "reached"):
        assert getattr(here, name).tobytes() == getattr(there, name).tobytes()
    assert here.draws.observed == there.draws.observed
    assert here.draws.draws.tobytes() == there.draws.draws.tobytes()
    assert here.chance.evidence.tobytes() == there.chance.evidence.tobytes()
    more = against_nulls(network, method, found, nulls=9, seed=5, compute=InProcess())
    assert np.array_equal(more.draws.draws[:6], here.draws.draws)
    assert not np.array_equal(
        against_nulls(network, method, found, nulls=6, seed=6, compute=InProcess()).draws.draws, here.draws.draws
    )


def test_a_null_run_is_a_run_on_a_rewired_network() -> None:
    network, _ = planted(2)
    method = Leiden(quality="cpm", resolution=0.3)
    figures = NullTask(method, 7).run(network)
    rewiring, running = child_seeds(7, 2)
    modules = method.find(rewire(network, rewiring), seed=running)
    assert figures.size.tolist() == modules.sizes.tolist()
    assert figures.modularity == standard_modularity(rewire(network, rewiring), modules)


def test_draws_stream_in_and_a_stop_is_heard() -> None:
    network, _ = planted(2)
    seen: list[NullDraws] = []
    method = Leiden(iterations=2)
    found = method.find(network, seed=1)
    result = against_nulls(network, method, found, nulls=5, seed=1, compute=InProcess(), on_draws=seen.append)
    assert [len(draws.draws) for draws in seen] == [1, 2, 3, 4, 5]
    assert np.array_equal(seen[-1].draws, result.draws.draws)

    def stop(fraction: float, _phrase: str) -> None:
        if fraction > 0.4:
            raise Cancelled("stop")

    with pytest.raises(Cancelled):
        against_nulls(network, method, found, nulls=5, seed=1, compute=InProcess(), progress=stop)


def test_networks_with_nothing_in_them() -> None:
    for network in (
        Network.from_edges([]),
        Network.from_edges([], nodes=["a", "b", "c"]),
        Network.from_edges([("a", "b")]),
    ):
        for method in (Leiden(), Louvain(), CliquePercolation(k=3)):
            found = method.find(network, seed=1)
            result = against_nulls(network, method, found, nulls=3, seed=1, compute=InProcess())
            assert result.draws.p_value == 1.0
            assert np.isnan(result.p_value).all()
            assert "no more modular" in verdict(result)


def test_a_module_of_a_cover_is_judged_too() -> None:
    network, _ = planted(1)
    found = CliquePercolation(k=3).find(network)
    assert found.is_cover
    result = against_nulls(network, CliquePercolation(k=3), found, nulls=10, seed=1, compute=InProcess())
    assert len(result.q_value) == len(found)


def test_modules_picked_by_hand_can_be_judged() -> None:
    network, labels = planted(1)
    chosen = replace(Modules.from_labels(labels), method="by hand")
    result = against_nulls(network, Leiden(), chosen, nulls=40, seed=1, compute=InProcess())
    assert np.all(result.q_value < LEVEL)


def test_no_null_networks_is_a_setting_error() -> None:
    network, _ = planted(1)
    with pytest.raises(SettingError, match="give 1 or more"):
        against_nulls(network, Leiden(), Leiden().find(network, seed=1), nulls=0, seed=1, compute=InProcess())
