"""The close-up: which genes and edges it shows, and where."""

from __future__ import annotations

import numpy as np

from analysis.layout import layout
from analysis.modules import Modules
from app.map.closeup import NODES_SHOWN, gene_closeup, module_closeup
from tests.planted import planted_network

PLANTED = planted_network([60, 40, 30], seed=5)
MODULES = Modules.from_labels(np.maximum(PLANTED.labels, 0))
POSITIONS = layout(PLANTED.network)
HUES = np.arange(len(MODULES), dtype=np.uint16)


def split(elements):
    nodes = [each for each in elements if "source" not in each["data"]]
    return nodes, [each for each in elements if "source" in each["data"]]


def test_a_module_comes_whole_with_its_neighbours():
    elements, sentence = module_closeup(PLANTED.network, MODULES, HUES, POSITIONS, 1)
    nodes, edges = split(elements)
    shown = {int(node["data"]["id"]) for node in nodes}
    members = set(MODULES.members[1].tolist())
    assert members <= shown
    around = {int(n) for m in members for n in PLANTED.network.igraph.neighbors(m)} - members
    assert shown - members <= around
    assert f"{len(shown)} genes" in sentence
    ends = {(int(edge["data"]["source"]), int(edge["data"]["target"])) for edge in edges}
    known = set(zip(PLANTED.network.sources.tolist(), PLANTED.network.targets.tolist(), strict=True))
    assert ends <= known
    assert {pair for pair in known if set(pair) <= members} <= ends


def test_a_gene_stands_in_the_middle_of_its_partners():
    node = int(PLANTED.network.degree.argmax())
    elements, sentence = gene_closeup(PLANTED.network, MODULES, HUES, POSITIONS, node)
    nodes, _ = split(elements)
    partners = {int(other) for other in PLANTED.network.igraph.neighbors(node)}
    assert {int(each["data"]["id"]) for each in nodes} == partners | {node}
    centre = next(each for each in nodes if each["classes"] == "centre")
    assert centre["position"] == {"x": 0.0, "y": 0.0}
    places = {(each["position"]["x"], each["position"]["y"]) for each in nodes}
    assert len(places) == len(nodes)
    assert PLANTED.network.names[node] in sentence


def test_what_is_not_drawn_is_counted():
    big = planted_network([NODES_SHOWN + 100], seed=1, inside=0.05)
    modules = Modules.from_labels(np.zeros(big.network.node_count, int))
    elements, sentence = module_closeup(big.network, modules, np.zeros(1, np.uint16), layout(big.network), 0)
    assert len(split(elements)[0]) == NODES_SHOWN
    assert "100 less connected genes are not drawn" in sentence
