"""Other clusterings in a real Chromium: by the ruler, the question, the method; what stays and what follows."""

from __future__ import annotations

import re
from collections import Counter

import networkx as nx
import numpy as np
import pytest
from numpy.typing import NDArray
from playwright.sync_api import expect

from tests.browser.screen import Screen

NO_MODULE = 65535
STAYS = 0.9  # overlap of a module before and after, as a Jaccard index
DRAWN_IN_COLOUR = 8  # genes; smaller modules may be grey
IS_WIDE = """() => {
  const { method, quality, resolution, seed } = JSON.parse(sessionStorage.getItem("wanted"));
  return method === "leiden" && quality === "modularity" && resolution === 1 && seed === 1;
}"""


@pytest.fixture
def wide(small: Screen) -> Screen:
    """Return a window on les misérables at resolution 1, wherever an earlier test has left it."""
    if not small.page.evaluate(IS_WIDE):
        with small.another_clustering():
            small.pane.get_by_role("button", name="Leiden, wide neighbourhoods, 1, seed 1").click()
    small.fill_ruler()
    return small


def kept_modules(before: NDArray[np.uint16], after: NDArray[np.uint16]) -> list[NDArray[np.int64]]:
    """Return the genes of the modules that hardly changed."""
    kept = []
    for module in range(int(before[before != NO_MODULE].max()) + 1):
        group = before == module
        fate, shared = Counter(after[group].tolist()).most_common(1)[0]
        if group.sum() >= DRAWN_IN_COLOUR and shared / (group | (after == fate)).sum() >= STAYS:
            kept.append(np.flatnonzero(group & (after == fate)))
    return kept


def main_colour(colours: NDArray[np.uint8], genes: NDArray[np.int64]) -> tuple[int, ...]:
    return Counter(map(tuple, colours[genes].tolist())).most_common(1)[0][0]


def test_dragging_the_marker_splits_modules_where_they_stand(screen: Screen):
    screen.fill_ruler()
    modules, labels, colours, positions = screen.modules(), screen.labels(), screen.colours(), screen.positions()
    edge_draws = screen.stats()["edgeDraws"]
    marker = screen.page.locator("#ruler .ruler-marker").bounding_box()
    x, y = marker["x"] + marker["width"] / 2, marker["y"] + marker["height"] / 2
    screen.page.mouse.move(x, y)
    with screen.another_clustering():
        screen.page.mouse.down()
        screen.page.mouse.move(x + 120, y, steps=6)
        expect(screen.page.locator("#state-count")).not_to_contain_text(re.compile(f"^{modules} modules"))  # while held
        screen.page.mouse.up()
    assert screen.modules() > modules
    assert screen.row_count("module-grid") == screen.modules()
    np.testing.assert_array_equal(screen.positions(), positions)
    assert screen.stats()["edgeDraws"] == edge_draws
    kept = kept_modules(labels, screen.labels())
    assert len(kept) >= 3
    now = screen.colours()
    assert [main_colour(now, genes) for genes in kept] == [main_colour(colours, genes) for genes in kept]
    assert (now != colours).any()
    line = f"Leiden, wide neighbourhoods, {float(screen.ruler.get_attribute('aria-valuenow')):.2g}"
    expect(screen.pane.locator("[aria-current=true]")).to_contain_text(line)


def test_the_arrow_keys_move_the_marker(wide: Screen):
    modules = wide.modules()
    wide.ruler.focus()
    with wide.another_clustering():
        for _ in range(8):
            wide.page.keyboard.press("ArrowRight")
    assert float(wide.ruler.get_attribute("aria-valuenow")) > 1
    assert wide.modules() > modules
    with wide.another_clustering():
        wide.page.keyboard.press("Home")
    assert wide.modules() < modules
    assert wide.ruler.get_attribute("aria-valuenow") == wide.ruler.get_attribute("aria-valuemin")


def test_a_press_on_the_suggestion_goes_there(wide: Screen):
    suggested = wide.page.locator("#state-suggestion button")
    value = suggested.inner_text()
    with wide.another_clustering():
        suggested.click()
    assert float(wide.ruler.get_attribute("aria-valuenow")) == pytest.approx(float(value), rel=0.05)


def test_the_other_question_has_its_own_ruler(wide: Screen):
    curve = wide.page.locator("#ruler .ruler-curve").get_attribute("d")
    tight = wide.page.locator("#question-switch").get_by_role("button", name="tight groups")
    with wide.another_clustering():
        tight.click()
    expect(tight).to_have_attribute("aria-pressed", "true")
    expect(wide.page.locator("#state-unit")).to_have_text("inside density")
    expect(wide.pane).to_contain_text("groups whose members are joined")
    wide.fill_ruler()
    assert wide.page.locator("#ruler .ruler-curve").get_attribute("d") != curve
    assert wide.row_count("module-grid") == wide.modules()


def test_clique_percolation_finds_what_networkx_finds(wide: Screen):
    with wide.another_clustering():
        wide.choose("method", "clique percolation")
    for k in (4, 5):
        if k != 4:
            with wide.another_clustering():
                wide.page.locator("#k").fill(str(k))
                wide.page.locator("#k").press("Enter")
        communities = list(nx.community.k_clique_communities(nx.les_miserables_graph(), k))
        assert wide.modules() == len(communities)
        expect(wide.pane.locator("[aria-current=true]")).to_have_text(f"clique percolation, k = {k}")
        wide.page.locator("#table-kind").get_by_text("genes").click()
        expect(wide.rows("gene-grid").first).to_be_visible()
        assert wide.row_count("gene-grid") == sum(len(each) for each in communities)
    wide.ruler.focus()
    with wide.another_clustering():  # moving the marker asks for a resolution again
        wide.page.keyboard.press("ArrowRight")
    expect(wide.pane.locator("[aria-current=true]")).to_contain_text("Leiden, wide neighbourhoods")


def test_louvain_harvest_and_another_seed_each_leave_a_line_in_the_trail(wide: Screen):
    for option, line in (("Louvain", "Louvain, wide neighbourhoods"), ("harvest", "harvest, seed 1")):
        with wide.another_clustering():
            wide.choose("method", option)
        expect(wide.pane.locator("[aria-current=true]").first).to_contain_text(line)
    with wide.another_clustering():
        wide.choose("method", "Leiden")
    with wide.another_clustering():
        wide.page.locator("#seed").fill("2")
        wide.page.locator("#seed").press("Enter")
    expect(wide.pane.locator("[aria-current=true]")).to_contain_text("seed 2")
    with wide.another_clustering():
        wide.pane.get_by_role("button", name="Louvain, wide neighbourhoods").click()
    expect(wide.page.locator("#method")).to_have_text("Louvain")
