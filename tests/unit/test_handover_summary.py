"""The summary: valid JSON with what the contract names."""

from __future__ import annotations

import json
import tomllib
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from analysis.handover import bundle_files
from analysis.handover.bundle import report_from_plain
from analysis.handover.summary import json_bytes, summary_file
from analysis.intake import parse_network
from analysis.study import NullDraws
from analysis.version import VERSION, versions
from tests.handover import bundle_of, karate_text

REPOSITORY = Path(__file__).resolve().parents[2]


def test_it_holds_what_the_contract_names():
    bundle = bundle_of(karate_text(), "karate.txt")
    summary = json.loads(bundle_files(bundle)["summary.json"])
    contract = {
        "network",
        "method",
        "settings",
        "quality",
        "modularity",
        "modules",
        "stability",
        "significance",
        "versions",
    }
    assert contract <= set(summary)
    # 34 nodes and 78 edges: Zachary 1977, as networkx carries it
    assert summary["network"]["nodes"] == 34
    assert summary["network"]["edges"] == 78
    assert summary["network"]["fingerprint"] == bundle.study.network.fingerprint
    assert {"seed_ami", "noise_ami"} <= set(summary["stability"])
    assert {"null_mean", "null_sd", "z", "p_value"} <= set(summary["significance"])
    assert {"corymb", "python", "igraph", "leidenalg", "networkx", "numpy", "scipy", "pandas"} <= set(
        summary["versions"]
    )


def test_figures_that_were_not_computed_are_null():
    bundle = bundle_of(karate_text(), runs=1, noise=0.0)
    summary = json.loads(summary_file(bundle)["summary.json"])
    assert summary["stability"] == {"seed_ami": None, "noise_ami": None}
    assert summary["significance"]["p_value"] is None


def test_significance_follows_the_draws():
    bundle = bundle_of(karate_text())
    study = replace(bundle.study, nulls=NullDraws(0.4, np.array([0.1, 0.2, 0.3, 0.4])))
    found = json.loads(summary_file(replace(bundle, study=study))["summary.json"])["significance"]
    # by hand: mean 0.25, sum of squares 0.05, sample variance 0.05/3, one of four reaches 0.4
    assert found["null_mean"] == pytest.approx(0.25)
    assert found["null_sd"] == pytest.approx((0.05 / 3) ** 0.5)
    assert found["z"] == pytest.approx(0.15 / (0.05 / 3) ** 0.5)
    assert found["p_value"] == pytest.approx(2 / 5)
    assert found["null_networks"] == 4


def test_json_has_no_word_for_what_is_not_a_number():
    content = json_bytes({"a": float("nan"), "b": np.float64("inf"), "c": [np.int64(1), 0.1], "d": np.bool_(True)})
    assert json.loads(content, parse_constant=pytest.fail) == {"a": None, "b": None, "c": [1, 0.1], "d": True}


def test_the_version_is_that_of_the_package():
    project = tomllib.loads((REPOSITORY / "pyproject.toml").read_text(encoding="utf-8"))["project"]
    assert project["version"] == VERSION == versions()["corymb"]


def test_a_report_comes_back_from_its_plain_form():
    text = "# note\np,q,score\na,b,0.5\nb,c,0.25\nb,c,0.5\nc,c,1\nd,,1\n"
    report = parse_network(text.encode(), "x.csv").report
    plain = json.loads(json.dumps(report.as_json() | {"sentences": report.sentences()}))
    assert report_from_plain(plain) == report
