"""In the browser: two clusterings are pinned and compared; what is wanted is chosen and saved; the map as a picture."""

from __future__ import annotations

import io
import struct
import zipfile
from collections.abc import Iterator
from pathlib import Path
from typing import TYPE_CHECKING

import pytest

from tests.dashboard import served
from tests.handover import write_karate

if TYPE_CHECKING:
    from playwright.sync_api import Browser, Page

WAIT = 30_000


@pytest.fixture(scope="module")
def address(tmp_path_factory) -> Iterator[str]:
    folder = tmp_path_factory.mktemp("dashboard")
    with served(folder / "workspace", str(write_karate(folder))) as found:
        yield found


@pytest.fixture
def page(browser: Browser, address: str) -> Iterator[Page]:
    context = browser.new_context(viewport={"width": 1366, "height": 768}, accept_downloads=True)
    page = context.new_page()
    faults: list[str] = []
    page.on("pageerror", lambda error: faults.append(str(error)))
    page.on("console", lambda message: faults.append(message.text) if message.type == "error" else None)
    page.goto(address)
    page.locator("#path button", has_text="Modules").click()
    page.locator("#table-area").wait_for(timeout=WAIT)
    yield page
    context.close()
    assert faults == []


def test_two_clusterings_are_pinned_and_compared(page):
    seed = page.locator("#seed")
    seed.fill("2")
    seed.press("Enter")
    pins = page.locator("table[aria-label='Trail of clusterings'] button[aria-pressed]")
    pins.nth(1).wait_for(timeout=WAIT)
    pins.nth(0).click()
    page.get_by_role("button", name="pinned").wait_for(timeout=WAIT)
    page.get_by_role("button", name="compare", exact=True).first.click()
    page.get_by_role("heading", name="Agreement").wait_for(timeout=WAIT)
    text = page.locator("#pane-body").inner_text()
    assert "ARI" in text
    assert "changed homes" in text
    width = page.locator("#pane-body img").evaluate("image => image.naturalWidth")
    assert width > 0
    page.locator("#pane-head button").first.click()
    pins.nth(0).wait_for(timeout=WAIT)
    assert page.get_by_role("button", name="pinned").count() == 0


def test_what_is_chosen_is_in_the_zip(page, tmp_path):
    page.locator("#path button", has_text="Handover").click()
    page.get_by_label("membership.xlsx", exact=False).check(timeout=WAIT)
    page.get_by_label("gene_lists_core/", exact=False).check()
    with page.expect_download(timeout=WAIT) as waiting:
        page.get_by_role("button", name="Write and save the zip").click()
    path = tmp_path / "files.zip"
    waiting.value.save_as(path)
    with zipfile.ZipFile(io.BytesIO(path.read_bytes())) as archive:
        names = set(archive.namelist())
    assert {"membership.xlsx", "gene_lists_core/M1.txt", "membership.csv", "references.bib"} <= names
    assert "membership.tsv" not in names


def test_the_map_is_saved_at_300_dots_per_inch(page, tmp_path):
    page.locator("#path button", has_text="Handover").click()
    with page.expect_download(timeout=WAIT) as waiting:
        page.get_by_role("button", name="Save the map as PNG").click(timeout=WAIT)
    path = Path(tmp_path / "map.png")
    waiting.value.save_as(path)
    content = path.read_bytes()
    width, height = struct.unpack(">II", content[16:24])
    place = content.index(b"pHYs") + 4
    across, down, unit = struct.unpack(">IIB", content[place : place + 9])
    assert (across, down, unit) == (11811, 11811, 1)  # 300 / 0.0254 dots a metre (ISO/IEC 15948, 11.3.4.3)
    assert width >= 2100  # 18 cm
    found = page.evaluate(
        "bytes => createImageBitmap(new Blob([new Uint8Array(bytes)])).then((image) => [image.width, image.height])",
        list(content),
    )
    assert found == [width, height]
