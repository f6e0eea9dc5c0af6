"""The report: one file that asks for nothing, in which names are text and nothing else."""

from __future__ import annotations

import re
import xml.etree.ElementTree as ET
from dataclasses import replace

import networkx as nx
import numpy as np
import pytest

from analysis.handover import Bundle, bundle_files
from analysis.handover.report import report_file
from analysis.handover.report.charts import confidence_chart, null_chart, size_chart
from analysis.handover.report.citations import REFERENCES, cited
from analysis.handover.report.map_figure import draw_modules, fit
from analysis.handover.report.markup import Markup, join, tag
from analysis.handover.report.methods_text import methods_sentences
from analysis.layout import layout
from analysis.study import NullDraws
from analysis.verdicts import CLUSTERED_CAUTION, DEGREE_CAUTION, STRUCTURE_CAUTION, USE_CAUTION
from tests.handover import NASTY, bundle_of, karate_text, with_nulls

NEVER_IN_A_REPORT = {"script", "img", "link", "iframe", "object", "embed", "form", "base", "a", "use", "image"}


def _page(bundle: Bundle) -> str:
    return report_file(bundle)["report.html"].decode()


def _tree(page: str) -> ET.Element:
    """Parse the page as XML, which it is too: every tag closed, every special character escaped."""
    return ET.fromstring(page.removeprefix("<!DOCTYPE html>"))  # noqa: S314 - our own page


def _text(tree: ET.Element) -> str:
    return " ".join(" ".join(tree.itertext()).split())


@pytest.fixture(scope="module")
def karate() -> Bundle:
    bundle = bundle_of(karate_text(), "karate.txt", names={"M1": 'the "first" <group>'})
    return replace(bundle, study=with_nulls(bundle.study))


def test_sentences_come_first_and_cautions_are_there(karate):
    text = _text(_tree(_page(karate)))
    first = text.index(karate.study.sentences[0])
    assert first < text.index("The map") < text.index("The modules")
    for caution in (STRUCTURE_CAUTION, DEGREE_CAUTION, CLUSTERED_CAUTION, USE_CAUTION):
        assert caution in text


def test_every_module_setting_and_version_stands_in_it(karate):
    text = _text(_tree(_page(karate)))
    for module in karate.study.modules.numbers:
        assert module in text
    assert 'M1 “the "first" <group>”' in text
    for word in ("leiden", "modularity", karate.study.network.fingerprint, "igraph", karate.source.sha256):
        assert word in text


def test_names_stay_text():
    page = _page(bundle_of(NASTY))
    tree = _tree(page)
    tags = {element.tag for element in tree.iter()}
    assert not tags & NEVER_IN_A_REPORT
    assert not any(name.startswith("on") for element in tree.iter() for name in element.attrib)
    text = _text(tree)
    for gene in ("<script>alert(1)</script>", 'x"><img src=x onerror=alert(1)>', "&amp;"):
        assert gene in text


def test_names_of_modules_networks_and_files_stay_text():
    bundle = bundle_of(karate_text(), "<img src=x>.txt", names={"M2": "</style><script>x</script>"})
    tree = _tree(_page(bundle))
    assert not {element.tag for element in tree.iter()} & NEVER_IN_A_REPORT
    assert "Modules of <img src=x>" in _text(tree)


def test_it_names_no_other_host(karate):
    page = _page(karate)
    assert not re.search(r"https?:|//[a-z]|url\((?!#)|@import", page)


def test_characters_that_html_forbids_are_replaced():
    assert tag("p", "a\x00b\x1bc\ud800") == "<p>a\ufffdb\ufffdc\ufffd</p>"


def test_text_is_escaped_and_markup_is_not():
    assert tag("b", "<", Markup("<i></i>"), ["&", None], title='"') == '<b title="&quot;">&lt;<i></i>&amp;</b>'
    assert join(["a", ["<"]]) == "a&lt;"


def test_without_evidence_it_says_that_nothing_is_known():
    text = _text(_tree(_page(bundle_of(karate_text(), runs=1, noise=0.0))))
    assert "it is not known whether chance alone" in text
    assert "it is not known how surely genes stay" in text


@pytest.mark.parametrize(
    "settings",
    [
        {"method": "louvain"},
        {"method": "clique-percolation", "k": 3},
        {"method": "clique-percolation", "k": 9},
        {"method": "harvest", "nulls": 3},
        {"method": "harvest", "keep": "all"},
        {"resolution": "suggest", "show": "consensus", "nulls": 5},
        {"quality": "cpm", "resolution": 0.2},
        {"resolution": 50.0},
    ],
)
def test_every_method_gives_a_whole_page(settings):
    tree = _tree(_page(bundle_of(karate_text(), **settings)))
    assert tree.find("body/main") is not None


def test_very_many_single_genes_are_counted_and_not_listed():
    bundle = bundle_of(karate_text(), resolution=1000.0)
    assert len(bundle.study.modules) == 34
    tree = _tree(_page(bundle))
    assert "34 modules of a single gene each are in modules.csv" in _text(tree)
    assert tree.findall(".//details[@class='module']") == []


def test_the_map_has_every_gene_and_edge(karate):
    tree = _tree(_page(karate))
    figure = tree.find(".//figure[@class='map']")
    titles = [title.text for title in figure.iter("title")][1:]
    assert sorted(title.split(",")[0] for title in titles) == list(karate.study.network.names)
    edges = sum(path.get("d").count("L") for path in figure.iter("path"))
    assert edges == karate.study.network.edge_count


def test_a_large_network_is_drawn_by_modules(karate):
    sheet = fit(layout(karate.study.network))
    drawn = ET.fromstring(draw_modules(karate.study, sheet).picture)  # noqa: S314 - our own drawing
    discs = list(drawn.iter("circle"))
    assert len(discs) == len(karate.study.modules)
    areas = np.array([float(disc.get("r")) ** 2 for disc in discs])
    assert np.allclose(areas / areas[0], karate.study.modules.sizes / karate.study.modules.sizes[0], rtol=0.01)
    network = karate.study.network
    graph = nx.Graph(zip(network.sources.tolist(), network.targets.tolist(), strict=True))
    joined = nx.quotient_graph(graph, [set(members.tolist()) for members in karate.study.modules.members])
    assert len(list(drawn.iter("line"))) == joined.number_of_edges()


def test_positions_fill_the_sheet_without_being_stretched():
    sheet = fit(np.array([[0.0, 0.0], [10.0, 0.0], [0.0, 30.0]]))
    one, other, third = sheet.points
    assert np.hypot(*(third - one)) == pytest.approx(3 * np.hypot(*(other - one)))
    assert sheet.points.min() > 0
    assert sheet.points[:, 1].max() < sheet.height


def test_histograms_count_what_they_are_given():
    confidence = ET.fromstring(confidence_chart(np.array([0.0, 0.05, 0.6, 0.95, 1.0])))  # noqa: S314
    counts = [text.text for text in confidence.iter("text") if "." not in text.text]
    assert counts == ["2", "1", "2"]
    sizes = ET.fromstring(size_chart([12, 9, 3, 2, 1]))  # noqa: S314
    assert [text.text for text in sizes.iter("text")] == ["1", "1", "2", "2–3", "4–7", "2", "8–15"]


def test_nulls_that_are_all_alike_can_be_drawn():
    assert "here 0.500" in null_chart(NullDraws(0.5, np.full(5, 0.5)))


def test_references_are_numbered_as_they_come():
    text, sources = cited(["A [leiden].", "B [modularity, leiden].", "[unknown] [modularity]"])
    assert text == "A [1]. B [1, 2]. [unknown] [2]"
    assert sources == [REFERENCES["leiden"], REFERENCES["modularity"]]


def test_the_methods_cite_what_was_used_and_nothing_else(karate):
    text, sources = cited(methods_sentences(karate))
    assert any("From Louvain to Leiden" in source for source in sources)
    assert not any("Fast unfolding" in source for source in sources)
    assert "100 random networks" in text
    assert "34 nodes and 78 edges" in text
    plain, _ = cited(methods_sentences(bundle_of(karate_text(), method="louvain", noise=0.0)))
    assert "random networks" not in plain
    assert not re.search(r"\[[a-z]", text + plain)


def test_the_same_bundle_gives_the_same_bytes(karate):
    assert bundle_files(karate) == bundle_files(karate)
