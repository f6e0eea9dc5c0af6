"""The dashboard as a person at the screen meets it: looks, types, clicks and waits; for the tests in Chromium."""

from __future__ import annotations

import contextlib
import re
from collections.abc import Iterator
from typing import Any

import numpy as np
from numpy.typing import NDArray
from playwright.sync_api import BrowserContext, Locator, Page, expect

PATIENCE = 60_000
"""Milliseconds that anything may take on a slow and busy machine; nothing waits longer than it must."""
TOLERATED = (
    "You have set a custom wheel sensitivity.  This will make your app zoom unnaturally when using mainstream mice.  "
    "You should change this value from the default only if you can guarantee that all your users will use the same "
    "hardware and OS configuration as your current machine."
)
"""cytoscape.js says this whatever dash-cytoscape is told; nothing is set."""

# The clustering asked for is shown, by the path, the pane, the foot and the map alike.
SETTLED = """() => {
  const text = (id) => document.getElementById(id)?.textContent ?? "";
  const kept = (name) => JSON.parse(sessionStorage.getItem(name));
  const [shown, wanted] = [kept("shown"), kept("wanted")];
  const drawn = window.corymb?.map?.stats();
  return drawn?.nodes > 0 && !drawn.waiting && text("state-count") !== "" && text("progress-area") === "" && shown
    && ["network", "method", "quality", "resolution"].every((key) => shown[key] === wanted[key]);
}"""
RULER_IS_FULL = """() => document.querySelector("#ruler svg")?.getAttribute("aria-busy") === "false" """
# The pane and the foot tell the same number of modules: both have followed.
AGREED = """() => {
  const counts = ["pane-body", "state-count"].map((id) => document.getElementById(id)?.textContent
    .match(/([\\d,]+) modules?, /)?.[1]);
  return counts[0] !== undefined && counts[0] === counts[1];
}"""
WHERE_ALL = "() => Array.from({ length: corymb.map.stats().nodes }, (_, gene) => corymb.map.where(gene))"
# The colour in the middle of every gene's disc, as red, green, blue.
COLOURS = """() => {
  const layer = document.querySelector("canvas[data-layer=nodes]");
  const copy = new OffscreenCanvas(layer.width, layer.height).getContext("2d", { willReadFrequently: true });
  copy.drawImage(layer, 0, 0);
  const { data } = copy.getImageData(0, 0, layer.width, layer.height);
  return Array.from({ length: corymb.map.stats().nodes }, (_, gene) => {
    const { x, y } = corymb.map.where(gene);
    const at = 4 * (Math.round(y * devicePixelRatio) * layer.width + Math.round(x * devicePixelRatio));
    return Array.from(data.slice(at, at + 3));
  });
}"""
# A gene whose disc nothing covers: no other disc, no plate, no card.
UNCOVERED = """() => {
  const { plates, nodes } = corymb.map.stats();
  const places = Array.from({ length: nodes }, (_, gene) => corymb.map.where(gene));
  const map = document.getElementById("map").getBoundingClientRect();
  return places.findIndex(({ x, y }, gene) => document.elementFromPoint(x + map.left, y + map.top)?.id === "map"
    && plates.every((p) => x < p.left - 6 || x > p.left + p.width + 6 || y < p.top - 6 || y > p.top + p.height + 6)
    && places.every((other, index) => index === gene || Math.hypot(other.x - x, other.y - y) > 14));
}"""


class Screen:
    """A window on the dashboard that writes down whatever goes wrong in it.

    Parameters
    ----------
    context : BrowserContext
        A browser profile of its own.
    address : str
        Of the dashboard.
    """

    def __init__(self, context: BrowserContext, address: str) -> None:
        context.set_default_timeout(PATIENCE)
        self.context = context
        self.address = address
        self.said: list[str] = []
        self.asked_elsewhere: list[str] = []
        self.page = self._watched(context.new_page())
        self.pane = self.page.locator("#pane-body")
        self.ruler = self.page.get_by_role("slider", name="Resolution")

    def _watched(self, page: Page) -> Page:
        def hear(text: str, place: str = "") -> None:
            if text != TOLERATED:
                self.said.append(f"{text} {place}".strip())

        def notice(address: str) -> None:
            if not address.startswith((self.address, "data:", f"blob:{self.address}")):
                self.asked_elsewhere.append(address)

        page.on("console", lambda message: hear(message.text, message.location["url"]))
        page.on("pageerror", lambda error: hear(str(error)))
        page.on("request", lambda request: notice(request.url))
        return page

    # waiting

    def open(self) -> None:
        """Open the dashboard and wait for the clustering it shows."""
        self.page.goto(self.address)
        self.settle()

    def settle(self) -> None:
        """Wait until the clustering asked for is shown everywhere and nothing is being worked out."""
        self.page.wait_for_function(SETTLED, timeout=2 * PATIENCE)
        if self.page.locator("[aria-current=page]").inner_text() in {"Modules", "Trust"}:
            self.page.wait_for_function(AGREED)

    def fill_ruler(self) -> None:
        """Wait until the sweep behind the ruler is done."""
        self.page.wait_for_function(RULER_IS_FULL, timeout=2 * PATIENCE)

    @contextlib.contextmanager
    def another_clustering(self) -> Iterator[None]:
        """Do what asks for another clustering, then wait for it."""
        before = self.study()
        yield
        self.page.wait_for_function(
            "(before) => JSON.parse(sessionStorage.getItem('shown')).study !== before", arg=before, timeout=2 * PATIENCE
        )
        self.settle()

    # what is seen

    def study(self) -> str:
        """Return the id of the clustering shown."""
        return str(self.page.evaluate("() => JSON.parse(sessionStorage.getItem('shown')).study"))

    def modules(self) -> int:
        """Return the number of modules that the foot tells."""
        return count_of(self.page.locator("#state-count").inner_text())

    def title(self) -> str:
        """Return the name of the network on the map."""
        return self.page.locator("#map-name").inner_text()

    def stats(self) -> dict[str, Any]:
        """Return the map's counts, times and plates."""
        stats: dict[str, Any] = self.page.evaluate("() => corymb.map.stats()")
        return stats

    def labels(self) -> NDArray[np.uint16]:
        """Return the module of every gene as the map got it (65535 for none), shape (genes,)."""
        content = self.page.request.get(f"{self.address}data/study/{self.study()}").body()
        modules, genes = np.frombuffer(content, "<u4", 2)
        return np.frombuffer(content, "<u2", int(genes), 8 + 2 * int(modules))

    def colours(self) -> NDArray[np.uint8]:
        """Return the colour in the middle of every gene's disc, shape (genes, 3)."""
        return np.array(self.page.evaluate(COLOURS), np.uint8)

    def positions(self) -> NDArray[np.float64]:
        """Return where every gene is drawn, in CSS pixels of the map, shape (genes, 2)."""
        return np.array([[place["x"], place["y"]] for place in self.page.evaluate(WHERE_ALL)])

    def crumbs(self) -> Locator:
        """Return the line that says what the pane shows."""
        return self.page.locator("#pane-head")

    def rows(self, grid: str) -> Locator:
        """Return the rows of a table that are drawn, in the order seen."""
        return self.page.locator(f"#{grid} .ag-center-cols-container .ag-row")

    def row_count(self, grid: str) -> int:
        """Return how many rows a table has, those out of sight among them."""
        root = self.page.locator(f"#{grid} [role=grid], #{grid} [role=treegrid]")
        return int(root.get_attribute("aria-rowcount") or 0) - 1

    # what is done

    def go(self, station: str) -> None:
        """Go to a station."""
        self.page.locator("#path").get_by_role("button", name=station, exact=True).click()
        expect(self.crumbs()).to_have_text(station)

    def find(self, text: str) -> None:
        """Type a text into the search field, as a paste does, and press Enter."""
        self.page.locator("#find").fill("")
        self.page.locator("#find").focus()
        self.page.keyboard.insert_text(text)
        self.page.keyboard.press("Enter")

    def press(self, name: str) -> None:
        """Press one of the buttons at the end of the pane."""
        self.page.locator("#pane-actions").get_by_role("button", name=name, exact=True).click()

    def choose(self, control: str, option: str) -> None:
        """Choose from a list that opens."""
        self.page.locator(f"#{control}").click()
        self.page.get_by_role("option", name=option, exact=True).click()

    def click_map(self, x: float, y: float) -> None:
        """Click on the map, at CSS pixels from its corner."""
        self.page.locator("#map").click(position={"x": x, "y": y})

    def uncovered_gene(self) -> int:
        """Return a gene whose disc nothing covers."""
        return int(self.page.evaluate(UNCOVERED))

    def show_all(self) -> None:
        """Bring the whole network back into view."""
        self.page.locator("#map").focus()
        self.page.keyboard.press("0")
        self.page.wait_for_function("() => corymb.map.stats().zoom === 1 && !corymb.map.stats().waiting")


def count_of(text: str) -> int:
    """Return the number of modules that a sentence tells."""
    found = re.search(r"([\d,]+) modules?, ", text)
    assert found, text
    return int(found[1].replace(",", ""))
