"""The Bridges station in a real Chromium: a role clicked, a bridge taken out and put back, k picked on its ruler."""

from __future__ import annotations

import re

import pytest
from playwright.sync_api import expect

from tests.browser.screen import Screen


@pytest.fixture
def bridges(screen: Screen) -> Screen:
    screen.go("Bridges")
    expect(screen.pane.get_by_role("table", name="Ranking of removals")).to_be_visible(timeout=60_000)
    expect(screen.pane.locator("#k-ruler")).to_be_visible(timeout=60_000)
    return screen


def nodes_on_the_map(screen: Screen) -> int:
    """Count the pixels of the map's layer of nodes that are not empty."""
    count: int = screen.page.evaluate(
        """() => {
          const layer = document.querySelector("canvas[data-layer=nodes]");
          const copy = new OffscreenCanvas(layer.width, layer.height).getContext("2d");
          copy.drawImage(layer, 0, 0);
          const { data } = copy.getImageData(0, 0, layer.width, layer.height);
          let filled = 0;
          for (let place = 3; place < data.length; place += 4) if (data[place] > 0) filled += 1;
          return filled;
        }"""
    )
    return count


def test_a_role_lists_its_genes(bridges: Screen):
    row = bridges.pane.get_by_role("table", name="Roles", exact=True).get_by_role("row", name=re.compile("^connector"))
    count = int(row.get_by_role("cell").nth(1).inner_text().replace(",", ""))
    row.get_by_role("button", name="connector hub").click()
    expect(bridges.pane.locator(".verdict")).to_contain_text(f"All {count} genes")


def test_a_bridge_is_taken_out_and_put_back(bridges: Screen):
    ranking = bridges.pane.get_by_role("table", name="Ranking of removals")
    gene = ranking.locator("tbody tr").first.get_by_role("cell").first.inner_text()
    before = nodes_on_the_map(bridges)
    ranking.get_by_role("button", name="take out").first.click()
    told = bridges.pane.locator("#taken-out-area")
    expect(told).to_contain_text(f"Without {gene}, ")
    expect(told.get_by_role("table", name="Paths between modules")).to_be_visible()
    bridges.page.wait_for_function("() => !corymb.map.stats().waiting")
    assert nodes_on_the_map(bridges) < before
    told.get_by_role("button", name="Put back").click()
    expect(told).to_contain_text("Nothing is taken out")


def test_genes_are_taken_out_by_name(bridges: Screen):
    ranking = bridges.pane.get_by_role("table", name="Ranking of removals")
    genes = [ranking.locator("tbody tr").nth(place).get_by_role("cell").first.inner_text() for place in (0, 1)]
    field = bridges.page.locator("#take-out-text")
    field.fill(f"{genes[0].upper()}, {genes[1]}")
    field.press("Enter")
    expect(bridges.pane.locator("#taken-out-area")).to_contain_text("Without these 2 genes, ")
    bridges.page.locator("#take-out-text").fill("no-such-gene")
    bridges.page.locator("#take-out-text").press("Enter")
    expect(bridges.pane.get_by_role("alert")).to_contain_text("not in this network: no-such-gene")


def test_the_map_of_modules_hides_weak_links(bridges: Screen):
    drawing = bridges.pane.locator("#module-map-area img")
    expect(drawing).to_be_visible()
    before = drawing.get_attribute("src")
    bridges.pane.get_by_text("beyond chance", exact=True).click()
    expect(drawing).not_to_have_attribute("src", str(before))


def test_k_is_picked_on_its_ruler(bridges: Screen):
    with bridges.another_clustering():
        bridges.pane.locator("#k-ruler").get_by_role("button", name="4", exact=True).click()
    expect(bridges.pane.locator("#k-ruler [aria-pressed=true]")).to_have_text("4")
    expect(bridges.pane.get_by_role("table", name="Shared genes")).to_be_visible()
