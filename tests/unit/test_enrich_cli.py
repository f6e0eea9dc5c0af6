"""`corymb enrich` and `corymb modules --gene-sets`: what they write, say and repeat."""

from __future__ import annotations

import csv
import json
from pathlib import Path

import networkx as nx
import pytest
from scipy.stats import hypergeom

from app.cli import main
from tests.handover import write_karate

QUICK = ["--runs", "4", "--nulls", "0", "--quiet"]


def run(*arguments: str | Path) -> int:
    return main([str(each) for each in arguments])


def rows(path: Path) -> list[dict[str, str]]:
    with path.open(encoding="utf-8", newline="") as file:
        return list(csv.DictReader(file))


def files(folder: Path) -> dict[str, bytes]:
    return {path.relative_to(folder).as_posix(): path.read_bytes() for path in folder.rglob("*") if path.is_file()}


@pytest.fixture(scope="module")
def place(tmp_path_factory) -> Path:
    """Run a study of the karate club with its two factions as gene sets, named by aliases in one of them."""
    folder = tmp_path_factory.mktemp("enrich")
    write_karate(folder)
    club = nx.get_node_attributes(nx.karate_club_graph(), "club")
    factions = [[f"n{node}" for node in club if club[node] == side] for side in ("Mr. Hi", "Officer")]
    lines = [
        "hi\tthe instructor's\t" + "\t".join(factions[0]),
        "officer\t\t" + "\t".join(f"old_{name}" for name in factions[1]),
    ]
    (folder / "sets.tsv").write_text("\n".join(lines) + "\n", encoding="utf-8")
    aliases = ["name\tsynonym", *(f"n{node}\told_n{node}" for node in club)]
    (folder / "aliases.tsv").write_text("\n".join(aliases) + "\n", encoding="utf-8")
    options = ["--gene-sets", folder / "sets.tsv", "--aliases", folder / "aliases.tsv"]
    assert run("modules", folder / "karate.txt", "-o", folder / "out", *options, *QUICK) == 0
    return folder


def test_modules_adds_the_tables_the_summary_the_report_and_the_recipe(place):
    out = place / "out"
    table = rows(out / "enrichment.csv")
    head = (out / "enrichment.csv").read_text(encoding="utf-8").splitlines()[0]
    assert head == "module,gene_set,overlap,module_size,set_size,background,expected,fold,p_value,q_value,genes"
    for row in table:
        overlap, size, members, background = (
            int(row[key]) for key in ("overlap", "module_size", "set_size", "background")
        )
        # computed with scipy
        assert float(row["p_value"]) == pytest.approx(hypergeom.sf(overlap - 1, background, members, size), rel=1e-9)
        assert len(row["genes"].split(";")) == overlap
    summary = json.loads((out / "summary.json").read_text(encoding="utf-8"))
    assert summary["meaning"]["matched"]["by_alias"] == 17  # the officer's faction has 17 members (Zachary 1977)
    assert summary["meaning"]["tests"] == summary["meaning"]["modules_tested"] * 2
    report = (out / "report.html").read_text(encoding="utf-8")
    assert "one-sided hypergeometric test" in report
    assert "Gene sets</h2>" in report
    assert "gene_sets_sha256" in (out / "recipe.toml").read_text(encoding="utf-8")


def test_modules_with_gene_sets_are_repeated_byte_by_byte(place, tmp_path):
    assert run("rerun", place / "out" / "recipe.toml", "-o", tmp_path / "again", "--quiet") == 0
    first, again = files(place / "out"), files(tmp_path / "again")
    for name in ("enrichment.csv", "spread.csv", "membership.csv", "summary.json"):
        assert first[name] == again[name]


def test_enrich_gives_the_same_table_and_repeats_it(place, tmp_path):
    given = [place / "out" / "membership.csv", place / "sets.tsv", "--aliases", place / "aliases.tsv"]
    assert run("enrich", *given, "-o", tmp_path / "one", "--quiet") == 0
    assert sorted(files(tmp_path / "one")) == ["enrichment.csv", "recipe.toml", "spread.csv", "summary.json"]
    assert (tmp_path / "one" / "enrichment.csv").read_bytes() == (place / "out" / "enrichment.csv").read_bytes()
    assert run("rerun", tmp_path / "one" / "recipe.toml", "-o", tmp_path / "two", "--quiet") == 0
    for name in ("enrichment.csv", "spread.csv", "summary.json"):
        assert (tmp_path / "one" / name).read_bytes() == (tmp_path / "two" / name).read_bytes()
    assert run("enrich", *given, "-o", tmp_path / "one", "--quiet", "--core-only", "--max-size", "17") == 0
    settings = json.loads((tmp_path / "one" / "summary.json").read_text(encoding="utf-8"))["settings"]
    assert (settings["core_only"], settings["max_size"]) == (True, 17)


def test_a_changed_gene_set_file_stops_the_rerun(place, tmp_path, capsys):
    sets = tmp_path / "sets.tsv"
    sets.write_bytes((place / "sets.tsv").read_bytes())
    given = [place / "out" / "membership.csv", sets, "--aliases", place / "aliases.tsv"]
    assert run("enrich", *given, "-o", tmp_path / "one", "--quiet") == 0
    sets.write_bytes(sets.read_bytes() + b"more\t\tn1\tn2\tn3\tn4\tn5\n")
    assert run("rerun", tmp_path / "one" / "recipe.toml", "-o", tmp_path / "two", "--quiet") == 2
    assert "has changed" in capsys.readouterr().err
    assert run("rerun", tmp_path / "one" / "recipe.toml", "-o", tmp_path / "two", "--quiet", "--anyway") == 0


def test_a_background_list_is_the_background(place, tmp_path, capsys):
    background = tmp_path / "measured.txt"
    background.write_text("".join(f"n{number}\n" for number in range(100)), encoding="utf-8")
    given = [place / "out" / "membership.csv", place / "sets.tsv", "--aliases", place / "aliases.tsv"]
    assert run("enrich", *given, "-o", tmp_path / "out", "--background", background) == 0
    assert {row["background"] for row in rows(tmp_path / "out" / "enrichment.csv")} == {"100"}
    told = capsys.readouterr().out
    assert "66 of them not in the network" in told
    assert "does not show that the module has this function" in told
    assert "circular" in told


@pytest.mark.parametrize(
    ("change", "words"),
    [
        (["--min-size", "9", "--max-size", "3"], "--max-size is 3"),
        (["--aspect", "P"], "belong to GAF"),
        (["--aspect", "Z"], "P (process)"),
        (["--aliases", "nowhere.tsv"], "there is no such file"),
        (["--min-size", "30"], "no set has between 30 and 500 genes"),
    ],
)
def test_what_does_not_fit_is_told_in_one_paragraph(place, tmp_path, capsys, change, words):
    given = [place / "out" / "membership.csv", place / "sets.tsv", "-o", tmp_path / "out"]
    assert run("enrich", *given, *change) == 2
    told = capsys.readouterr().err
    assert words in told
    assert told.startswith("corymb: ")
    assert not (tmp_path / "out").exists()


@pytest.mark.parametrize(
    ("content", "words"),
    [
        ("", "the file is empty"),
        ("a,b\n1,2\n", "no column 'gene'"),
        ("gene,module\n", "has no rows"),
        ("gene,module\nn1,\n", "line 2: a row lacks"),
        ("gene,module,confidence\nn1,M1,sure\n", "confidence 'sure'"),
    ],
)
def test_a_table_that_holds_no_modules_is_told(place, tmp_path, capsys, content, words):
    table = tmp_path / "membership.csv"
    table.write_text(content, encoding="utf-8")
    assert run("enrich", table, place / "sets.tsv", "-o", tmp_path / "out") == 2
    assert words in capsys.readouterr().err


def test_modules_tells_faults_of_the_gene_sets_before_the_long_work(place, tmp_path, capsys):
    wrong = tmp_path / "wrong.tsv"
    wrong.write_text("x\t\tnobody\tno one\tneither\n", encoding="utf-8")
    assert run("modules", place / "karate.txt", "-o", tmp_path / "out", "--gene-sets", wrong, "--runs", "100000") == 2
    assert "the network knows none" in capsys.readouterr().err
    assert run("modules", place / "karate.txt", "-o", tmp_path / "out", "--core-only") == 2
    assert "belongs to --gene-sets" in capsys.readouterr().err
