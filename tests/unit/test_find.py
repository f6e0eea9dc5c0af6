"""Find: what a typed or pasted text names."""

from __future__ import annotations

import pytest

from analysis.evidence import run_study
from analysis.network import Network
from analysis.study import StudySettings
from app.find import find

EDGES = [
    ("abc1", "Abd2"),
    ("Abd2", "xyz"),
    ("xyz", "XYZ2"),
    ("abc1", "xyz"),
    ("M2", "xyz"),
    ("dup", "xyz"),
    ("DUP", "xyz"),
]


@pytest.fixture(scope="module")
def network():
    return Network.from_edges(EDGES)


@pytest.fixture(scope="module")
def study(network):
    return run_study(network, StudySettings(runs=2, noise=0, nulls=0, resolution=2.0, names={"M1": "salt gate"}))


def test_a_gene_by_its_exact_name(network, study):
    assert find(" abc1 ", network, study).genes == (network.index["abc1"],)


def test_case_is_ignored_where_only_one_gene_is_meant(network, study):
    assert find("abd2", network, study).genes == (network.index["Abd2"],)
    ambiguous = find("Dup", network, study)
    assert ambiguous.genes == ()
    assert set(ambiguous.similar) == {network.index["dup"], network.index["DUP"]}


def test_a_gene_comes_before_a_module_of_that_name(network, study):
    assert find("M2", network, study).genes == (network.index["M2"],)
    assert find("m1", network, study).module == 0


def test_a_module_by_the_name_given_to_it(network, study):
    assert find("Salt Gate", network, study).module == 0


def test_a_pasted_list_keeps_its_order_and_names_what_is_missing(network, study):
    found = find("xyz, nosuch;abc1\nxyz\tnosuch", network, study)
    assert found.genes == (network.index["xyz"], network.index["abc1"])
    assert found.missing == ("nosuch",)


def test_what_is_similar_is_offered(network, study):
    found = find("ab", network, study)
    assert {network.names[node] for node in found.similar} == {"abc1", "Abd2"}


def test_without_a_clustering_no_module_is_found(network):
    assert find("M1", network, None).module is None
    assert find("", network, None) == find("   ", network, None)
