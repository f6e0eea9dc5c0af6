"""A workspace whose writer was killed opens whole; one that is damaged, foreign or newer is left alone."""

from __future__ import annotations

import os
import signal
import sqlite3
import subprocess
import sys
from contextlib import closing
from pathlib import Path

import numpy as np
import pytest

from analysis.network import Network
from app.workspace import TrailEntry, Workspace, WorkspaceError
from app.workspace.database import STEPS, Database

ROOT = Path(__file__).resolve().parents[2]


@pytest.fixture
def folder(tmp_path: Path) -> Path:
    return tmp_path / "kept" / "workspace"


WRITER = """
import sys, itertools
import numpy as np
from analysis.network import Network
from app.workspace import TrailEntry, Workspace
workspace = Workspace.open(sys.argv[1])
network = Network.from_edges([("a", "b"), ("b", "c")])
workspace.add_network(network, {}, b"a b", "a.tsv")
print("ready", network.fingerprint, flush=True)
for step in itertools.count(int(sys.argv[2])):
    workspace.save_arrays("positions", str(step), {"x": np.full(50_000, step)})
    entry = workspace.save_clustering(TrailEntry.of(network.fingerprint, {"seed": step}, {"modules": step}))
    workspace.set_name(network.fingerprint, entry.id, "M1", f"name {step}")
    print("saved", step, entry.id, flush=True)
"""


def test_a_writer_killed_at_any_moment_leaves_all_that_it_acknowledged(folder: Path):
    saved: dict[int, str] = {}
    for round_number, saves_before_kill in enumerate((1, 4, 9)):
        with subprocess.Popen(
            [sys.executable, "-c", WRITER, str(folder), str(round_number * 1000)],
            cwd=ROOT,
            stdout=subprocess.PIPE,
            text=True,
        ) as writer:
            assert writer.stdout is not None
            fingerprint = writer.stdout.readline().split()[1]
            for _ in range(saves_before_kill):
                _, step, identifier = writer.stdout.readline().split()
                saved[int(step)] = identifier
            os.kill(writer.pid, signal.SIGKILL)
            for line in writer.stdout:  # what it acknowledged until it died
                words = line.split()
                if len(words) == 3 and line.endswith("\n"):
                    saved[int(words[1])] = words[2]
        with Workspace.open(folder) as workspace:
            trail = {entry.settings["seed"]: entry for entry in workspace.trail(fingerprint)}
            assert workspace.raw(fingerprint) == ("a.tsv", b"a b")
            for step, identifier in saved.items():
                assert trail[step].id == identifier
                assert trail[step].figures == {"modules": step}
                assert workspace.names(identifier) == {"M1": f"name {step}"}
                arrays = workspace.arrays("positions", str(step))
                assert arrays is not None
                assert arrays["x"].tolist() == [step] * 50_000


def test_what_killed_writers_left_is_swept_after_an_hour(folder: Path):
    with Workspace.open(folder) as workspace:
        workspace.save_arrays("positions", "a", {"x": np.arange(5)})
    (kept,) = folder.glob("files/*/*.npz")
    old, new = kept.parent / "draft-old", kept.parent / "draft-new"
    for draft in (old, new):
        draft.write_bytes(b"half")
    os.utime(old, (0, 0))
    with Workspace.open(folder):
        assert (old.exists(), new.exists(), kept.exists()) == (False, True, True)


# What cannot be opened


def database_of(folder: Path) -> Path:
    return folder / "workspace.sqlite"


def filled(folder: Path) -> Path:
    """Make a workspace of some pages and close it."""
    network = Network.from_edges([("a", "b"), ("b", "c")])
    with Workspace.open(folder) as workspace:
        workspace.add_network(network, {}, None, "a.tsv")
        for seed in range(100):
            workspace.save_clustering(TrailEntry.of(network.fingerprint, {"seed": seed}, {}))
    return database_of(folder)


def everything_in(folder: Path) -> dict[Path, bytes]:
    return {path: path.read_bytes() for path in folder.rglob("*") if path.is_file()}


def test_a_newer_workspace_is_refused_and_left_alone(folder: Path):
    path = filled(folder)
    with closing(sqlite3.connect(path)) as connection:
        connection.execute("UPDATE schema_version SET version = 99")
        connection.commit()
    before = everything_in(folder)
    with pytest.raises(
        WorkspaceError, match=r"newer corymb \(its form is number 99, this one knows 1\).*nothing was changed"
    ):
        Workspace.open(folder)
    assert everything_in(folder) == before


UPGRADER = """
import os, sqlite3, sys
connection = sqlite3.connect(sys.argv[1])
connection.execute("UPDATE schema_version SET version = 99")
connection.commit()
os._exit(0)
"""


def test_a_newer_workspace_whose_log_is_not_merged_is_refused_too(folder: Path):
    path = filled(folder)
    subprocess.run([sys.executable, "-c", UPGRADER, str(path)], check=True)
    log = path.with_name(path.name + "-wal")
    before = (path.read_bytes(), log.read_bytes())
    assert before[1]
    with pytest.raises(WorkspaceError, match="newer corymb"):
        Workspace.open(folder)
    assert (path.read_bytes(), log.read_bytes()) == before


def overwrite(path: Path, start: int, content: bytes) -> None:
    with path.open("r+b") as file:
        file.seek(start)
        file.write(content)


@pytest.mark.parametrize(
    ("damage", "said"),
    [
        (lambda path: path.write_bytes(b"gene_a\tgene_b\n" * 100), "does not begin as a database"),
        (lambda path: os.truncate(path, path.stat().st_size // 2), "damaged"),
        (lambda path: os.truncate(path, 50), "damaged"),
        (lambda path: overwrite(path, 4096 * 3, b"\xff" * 4096), "damaged"),
        (lambda path: overwrite(path, 110, b"\xff" * 200), "damaged"),
    ],
)
def test_a_damaged_database_is_named_and_left_alone(folder: Path, damage, said: str):
    path = filled(folder)
    damage(path)
    before = everything_in(folder)
    with pytest.raises(WorkspaceError, match=said) as caught:
        Workspace.open(folder)
    assert str(path) in str(caught.value)
    assert "nothing was changed" in str(caught.value)
    assert everything_in(folder) == before


def test_another_program_s_database_is_refused(folder: Path):
    folder.mkdir(parents=True)
    with closing(sqlite3.connect(database_of(folder))) as connection:
        connection.execute("CREATE TABLE birds (name TEXT)")
    before = everything_in(folder)
    with pytest.raises(WorkspaceError, match="not one of a corymb workspace"):
        Workspace.open(folder)
    assert everything_in(folder) == before


def test_an_opening_cut_off_before_the_first_table_is_begun_again(folder: Path):
    folder.mkdir(parents=True)
    database_of(folder).touch()
    with Workspace.open(folder) as workspace:
        assert workspace.networks() == []


def test_a_file_in_the_folder_s_place_is_named(tmp_path: Path):
    (tmp_path / "taken").write_text("x")
    with pytest.raises(WorkspaceError, match="taken: cannot be a workspace"):
        Workspace.open(tmp_path / "taken")


def test_an_older_workspace_is_brought_up_to_date_once(tmp_path: Path):
    path = tmp_path / "workspace.sqlite"
    calls = []

    def add_remarks(connection: sqlite3.Connection) -> None:
        calls.append(1)
        connection.execute("CREATE TABLE remarks (text TEXT)")
        connection.execute("INSERT INTO remarks SELECT value FROM remembered")

    with closing(Database(path)) as database, database.change() as connection:
        connection.execute("INSERT INTO remembered VALUES ('a', '1')")
    for _ in range(2):
        with closing(Database(path, (*STEPS, add_remarks))) as database:
            assert database.rows("SELECT text FROM remarks") == [("1",)]
            assert database.rows("SELECT version FROM schema_version") == [(2,)]
    assert calls == [1]
    with pytest.raises(WorkspaceError, match="newer corymb"):
        Database(path)


def test_a_step_that_fails_changes_nothing(tmp_path: Path):
    path = tmp_path / "workspace.sqlite"

    def fail(connection: sqlite3.Connection) -> None:
        connection.execute("CREATE TABLE remarks (text TEXT)")
        raise WorkspaceError("no room")

    Database(path).close()
    with pytest.raises(WorkspaceError, match="no room"):
        Database(path, (*STEPS, fail))
    with closing(Database(path)) as database:
        assert database.rows("SELECT version FROM schema_version") == [(1,)]
        assert database.rows("SELECT name FROM sqlite_master WHERE name = 'remarks'") == []


def test_a_change_that_fails_halfway_leaves_nothing(tmp_path: Path):
    with closing(Database(tmp_path / "workspace.sqlite")) as database:

        def change_and_fail() -> None:
            with database.change() as connection:
                connection.execute("INSERT INTO remembered VALUES ('a', '1')")
                raise WorkspaceError("no room")

        with pytest.raises(WorkspaceError, match="no room"):
            change_and_fail()
        assert database.rows("SELECT * FROM remembered") == []
        with database.change() as connection:
            connection.execute("INSERT INTO remembered VALUES ('a', '2')")
        assert database.rows("SELECT value FROM remembered") == [("2",)]
