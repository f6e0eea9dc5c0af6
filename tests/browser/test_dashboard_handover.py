"""What the Handover station gives, in a real Chromium: the zip, what is in it, and that its recipe repeats it."""

from __future__ import annotations

import json
import os
import subprocess
import sys
import zipfile
from pathlib import Path
from typing import TYPE_CHECKING

import networkx as nx
import pandas as pd
import pytest
from playwright.sync_api import expect

from tests.browser.screen import Screen
from tests.dashboard import TOP

if TYPE_CHECKING:
    from playwright.sync_api import Browser

TABLES = ("membership.csv", "modules.csv")
FILES = (*TABLES, "gene_lists/M1.txt", "gene_lists/background.txt", "summary.json", "recipe.toml", "report.html")


def hand_over(screen: Screen, folder: Path) -> Path:
    """Press the button, save what comes and unpack it."""
    screen.go("Handover")
    with screen.page.expect_download() as download:
        screen.press("Write and save the zip")
    assert download.value.suggested_filename.endswith("-modules.zip")
    with zipfile.ZipFile(download.value.path()) as packed:
        assert packed.testzip() is None
        packed.extractall(folder)
    return folder


def modularity_by_networkx(membership: pd.DataFrame) -> float:
    modules = membership.groupby("module")["gene"].apply(list)
    return float(nx.community.modularity(nx.les_miserables_graph(), modules, weight="weight"))


def rerun(recipe: Path, out: Path) -> None:
    """Repeat what was handed over, as the recipe says, in a process of its own."""
    command = [sys.executable, "-m", "app.cli", "rerun", str(recipe), "-o", str(out)]
    subprocess.run(command, cwd=recipe.parent, env={**os.environ, "PYTHONPATH": str(TOP)}, check=True)


def test_the_zip_holds_everything_and_repeats_itself(small: Screen, browser: Browser, tmp_path: Path):
    modules = small.modules()
    folder = hand_over(small, tmp_path / "handed over")
    for name in (*FILES, "network.graphml"):
        assert (folder / name).is_file(), name
    membership = pd.read_csv(folder / "membership.csv")
    assert set(membership["gene"]) == set(nx.les_miserables_graph().nodes)
    assert membership["module"].nunique() == modules == len(pd.read_csv(folder / "modules.csv"))
    assert (folder / "gene_lists" / "M1.txt").read_text("utf-8").split("\n")[:-1] == membership.query("module == 'M1'")[
        "gene"
    ].tolist()
    summary = json.loads((folder / "summary.json").read_text("utf-8"))
    assert summary["modularity"] == pytest.approx(modularity_by_networkx(membership), abs=1e-12)
    assert nx.read_graphml(folder / "network.graphml").number_of_edges() == nx.les_miserables_graph().number_of_edges()
    expect(small.page.locator("#path [aria-current=page]")).to_have_attribute("data-state", "done")

    rerun(folder / "recipe.toml", tmp_path / "again")
    for name in TABLES:
        assert (tmp_path / "again" / name).read_bytes() == (folder / name).read_bytes(), name

    told: list[str] = []
    context = browser.new_context(offline=True)
    page = context.new_page()
    page.on("console", lambda message: told.append(message.text))
    page.on("pageerror", lambda error: told.append(str(error)))
    page.on("request", lambda request: told.append(request.url))
    address = (folder / "report.html").as_uri()
    page.goto(address)
    expect(page.locator("h1")).to_be_visible()
    assert told == [address]
    context.close()


def test_a_name_given_to_a_module_is_handed_over_too(small: Screen, tmp_path: Path):
    small.find("M2")
    expect(small.pane.locator("h1")).to_have_text("M2")
    small.page.locator("#module-name").fill("bishop's household")
    small.press("Name it")
    expect(small.pane.locator("h1")).to_contain_text("bishop's household")
    folder = hand_over(small, tmp_path / "named")
    named = pd.read_csv(folder / "modules.csv").set_index("module")["name"]
    assert named["M2"] == "bishop's household"
    assert named.drop("M2").isna().all()
