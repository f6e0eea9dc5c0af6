"""The dashboard for readers of all kinds: by axe-core at every station, in light and dark; by keyboard alone."""

from __future__ import annotations

from typing import Any

import pytest
from axe_playwright_python.sync_playwright import Axe
from playwright.sync_api import expect

from tests.browser.screen import Screen

GRAVE = {"serious", "critical"}
DOUBLE_IDS = """() => {
  const ids = Array.from(document.querySelectorAll("[id]"), (element) => element.id);
  return ids.filter((id, place) => ids.indexOf(id) !== place);
}"""
FOCUS = """() => ["id", "col-id", "class"].map((name) => document.activeElement.getAttribute(name))
  .find(Boolean) ?? document.activeElement.tagName"""


def faults(screen: Screen) -> list[Any]:
    """Return what axe-core takes for grave, with the elements, and ids that are there twice."""
    found = Axe().run(screen.page).response["violations"]
    grave = [
        (each["id"], node["html"][:200], node["any"][0]["message"] if node["any"] else "")
        for each in found
        if each["impact"] in GRAVE
        for node in each["nodes"]
    ]
    return [*grave, *screen.page.evaluate(DOUBLE_IDS)]


def test_everything_is_reached_and_left_by_the_tab_key(screen: Screen):
    expect(screen.rows("module-grid").first).to_be_visible()
    screen.page.keyboard.press("Tab")
    seen: list[str] = []
    for _ in range(60):
        seen.append(screen.page.evaluate(FOCUS))
        if screen.page.evaluate("() => document.activeElement.getAttribute('role') === 'slider'"):
            break
        screen.page.keyboard.press("Tab")
    else:
        pytest.fail(f"the ruler is not reached: {seen}")
    told = " ".join(seen)
    for part in ("find", "theme", "map", "size-cut", "module", "method", "seed"):
        assert part in told, part


def test_a_table_is_worked_by_keys(screen: Screen):
    expect(screen.rows("module-grid").first).to_be_visible()
    screen.page.locator("#table-kind input").first.focus()
    screen.page.keyboard.press("Tab")
    for key in ("ArrowDown", "ArrowDown"):
        screen.page.keyboard.press(key)
    screen.page.keyboard.press("Enter")
    expect(screen.pane.locator("h1")).to_have_text("M2")
    screen.page.keyboard.press("Escape")
    expect(screen.crumbs()).to_have_text("Modules")


def test_the_map_is_worked_by_keys(screen: Screen):
    screen.page.locator("#map").focus()
    before = screen.positions()
    screen.page.keyboard.press("ArrowLeft")
    screen.page.wait_for_function("(x) => corymb.map.where(0).x !== x", arg=before[0, 0])
    screen.page.keyboard.press("+")
    screen.page.wait_for_function("() => corymb.map.stats().zoom > 1")
    screen.show_all()
    screen.page.keyboard.press("/")
    expect(screen.page.locator("#find")).to_be_focused()


def test_the_projector_enlarges_and_both_choices_outlast_a_reload(screen: Screen):
    size = "() => parseFloat(getComputedStyle(document.querySelector('#pane-body .verdict')).fontSize)"
    before = screen.page.evaluate(size)
    screen.page.get_by_role("button", name="Projector mode").click()
    screen.page.get_by_role("button", name="Light or dark").click()
    screen.page.wait_for_function(f"(before) => ({size})() > before", arg=before)
    screen.page.reload()
    screen.settle()
    assert screen.page.evaluate(size) > before
    expect(screen.page.locator("html")).to_have_attribute("data-theme", "dark")
    assert screen.page.evaluate("() => document.documentElement.scrollHeight <= innerHeight")


def test_axe_finds_nothing_grave_at_any_station_or_passport_in_light_and_dark(small: Screen):
    found: dict[str, list[Any]] = {}

    def look(place: str) -> None:
        for theme in ("light", "dark"):
            found[f"{place}, {theme}"] = faults(small)
            small.page.get_by_role("button", name="Light or dark").click()

    for station in small.page.locator("#path button").all_inner_texts():
        small.go(station)
        expect(small.pane.locator("p, table, .drop").first).to_be_visible()
        look(station)
    for text in ("M1", "Valjean", "Valjean Cosette nobody"):
        small.find(text)
        expect(small.crumbs()).to_contain_text("found" if " " in text else "passport")
        look(text)
    assert {place: grave for place, grave in found.items() if grave} == {}
