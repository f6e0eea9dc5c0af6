"""`corymb compare`: outputs read back, tables written, the recipe repeated."""

from __future__ import annotations

import csv
import io
import json
import xml.etree.ElementTree as ET
from pathlib import Path

import networkx as nx
import pytest

from analysis.errors import InputError
from analysis.handover import bundle_files
from analysis.handover.reading_back import clustering_from
from app.cli import main
from app.comparing import read_folder
from tests.handover import NASTY, bundle_of, karate_text, write_karate

QUICK = ["--runs", "4", "--nulls", "0", "--noise", "0", "--quiet"]


def _files(folder: Path) -> dict[str, bytes]:
    return {path.relative_to(folder).as_posix(): path.read_bytes() for path in folder.rglob("*") if path.is_file()}


def _rows(content: bytes) -> list[dict[str, str]]:
    return list(csv.DictReader(io.StringIO(content.decode())))


@pytest.fixture(scope="module")
def outputs(tmp_path_factory) -> Path:
    """Two clusterings of the karate club, and one of a part of its edges."""
    folder = tmp_path_factory.mktemp("outputs")
    whole = str(write_karate(folder))
    part = folder / "part.txt"
    part.write_text("".join(karate_text().splitlines(keepends=True)[::2]))
    for name, path, more in (("a", whole, []), ("b", whole, ["--resolution", "2"]), ("c", str(part), [])):
        assert main(["modules", path, "-o", str(folder / name), *QUICK, *more]) == 0
    return folder


@pytest.mark.parametrize("settings", [{}, {"method": "clique-percolation", "k": 3}])
@pytest.mark.parametrize(
    "text", [karate_text(), NASTY, "a\ufffeb c\nc a\uffffb\na\ufffeb a\uffffb\n"], ids=["karate", "nasty", "xml"]
)
def test_what_was_written_reads_back(text, settings):
    bundle = bundle_of(text, **settings)
    found = clustering_from(bundle_files(bundle), "out")
    assert found.network == bundle.study.network
    assert [group.tolist() for group in found.modules.members] == [
        group.tolist() for group in bundle.study.modules.members
    ]


def test_two_clusterings_of_one_network(outputs, tmp_path, capsys):
    command = ["compare", str(outputs / "a"), str(outputs / "b"), "-o", str(tmp_path / "out")]
    assert main(command) == 0
    assert "changed homes" in capsys.readouterr().out
    files = _files(tmp_path / "out")
    assert set(files) == {"flows.csv", "flows.svg", "matches.csv", "moved_genes.csv", "summary.json", "recipe.toml"}
    assert sum(int(row["genes"]) for row in _rows(files["flows.csv"])) == nx.karate_club_graph().number_of_nodes()
    summary = json.loads(files["summary.json"])
    assert summary["shared_genes"] == 34
    assert set(summary["agreement"]) == {"ARI", "NMI", "AMI", "VI"}
    ET.fromstring(files["flows.svg"])  # noqa: S314 - our own file
    assert main(command) == 0  # an earlier comparison is replaced


def test_two_networks_and_their_recipe(outputs, tmp_path):
    command = ["compare", str(outputs / "a"), str(outputs / "c"), "-o", str(tmp_path / "out"), "--permutations", "10"]
    assert main([*command, "--seed", "7", "--quiet"]) == 0
    files = _files(tmp_path / "out")
    modules = {row["modules_of"] for row in _rows(files["preservation.csv"])}
    assert modules == {"first", "second"}
    assert main(["rerun", str(tmp_path / "out" / "recipe.toml"), "-o", str(tmp_path / "again"), "--quiet"]) == 0
    assert _files(tmp_path / "again") == files


def test_the_same_name_twice_is_told_apart(outputs, tmp_path, capsys):
    assert main(["compare", str(outputs / "a"), str(outputs / "a"), "-o", str(tmp_path / "out")]) == 0
    assert "a (first) has" in capsys.readouterr().out
    assert main(["rerun", str(tmp_path / "out" / "recipe.toml"), "-o", str(tmp_path / "again"), "--quiet"]) == 0
    assert _files(tmp_path / "again") == _files(tmp_path / "out")


def test_a_clustering_that_changed_stops_the_recipe(outputs, tmp_path, capsys):
    for name in ("a", "b"):
        assert main(["modules", str(outputs / "karate.txt"), "-o", str(tmp_path / name), *QUICK]) == 0
    assert main(["compare", str(tmp_path / "a"), str(tmp_path / "b"), "-o", str(tmp_path / "out"), "--quiet"]) == 0
    assert main(["modules", str(outputs / "karate.txt"), "-o", str(tmp_path / "b"), *QUICK, "--resolution", "3"]) == 0
    again = ["rerun", str(tmp_path / "out" / "recipe.toml"), "-o", str(tmp_path / "again"), "--quiet"]
    assert main(again) == 2
    assert "the clustering has changed" in capsys.readouterr().err
    assert main([*again, "--anyway"]) == 0


def test_a_folder_of_something_else_is_refused(outputs, tmp_path, capsys):
    assert main(["compare", str(tmp_path), str(outputs / "a"), "-o", str(tmp_path / "out")]) == 2
    assert "there is no membership.csv in it" in capsys.readouterr().err


@pytest.mark.parametrize(
    ("name", "content", "said"),
    [
        ("membership.csv", b"gene,module\nn0,X1\n", "line 2: the module is 'X1'"),
        ("membership.csv", b"gene,module\nstranger,M1\n", "line 2: 'stranger' is not in"),
        ("membership.csv", b"gene,module\nn0,M2\n", "M1 has no gene"),
        ("membership.csv", b"name\nn0\n", "columns gene and module"),
        ("membership.csv", b"\xff\xfe", "no table"),
        ("network.graphml", b"<graphml", "no network as it was written"),
        ("network.graphml", b"not xml", "no network as it was written"),
    ],
)
def test_files_that_are_not_as_they_were_are_named(name, content, said):
    files = {**bundle_files(bundle_of(karate_text(), noise=0.0)), name: content}
    with pytest.raises(InputError, match="out/") as caught:
        clustering_from(files, "out")
    assert said in str(caught.value)


def test_the_digest_follows_the_files(outputs, tmp_path):
    assert read_folder(outputs / "a").sha256 != read_folder(outputs / "b").sha256
