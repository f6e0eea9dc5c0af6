"""Where the shipped files are: in this checkout, and in the shape that an installed wheel has."""

from __future__ import annotations

import shutil
import subprocess
import sys
import tomllib
from pathlib import Path

import pytest

from analysis.errors import CorymbError
from app.places import assets_folder, sample_folder, shipped_folder
from app.workspace import default_folder

ROOT = Path(__file__).resolve().parents[2]
ASK = "from app.places import *; print(assets_folder()); print(sample_folder())"


def test_a_checkout_has_them_at_its_top():
    assert assets_folder() == ROOT / "assets"
    assert sample_folder() == ROOT / "sample_networks"


def test_an_installed_copy_has_them_inside_from_any_folder(tmp_path: Path):
    """The tree is laid out as pyproject.toml tells the wheel to be; beside it stand folders of others."""
    site = tmp_path / "site-packages"
    wheel = tomllib.loads((ROOT / "pyproject.toml").read_text())["tool"]["hatch"]["build"]["targets"]["wheel"]
    assert {"/analysis", "/app"} <= set(wheel["include"])
    for needed in ("analysis/__init__.py", "analysis/errors.py", "app/__init__.py", "app/places.py"):
        (site / needed).parent.mkdir(parents=True, exist_ok=True)
        shutil.copy(ROOT / needed, site / needed)
    for source, target in wheel["sources"].items():
        assert (ROOT / source).is_dir()
        (site / target).mkdir(parents=True)
        (site / source).mkdir()  # another package's
    elsewhere = tmp_path / "elsewhere"
    elsewhere.mkdir()
    answer = subprocess.run(
        [sys.executable, "-c", ASK],
        cwd=elsewhere,
        env={"PYTHONPATH": str(site)},
        capture_output=True,
        text=True,
        check=True,
    )
    assert answer.stdout.split() == [str(site / "app/shipped/assets"), str(site / "app/shipped/sample_networks")]


def test_a_copy_that_is_not_whole_says_so(tmp_path: Path):
    (tmp_path / "assets").mkdir()  # another package's: no checkout, since there is no pyproject.toml
    with pytest.raises(CorymbError, match="not whole, install it again"):
        shipped_folder("assets", tmp_path / "app")


def test_the_workspace_has_a_place_of_its_own():
    assert default_folder().is_absolute()
    assert default_folder().name == "corymb"
