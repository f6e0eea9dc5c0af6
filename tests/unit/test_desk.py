"""The desk with the real workspace, real jobs and real worker processes."""

from __future__ import annotations

import gzip
import io
import json
import zipfile

import networkx as nx
import pandas as pd
import pytest

from analysis.errors import InputError
from analysis.study import StudySettings
from app.desk import Desk
from app.jobs import Jobs
from app.workspace import Workspace

WAIT = 120


@pytest.fixture(scope="module")
def edges():
    graph = nx.les_miserables_graph()
    return "".join(
        f"{a.replace(' ', '_')}\t{b.replace(' ', '_')}\t{d['weight']}\n" for a, b, d in graph.edges(data=True)
    )


@pytest.fixture(scope="module")
def desk(tmp_path_factory):
    workspace = Workspace.open(tmp_path_factory.mktemp("workspace"))
    jobs = Jobs(workspace)
    yield Desk(workspace, jobs)
    jobs.close()
    workspace.close()


def settle(desk, job):
    if job is not None:
        state = desk.jobs.wait(job, WAIT)
        assert state.status == "done", state


def test_the_whole_way_from_an_upload_to_a_zip(desk, edges):
    fingerprint = desk.open_bytes(gzip.compress(edges.encode()), "friends.tsv.gz")
    assert desk.network(fingerprint).edge_count == 254  # networkx
    assert desk.drawing(fingerprint) is None
    settle(desk, desk.start_drawing(fingerprint))
    positions, _ = desk.drawing(fingerprint)
    assert positions.shape == (77, 2)
    assert desk.anchor_colours(fingerprint) is not None
    settle(desk, desk.start_ruler(fingerprint, "modularity"))
    ruler = desk.ruler(fingerprint, "modularity")
    assert ruler.done
    assert desk.start_ruler(fingerprint, "modularity") is None
    assert desk.ruler_colours(fingerprint, "modularity", 3) is not None
    assert desk.ruler_colours(fingerprint, "modularity", 999) is None
    study_id, job = desk.start_study(fingerprint, StudySettings(runs=10, nulls=5))
    settle(desk, job)
    assert desk.start_study(fingerprint, StudySettings(runs=10, nulls=5)) == (study_id, None)
    desk.workspace.set_name(fingerprint, study_id, "M1", "=the barricade")
    study = desk.study(study_id)
    assert study.settings.names == {"M1": "=the barricade"}
    settle(desk, desk.start_packing(study_id))
    name, content = desk.packed(study_id)
    assert name.endswith(".zip")
    with zipfile.ZipFile(io.BytesIO(content)) as archive:
        inside = set(archive.namelist())
        table = pd.read_csv(archive.open("membership.csv"))
        summary = json.loads(archive.read("summary.json"))
    wanted = {"membership.csv", "modules.csv", "summary.json", "recipe.toml", "report.html", "network.graphml"}
    assert wanted | {"gene_lists/M1.txt", "gene_lists/background.txt", "input/friends.tsv.gz"} <= inside
    graph = nx.Graph()
    for line in edges.splitlines():
        a, b, weight = line.split("\t")
        graph.add_edge(a, b, weight=float(weight))
    groups = table.groupby("module")["gene"].apply(set).tolist()
    assert nx.community.modularity(graph, groups) == pytest.approx(summary["modularity"])


def test_a_bad_upload_leaves_everything_as_it_was(desk, edges):
    before = desk.open_bytes(edges.encode(), "friends.tsv")
    listed = [entry.fingerprint for entry in desk.workspace.networks()]
    for content in (b"", b"\x89PNG\r\n\x1a\n\0\0", b"alone\n", gzip.compress(edges.encode())[:200], b"a\ta\t1\n"):
        with pytest.raises(InputError, match=r"bad\.tsv"):
            desk.open_bytes(content, "bad.tsv")
    assert [entry.fingerprint for entry in desk.workspace.networks()] == listed
    assert desk.network(before).node_count == 77


def test_the_trail_holds_each_clustering_once(desk, edges):
    fingerprint = desk.open_bytes(edges.encode(), "friends.tsv")
    settings = StudySettings(runs=3, nulls=0, noise=0, resolution=2.0)
    for _ in range(2):
        settle(desk, desk.start_study(fingerprint, settings)[1])
    matching = [entry for entry in desk.workspace.trail(fingerprint) if entry.settings["resolution"] == 2.0]
    assert len(matching) == 1


def test_what_was_at_hand_last_comes_first(desk, edges):
    fingerprint = desk.open_bytes(edges.encode(), "friends.tsv")
    desk.workspace.remember("network at hand", fingerprint)
    assert desk.first_network() == fingerprint
    desk.keep_wanted(fingerprint, {"method": "louvain"})
    assert desk.last_wanted(fingerprint) == {"method": "louvain"}
