"""The dashboard on the sample network, in a real Chromium: what is seen, found, picked, named, sorted and drawn."""

from __future__ import annotations

import re
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest
from playwright.sync_api import expect

from analysis.evidence import run_study
from analysis.intake import read_network
from analysis.network import Network
from analysis.study import Study, StudySettings
from tests.browser.screen import Screen

INVENTED = "no-such-gene"


@pytest.fixture(scope="module")
def network(sample_file: Path) -> Network:
    return read_network(sample_file).network


@pytest.fixture(scope="module")
def study(network: Network) -> Study:
    """Return the clustering that the dashboard begins with, computed here without it."""
    return run_study(network, StudySettings(nulls=0))


@pytest.mark.parametrize("size", [(1366, 768), (1920, 1080)], ids=["laptop", "desk"])
def test_it_opens_on_the_sample_network_and_fits_the_window(
    opened: Callable[..., Screen], address: str, network: Network, size: tuple[int, int]
):
    screen = opened(address, viewport={"width": size[0], "height": size[1]})
    assert (screen.stats()["nodes"], screen.stats()["edges"]) == (network.node_count, network.edge_count)
    assert len(np.unique(screen.colours(), axis=0)) > 5
    assert screen.stats()["plates"]
    assert screen.page.evaluate("() => document.documentElement.scrollHeight <= innerHeight")
    assert screen.page.evaluate("() => document.documentElement.scrollWidth <= innerWidth")
    for part in ("#path", "#map", "#pane-body", "#pane-actions button", "#ruler svg", "#question-switch"):
        expect(screen.page.locator(part).first).to_be_in_viewport(ratio=0.99)


def test_its_clustering_is_the_one_that_the_analysis_finds(screen: Screen, study: Study):
    assert screen.modules() == len(study.modules)
    expect(screen.pane.locator(".verdict")).to_have_text(study.sentences[0])
    np.testing.assert_array_equal(screen.labels(), study.modules.labels)
    assert screen.row_count("module-grid") == len(study.modules)


def test_the_ruler_is_filled_and_suggests(screen: Screen):
    screen.fill_ruler()
    assert screen.page.locator("#ruler .ruler-missing").count() == 0
    assert screen.page.locator("#ruler .ruler-curve").count() == 1
    assert screen.page.locator("#ruler .ruler-plateau").count() >= 1
    expect(screen.ruler).to_have_attribute("aria-valuetext", re.compile(r"resolution 1, \d+ modules"))
    expect(screen.page.locator("#state-suggestion")).to_have_text(re.compile(r"suggested: [\d.]+"))


def test_a_typed_gene_opens_its_passport_in_any_case(screen: Screen, network: Network, study: Study):
    hubs = network.degree.argsort()[::-1][:3].tolist()
    for node, written in zip(hubs, (str, str.upper, str.capitalize), strict=True):
        gene = network.names[node]
        screen.find(written(gene))
        expect(screen.pane.locator("h1")).to_have_text(gene)
        expect(screen.crumbs()).to_contain_text("gene passport")
        expect(screen.pane.locator(".verdict")).to_contain_text(f"{gene} is in M{study.modules.labels[node] + 1}")
        expect(screen.pane).to_contain_text(f"{network.degree[node]} interactions, by module")


def test_a_typed_module_opens_its_passport_again_and_again(screen: Screen, study: Study):
    evidence = screen.pane.get_by_role("table", name="Evidence for the module")
    for place, typed in enumerate(("M1", "m2")):
        screen.find(typed)
        expect(screen.pane.locator("h1")).to_have_text(f"M{place + 1}")
        expect(screen.crumbs()).to_contain_text("module passport")
        expect(evidence.get_by_role("row", name=re.compile("^genes"))).to_contain_text(
            f"{study.modules.sizes[place]:,}"
        )
    screen.page.keyboard.press("Escape")
    expect(screen.crumbs()).to_have_text("Modules")
    screen.page.locator("#find").press("Enter")  # the same text once more
    expect(screen.crumbs()).to_contain_text("module passport")


def test_a_pasted_list_is_counted_by_module_with_what_is_missing(screen: Screen, network: Network, study: Study):
    chosen = [int(group[0]) for group in study.modules.members[:2]] + [int(study.modules.members[0][1])]
    words = [network.names[node] for node in chosen]
    screen.find(f"{words[0].upper()}\n{words[1]}, {INVENTED}\t{words[2]}\n{words[2]}")
    expect(screen.crumbs()).to_contain_text("found")
    expect(screen.pane.locator(".verdict")).to_have_text("3 of 4 are in this network.")
    counts = screen.pane.get_by_role("table", name="By module").locator("tbody tr")
    expect(counts).to_have_text([f"M1 2 {study.modules.sizes[0]}".replace(" ", ""), f"M21{study.modules.sizes[1]}"])
    expect(screen.pane).to_contain_text(f"Not in this network{INVENTED}")


def test_a_click_on_a_disc_opens_the_gene_and_escape_leads_back(screen: Screen, network: Network):
    gene = screen.uncovered_gene()
    x, y = screen.positions()[gene]
    screen.click_map(x, y)
    expect(screen.pane.locator("h1")).to_have_text(network.names[gene])
    screen.page.keyboard.press("Escape")
    expect(screen.crumbs()).to_have_text("Modules")
    screen.click_map(x, y)
    expect(screen.pane.locator("h1")).to_have_text(network.names[gene])
    screen.crumbs().get_by_role("button", name="Modules").click()
    expect(screen.crumbs()).to_have_text("Modules")


def test_a_name_given_to_a_module_stands_on_the_map_and_outlasts_a_reload(screen: Screen):
    plate = screen.stats()["plates"][0]
    number = f"M{plate['module'] + 1}"
    screen.click_map(plate["left"] + plate["width"] / 2, plate["top"] + plate["height"] / 2)
    expect(screen.pane.locator("h1")).to_have_text(number)
    screen.page.locator("#module-name").fill("rewetting crew")
    screen.press("Name it")
    expect(screen.pane.locator("h1")).to_have_text(f"{number}“rewetting crew”")
    widths = "([module, width]) => corymb.map.stats().plates.some((p) => p.module === module && p.width > width + 60)"
    screen.page.wait_for_function(widths, arg=[plate["module"], plate["width"]])
    screen.page.reload()
    screen.settle()
    screen.page.wait_for_function(widths, arg=[plate["module"], plate["width"]])
    screen.find("Rewetting Crew")
    expect(screen.pane.locator("h1")).to_have_text(f"{number}“rewetting crew”")
    screen.show_all()
    member = int(np.flatnonzero(screen.labels() == plate["module"])[0])
    x, y = screen.positions()[member]
    screen.page.locator("#map").hover(position={"x": x, "y": y})
    expect(screen.page.locator(".map-tip")).to_contain_text(f"{number} rewetting crew")


def test_the_table_of_modules_sorts_and_opens_a_passport(screen: Screen, study: Study):
    header = screen.page.locator("#module-grid .ag-header-cell[col-id=support] .ag-header-cell-label")
    header.click()
    header.click()
    best = study.module_table.sort_values("support", ascending=False)["module"].iloc[0]
    first = screen.page.locator("#module-grid .ag-row[row-index='0'] [col-id=module]")
    expect(first).to_have_text(best)
    first.click()
    expect(screen.crumbs()).to_contain_text("module passport")
    expect(screen.pane.locator("h1")).to_have_text(best)


def test_the_table_of_genes_filters_and_opens_a_passport(screen: Screen, network: Network):
    screen.page.locator("#table-kind").get_by_text("genes").click()
    expect(screen.rows("gene-grid").first).to_be_visible()
    assert screen.row_count("gene-grid") == network.node_count
    gene = network.names[int(network.degree.argmax())]
    screen.page.locator("#gene-grid .ag-header-cell[col-id=gene] .ag-header-cell-filter-button").click()
    screen.page.get_by_role("textbox", name="Filter Value").first.fill(gene)
    matching = sum(gene in name for name in network.names)
    expect(screen.rows("gene-grid")).to_have_count(matching)
    screen.page.keyboard.press("Escape")
    screen.page.locator("#gene-grid .ag-row [col-id=gene]").get_by_text(gene, exact=True).click()
    expect(screen.pane.locator("h1")).to_have_text(gene)


def test_the_close_up_shows_a_module_and_a_disc_can_be_dragged(screen: Screen, study: Study):
    screen.find("M3")
    expect(screen.crumbs()).to_contain_text("module passport")
    screen.press("Close-up")
    count = "() => document.getElementById('closeup')._cyreg.cy.nodes(':visible').length"
    screen.page.wait_for_function(f"() => ({count})() > 0")
    assert screen.page.evaluate(count) >= study.modules.sizes[2]
    expect(screen.page.locator("#map-counts")).to_contain_text("M3 with its neighbours")
    place = """() => {
      const disc = document.getElementById('closeup')._cyreg.cy.nodes()[0];
      const box = document.getElementById('closeup').getBoundingClientRect();
      const { x, y } = disc.renderedPosition();
      return { x: x + box.left, y: y + box.top };
    }"""
    # the view fits itself to the drawing a moment after the discs are there
    screen.page.wait_for_function(
        f"""() => {{
      const now = JSON.stringify(({place})());
      const same = window.lastPlace === now;
      window.lastPlace = now;
      return same;
    }}""",
        polling=300,
    )
    before = screen.page.evaluate(place)
    screen.page.mouse.move(before["x"], before["y"])
    screen.page.mouse.down()
    screen.page.mouse.move(before["x"] + 40, before["y"] - 30, steps=5)
    screen.page.mouse.up()
    after = screen.page.evaluate(place)
    assert after["x"] - before["x"] == pytest.approx(40, abs=3)
    assert after["y"] - before["y"] == pytest.approx(-30, abs=3)
    screen.page.get_by_role("button", name="whole network").click()
    expect(screen.page.locator("#closeup-area")).to_be_hidden()
