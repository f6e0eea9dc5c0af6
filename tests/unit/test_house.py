"""The house itself: what lies where, what is shipped, and that the papers say what is so."""

from __future__ import annotations

import re
import subprocess
import sys
import tomllib
import zipfile
from pathlib import Path
from typing import Any

import pytest

ROOT = Path(__file__).resolve().parents[2]
PROJECT: dict[str, Any] = tomllib.loads((ROOT / "pyproject.toml").read_text(encoding="utf-8"))
TOP_LEVEL = {
    "DEVELOPERS.md",
    "LICENSE",
    "README.md",
    "analysis",
    "app",
    "assets",
    "pyproject.toml",
    "sample_networks",
    "tests",
}
NAMESPACES = {"www.w3.org"}
"""Hosts in names of XML vocabularies, which nobody fetches."""
OWN_CODE = (".js", ".css", ".svg", ".html")


def tracked() -> list[str]:
    """Return the files of the repository; of a copy without git, all but caches and environments."""
    if (ROOT / ".git").exists():
        listed = subprocess.run(["git", "ls-files", "-z"], cwd=ROOT, capture_output=True, text=True, check=True)
        return [name for name in listed.stdout.split("\0") if (ROOT / name).is_file()]
    names = [path.relative_to(ROOT).as_posix() for path in ROOT.rglob("*") if path.is_file()]
    return [name for name in names if not re.search(r"(^|/)(\.(?!ci/)|__pycache__/|build/|dist/)|\.egg-info/", name)]


def read(name: str) -> str:
    return (ROOT / name).read_text(encoding="utf-8")


def commands(name: str) -> list[str]:
    """Return the shell lines between the README's marks of this name."""
    between = re.search(rf"<!-- {name} -->\n```sh\n(.*?)```\n<!-- end -->", read("README.md"), re.DOTALL)
    assert between is not None
    return between[1].splitlines()


def test_the_top_level_has_nothing_else():
    entries = {name.split("/")[0] for name in tracked()}
    assert {entry for entry in entries if not entry.startswith(".")} == TOP_LEVEL


def test_no_cache_or_environment_is_tracked():
    assert not [name for name in tracked() if re.search(r"__pycache__|\.pyc$|\.egg-info|^\.venv/", name)]


def test_the_command_knows_the_project_s_version():
    answer = subprocess.run(
        [sys.executable, "-m", "app.cli", "--version"], cwd=ROOT, capture_output=True, text=True, check=True
    )
    assert answer.stdout.strip() == f"corymb {PROJECT['project']['version']}"


def test_each_set_up_is_one_line_that_makes_its_own_environment():
    for name, last in (("open command", ".venv/bin/corymb open"), ("test command", ".venv/bin/python -m tests")):
        (line,) = commands(name)
        assert line.startswith("python3 -m venv .venv && .venv/bin/pip install ")
        assert line.endswith(f" && {last}")


def test_ci_takes_its_command_from_the_readme(tmp_path: Path):
    """The script runs on a copy of the README whose command only tells that it ran."""
    (tmp_path / ".ci").mkdir()
    (tmp_path / ".ci" / "run").write_bytes((ROOT / ".ci" / "run").read_bytes())
    (line,) = commands("test command")
    stand_in = "python3 -c 'print(\"ran\")'"
    assert line in read("README.md")
    (tmp_path / "README.md").write_text(read("README.md").replace(line, stand_in), encoding="utf-8")
    answer = subprocess.run(
        ["bash", str(tmp_path / ".ci" / "run")],
        cwd="/",
        stdin=subprocess.DEVNULL,
        capture_output=True,
        text=True,
        check=True,
        env={"PATH": f"{Path(sys.executable).parent}:/usr/bin:/bin", "CORYMB_CHROMIUM": "/not/needed/here"},
    )
    assert answer.stdout.splitlines() == [f"+ {stand_in}", "ran"]


def test_every_dependency_has_a_lower_bound_and_a_reason():
    table = dict(re.findall(r"^\| `([\w-]+)` \| (\S.*) \|$", section("Dependencies"), re.MULTILINE))
    extras = PROJECT["project"]["optional-dependencies"]
    needed = [*PROJECT["project"]["dependencies"], *extras["dask"], *extras["test"]]
    unbounded = [each for each in needed if ">=" not in each]
    assert unbounded == ["corymb[dask]"]
    assert {re.split(r"[>\[]", each)[0] for each in needed} == set(table)


def section(title: str) -> str:
    """Return a chapter of DEVELOPERS.md."""
    text = re.search(rf"^## {title}\n(.*?)(?=^## |\Z)", read("DEVELOPERS.md"), re.DOTALL | re.MULTILINE)
    assert text is not None
    return text[1]


@pytest.mark.parametrize("document", ["README.md", "DEVELOPERS.md", "sample_networks/README.md"])
def test_files_that_the_papers_name_are_there(document: str):
    here = [ROOT, (ROOT / document).parent]
    named = set(re.findall(r"`((?:[\w.-]+/)+[\w.-]*)`", read(document))) | set(
        re.findall(r"\]\((?!https?:)([^)#]+)\)", read(document))
    )
    written_by_us = {"gene_lists/M1.txt"}
    missing = [
        name
        for name in named - written_by_us
        if "NEW" not in name
        and not any((place / part / name).exists() for place in here for part in ("", "analysis", "app"))
        and not (ROOT / "analysis/handover" / name).exists()
    ]
    assert missing == []


def test_every_file_of_the_science_and_the_app_is_told_of():
    """Each module or package stands in the layout, by name or under a star; each layer holds it (`lint-imports`)."""
    told = re.findall(r"`([\w/*.-]+)`", section("Layout of the repository"))
    names = {Path(name).name for name in told} | {name.split("/")[0] for name in told}
    patterns = [re.escape(name).replace(r"\*", ".*") for name in names]
    for folder in ("analysis", "app"):
        for path in (ROOT / folder).iterdir():
            if path.name.startswith("__") or path.suffix not in {"", ".py"}:
                continue
            assert any(re.fullmatch(pattern, path.name) for pattern in patterns), path


def test_nothing_in_the_assets_names_another_host():
    """What the browser gets; licences and the list of what was taken from where may name their origin."""
    for name in tracked():
        if not name.startswith("assets/") or not name.endswith(OWN_CODE):
            continue
        text = read(name)
        if "/vendor/" in name:
            text = re.sub(r"\A(?:// .*\n|/\*.*?\*/)+", "", text, flags=re.DOTALL)  # the notice of origin on top
        hosts = set(re.findall(r"(?:https?:|wss?:|url\(\s*['\"]?)//([\w.-]+)", text))
        assert hosts <= NAMESPACES, name


def test_sample_files_keep_their_bytes_on_every_system():
    assert "sample_networks/*.tsv -text" in read(".gitattributes").splitlines()


def test_the_wheel_has_all_that_the_program_shows_and_no_more(tmp_path: Path):
    subprocess.run(
        [sys.executable, "-m", "hatchling", "build", "-t", "wheel", "-d", str(tmp_path)],
        cwd=ROOT,
        capture_output=True,
        check=True,
    )
    (wheel,) = tmp_path.glob("*.whl")
    held = set(zipfile.ZipFile(wheel).namelist())
    for name in tracked():
        if name.startswith(("analysis/", "app/")):
            assert name in held
        elif name.startswith(("assets/", "sample_networks/")) and not name.startswith("assets/pictures/"):
            assert f"app/shipped/{name}" in held
    assert {name.split("/")[0] for name in held} == {
        "analysis",
        "app",
        f"corymb-{PROJECT['project']['version']}.dist-info",
    }
    assert not [name for name in held if "__pycache__" in name or "/pictures/" in name or name.endswith(".pyc")]
