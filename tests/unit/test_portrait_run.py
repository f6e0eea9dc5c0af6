"""The portrait as a whole: streaming, workers, a stop, what is written and what is kept."""

from __future__ import annotations

import itertools
import json
from pathlib import Path

import numpy as np
import pytest

from analysis.compute import LocalProcesses
from analysis.errors import Cancelled, SettingError
from analysis.handover.portrait import PortraitBundle, portrait_figures, portrait_files
from analysis.network import Network
from analysis.portrait import Portrait, PortraitSettings, run_portrait
from app.cli import main
from app.workspace.encoding import result_from_arrays, result_to_arrays
from tests.graphs import lettered, random_network

QUICK = PortraitSettings(nulls=2, draws=2, samples=10)
SECTIONS = ("summary", "degrees", "hierarchy", "distances", "tolerance", "hubs")


@pytest.fixture(scope="module")
def portrait(karate: Network) -> Portrait:
    return run_portrait(karate, QUICK)


def text(network: Network, portrait: Portrait) -> bytes:
    return portrait_files(PortraitBundle(network, portrait))["portrait.json"]


def test_sections_come_one_after_another_and_stay(karate: Network):
    seen: list[list[str]] = []
    complete: list[bool] = []

    def look(portrait: Portrait) -> None:
        seen.append([name for name in SECTIONS if getattr(portrait, name) is not None])
        complete.append(portrait.complete)

    run_portrait(karate, QUICK, on_section=look)
    assert seen[0] == ["summary", "hierarchy"]
    assert all(set(before) <= set(after) for before, after in itertools.pairwise(seen))
    assert seen[-1] == list(SECTIONS)
    assert complete == [False] * (len(complete) - 1) + [True]


def test_workers_do_not_change_it(karate: Network, portrait: Portrait):
    processes = LocalProcesses(2)
    try:
        assert text(karate, run_portrait(karate, QUICK, compute=processes)) == text(karate, portrait)
    finally:
        processes.close()


def test_the_seed_decides(karate: Network, portrait: Portrait):
    assert text(karate, run_portrait(karate, QUICK)) == text(karate, portrait)
    other = run_portrait(karate, PortraitSettings(nulls=2, draws=2, samples=10, seed=2))
    assert text(karate, other) != text(karate, portrait)


def test_it_stops_when_asked(karate: Network):
    def stop(fraction: float, _phrase: str) -> None:
        if fraction > 0.3:
            raise Cancelled("enough")

    with pytest.raises(Cancelled):
        run_portrait(karate, QUICK, progress=stop)


@pytest.mark.parametrize(
    "network",
    [lettered("ab"), lettered("ab bc ca", nodes="xyz"), lettered("ab cd", [1.0, 2.0]), lettered("ab ac ad ae af")],
    ids=["one edge", "lone genes", "two pieces", "star"],
)
def test_small_networks_have_a_portrait(network: Network):
    found = run_portrait(network, QUICK)
    assert all(getattr(found, name) is not None for name in SECTIONS)
    assert all(sentence.endswith(".") for sentence in found.sentences())
    json.loads(text(network, found))


def test_a_network_without_edges_has_none():
    with pytest.raises(SettingError, match="no portrait"):
        run_portrait(Network.from_edges([], nodes=["a", "b"]))
    with pytest.raises(SettingError):
        PortraitSettings(draws=0)


def test_every_figure_has_a_reading_a_source_a_drawing_and_its_data(karate: Network, portrait: Portrait):
    import xml.etree.ElementTree as ET

    figures = portrait_figures(karate, portrait)
    assert [each.key for each in figures] == [
        "degree_distribution",
        "degrees_cumulative",
        "clustering_by_degree",
        "distances",
        "removals",
    ]
    for figure in figures:
        assert figure.reading.endswith(".")
        assert figure.source
        ET.fromstring(figure.picture())  # noqa: S314 - our own
        assert figure.data().count(b"\n") > 2


def test_a_figure_of_study_comes_with_publications():
    network = random_network(1, nodes=40, edges=90)
    counts = {name: float(node) for node, name in enumerate(network.names)}
    found = run_portrait(network, QUICK, publications=counts)
    assert portrait_figures(network, found)[-1].key == "study_bias"
    content = json.loads(text(network, found))
    assert content["hubs"]["publications"]["genes"] == 40


def test_it_is_kept_and_found_again(portrait: Portrait, karate: Network):
    again = result_from_arrays(result_to_arrays(portrait))
    assert text(karate, again) == text(karate, portrait)
    assert isinstance(again, Portrait)
    assert again.degrees is not None
    assert portrait.degrees is not None
    np.testing.assert_array_equal(again.degrees.reaching, portrait.degrees.reaching)


def test_the_command_writes_a_whole_folder(tmp_path: Path, capsys: pytest.CaptureFixture[str]):
    source, studied, out = tmp_path / "n.tsv", tmp_path / "p.tsv", tmp_path / "out"
    network = random_network(6, nodes=40, edges=80)
    names = network.names
    pairs = zip(network.sources.tolist(), network.targets.tolist(), strict=True)
    source.write_text("".join(f"{names[a]}\t{names[b]}\n" for a, b in pairs), encoding="utf-8")
    studied.write_text("".join(f"{name}\t{node}\n" for node, name in enumerate(names)), encoding="utf-8")
    quick = ["--nulls", "2", "--draws", "2", "--samples", "0", "--publications", str(studied)]
    assert main(["portrait", str(source), "-o", str(out), *quick]) == 0
    assert "publications" in capsys.readouterr().out
    written = {path.relative_to(out).as_posix() for path in out.rglob("*") if path.is_file()}
    assert {"portrait.json", "report.html", "summary.csv", "hubs.csv", "figures/removals.svg"} <= written
    first = {name: (out / name).read_bytes() for name in written}
    assert main(["portrait", str(source), "-o", str(out), *quick, "--quiet"]) == 0
    assert {name: (out / name).read_bytes() for name in written} == first


def test_the_command_refuses_what_it_cannot_use(tmp_path: Path, capsys: pytest.CaptureFixture[str], sample_file: Path):
    out = ["-o", str(tmp_path / "out")]
    assert main(["portrait", str(sample_file), *out, "--draws", "0"]) == 2
    assert main(["portrait", str(sample_file), *out, "--publications", str(tmp_path / "none.tsv")]) == 2
    assert "cannot be read" in capsys.readouterr().err
    assert not (tmp_path / "out").exists()
