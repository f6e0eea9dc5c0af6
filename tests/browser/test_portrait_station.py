"""The Portrait station in a real Chromium: drawn by itself, figures saved, hubs taken off the map."""

from __future__ import annotations

import re
from pathlib import Path

import numpy as np
import pytest
from playwright.sync_api import expect
from scipy.sparse.csgraph import connected_components

from analysis.intake import read_network
from analysis.network import Network
from tests.browser.screen import PATIENCE, Screen

FIGURES = ("degree_distribution", "degrees_cumulative", "clustering_by_degree", "distances", "removals")
COMPLETE = """() => {
  const text = (id) => document.getElementById(id)?.textContent ?? "";
  return text("progress-area") === "" && text("pane-body").includes("same degrees 0")
    && !text("pane-body").includes("More is being worked out") && document.querySelector("#removal-slider");
}"""


@pytest.fixture(scope="module")
def network(sample_file: Path) -> Network:
    return read_network(sample_file).network


@pytest.fixture
def portrait(screen: Screen) -> Screen:
    """Return the window at the station, with everything there; a small network needs no button."""
    screen.go("Portrait")
    screen.page.wait_for_function(COMPLETE, timeout=2 * PATIENCE)
    return screen


def test_it_draws_itself_and_says_what_network_this_is(portrait: Screen, network: Network):
    expect(portrait.pane.locator(".verdict")).to_contain_text(
        f"{network.node_count:,} genes and {network.edge_count:,} interactions"
    )
    for name in FIGURES:
        figure = portrait.pane.locator(f"[data-name={name}]")
        expect(figure).to_have_attribute("title", re.compile("^After .*[0-9]{4}"))
        assert figure.locator("img").evaluate("(image) => image.complete && image.naturalWidth > 0")
    expect(portrait.page.locator("#path button", has_text="Portrait")).to_have_attribute("data-state", "done")
    best = network.names[int(network.degree.argmax())]
    expect(portrait.pane.get_by_role("table", name="Hubs").locator("tbody tr").first).to_contain_text(best)


@pytest.mark.parametrize(("kind", "begins"), [("svg", b"<?xml"), ("png", b"\x89PNG"), ("csv", b"removal,removed,")])
def test_a_figure_is_saved_as_drawing_pixels_and_data(portrait: Screen, kind: str, begins: bytes):
    with portrait.page.expect_download() as coming:
        portrait.pane.locator(f"[data-name=removals] [data-save={kind}]").click()
    assert coming.value.suggested_filename == f"removals.{kind}"
    assert Path(coming.value.path()).read_bytes().startswith(begins)


def test_the_slider_takes_hubs_off_the_map_and_leaving_brings_them_back(portrait: Screen, network: Network):
    told = portrait.page.locator("#removal-area output")
    expect(told).to_contain_text("None removed")
    before = portrait.colours()
    portrait.page.locator("#removal-slider").fill("10")
    order = np.lexsort((np.arange(network.node_count), -network.degree))
    gone = order[: round(0.1 * network.node_count)]
    kept = np.setdiff1d(np.arange(network.node_count), gone)
    _, labels = connected_components(network.adjacency[kept][:, kept], directed=False)
    share = round(100 * np.bincount(labels).max() / network.node_count)
    expect(told).to_contain_text(f"{len(gone)} genes gone")
    expect(told).to_contain_text(f"holds {share}\u00a0% of all genes; {labels.max() + 1} components")
    changed = "() => !corymb.map.stats().waiting"
    portrait.page.wait_for_function(changed)
    after = portrait.colours()
    assert (before[gone] != after[gone]).any(axis=1).mean() > 0.9
    portrait.go("Modules")
    portrait.page.wait_for_function(changed)
    np.testing.assert_array_equal(portrait.colours(), before)
