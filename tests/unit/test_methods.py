"""The methods against published results, networkx and leidenalg."""

from __future__ import annotations

from itertools import combinations

import leidenalg
import networkx as nx
import numpy as np
import pytest

from analysis.agreement import adjusted_mutual_information, normalised_mutual_information
from analysis.methods import CliquePercolation, Leiden, Louvain
from analysis.methods.leiden import weight_unit
from analysis.methods.randomness import child_seeds, igraph_seed
from analysis.modules import Modules, modularity, score_modules
from analysis.network import Network
from tests.graphs import groups_of, joined, lettered, named_groups, random_network, to_networkx
from tests.planted import benchmark_network, from_networkx, planted_network, ring_of_cliques

KARATE = 0.419790  # proved optimal by integer programming: Brandes et al. 2008, 0.4198 (from memory)


@pytest.fixture(scope="module")
def weighted_miserables() -> Network:
    return from_networkx(nx.les_miserables_graph(), weight="weight")


def best_of(method: Leiden | Louvain, network: Network, runs: int = 20) -> Modules:
    return max((method.find(network, seed=seed) for seed in range(runs)), key=lambda modules: modules.quality)


# Published best modularity


@pytest.mark.parametrize("method", [Leiden(), Louvain()], ids=repr)
def test_the_karate_club_reaches_its_proved_optimum(karate, method):
    best = best_of(method, karate, 50)
    assert best.quality == pytest.approx(KARATE, abs=1e-6)
    assert best.sizes.tolist() == [12, 11, 6, 5]  # computed with networkx on the optimal partition


def test_louvain_is_never_above_the_proved_optimum(karate):
    qualities = [Louvain().find(karate, seed=seed).quality for seed in range(100)]
    assert max(qualities) <= KARATE + 1e-6
    # and better than joining greedily, 0.381 (Newman 2006, PNAS 103, Table 1, from memory)
    assert min(qualities) > 0.381


@pytest.mark.parametrize("seed", range(10))
def test_leiden_beats_older_methods_on_the_karate_club(karate, seed):
    # Newman 2006, PNAS 103, Table 1 (from memory): 0.401 by edge betweenness, 0.381 greedy, 0.419 spectral
    assert Leiden().find(karate, seed=seed).quality > 0.419


@pytest.mark.parametrize(
    ("graph", "weight", "wanted", "groups"),
    [
        (nx.karate_club_graph(), "weight", 0.444904, 4),  # computed with networkx and igraph
        (nx.les_miserables_graph(), None, 0.560008, 6),  # published 0.5600 (from memory); computed
        (nx.les_miserables_graph(), "weight", 0.566688, 6),  # computed with networkx and igraph
        (nx.davis_southern_women_graph(), None, 0.336006, 3),  # computed with networkx and igraph
    ],
)
def test_other_published_networks(graph, weight, wanted, groups):
    network = from_networkx(graph, weight=weight)
    best = best_of(Leiden(), network)
    assert best.quality == pytest.approx(wanted, abs=1e-6)
    assert len(best) == groups
    louvain = best_of(Louvain(), network)
    assert louvain.quality <= wanted + 1e-6
    assert louvain.quality == pytest.approx(wanted, abs=0.01)


def test_sizes_on_les_miserables(les_miserables):
    assert best_of(Leiden(), les_miserables).sizes.tolist() == [17, 16, 12, 11, 11, 10]  # computed with networkx


# networkx and leidenalg as independent judges


@pytest.mark.parametrize("resolution", [0.5, 1.0, 2.0])
@pytest.mark.parametrize("seed", range(3))
def test_networkx_computes_the_same_quality(seed, resolution):
    network = random_network(seed, nodes=60, edges=200, weighted=seed > 0)
    graph = to_networkx(network)
    for method in (Leiden(resolution=resolution), Louvain(resolution=resolution)):
        modules = method.find(network, seed=seed)
        wanted = nx.community.modularity(graph, groups_of(modules), weight="weight", resolution=resolution)
        assert modules.quality == pytest.approx(wanted, abs=1e-12)


@pytest.mark.parametrize("resolution", [0.3, 1.0, 2.0])
def test_leidenalg_computes_the_same_quality(weighted_miserables, resolution):
    for network in (weighted_miserables, weighted_miserables.without_weights()):
        modules = Leiden(resolution=resolution).find(network, seed=1)
        weights = None if network.weights is None else "weight"
        theirs = leidenalg.RBConfigurationVertexPartition(
            network.igraph, modules.labels.tolist(), weights=weights, resolution_parameter=resolution
        )
        twice_the_weight = 2 * network.edge_weights.sum()
        assert theirs.quality() / twice_the_weight == pytest.approx(modules.quality)
        tight = Leiden(quality="cpm", resolution=resolution)
        modules = tight.find(network, seed=1)
        weights = None if network.weights is None else (network.weights / weight_unit(network)).tolist()
        theirs = leidenalg.CPMVertexPartition(
            network.igraph, modules.labels.tolist(), weights=weights, resolution_parameter=resolution
        )
        assert theirs.quality() / 2 == pytest.approx(modules.quality)  # theirs counts each pair in both directions


@pytest.mark.parametrize("resolution", [0.5, 1.0, 2.0])
def test_our_best_modularity_is_no_worse_than_leidenalgs(karate, weighted_miserables, resolution):
    for network in (karate, weighted_miserables):
        theirs = [
            leidenalg.find_partition(
                network.igraph,
                leidenalg.RBConfigurationVertexPartition,
                weights=None if network.weights is None else "weight",
                resolution_parameter=resolution,
                n_iterations=-1,
                seed=seed,
            )
            for seed in range(20)
        ]
        wanted = max(modularity(network, np.array(found.membership), resolution) for found in theirs)
        assert best_of(Leiden(resolution=resolution), network, 40).quality >= wanted - 1e-6


@pytest.mark.parametrize("resolution", [0.05, 0.2, 0.5])
def test_our_best_potts_quality_is_no_worse_than_leidenalgs(karate, les_miserables, resolution):
    for network in (karate, les_miserables):
        theirs = [
            leidenalg.find_partition(
                network.igraph,
                leidenalg.CPMVertexPartition,
                resolution_parameter=resolution,
                n_iterations=-1,
                seed=seed,
            ).quality()
            for seed in range(20)
        ]
        ours = best_of(Leiden(quality="cpm", resolution=resolution), network, 500).quality
        assert ours >= max(theirs) / 2 - 1e-6


# The constant Potts model by hand


def test_the_potts_quality_by_hand():
    network = lettered("ab bc ac de ef df cd")
    labels = np.array([0, 0, 0, 1, 1, 1])
    # 3 + 3 edges inside, 3 + 3 pairs (Traag, Van Dooren & Nesterov 2011)
    assert Leiden(quality="cpm", resolution=0.2).score(network, labels) == pytest.approx(6 - 0.2 * 6)
    assert Leiden(quality="cpm", resolution=0.2).score(network, np.zeros(6, int)) == pytest.approx(7 - 0.2 * 15)
    # joined where 7 − 15 γ > 6 − 6 γ, so below γ = 1/9
    assert len(Leiden(quality="cpm", resolution=0.1).find(network, seed=1)) == 1
    assert len(Leiden(quality="cpm", resolution=0.12).find(network, seed=1)) == 2


@pytest.mark.parametrize("resolution", [0.2, 0.4, 0.7])
def test_every_potts_module_is_denser_than_the_resolution(les_miserables, resolution):
    # Traag, Van Dooren & Nesterov 2011: inside density at least γ, density between two modules at most γ
    for seed in range(5):
        modules = Leiden(quality="cpm", resolution=resolution).find(les_miserables, seed=seed)
        figures = score_modules(les_miserables, modules)
        assert np.all(figures.internal_density[figures.size > 1] >= resolution - 1e-9)
        graph = to_networkx(les_miserables)
        for first, second in combinations(groups_of(modules), 2):
            between = nx.cut_size(graph, first, second)
            assert between <= resolution * len(first) * len(second) + 1e-9


def test_weights_count_in_units_of_their_95_percent_quantile(weighted_miserables):
    unit = np.quantile(weighted_miserables.weights, 0.95)
    assert weight_unit(weighted_miserables) == unit
    assert weight_unit(weighted_miserables.without_weights()) == 1
    whole = np.zeros(weighted_miserables.node_count, int)
    method = Leiden(quality="cpm", resolution=0.01)
    pairs = 77 * 76 / 2
    wanted = weighted_miserables.weights.sum() / unit - 0.01 * pairs
    assert method.score(weighted_miserables, whole) == pytest.approx(wanted)


# Resolution


def test_the_ring_of_cliques_merges_in_pairs():
    # Fortunato & Barthélemy 2007: 30 K5 in a ring, Q = 0.887879 in pairs, 0.875758 apart. A run may leave a clique
    # alone or three together where the pairs do not come out even
    ring = ring_of_cliques(30, 5)
    pairs = 1 - 1 / 22 - 2 / 30
    for method in (Leiden(), Louvain()):
        for seed in range(10):
            found = method.find(ring, seed=seed)
            assert 1 - 2 / 22 - 1 / 30 < found.quality <= pairs + 1e-12
            assert set(found.sizes.tolist()) <= {5, 10, 15}
            assert np.mean(found.sizes == 10) > 0.5
    paired = np.array([int(name[1:3]) // 2 for name in ring.names])
    best = Leiden().find(ring, seed=1, initial=paired)
    assert best.quality == pytest.approx(pairs)
    assert best.sizes.tolist() == [10] * 15
    assert score_modules(ring, best).below_resolution_limit.all()
    tight = Leiden(quality="cpm", resolution=0.5).find(ring, seed=1)
    assert tight.sizes.tolist() == [5] * 30
    assert all(len({name[:3] for name in group}) == 1 for group in named_groups(ring, tight))
    assert Leiden(resolution=2.0).find(ring, seed=1).sizes.tolist() == [5] * 30


def test_two_copies_at_twice_the_resolution_are_each_as_before(karate):
    # Q of two copies at 2γ is Q of one at γ: 2 · W_c/2W − 2γ · 2 (K_c/4W)² = W_c/W − γ (K_c/2W)²
    twice = joined(karate, karate)
    best = best_of(Leiden(resolution=2.0), twice, 30)
    assert best.quality == pytest.approx(KARATE, abs=1e-6)
    one = named_groups(karate, best_of(Leiden(), karate))
    assert named_groups(twice, best) == {frozenset(f"{s}-{name}" for name in group) for s in "ab" for group in one}


def test_finer_resolution_gives_more_modules(les_miserables):
    counts = [len(best_of(Leiden(resolution=r), les_miserables, 5)) for r in (0.2, 0.5, 1.0, 2.0, 4.0, 8.0)]
    assert counts == sorted(counts)
    assert counts[-1] > counts[0]


@pytest.mark.parametrize("asked", [0.1, 0.2])
def test_leiden_recovers_the_modules_of_the_lfr_benchmark(asked):
    planted = benchmark_network(asked)
    assert planted.mixing < 0.35
    found = Leiden().find(planted.network, seed=1)
    # N = 500, ⟨k⟩ = 15; Lancichinetti & Fortunato 2009, Fig. 2: near 1 at mixing up to 0.4 (from memory)
    assert normalised_mutual_information(found.labels, planted.labels) > 0.95


def test_girvan_and_newmans_benchmark():
    # 4 groups of 32, mean degree 16; at z_out = 5 a good method is right but for a few (Girvan & Newman 2002)
    scores = []
    for seed in range(5):
        graph = nx.random_partition_graph([32] * 4, 11 / 31, 5 / 96, seed=seed)
        network = from_networkx(graph)
        labels = np.array([int(name) // 32 for name in network.names])
        scores.append(normalised_mutual_information(Leiden().find(network, seed=seed).labels, labels))
    assert np.mean(scores) > 0.95  # computed with networkx's Louvain: 0.99


# Runs


def test_a_run_may_start_from_another_partition(les_miserables):
    best = best_of(Leiden(), les_miserables)
    again = Leiden().find(les_miserables, seed=3, initial=best.labels)
    assert again.quality >= best.quality - 1e-12
    assert adjusted_mutual_information(again.labels, best.labels) == pytest.approx(1)


def test_until_stable_is_no_worse_than_two_passes():
    network = planted_network([12] * 30, seed=4, inside=0.4).network
    quick = [Leiden(iterations=2).find(network, seed=seed).quality for seed in range(10)]
    stable = [Leiden().find(network, seed=seed).quality for seed in range(10)]
    assert np.mean(stable) >= np.mean(quick)
    assert Leiden().quick() == Leiden(iterations=2)
    assert Louvain(resolution=2.0).quick() == Louvain(resolution=2.0)
    assert Leiden().at(3.0) == Leiden(resolution=3.0)
    assert Louvain().at(3.0) == Louvain(resolution=3.0)


def test_leidens_modules_are_connected(les_miserables):
    # guaranteed by Traag, Waltman & van Eck 2019
    graph = to_networkx(les_miserables)
    for seed in range(10):
        for method in (Leiden(), Leiden(resolution=4.0), Leiden(quality="cpm", resolution=0.1)):
            assert all(
                nx.is_connected(graph.subgraph(group)) for group in groups_of(method.find(les_miserables, seed=seed))
            )


def test_child_seeds_do_not_depend_on_how_many_are_asked_for():
    assert child_seeds(3, 5) == child_seeds(3, 50)[:5]
    assert len(set(child_seeds(3, 1000))) == 1000
    assert not set(child_seeds(3, 100)) & set(child_seeds(4, 100))
    assert not set(child_seeds(3, 100, purpose=1)) & set(child_seeds(3, 100, purpose=2))


def test_igraphs_generator_is_given_back_after_an_error(karate):
    with pytest.raises(RuntimeError, match="stopped"), igraph_seed(3):
        raise RuntimeError("stopped")
    with igraph_seed(3):
        first = karate.igraph.community_multilevel().membership
    with igraph_seed(3):
        assert karate.igraph.community_multilevel().membership == first


# Shares of edges, as the consensus uses them


@pytest.mark.parametrize("method", [Leiden(), Leiden(resolution=0.5), Leiden(quality="cpm", resolution=0.05)], ids=repr)
def test_with_whole_shares_it_is_a_plain_run(les_miserables, weighted_miserables, method):
    for network in (les_miserables, weighted_miserables):
        whole = np.ones(network.edge_count)
        ours = max(method.score(network, method.labels_by_shares(network, whole, seed=seed)) for seed in range(20))
        assert ours == pytest.approx(best_of(method, network).quality, abs=1e-9)


def test_edges_without_a_share_join_no_one():
    network = lettered("ab bc ac cd de ef df")
    shares = np.array([float(pair != ("c", "d")) for pair in [("a", "b"), ("a", "c"), ("b", "c"), ("c", "d"), *"xyz"]])
    found = Leiden(resolution=0.01).labels_by_shares(network, shares, seed=1)
    assert named_groups(network, Modules.from_labels(found)) == {frozenset("abc"), frozenset("def")}
    nothing = Leiden().labels_by_shares(network, np.zeros(7), seed=1)
    assert len(set(nothing.tolist())) == 6


# Clique percolation


@pytest.mark.parametrize(
    ("graph", "k", "sizes"),
    [
        # computed with networkx
        (nx.karate_club_graph(), 3, [25, 6, 3]),
        (nx.karate_club_graph(), 4, [6, 4, 4]),
        (nx.karate_club_graph(), 5, [6]),
        (nx.les_miserables_graph(), 3, [46, 8, 4, 3]),
        (nx.les_miserables_graph(), 4, [33, 8, 7, 4]),
        (nx.les_miserables_graph(), 5, [14, 13, 8, 7, 6]),
        (nx.les_miserables_graph(), 6, [13, 11, 8, 7]),
    ],
)
def test_clique_percolation_on_published_networks(graph, k, sizes):
    network = from_networkx(graph)
    found = CliquePercolation(k=k).find(network)
    assert found.sizes.tolist() == sizes
    theirs = nx.community.k_clique_communities(to_networkx(network), k)
    assert {frozenset(group) for group in groups_of(found)} == set(theirs)


def test_the_communities_of_the_karate_club_by_name(karate):
    wanted = {"000 001 002 003 007 013", "008 030 032 033", "023 029 032 033"}  # computed with networkx
    found = CliquePercolation(k=4).find(karate)
    assert {" ".join(sorted(group)) for group in named_groups(karate, found)} == wanted
    assert found.is_cover


@pytest.mark.parametrize("seed", range(12))
def test_clique_percolation_is_that_of_networkx_on_random_networks(seed):
    network = random_network(seed, nodes=30, edges=60 + 20 * seed)
    graph = to_networkx(network)
    for k in range(2, 7):
        theirs = {frozenset(group) for group in nx.community.k_clique_communities(graph, k)}
        assert {frozenset(group) for group in groups_of(CliquePercolation(k=k).find(network))} == theirs


def test_two_cliques_of_four_that_share_an_edge():
    # the definition (Palla, Derényi, Farkas & Vicsek 2005): one community of triangles, two of four-cliques
    network = lettered("ab ac ad bc bd cd ce cf de df ef")
    assert CliquePercolation(k=3).find(network).sizes.tolist() == [6]
    four = CliquePercolation(k=4).find(network)
    assert named_groups(network, four) == {frozenset("abcd"), frozenset("cdef")}
    assert four.homes.tolist() == [1, 1, 2, 2, 1, 1]
    assert CliquePercolation(k=5).find(network).sizes.tolist() == []


def test_pairs_percolate_to_components():
    network = random_network(3, nodes=50, edges=35)
    found = CliquePercolation(k=2).find(network)
    parts = [part for part in nx.connected_components(to_networkx(network)) if len(part) > 1]
    assert {frozenset(group) for group in groups_of(found)} == {frozenset(part) for part in parts}


def test_communities_appear_at_the_published_point():
    # Derényi, Palla & Vicsek 2005: p_c = [(k − 1) N]^(−1/(k−1)); N = 500, k = 3: 0.031623
    point = (2 * 500) ** -0.5
    assert point == pytest.approx(0.031623, abs=1e-6)
    largest = []
    for share in (0.6, 1.6):
        graph = nx.gnp_random_graph(500, share * point, seed=1)
        sizes = CliquePercolation(k=3).find(from_networkx(graph)).sizes
        largest.append(int(sizes.max(initial=0)))
    assert largest[0] < 50
    assert largest[1] > 250


def test_a_run_until_stable_ends_where_moves_gain_nothing():
    # igraph 1.0.0 never ends on this network with n_iterations=-1: nodes move for ever between equal places
    rng = np.random.default_rng(8)
    count, draws = int(rng.integers(3, 16)), int(rng.integers(2, 30))
    pairs = sorted({tuple(sorted(map(int, rng.choice(count, 2, replace=False)))) for _ in range(draws)})
    weights = rng.choice([0.1, 0.3, 1.0, 2.5, 1e-3, 7, 1 / 3], len(pairs))
    network = Network.from_indices(tuple(f"n{node:02d}" for node in range(count)), np.array(pairs), weights)
    method = Leiden(quality="cpm", resolution=0.1)
    whole = np.zeros(count, np.int32)
    found = method.find(network, seed=8, initial=whole)
    assert found.quality >= method.score(network, whole) - 1e-9
