"""The workspace: what goes in comes out bit for bit, after a restart too; what it cannot open it leaves alone."""

from __future__ import annotations

import threading
from collections.abc import Iterator
from dataclasses import replace
from datetime import UTC, datetime
from pathlib import Path

import numpy as np
import pytest

from analysis.network import Network
from analysis.study import StudySettings
from app.workspace import TrailEntry, Workspace, WorkspaceError, clustering_id

ROOT = Path(__file__).resolve().parents[2]
SETTINGS = StudySettings(resolution=0.1 + 0.2, seed=7, names={"M2": "bilayer repair"}).as_dict()


@pytest.fixture
def folder(tmp_path: Path) -> Path:
    return tmp_path / "kept" / "workspace"


@pytest.fixture
def workspace(folder: Path) -> Iterator[Workspace]:
    with Workspace.open(folder) as opened:
        yield opened


def make_network(*, weighted: bool = True, label: str = "moss") -> Network:
    weights = [0.1 + 0.2, 1 / 3, 5e-324, 1.7976931348623157e308] if weighted else None
    ends = [("SmA1", "SmB2"), ("SmB2", "SmC3"), ("SmC3", "SmA1"), ("Ørn β", '<b>"x"</b>')]
    return Network.from_edges(ends, weights, nodes=["alone"], label=label, provenance={"file": "a.tsv", "weight": "w"})


def assert_same_network(found: Network, expected: Network) -> None:
    assert found.names == expected.names
    assert found.fingerprint == expected.fingerprint
    assert (found.label, dict(found.provenance)) == (expected.label, dict(expected.provenance))
    assert (found.weights is None) == (expected.weights is None)
    assert not found.sources.flags.writeable


# Networks


@pytest.mark.parametrize("weighted", [True, False])
def test_a_network_comes_back_after_a_restart(folder: Path, weighted: bool):
    network = make_network(weighted=weighted)
    report = {"rows": 5, "rejected": [{"line": 3, "reason": "no gene"}], "sentences": ["Ørn."], "share": 0.1 + 0.2}
    with Workspace.open(folder) as workspace:
        workspace.add_network(network, report, b"\x1f\x8b raw \0", "ö <x>.tsv.gz")
        assert workspace.network(network.fingerprint) is network
    with Workspace.open(folder) as workspace:
        assert_same_network(workspace.network(network.fingerprint), network)
        assert workspace.report(network.fingerprint) == report
        assert workspace.raw(network.fingerprint) == ("ö <x>.tsv.gz", b"\x1f\x8b raw \0")
        (entry,) = workspace.networks()
        assert (entry.label, entry.file_name, entry.nodes, entry.edges) == ("moss", "ö <x>.tsv.gz", 6, 4)
        assert abs((datetime.now(UTC) - datetime.fromisoformat(entry.opened_at)).total_seconds()) < 60


def test_networks_are_listed_by_last_opening(workspace: Workspace):
    first, second = make_network(), make_network(weighted=False)
    workspace.add_network(first, {}, None, "a.tsv")
    workspace.add_network(second, {}, None, "b.tsv")
    assert [entry.file_name for entry in workspace.networks()] == ["b.tsv", "a.tsv"]
    workspace.mark_opened(first.fingerprint)
    assert [entry.file_name for entry in workspace.networks()] == ["a.tsv", "b.tsv"]
    assert workspace.raw(first.fingerprint) is None


def test_the_same_interactions_again_take_the_new_names_and_keep_the_trail(workspace: Workspace):
    network = make_network()
    workspace.add_network(network, {"rows": 4}, b"old", "old.tsv")
    entry = workspace.save_clustering(TrailEntry.of(network.fingerprint, SETTINGS, {"modules": 2}))
    renamed = replace(network, label="again")
    workspace.add_network(renamed, {"rows": 8}, b"new", "new.tsv")
    assert [found.label for found in workspace.networks()] == ["again"]
    assert workspace.network(network.fingerprint).label == "again"
    assert workspace.report(network.fingerprint) == {"rows": 8}
    assert workspace.raw(network.fingerprint) == ("new.tsv", b"new")
    assert workspace.trail(network.fingerprint) == [entry]
    workspace.add_network(renamed, {"rows": 8}, None, "unnamed")
    assert workspace.raw(network.fingerprint) == ("new.tsv", b"new")


def test_what_is_not_there_is_said(workspace: Workspace):
    for ask in (workspace.network, workspace.report, workspace.raw):
        with pytest.raises(WorkspaceError, match="has no network 0123456789ab"):
            ask("0123456789abcdef")
    assert workspace.trail("0123") == []
    assert workspace.clustering("0123") is None
    assert workspace.study("0123") is None
    assert workspace.arrays("positions", "0123") is None
    assert workspace.recall("0123") is None
    assert workspace.names("0123") == {}


# Arrays


def test_arrays_come_back_bit_for_bit(folder: Path):
    arrays = {
        "file": np.array([0.1 + 0.2, np.nan, -0.0, np.inf]),
        "labels": np.arange(6, dtype=np.uint16).reshape(2, 3),
        "columns first": np.asfortranarray(np.arange(6.0).reshape(2, 3)),
        "none": np.zeros((0, 2), np.float32),
        "one": np.array(7, np.int8),
        "words": np.array(["Ørn", "x"]),
    }
    with Workspace.open(folder) as workspace:
        workspace.save_arrays("positions", "key/../ö", arrays)
        workspace.save_arrays("positions", "other", {"x": np.ones(2)})
        workspace.save_arrays("positions", "other", {"x": np.zeros(3)})
    with Workspace.open(folder) as workspace:
        found = workspace.arrays("positions", "key/../ö")
        assert found is not None
        assert list(found) == list(arrays)
        for name, array in arrays.items():
            assert found[name].dtype == array.dtype
            assert found[name].shape == array.shape
            assert found[name].tobytes() == array.tobytes()
            assert not found[name].flags.writeable
        replaced = workspace.arrays("positions", "other")
        assert replaced is not None
        assert replaced["x"].tolist() == [0.0, 0.0, 0.0]
        assert workspace.arrays("sweep", "other") is None


def test_equal_arrays_share_one_file(workspace: Workspace):
    for key in ("a", "b"):
        workspace.save_arrays("positions", key, {"x": np.arange(5)})
    assert len(list(workspace.folder.glob("files/*/*.npz"))) == 1


def test_python_objects_are_neither_written_nor_read(workspace: Workspace, tmp_path: Path):
    with pytest.raises(TypeError, match="Python objects"):
        workspace.save_arrays("positions", "a", {"x": np.array([{}])})
    assert workspace.arrays("positions", "a") is None


def test_a_damaged_array_file_counts_as_none_and_is_mended_by_saving_again(
    workspace: Workspace, caplog: pytest.LogCaptureFixture
):
    workspace.save_arrays("positions", "a", {"x": np.arange(5)})
    (path,) = workspace.folder.glob("files/*/*.npz")
    path.write_bytes(path.read_bytes()[:-1] + b"?")
    assert workspace.arrays("positions", "a") is None
    assert "damaged" in caplog.text
    workspace.save_arrays("positions", "a", {"x": np.arange(5)})
    mended = workspace.arrays("positions", "a")
    assert mended is not None
    assert mended["x"].tolist() == [0, 1, 2, 3, 4]


def test_a_damaged_network_file_is_named(folder: Path):
    network = make_network()
    with Workspace.open(folder) as workspace:
        workspace.add_network(network, {}, None, "a.tsv")
    (path,) = folder.glob("files/*/*.npz")
    path.unlink()
    with Workspace.open(folder) as workspace:
        with pytest.raises(WorkspaceError, match=f"{path.name}.*open the network's own file again"):
            workspace.network(network.fingerprint)
        workspace.add_network(network, {}, None, "a.tsv")
    with Workspace.open(folder) as workspace:
        assert_same_network(workspace.network(network.fingerprint), network)


# The trail


def test_the_trail_keeps_order_names_and_figures(folder: Path):
    network = make_network()
    finer = SETTINGS | {"resolution": 2.0}
    with Workspace.open(folder) as workspace:
        workspace.add_network(network, {}, None, "a.tsv")
        first = workspace.save_clustering(TrailEntry.of(network.fingerprint, SETTINGS, {"modularity": 1 / 3}))
        second = workspace.save_clustering(
            TrailEntry.of(
                network.fingerprint, finer, {"modules": np.int64(3), "seed_ami": float("nan")}, "<i>finer</i>"
            )
        )
        assert (first.order, second.order) == (1, 2)
        again = workspace.save_clustering(TrailEntry.of(network.fingerprint, SETTINGS, {"modularity": 0.5}))
        assert again == replace(first, figures={"modularity": 0.5})
        named = workspace.name_clustering(first.id, "  as typed ")
        assert named.name == "  as typed "
        kept = workspace.save_clustering(TrailEntry.of(network.fingerprint, SETTINGS, {"modularity": 0.5}))
        assert kept == named
    with Workspace.open(folder) as workspace:
        assert workspace.trail(network.fingerprint)[0] == kept
        found = workspace.clustering(second.id)
        assert found is not None
        assert (found.settings, found.name, found.order) == (finer, "<i>finer</i>", 2)
        assert found.figures["modules"] == 3
        assert np.isnan(found.figures["seed_ami"])
        with pytest.raises(WorkspaceError, match="has no network"):
            workspace.save_clustering(TrailEntry.of("0123", SETTINGS, {}))
        with pytest.raises(WorkspaceError, match="has no clustering"):
            workspace.name_clustering("0123", "x")


def test_the_id_hangs_on_what_is_computed_and_on_nothing_else():
    base = clustering_id("abc", SETTINGS)
    assert base == clustering_id("abc", dict(reversed(SETTINGS.items())))
    assert base == clustering_id("abc", SETTINGS | {"names": {}})
    assert clustering_id("abc", {"resolution": 1}) == clustering_id("abc", {"resolution": np.float64(1.0)})
    others = [clustering_id("abd", SETTINGS)]
    others += [clustering_id("abc", SETTINGS | {key: 3.5}) for key in SETTINGS if key != "names"]
    assert len({base, *others}) == len(others) + 1


# Notes and small things


def test_names_are_kept_as_typed(folder: Path):
    network = make_network()
    typed = "  <script>alert(1)</script> =1+1 \u202e'; DROP TABLE module_names; --\n"
    with Workspace.open(folder) as workspace:
        workspace.add_network(network, {}, None, "a.tsv")
        entry = workspace.save_clustering(TrailEntry.of(network.fingerprint, SETTINGS, {}))
        workspace.set_name(network.fingerprint, entry.id, "M10", "ten")
        workspace.set_name(network.fingerprint, entry.id, "M2", "first")
        workspace.set_name(network.fingerprint, entry.id, "M2", typed)
        workspace.set_name(network.fingerprint, entry.id, "M3", "gone")
        workspace.set_name(network.fingerprint, entry.id, "M3", "")
    with Workspace.open(folder) as workspace:
        assert list(workspace.names(entry.id).items()) == [("M2", typed), ("M10", "ten")]
        with pytest.raises(WorkspaceError, match="has no clustering"):
            workspace.set_name(network.fingerprint, "0123", "M2", "x")
        with pytest.raises(WorkspaceError, match="not one of this network"):
            workspace.set_name("0123", entry.id, "M2", "x")


def test_small_things_are_remembered(folder: Path):
    value = {"at hand": ["abc", None, True, 0.1 + 0.2], "ö": {}}
    with Workspace.open(folder) as workspace:
        workspace.remember("view", 1)
        workspace.remember("view", value)
    with Workspace.open(folder) as workspace:
        assert workspace.recall("view") == value


def test_job_records_are_kept_until_forgotten(folder: Path):
    with Workspace.open(folder) as workspace:
        workspace.record_job("sweep", "abc", {"quality": "cpm"})
        workspace.record_job("study", "abc", {})
        workspace.forget_job("study", "abc")
    with Workspace.open(folder) as workspace:
        (record,) = workspace.unfinished_jobs()
        assert (record.kind, record.key, record.request) == ("sweep", "abc", {"quality": "cpm"})


# Several at once


def test_two_windows_on_one_folder_see_each_other(folder: Path):
    network = make_network()
    with Workspace.open(folder) as one, Workspace.open(folder) as other:
        one.add_network(network, {}, None, "a.tsv")
        entry = other.save_clustering(TrailEntry.of(network.fingerprint, SETTINGS, {}))
        one.set_name(network.fingerprint, entry.id, "M1", "seen")
        assert other.names(entry.id) == {"M1": "seen"}
        assert_same_network(other.network(network.fingerprint), network)


def test_threads_share_one_workspace(workspace: Workspace):
    network = make_network()
    workspace.add_network(network, {}, None, "a.tsv")
    failures: list[BaseException] = []

    def write(number: int) -> None:
        try:
            for step in range(20):
                settings = {"seed": number * 100 + step}
                workspace.save_clustering(TrailEntry.of(network.fingerprint, settings, {}))
                workspace.save_arrays("positions", f"{number}-{step % 3}", {"x": np.full(100, step)})
                assert workspace.arrays("positions", f"{number}-{step % 3}")["x"][0] == step
                workspace.trail(network.fingerprint)
        except BaseException as error:  # noqa: BLE001 - carried to the test's own thread
            failures.append(error)

    threads = [threading.Thread(target=write, args=(number,)) for number in range(3)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    assert failures == []
    trail = workspace.trail(network.fingerprint)
    assert [entry.order for entry in trail] == list(range(1, 61))
    assert {entry.settings["seed"] for entry in trail} == {n * 100 + step for n in range(3) for step in range(20)}
