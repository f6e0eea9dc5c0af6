"""What if it were gone; links between modules; how far things spread."""

from __future__ import annotations

import itertools

import networkx as nx
import numpy as np
import pytest
from scipy.sparse import csc_array, eye_array
from scipy.sparse.linalg import spsolve

from analysis.bridges.module_links import bridge_genes, link_modules
from analysis.bridges.removal import candidates, gather_ranking, rank_tasks, remove_genes
from analysis.bridges.spreading import share_inside, spread_from, walk_from
from analysis.compute import InProcess, run_all
from analysis.errors import SettingError
from analysis.modules import Modules
from analysis.network import Network
from tests.graphs import lettered, random_labels, random_network, to_networkx


def efficiency_by_networkx(network: Network, labels: np.ndarray, gone: list[int], *, cut: bool) -> float:
    """Mean of 1 / distance over pairs of other nodes in different modules (Latora & Marchiori 2001)."""
    graph = to_networkx(network)
    if cut:
        graph.remove_nodes_from(gone)
    lengths = dict(nx.all_pairs_shortest_path_length(graph))
    kept = [node for node in range(network.node_count) if node not in gone]
    pairs = [(a, b) for a, b in itertools.permutations(kept, 2) if labels[a] != labels[b]]
    return sum(1 / lengths[a][b] for a, b in pairs if b in lengths[a]) / len(pairs)


@pytest.mark.parametrize("seed", range(4))
@pytest.mark.parametrize("count", [1, 3])
def test_paths_and_giant_component_as_networkx_finds_them(seed: int, count: int):
    network = random_network(seed, nodes=70, edges=90)  # more than one batch of 64 sources
    labels = random_labels(seed, 70, 4)
    gone = np.argsort(-network.degree, kind="stable")[:count].tolist()
    found = remove_genes(network, Modules.from_labels(labels), gone)
    assert found.exact
    assert found.before.efficiency == pytest.approx(efficiency_by_networkx(network, labels, gone, cut=False))
    assert found.after.efficiency == pytest.approx(efficiency_by_networkx(network, labels, gone, cut=True))
    graph = to_networkx(network)
    largest = max(nx.connected_components(graph), key=len)
    assert found.giant_before == len(largest - set(gone))
    graph.remove_nodes_from(gone)
    assert found.giant_after == len(max(nx.connected_components(graph), key=len))


def bridged() -> tuple[Network, Modules]:
    """Two triangles whose only link is x, which belongs to the first module."""
    network = lettered("ab ac bc de df ef ax dx")
    return network, Modules.from_labels(np.array([0, 0, 0, 1, 1, 1, 0]))


def test_a_bridge_by_hand():
    network, modules = bridged()
    found = remove_genes(network, modules, [network.index["x"]])
    assert (found.giant_before, found.giant_after) == (6, 3)
    assert found.split == ()
    # a–d is 2 apart, a–e a–f b–d c–d are 3, the other four are 4: (1/2 + 4/3 + 4/4) / 9 pairs
    assert found.before.efficiency == pytest.approx((1 / 2 + 4 / 3 + 1) / 9)
    assert found.after.efficiency == 0
    assert found.efficiency_lost == 1
    assert found.before.lengths[0, 1] == pytest.approx((2 + 4 * 3 + 4 * 4) / 9)
    assert (found.before.pairs[0, 1], found.after.pairs[0, 1]) == (9, 0)
    assert found.sentence(network) == (
        "Without x, 3 other genes leave the giant component, no module falls apart, and paths between modules lose "
        "100 % of their efficiency."
    )


def test_a_module_that_falls_apart():
    network = lettered("ab bc cd de")
    modules = Modules.from_labels(np.zeros(5, int))
    found = remove_genes(network, modules, [2])
    assert [(each.module, each.pieces) for each in found.split] == [(0, (2, 2))]
    assert remove_genes(network, modules, [0]).split == ()
    assert remove_genes(network, modules, range(5)).giant_after == 0


def test_the_ranking_is_what_single_removals_give():
    network = random_network(8, nodes=50, edges=70)
    modules = Modules.from_labels(random_labels(8, 50, 4))
    nodes = candidates(network, modules, 20)
    assert len(set(nodes.tolist())) == 20
    ranking = gather_ranking(nodes, run_all(InProcess(), network, rank_tasks(modules, nodes, chunk=7)))
    assert sorted(ranking.nodes.tolist()) == sorted(nodes.tolist())
    assert np.all(np.diff(ranking.efficiency_lost) <= 0)
    for place, node in enumerate(ranking.nodes):
        alone = remove_genes(network, modules, [node])
        assert ranking.efficiency_lost[place] == pytest.approx(alone.efficiency_lost)
        assert ranking.giant_lost[place] == alone.giant_before - alone.giant_after
        assert ranking.modules_split[place] == len(alone.split)


def test_the_bridge_comes_first():
    network, modules = bridged()
    ranking = gather_ranking(
        candidates(network, modules), [task.run(network) for task in rank_tasks(modules, candidates(network, modules))]
    )
    assert network.names[ranking.nodes[0]] in {"x", "a", "d"}
    assert ranking.efficiency_lost[0] == 1


def test_a_large_network_is_sampled():
    network = random_network(2, nodes=2_100, edges=5_000)
    modules = Modules.from_labels(random_labels(2, 2_100, 40))
    found = remove_genes(network, modules, [int(network.degree.argmax())])
    assert not found.exact
    assert found.sources < 2_100
    assert found.before.pairs.shape == (25, 25)
    assert found.efficiency_lost == remove_genes(network, modules, [int(network.degree.argmax())]).efficiency_lost


def test_links_between_modules_by_hand():
    network, modules = bridged()
    links = link_modules(network, modules)
    assert (links.first.tolist(), links.second.tolist(), links.edges.tolist()) == ([0], [1], [1.0])
    # 9 ends (7 in abc, 2 in x) and 7, 2m = 16: 9 · 7 / 15
    assert links.expected[0] == pytest.approx(63 / 15)
    assert not links.beyond_chance()[0]
    assert bridge_genes(network, modules, 0, 1) == [(network.index["d"], 1), (network.index["x"], 1)]


def test_expected_links_and_their_spread_as_random_matchings_give_them():
    network = random_network(3, nodes=30, edges=60)
    labels = random_labels(3, 30, 3)
    modules = Modules.from_labels(labels)
    links = link_modules(network, modules)
    home = modules.labels[np.repeat(np.arange(30), network.degree)]
    random = np.random.default_rng(1)
    draws = []
    for _ in range(4_000):
        mixed = random.permutation(home).reshape(-1, 2)
        low, high = mixed.min(axis=1), mixed.max(axis=1)
        draws.append([int(((low == a) & (high == b)).sum()) for a, b in zip(links.first, links.second, strict=True)])
    table = np.array(draws)
    assert table.mean(axis=0) == pytest.approx(links.expected, rel=0.03)
    assert table.std(axis=0) == pytest.approx((links.edges - links.expected) / links.z, rel=0.05)


@pytest.mark.parametrize("weighted", [False, True])
def test_the_walk_as_a_linear_system_gives_it(weighted: bool):
    network = random_network(4, nodes=40, edges=80, weighted=weighted)
    leave = np.divide(1.0, network.strength, out=np.zeros(40), where=network.strength > 0)
    step = network.adjacency.multiply(leave[None, :]) + np.diag((network.strength == 0).astype(float))
    origin = np.zeros(40)
    origin[7] = 1
    solved = spsolve(csc_array(eye_array(40) - 0.7 * csc_array(step)), 0.3 * origin)
    assert walk_from(network, [7], 0.3)[:, 0] == pytest.approx(solved, abs=1e-11)
    assert walk_from(network, [1, 7]).sum(axis=0) == pytest.approx([1, 1])


def test_spread_along_edges():
    network = lettered("ab bc de")
    assert spread_from(network, 0, chance=1.0, runs=3).tolist() == [1, 1, 1, 0, 0]
    assert spread_from(network, 0, chance=0.0, runs=3).tolist() == [1, 0, 0, 0, 0]
    # a chain: b is reached with the chance, c with its square
    found = spread_from(network, 0, chance=0.5, runs=2_000)
    assert found[:3] == pytest.approx([1, 0.5, 0.25], abs=0.05)


def test_what_stays_inside():
    network, modules = bridged()
    assert share_inside(modules, 0, spread_from(network, 0, chance=1.0, runs=1)) == pytest.approx(3 / 6)
    alone = Network.from_edges([("a", "b")], nodes=["c"])
    assert np.isnan(share_inside(Modules.from_labels(np.array([0, 0, 1])), 2, walk_from(alone, [2])[:, 0]))


@pytest.mark.parametrize("wrong", [0.0, 1.0])
def test_settings_out_of_range(wrong: float):
    network, _ = bridged()
    with pytest.raises(SettingError, match="begin anew"):
        walk_from(network, [0], wrong)
    with pytest.raises(SettingError, match="pass on"):
        spread_from(network, 0, chance=wrong + 1.5)
