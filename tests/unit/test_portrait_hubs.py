"""Hubs, and the caution about study."""

from __future__ import annotations

import networkx as nx
import numpy as np
import pytest
from scipy import stats

from analysis.errors import InputError
from analysis.network import Network
from analysis.portrait.hubs import Hubs, HubTask, gather_hubs, parse_publications
from analysis.portrait.summary import OwnFiguresTask
from tests.graphs import random_network, to_networkx


def hubs_of(network: Network, publications: dict[str, float] | None = None) -> Hubs:
    own = OwnFiguresTask().run(network)
    return gather_hubs(network, HubTask(1).run(network), own.local, own.core, publications)


@pytest.mark.parametrize("seed", range(4))
def test_what_hangs_on_a_hub_agrees_with_networkx(seed: int):
    network = random_network(seed, nodes=60, edges=70)
    hubs = hubs_of(network)
    graph = to_networkx(network)
    giant = max(nx.connected_components(graph), key=len)
    assert len(hubs.nodes) == 10
    assert hubs.cut == hubs.degree.min()
    assert set(np.flatnonzero(network.degree > hubs.cut).tolist()) <= set(hubs.nodes.tolist())
    assert np.all(np.diff(hubs.degree) <= 0)
    together = graph.copy()
    for place, node in enumerate(hubs.nodes.tolist()):
        alone = graph.copy()
        alone.remove_node(node)
        left = max((len(piece & giant) for piece in nx.connected_components(alone)), default=0)
        assert hubs.lost[place] == (len(giant) - 1 - left if node in giant else 0)
        together.remove_node(node)
        assert hubs.giant_without[place] == max(map(len, nx.connected_components(together))) / 60
        assert hubs.core[place] == nx.core_number(graph)[node]
        assert hubs.clustering[place] == pytest.approx(nx.clustering(graph, node))


def test_degree_against_publications_is_spearman_s():
    network = random_network(3, nodes=80, edges=200)
    counts = {name: float(2 * network.degree[node] + node % 7) for node, name in enumerate(network.names) if node % 3}
    hubs = hubs_of(network, counts)
    nodes = [network.index[name] for name in counts]
    expected = stats.spearmanr(network.degree[nodes], list(counts.values()))
    assert hubs.counted == len(counts)
    assert (hubs.correlation, hubs.p_value) == pytest.approx((expected.statistic, expected.pvalue))
    assert "rises with" in hubs.study_sentence()
    assert hubs_of(network).study_sentence() == ""
    assert "Too few" in hubs_of(network, {"nobody": 3.0}).study_sentence()


def test_publications_are_read_line_by_line():
    assert parse_publications("gene\tcount\nab1\t12\n# aside\n\nac2\t0\n", "p.tsv") == {"ab1": 12.0, "ac2": 0.0}
    assert parse_publications("ab1,3", "p.csv") == {"ab1": 3.0}
    with pytest.raises(InputError, match=r"p\.tsv, line 2: 'ac2\\tmany' is no gene with a number"):
        parse_publications("ab1\t3\nac2\tmany\n", "p.tsv")
    with pytest.raises(InputError, match="line 2"):
        parse_publications("ab1\t3\nac2\n", "p.tsv")
