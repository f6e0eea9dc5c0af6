"""Gene sets on the desk: kept, tested, faulty, and handed over so that the recipe repeats them."""

from __future__ import annotations

import io
import zipfile
from collections.abc import Iterator

import networkx as nx
import pytest

from analysis.errors import InputError
from analysis.study import StudySettings
from app.cli import main
from app.desk import Desk
from app.jobs import Jobs
from app.workspace import Workspace
from tests.handover import karate_text

WAIT = 120


@pytest.fixture(scope="module")
def desk(tmp_path_factory) -> Iterator[Desk]:
    workspace = Workspace.open(tmp_path_factory.mktemp("workspace"))
    jobs = Jobs(workspace)
    yield Desk(workspace, jobs)
    jobs.close()
    workspace.close()


@pytest.fixture(scope="module")
def study_id(desk: Desk) -> str:
    fingerprint = desk.open_bytes(karate_text().encode(), "karate.txt")
    found, job = desk.start_study(fingerprint, StudySettings(runs=4, nulls=0))
    assert job is not None
    desk.jobs.wait(job, WAIT)
    return found


def faction_lines() -> bytes:
    club = nx.get_node_attributes(nx.karate_club_graph(), "club")
    sides = {side: [f"n{node}" for node in club if club[node] == side] for side in sorted(set(club.values()))}
    return "".join(f"{side}\t\t{chr(9).join(names)}\n" for side, names in sides.items()).encode()


def settle(desk: Desk, study_id: str) -> None:
    study = desk.study(study_id)
    assert study is not None
    job = desk.meaning.start(study_id, study)
    if job is not None:
        state = desk.jobs.wait(job, WAIT)
        assert state is not None
        assert state.status == "done", state


def test_gene_sets_are_kept_for_their_network_tested_and_handed_over(desk, study_id, tmp_path):
    study = desk.study(study_id)
    fingerprint = study.network.fingerprint
    assert desk.meaning.start(study_id, study) is None  # nothing was given yet
    kept = desk.meaning.keep("gene_sets", faction_lines(), "folder\\factions.tsv")
    assert (kept["name"], kept["format"]) == ("factions.tsv", "set lines")
    desk.meaning.choose(fingerprint, gene_sets=kept)
    settle(desk, study_id)
    meaning = desk.meaning.found(study_id, study)
    assert meaning is not None
    assert meaning.enrichment.background == 34  # the club's members (Zachary 1977)

    before = desk.meaning.version(study_id, study)
    desk.meaning.choose(fingerprint, same_source="yes")
    assert desk.meaning.version(study_id, study) != before
    assert desk.meaning.found(study_id, study) is meaning  # the answer changes no test
    desk.meaning.choose(fingerprint, min_size=6)
    assert desk.meaning.found(study_id, study) is None

    state = desk.jobs.wait(desk.start_packing(study_id), WAIT)
    assert state.status == "done"
    packed = desk.packed(study_id)
    assert packed is not None
    with zipfile.ZipFile(io.BytesIO(packed[1])) as archive:
        archive.extractall(tmp_path / "given")  # our own zip
    assert (tmp_path / "given" / "input" / "gene_sets" / "factions.tsv").read_bytes() == faction_lines()
    assert "circular" in (tmp_path / "given" / "report.html").read_text(encoding="utf-8")
    assert main(["rerun", str(tmp_path / "given" / "recipe.toml"), "-o", str(tmp_path / "again"), "--quiet"]) == 0
    for name in ("enrichment.csv", "spread.csv", "membership.csv"):
        assert (tmp_path / "given" / name).read_bytes() == (tmp_path / "again" / name).read_bytes()


def test_sets_of_another_organism_are_told_at_the_station(desk, study_id):
    study = desk.study(study_id)
    kept = desk.meaning.keep("gene_sets", b"x\t\tnobody\tno one\tneither\n", "strange.tsv")
    desk.meaning.choose(study.network.fingerprint, gene_sets=kept)
    settle(desk, study_id)
    assert desk.meaning.found(study_id, study) is None
    assert "the network knows none" in desk.meaning.fault(study_id, study)
    aliases = desk.meaning.keep("aliases", b"nobody\tn0\nno one\tn1\nneither\tn2\n", "names.tsv")
    desk.meaning.choose(study.network.fingerprint, aliases=aliases, min_size=1)
    settle(desk, study_id)
    assert desk.meaning.found(study_id, study) is not None


@pytest.mark.parametrize("kind", ["gene_sets", "aliases", "ontology", "something"])
def test_what_is_no_such_file_is_not_kept(desk, kind):
    with pytest.raises(InputError, match=r"words\.txt"):
        desk.meaning.keep(kind, b"words\n", "words.txt")
