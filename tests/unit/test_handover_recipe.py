"""The recipe: explicit, readable back, and strict about what it does not know."""

from __future__ import annotations

import tomllib
from dataclasses import fields

import pytest
import tomli_w

from analysis.compute import InProcess
from analysis.errors import InputError
from analysis.handover import Bundle, Source, SweepBundle, bundle_files, read_recipe, sweep_bundle_files
from analysis.intake import parse_network
from analysis.study import StudySettings
from analysis.trust.sweep import SweepSettings, run_sweep
from analysis.version import VERSION
from tests.handover import bundle_of, karate_text


@pytest.fixture(scope="module")
def text() -> str:
    bundle = bundle_of(karate_text(), "karate.txt", names={"M2": "bilayer repair"}, resolution=0.9, seed=7)
    return bundle_files(bundle)["recipe.toml"].decode()


def _changed(text: str, table: str, key: str, value: object) -> str:
    content = tomllib.loads(text)
    part = content if not table else content[table]
    if value is None:
        del part[key]
    else:
        part[key] = value
    return tomli_w.dumps(content)


def test_it_names_every_setting_and_the_file(text):
    content = tomllib.loads(text)
    always = {each.name for each in fields(StudySettings)} - {"names", "weight", "min_weight"}
    assert set(content["settings"]) == always
    assert content["network"]["file"] == "../karate.txt"
    assert content["versions"]["corymb"] == VERSION


def test_it_reads_back(text):
    recipe = read_recipe(text)
    expected = bundle_of(karate_text(), "karate.txt", names={"M2": "bilayer repair"}, resolution=0.9, seed=7)
    assert recipe.settings == expected.study.settings
    assert recipe.source == expected.source
    assert recipe.fingerprint == expected.study.network.fingerprint


def test_weights_and_cut_read_back():
    bundle = bundle_of("a b 0.5\nb c 0.7\na c 0.1\n", weight="3", min_weight=0.1)
    recipe = read_recipe(bundle_files(bundle)["recipe.toml"].decode())
    assert (recipe.weight, recipe.min_weight) == ("3", 0.1)
    assert recipe.settings == bundle.study.settings


def test_a_sweep_reads_back():
    reading = parse_network(karate_text().encode(), "karate.txt")
    settings = SweepSettings(steps=4, runs=2, low=0.5, high=2.0)
    sweep = run_sweep(reading.network, settings, InProcess())
    source = Source("karate.txt", reading.network.provenance["sha256"], "karate.txt")
    files = sweep_bundle_files(SweepBundle(reading.network, sweep, reading.report, source, min_weight=None))
    recipe = read_recipe(files["recipe.toml"].decode())
    assert recipe.settings == settings
    assert recipe.source == source


def test_without_a_file_there_is_nothing_to_repeat():
    bundle = bundle_of(karate_text())
    assert "recipe.toml" not in bundle_files(Bundle(bundle.study))


def test_whole_numbers_serve_as_numbers(text):
    assert read_recipe(_changed(text, "settings", "resolution", 2)).settings.resolution == 2.0


@pytest.mark.parametrize(
    ("table", "key", "value", "said"),
    [
        ("settings", "colour", "blue", "'colour'"),
        ("", "extra", {"a": 1}, "'extra'"),
        ("network", "folder", "x", "'folder'"),
        ("settings", "runs", None, "lacks 'runs'"),
        ("settings", "runs", "many", "runs is 'many'"),
        ("settings", "runs", True, "runs is True"),
        ("settings", "runs", 0, "--runs"),
        ("settings", "noise", "much", "noise is 'much'"),
        ("settings", "noise", 10**400, "noise is too large"),
        ("settings", "resolution", "fine", "resolution is 'fine'"),
        ("network", "sha256", None, "lacks 'sha256'"),
        ("network", "file", "", "file in [network]"),
        ("names", "M1", 3, "M1 in [names]"),
        ("", "work", "enrich", "work is 'enrich'"),
        ("", "work", ["modules"], "work is ['modules']"),
        ("", "settings", None, "[settings] is missing"),
        ("", "versions", None, "[versions] is missing"),
    ],
)
def test_what_it_does_not_know_is_named(text, table, key, value, said):
    with pytest.raises(InputError) as caught:
        read_recipe(_changed(text, table, key, value), "mine.toml")
    assert str(caught.value).startswith("mine.toml: ")
    assert said in str(caught.value)


def test_an_older_recipe_may_lack_a_newer_setting(text):
    older = _changed(_changed(text, "versions", "corymb", "0.0.1"), "settings", "show", None)
    assert read_recipe(older).settings == read_recipe(text).settings


def test_a_key_of_another_version_points_to_that_version(text):
    newer = _changed(_changed(text, "versions", "corymb", "9.1.0"), "settings", "colour", "blue")
    with pytest.raises(InputError, match=r"written by corymb 9\.1\.0"):
        read_recipe(newer)


@pytest.mark.parametrize("broken", ["work = ", "\x00", "a.b = 1\na = 2", "[" * 5000, "x = " + "[" * 20000])
def test_what_is_no_recipe_is_refused(broken):
    with pytest.raises(InputError, match="recipe"):
        read_recipe(broken)
