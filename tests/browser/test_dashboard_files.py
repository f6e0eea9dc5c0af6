"""Files brought to the dashboard, good and bad, in a real Chromium; what a workspace remembers."""

from __future__ import annotations

import base64
import gzip
from collections.abc import Callable
from pathlib import Path

import numpy as np
from playwright.sync_api import expect

from analysis.evidence import run_study
from analysis.study import StudySettings
from tests.browser.networks import EDGES, NODES, les_miserables, write_les_miserables
from tests.browser.screen import Screen
from tests.dashboard import served

TWICE = "Valjean\tCosette\t31"
"""Stands the other way round already, with the same weight."""
ITSELF = "Valjean\tValjean\t1"
HEAVY = "Valjean\tPolitician\theavy"
ALONE = "Gavroche"
TOO_LONG = b"x" * 10_000_000
BAD_FILES = {
    "empty.tsv": (b"", "empty"),
    "picture.png": (bytes(range(256)) * 40, "picture.png"),
    "one_column.txt": (b"gene\n" + b"bef1\n" * 20, "one_column.txt"),
    "cut.tsv.gz": (gzip.compress(b"bef1\tbef2\n" * 5000)[:-40], "cut.tsv.gz"),
    "long_line.tsv": (TOO_LONG, "long_line.tsv"),
}

DROP = """([name, content]) => {
  const bytes = Uint8Array.from(atob(content), (letter) => letter.charCodeAt(0));
  const files = new DataTransfer();
  files.items.add(new File([bytes], name));
  const event = new DragEvent("drop", { dataTransfer: files, bubbles: true, cancelable: true });
  document.getElementById("drop").dispatchEvent(event);
}"""


def load(screen: Screen, path: Path) -> None:
    """Choose a file with the picker of the Intake station."""
    with screen.page.expect_file_chooser() as chooser:
        screen.page.locator("#drop").click()
    chooser.value.set_files(path)


def test_a_file_comes_in_by_the_picker_and_takes_the_place_of_the_network(screen: Screen, tmp_path: Path):
    path = write_les_miserables(tmp_path, TWICE, ITSELF, HEAVY, ALONE)
    screen.go("Intake")
    with screen.another_clustering():
        load(screen, path)
    expect(screen.page.locator("#map-name")).to_have_text("les_miserables")
    expect(screen.page.locator("#map-counts")).to_have_text(f"{NODES} genes, {EDGES} interactions")
    assert (screen.stats()["nodes"], screen.stats()["edges"]) == (NODES, EDGES)
    rows = screen.pane.get_by_role("table", name="Rows", exact=True).locator("tbody tr")
    told = [int(row.locator(".number").inner_text().replace(",", "")) for row in rows.all()]
    assert told == [EDGES + 4, EDGES, 1, 1, 2]
    assert told[0] == sum(told[1:])  # rows = edges + duplicates merged + self-loops + rejected
    left_out = screen.pane.get_by_role("table", name="Rows left out").locator("tbody tr")
    expect(left_out.nth(0)).to_contain_text(f"{EDGES + 4}")  # a line for the names of the columns, two good ones before
    expect(left_out.nth(0)).to_contain_text("heavy")
    expect(left_out.nth(1)).to_contain_text(f"{EDGES + 5}")
    screen.go("Modules")
    screen.settle()
    network = les_miserables()
    assert screen.modules() == len(run_study(network, StudySettings(nulls=0)).modules)
    screen.go("Intake")  # and back, through the workspace's list
    with screen.another_clustering():
        screen.pane.get_by_role("button", name="saltmarsh moss, stress interactome").click()
    expect(screen.page.locator("#map-name")).to_have_text("saltmarsh moss, stress interactome")


def test_a_bad_file_is_explained_beside_the_drop_area_and_changes_nothing(screen: Screen):
    title, counts = screen.title(), screen.page.locator("#map-counts").inner_text()
    study, positions = screen.study(), screen.positions()
    screen.go("Intake")
    message = screen.pane.locator("#drop + .fault")
    for name, (content, named) in BAD_FILES.items():
        screen.page.evaluate(DROP, [name, base64.b64encode(content).decode()])
        expect(message).to_contain_text(named)
        expect(message).to_contain_text(name)
        assert "Traceback" not in message.inner_text()
        assert len(message.inner_text()) < 400
        assert (screen.title(), screen.page.locator("#map-counts").inner_text()) == (title, counts)
    screen.go("Modules")
    expect(screen.pane.locator(".fault")).to_have_count(0)
    assert screen.study() == study
    np.testing.assert_array_equal(screen.positions(), positions)


def test_a_bad_file_dropped_at_another_station_is_explained_there(screen: Screen):
    screen.go("Handover")
    screen.page.evaluate(DROP.replace('getElementById("drop")', "body"), ["empty.tsv", ""])
    expect(screen.pane.locator(".fault")).to_contain_text("empty.tsv")


def test_a_restart_finds_the_network_the_trail_and_the_names_again(opened: Callable[..., Screen], tmp_path: Path):
    path, workspace = write_les_miserables(tmp_path), tmp_path / "workspace"
    with served(workspace, str(path)) as address:
        screen = opened(address)
        screen.find("M1")
        expect(screen.pane.locator("h1")).to_have_text("M1")
        screen.page.locator("#module-name").fill("the barricade")
        screen.page.locator("#module-name").press("Enter")
        expect(screen.pane.locator("h1")).to_contain_text("the barricade")
        screen.page.keyboard.press("Escape")
        screen.show_all()
        screen.fill_ruler()
        screen.ruler.focus()
        with screen.another_clustering():
            screen.page.keyboard.press("ArrowRight")
        trail = screen.pane.get_by_role("table", name="Trail of clusterings").inner_text()
        modules, positions = screen.modules(), screen.positions()
        screen.context.close()  # its server is about to end
    with served(workspace) as address:
        screen = opened(address)  # another profile of the browser, which has nothing of the first
        assert screen.title() == "les_miserables"
        assert screen.modules() == modules
        np.testing.assert_array_equal(screen.positions(), positions)
        assert screen.pane.get_by_role("table", name="Trail of clusterings").inner_text() == trail
        with screen.another_clustering():
            screen.pane.get_by_role("button", name="Leiden, wide neighbourhoods, 1, seed 1").click()
        screen.find("the barricade")
        expect(screen.pane.locator("h1")).to_contain_text("M1")
        screen.context.close()
