"""A whole result comes back from the workspace exactly as it went in."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace
from pathlib import Path

import networkx
import numpy as np
import pandas as pd
import pytest

from analysis.compute import InProcess
from analysis.evidence import run_study
from analysis.modules import Modules
from analysis.network import Network
from analysis.study import NullDraws, Study, StudySettings
from app.workspace import Workspace
from app.workspace.encoding import DOCUMENT, study_to_arrays


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


def make_study(network: Network) -> Study:
    modules = Modules.from_members(
        network.node_count,
        [np.array([0, 1, 2]), np.array([2, 3])],
        method="leiden",
        settings={"resolution": 1 / 3, "k": None, "quality": "modularity", "iterations": -1},
        quality=float("nan"),
        seed=2**40,
    )
    membership = pd.DataFrame(
        {
            "gene": ["SmA1", "Ørn β", "=1+1", "line\nbreak", ""],
            "module": ["M1", "M1", "M2", "M2", "M2"],
            "confidence": [1.0, 1 / 3, float("nan"), 0.1 + 0.2, -0.0],
            "second_module": [None, "M2", None, "M1", None],
            "degree": np.array([3, 2, 1, 0, 9], np.int32),
            "role": ["R1", None, "R7", "", "R2"],
        }
    )
    table = pd.DataFrame(
        {
            "module": ["M1", "M2"],
            "size": np.array([3, 2], np.int64),
            "p_value": [5e-324, float("inf")],
            "below_resolution_limit": [True, False],
            "share": np.array([1 / 3, 0.25], np.float32),
        }
    )
    # The columns of text in both forms that pandas may give them.
    membership["second_module"] = (
        membership["second_module"].astype(object).where(membership["second_module"].notna(), None)
    )
    return Study(
        network=network,
        settings=StudySettings(resolution="suggest", seed=3, names={"M2": "bilayer repair"}, min_weight=0.1 + 0.2),
        modules=modules,
        membership=membership,
        module_table=table,
        modularity=0.1 + 0.2,
        shown="the best of 50 runs",
        seed_ami=2 / 3,
        noise_ami=float("nan"),
        nulls=NullDraws(0.5, np.random.default_rng(1).random(100)),
        suggestion="",
        sentences=("A first one.", "Ein zweiter: ≥ 3."),
        copies=10,
        returned=np.array([10, 4], np.int32),
    )


def assert_same_study(found: Study | None, expected: Study) -> None:
    assert found is not None
    assert found is not expected
    pd.testing.assert_frame_equal(found.membership, expected.membership, check_exact=True)
    pd.testing.assert_frame_equal(found.module_table, expected.module_table, check_exact=True)
    assert np.signbit(found.membership["confidence"].to_numpy()[4])
    assert found.settings == expected.settings
    for name in ("modularity", "shown", "seed_ami", "suggestion", "sentences", "copies"):
        assert getattr(found, name) == getattr(expected, name)
    assert np.isnan(found.noise_ami)
    assert_same_network(found.network, expected.network)
    assert_same_modules(found.modules, expected.modules)
    if expected.nulls is None or found.nulls is None:
        assert found.nulls is expected.nulls
    else:
        assert found.nulls.observed == expected.nulls.observed
        np.testing.assert_array_equal(found.nulls.draws, expected.nulls.draws)
        assert found.nulls.z == expected.nulls.z


def assert_same_modules(found: Modules, expected: Modules) -> None:
    assert len(found) == len(expected)
    for one, other in zip(found.members, expected.members, strict=True):
        np.testing.assert_array_equal(one, other)
        assert one.dtype == np.int32
        assert not one.flags.writeable
    assert (found.node_count, found.method, found.settings) == (expected.node_count, expected.method, expected.settings)
    assert (np.isnan(found.quality), found.seed) == (np.isnan(expected.quality), expected.seed)


def assert_same_network(found: Network, expected: Network) -> None:
    assert found.names == expected.names
    assert found.fingerprint == expected.fingerprint
    assert (found.label, dict(found.provenance)) == (expected.label, dict(expected.provenance))
    assert (found.weights is None) == (expected.weights is None)
    assert not found.sources.flags.writeable


@pytest.mark.parametrize("weighted", [True, False])
def test_a_study_comes_back_exactly(folder: Path, weighted: bool):
    network = make_network(weighted=weighted)
    study = make_study(network)
    without = replace(study, nulls=None, modules=Modules(network.node_count, ()), sentences=(), returned=None)
    cut = replace(study, network=replace(network.with_edges(np.array([True, False, True, True])), label="cut"))
    with Workspace.open(folder) as workspace:
        workspace.add_network(network, {}, None, "a.tsv")
        for key, saved in (("one", study), ("two", without), ("three", cut)):
            workspace.save_study(key, saved)
            assert workspace.study(key) is saved
        workspace.add_network(replace(network, label="renamed since"), {}, None, "a.tsv")
    with Workspace.open(folder) as workspace:
        assert_same_study(workspace.study("one"), study)
        assert_same_study(workspace.study("two"), without)
        assert_same_study(workspace.study("three"), cut)
        found = workspace.study("one")
        assert found is not None
        np.testing.assert_array_equal(found.returned, study.returned)
        assert len(workspace.networks()) == 1


def test_a_study_in_the_form_of_another_version_counts_as_none(folder: Path, caplog: pytest.LogCaptureFixture):
    arrays = study_to_arrays(make_study(make_network()))
    with Workspace.open(folder) as workspace:
        workspace.save_study("one", make_study(make_network()))
        for old, new in (
            (b'"shown"', b'"drawn"'),
            (b'"kept": "Modules"', b'"kept": "Groups!"'),
            (b'"seed": 3', b'"seed":-3'),
        ):
            text = arrays[DOCUMENT].tobytes()
            assert old in text
            changed = arrays | {DOCUMENT: np.frombuffer(text.replace(old, new), np.uint8)}
            workspace.save_arrays("study", "other", changed)
            assert workspace.study("other") is None
    assert caplog.text.count("computed again") == 3


def test_what_cannot_be_kept_exactly_is_refused(workspace: Workspace):
    study = make_study(make_network())
    table = study.membership
    for unfit in (table.set_index("gene"), table.astype({"role": "category"}), table.assign(role=[{}] * 5)):
        with pytest.raises(TypeError, match="kept"):
            workspace.save_study("one", replace(study, membership=unfit))
    assert workspace.study("one") is None


def test_a_computed_study_comes_back_exactly(folder: Path):
    network = Network.from_edges([(str(one), str(other)) for one, other in networkx.les_miserables_graph().edges()])
    study = run_study(network, StudySettings(runs=4, nulls=4, seed=1), compute=InProcess())
    with Workspace.open(folder) as workspace:
        workspace.save_study("one", study)
    with Workspace.open(folder) as workspace:
        found = workspace.study("one")
    assert found is not None
    pd.testing.assert_frame_equal(found.membership, study.membership, check_exact=True)
    pd.testing.assert_frame_equal(found.module_table, study.module_table, check_exact=True)
    assert_same_modules(found.modules, study.modules)
    assert (found.settings, found.sentences, found.seed_ami) == (study.settings, study.sentences, study.seed_ami)
    assert study_to_arrays(found).keys() == study_to_arrays(study).keys()
    for name, array in study_to_arrays(study).items():
        np.testing.assert_array_equal(study_to_arrays(found)[name], array)
