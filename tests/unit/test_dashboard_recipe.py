"""What was clicked can be repeated without a browser: zips of the real desk, rerun by the command line."""

from __future__ import annotations

import io
import zipfile
from pathlib import Path

import pytest

from analysis.evidence import HARVEST
from analysis.study import StudySettings
from app.cli import main
from app.desk import Desk
from app.jobs import Jobs
from app.wiring.modules import settings_of
from app.workspace import Workspace
from tests.handover import karate_text

WAIT = 120
WANTED = {"method": "leiden", "quality": "modularity", "resolution": 1.0, "k": 3, "seed": 4, "nulls": 0}
PARTS = ("xlsx", "tsv", "core-lists", "map-svg", "figure-data")
MESSY = "header one\tother\tscore\n" + "".join(
    f"{one}\t{other}\t{1 + len(one) % 3}\n" for one, other in map(str.split, karate_text().splitlines())
)


@pytest.fixture(scope="module")
def desk(tmp_path_factory):
    workspace = Workspace.open(tmp_path_factory.mktemp("workspace"))
    jobs = Jobs(workspace)
    yield Desk(workspace, jobs)
    jobs.close()
    workspace.close()


def _study(desk: Desk, fingerprint: str, settings: StudySettings) -> str:
    study_id, job = desk.start_study(fingerprint, settings)
    if job is not None:
        state = desk.jobs.wait(job, WAIT)
        assert state.status == "done", state
    return study_id


def _unpacked(desk: Desk, study_id: str, folder: Path, parts: tuple[str, ...] = ()) -> Path:
    state = desk.jobs.wait(desk.start_packing(study_id, parts), WAIT)
    assert state.status == "done", state
    _, content = desk.packed(study_id)
    with zipfile.ZipFile(io.BytesIO(content)) as archive:
        archive.extractall(folder)
    return folder


def _files(folder: Path) -> dict[str, bytes]:
    """Return every file but the input, and the recipe, which says where the input is from there."""
    found = {path.relative_to(folder).as_posix(): path for path in folder.rglob("*") if path.is_file()}
    return {
        name: path.read_bytes()
        for name, path in found.items()
        if name != "recipe.toml" and not name.startswith("input/")
    }


@pytest.mark.parametrize(
    "clicked",
    [{}, {"method": "clique-percolation"}, {"method": HARVEST}, {"quality": "cpm", "resolution": 0.2, "nulls": 5}],
    ids=["leiden", "cliques", "harvest", "potts"],
)
def test_a_zip_of_the_dashboard_reruns_to_the_same_bytes(desk, tmp_path, clicked):
    fingerprint = desk.open_bytes(MESSY.encode(), "my friends.tsv")
    study_id = _study(desk, fingerprint, settings_of({**WANTED, **clicked}))
    desk.workspace.set_name(fingerprint, study_id, "M1", "bilayer repair")
    zipped = _unpacked(desk, study_id, tmp_path / "zip", PARTS)
    assert main(["rerun", str(zipped / "recipe.toml"), "-o", str(tmp_path / "again"), "--quiet"]) == 0
    again = _files(tmp_path / "again")
    assert again == _files(zipped)
    assert b"bilayer repair" in again["modules.csv"]
    assert "membership.xlsx" in again
    assert b"What was read" in again["report.html"]


def test_the_sample_keeps_its_own_name(desk, tmp_path):
    fingerprint = desk.open_sample()
    study_id = _study(desk, fingerprint, StudySettings(runs=1, noise=0.0, nulls=0))
    zipped = _unpacked(desk, study_id, tmp_path / "zip")
    assert main(["rerun", str(zipped / "recipe.toml"), "-o", str(tmp_path / "again"), "--quiet"]) == 0
    assert _files(tmp_path / "again") == _files(zipped)


def test_two_clusterings_of_the_trail_compare(desk):
    fingerprint = desk.open_bytes(MESSY.encode(), "my friends.tsv")
    one, other = (
        _study(desk, fingerprint, StudySettings(runs=2, noise=0.0, nulls=0, resolution=resolution))
        for resolution in (1.0, 3.0)
    )
    found = desk.comparison(one, other, ("coarse", "fine"))
    assert (found.first, found.second, found.preservation) == ("coarse", "fine", None)
    assert found.modules[0] < found.modules[1]
    assert desk.comparison(one, "gone", ("coarse", "fine")) is None


def test_two_networks_compare_with_preservation(desk):
    settings = StudySettings(runs=2, noise=0.0, nulls=0)
    whole = desk.open_bytes(karate_text().encode(), "whole.txt")
    part = desk.open_bytes("".join(karate_text().splitlines(keepends=True)[::2]).encode(), "part.txt")
    found = desk.comparison(_study(desk, whole, settings), _study(desk, part, settings), ("whole", "part"))
    assert set(found.preservation["modules_of"]) == {"first", "second"}


def test_a_part_that_cannot_be_written_is_told(desk):
    fingerprint = desk.open_bytes(karate_text().encode(), "whole.txt")
    study_id = _study(desk, fingerprint, StudySettings(runs=1, noise=0.0, nulls=0))
    state = desk.jobs.wait(desk.start_packing(study_id, ("core-lists",)), WAIT)
    assert state.status == "failed"
    assert "how surely genes stay" in state.error
