"""GraphML, read back with networkx and igraph."""

from __future__ import annotations

import io
from dataclasses import replace

import igraph
import networkx as nx
import pytest

from analysis.evidence import run_study
from analysis.handover import Bundle
from analysis.handover.graph_file import graphml_file, xml_names
from analysis.study import StudySettings
from tests.handover import NASTY, bundle_of, karate_text, names_with


def _read(bundle: Bundle) -> nx.Graph:
    return nx.read_graphml(io.BytesIO(graphml_file(bundle)["network.graphml"]))


def test_networkx_reads_the_same_network_and_the_same_modularity():
    study = bundle_of(karate_text()).study
    graph = _read(Bundle(study))
    assert sorted(graph.nodes) == list(study.network.names)
    assert graph.number_of_edges() == study.network.edge_count
    homes = nx.get_node_attributes(graph, "module")
    groups = [{gene for gene, home in homes.items() if home == module} for module in study.modules.numbers]
    assert nx.community.modularity(graph, groups) == pytest.approx(study.modularity, abs=1e-12)


def test_igraph_reads_the_same_modularity(tmp_path):
    study = bundle_of(karate_text()).study
    path = tmp_path / "network.graphml"
    path.write_bytes(graphml_file(Bundle(study))["network.graphml"])
    graph = igraph.Graph.Read_GraphML(str(path))
    numbers = [int(module[1:]) for module in graph.vs["module"]]
    assert graph.modularity(numbers) == pytest.approx(study.modularity, abs=1e-12)


def test_weights_confidence_and_role_are_carried():
    study = bundle_of(NASTY).study
    graph = _read(Bundle(study))
    assert graph["ADE5,7"]["&amp;"]["weight"] == 0.3333333333333333
    table = study.membership.set_index("gene")
    for gene, data in graph.nodes(data=True):
        assert data["confidence"] == table.loc[gene, "confidence"]
        assert data["role"] == table.loc[gene, "role"]


def test_a_gene_of_several_modules_names_them_all():
    study = bundle_of(karate_text(), method="clique-percolation", k=3).study
    graph = _read(Bundle(study))
    for gene, rows in study.membership.groupby("gene"):
        assert graph.nodes[gene]["modules"].split() == rows["module"].tolist()
    alone = set(study.network.names) - set(study.membership["gene"])
    assert len(alone) == 2  # the union of the k = 3 communities of the karate club leaves two (computed with networkx)
    assert all("module" not in graph.nodes[gene] for gene in alone)


def test_characters_that_xml_forbids_leave_names_apart():
    network = names_with("a\x00b", "a\x01b", "a\ufffdb", "tab\there")
    study = run_study(network, StudySettings(runs=1, noise=0.0, nulls=0))
    graph = _read(Bundle(study))
    assert graph.number_of_nodes() == 4
    assert "a\ufffdb" in graph
    assert len(set(xml_names(network.names))) == 4


def test_names_of_people_do_not_enter_as_markup():
    bundle = bundle_of(NASTY)
    named = replace(bundle, study=bundle.study.named({"M1": "<b>"}))
    assert sorted(_read(named).nodes) == list(bundle.study.network.names)
