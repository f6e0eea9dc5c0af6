"""Two clusterings side by side: flows, matches, moved genes, agreement, preservation, and the figure of flows."""

from __future__ import annotations

import xml.etree.ElementTree as ET
from dataclasses import replace

import networkx as nx
import numpy as np
import pytest
from sklearn.metrics import adjusted_mutual_info_score, adjusted_rand_score, normalized_mutual_info_score

from analysis.compare import Clustering, ComparisonSettings, compare, comparison_sentences
from analysis.errors import Cancelled, SettingError
from analysis.handover.report.flow_figure import draw_flows
from analysis.methods.clique_percolation import CliquePercolation
from analysis.modules import Modules
from analysis.network import Network
from analysis.trust.nulls import rewire, rewire_share
from tests.graphs import random_labels, random_network, to_networkx
from tests.planted import from_networkx

QUICK = ComparisonSettings(permutations=20)


def clustering(network: Network, labels: list[int], label: str = "one") -> Clustering:
    return Clustering(network, Modules.from_labels(np.array(labels)), label)


@pytest.fixture(scope="module")
def ring() -> Network:
    return from_networkx(nx.cycle_graph(8))


def test_by_hand(ring):
    found = compare(clustering(ring, [0, 0, 0, 0, 1, 1, 1, -1]), clustering(ring, [0, 0, 0, 1, 1, 1, 1, 1], "other"))
    flows = {(row.first, row.second): row.genes for row in found.flows.itertuples()}
    # M1 of the second holds five genes, M2 three
    assert flows == {("M1", "M2"): 3, ("M1", "M1"): 1, ("M2", "M1"): 3, ("", "M1"): 1}
    matches = found.matches.set_index(["clustering", "module"])
    assert matches.loc[("first", "M1"), "best_match"] == "M2"
    assert matches.loc[("first", "M1"), "jaccard"] == 3 / 4
    assert matches.loc[("first", "M2"), "jaccard"] == 3 / 5
    assert matches.loc[("second", "M1"), "best_match"] == "M2"
    moved = found.moved.set_index("gene")["change"].to_dict()
    assert moved == {ring.names[3]: "moved", ring.names[7]: "in a module now"}
    assert found.preservation is None


def test_scores_are_those_of_scikit_learn():
    network = random_network(1, nodes=60)
    one, other = random_labels(2, 60, 5), random_labels(3, 60, 7)
    scores = compare(clustering(network, one.tolist()), clustering(network, other.tolist(), "other")).scores
    assert scores.ari == pytest.approx(adjusted_rand_score(one, other))
    assert scores.nmi == pytest.approx(normalized_mutual_info_score(one, other))
    assert scores.ami == pytest.approx(adjusted_mutual_info_score(one, other))
    assert scores.meanings.keys() == scores.figures.keys()


def test_a_clustering_beside_itself_is_the_same_and_nothing_moves(ring):
    same = clustering(ring, [0, 0, 0, 1, 1, 1, -1, -1])
    found = compare(same, replace(same, label="again"))
    assert found.moved.empty
    assert found.matches["jaccard"].tolist() == [1.0] * 4
    assert (found.scores.ari, found.scores.ami, found.scores.vi) == (1.0, pytest.approx(1.0), 0.0)


def test_flows_of_a_partition_count_each_gene_once():
    network = random_network(1, nodes=60)
    one, other = random_labels(2, 60, 5).tolist(), random_labels(3, 60, 7).tolist()
    flows = compare(clustering(network, one), clustering(network, other, "other")).flows
    assert flows["genes"].sum() == 60
    assert np.allclose(flows.groupby("first")["share_of_first"].sum(), 1)
    assert np.allclose(flows.groupby("second")["share_of_second"].sum(), 1)


def test_only_shared_genes_count():
    one = Network.from_edges([("a", "b"), ("b", "c"), ("c", "d")])
    other = Network.from_edges([("b", "c"), ("c", "x"), ("x", "y")])
    found = compare(clustering(one, [0, 0, 1, 1]), clustering(other, [0, 0, 1, 1], "other"), QUICK)
    assert (found.genes, found.only_first, found.only_second) == (2, 2, 2)
    assert found.flows["genes"].sum() == 2
    assert any("2 of the first alone" in sentence for sentence in comparison_sentences(found))


def test_networks_without_a_shared_gene_are_refused(ring):
    stranger = Network.from_edges([("x", "y")])
    with pytest.raises(SettingError, match="same kind of names"):
        compare(clustering(ring, [0] * 8), clustering(stranger, [0, 0], "other"))


def test_covers_compare_and_their_scores_say_so(karate):
    cover = Clustering(karate, CliquePercolation(k=3).find(karate), "cliques")
    found = compare(cover, clustering(karate, [0] * 17 + [1] * 17, "halves"))
    assert found.scores.caution
    homes = cover.modules.homes
    assert found.flows["genes"].sum() == homes.sum() + (homes == 0).sum()


# preservation, against figures computed with networkx and numpy on the same modules


@pytest.fixture(scope="module")
def planted() -> Clustering:
    network = from_networkx(nx.planted_partition_graph(6, 20, 0.5, 0.03, seed=1))
    truth = [int(name) // 20 for name in network.names]
    return Clustering(network, Modules.from_labels(np.array(truth)), "planted")


def test_what_is_found_equals_the_definition(planted):
    other = rewire_share(planted.network, 0.4, 3)
    table = compare(planted, replace(planted, network=other, label="noisy"), QUICK).preservation
    rows = table[table["modules_of"] == "first"]
    here, there = (nx.to_numpy_array(to_networkx(network)) for network in (planted.network, other))
    for members, row in zip(planted.modules.members, rows.to_dict("records"), strict=True):
        a, b = here[np.ix_(members, members)], there[np.ix_(members, members)]
        pairs = np.triu_indices(len(members), 1)
        assert row["density"] == pytest.approx(b[pairs].mean())
        assert row["degree_correlation"] == pytest.approx(np.corrcoef(a.sum(0), b.sum(0))[0, 1])
        assert row["edge_correlation"] == pytest.approx(np.corrcoef(a[pairs], b[pairs])[0, 1])


def test_weights_count_too():
    network = random_network(5, nodes=30, edges=150, weighted=True)
    other = random_network(6, nodes=30, edges=150, weighted=True)
    found = Clustering(network, Modules.from_labels(random_labels(1, 30, 2)), "one")
    table = compare(found, replace(found, network=other, label="other"), QUICK).preservation
    there = nx.to_numpy_array(to_networkx(other))
    for members, density in zip(found.modules.members, table["density"], strict=False):
        assert density == pytest.approx(there[np.ix_(members, members)][np.triu_indices(len(members), 1)].mean())


def test_planted_modules_are_held_together_by_a_noisy_copy_and_not_by_chance(planted):
    """Marks of the summary: below 2 no evidence, from 10 on strong (Langfelder et al. 2011, from memory)."""
    noisy = replace(planted, network=rewire_share(planted.network, 0.1, 1), label="noisy")
    kept = compare(planted, noisy).preservation
    assert (kept["z_summary"] >= 10).all()
    assert (kept["p_density"] == 1 / 101).all()
    chance = compare(planted, replace(planted, network=rewire(planted.network, 2), label="chance")).preservation
    first = chance[chance["modules_of"] == "first"]
    assert (first["z_summary"] < 2).mean() >= 0.8


def test_the_mean_density_of_random_modules_is_that_of_the_network(planted):
    other = rewire(planted.network, 1)
    settings = ComparisonSettings(permutations=400)
    table = compare(planted, replace(planted, network=other, label="other"), settings).preservation
    assert table["random_density"].to_numpy() == pytest.approx(nx.density(to_networkx(other)), rel=0.05)


def test_covers_are_scored_module_by_module(karate):
    cover = Clustering(karate, CliquePercolation(k=3).find(karate), "cliques")
    other = rewire_share(karate, 0.3, 1)
    table = compare(cover, replace(cover, network=other, label="noisy"), QUICK).preservation
    there = nx.to_numpy_array(to_networkx(other))
    for members, density in zip(cover.modules.members, table["density"], strict=False):
        assert density == pytest.approx(there[np.ix_(members, members)][np.triu_indices(len(members), 1)].mean())


def test_small_modules_and_cliques_have_no_figures_that_nobody_can_know():
    clique = from_networkx(nx.complete_graph(6))
    pair = clustering(clique, [0, 0, 0, 0, 1, 1])
    table = compare(pair, replace(pair, network=rewire_share(clique, 0, 1).with_edges(np.arange(15) > 2)), QUICK)
    rows = table.preservation.set_index(["modules_of", "module"])
    assert np.isnan(rows.loc[("first", "M2"), "density"])
    assert np.isnan(rows.loc[("first", "M1"), "degree_correlation"])
    assert rows.loc[("first", "M1"), "evidence"] == "not known"


def test_the_same_seed_gives_the_same_table_and_a_stop_stops(planted):
    other = replace(planted, network=rewire(planted.network, 2), label="other")
    once, again = (compare(planted, other, QUICK).preservation for _ in range(2))
    assert once.equals(again)
    assert not once.equals(compare(planted, other, ComparisonSettings(20, seed=2)).preservation)

    def stop(_fraction: float, _phrase: str) -> None:
        raise Cancelled("stopped")

    with pytest.raises(Cancelled):
        compare(planted, other, QUICK, stop)


@pytest.mark.parametrize("settings", [{"permutations": 1}, {"permutations": -1}, {"seed": -1}])
def test_settings_out_of_range_are_refused(settings):
    with pytest.raises(SettingError, match="--"):
        ComparisonSettings(**settings)


def test_the_figure_has_a_band_for_each_flow_as_wide_as_its_genes(ring):
    found = compare(
        clustering(ring, [0, 0, 0, 0, 1, 1, 1, -1], "<one>"), clustering(ring, [0, 0, 0, 1, 1, 1, 1, 1], "other")
    )
    drawn = ET.fromstring(draw_flows(found))  # noqa: S314 - our own drawing
    words = {title.text for path in drawn.iter("path") for title in path.iter("title")}
    assert words == {"M1 → M2: 3 genes", "M1 → M1: 1 gene", "M2 → M1: 3 genes", "no module → M1: 1 gene"}
    heights = [float(box.get("height")) for box in drawn.iter("rect")]
    assert sum(heights[:3]) == pytest.approx(sum(heights[3:]), abs=0.1)


def test_many_small_modules_are_drawn_together():
    network = random_network(1, nodes=60)
    found = compare(clustering(network, list(range(60))), clustering(network, [0] * 60, "all"))
    drawn = ET.fromstring(draw_flows(found, most=5))  # noqa: S314
    assert len(list(drawn.iter("path"))) == 6
    assert any("smaller ones · 55" in (text.text or "") for text in drawn.iter("text"))
