"""The report in a real Chromium: silent, alone, legible, and inert against names that look like code."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path
from typing import TYPE_CHECKING

import pytest
from axe_playwright_python.sync_playwright import Axe

from analysis.handover.report import report_file
from tests.handover import NASTY, bundle_of, karate_text, with_nulls

if TYPE_CHECKING:
    from playwright.sync_api import Browser, Page


def _write(folder: Path, text: str, **settings: object) -> str:
    bundle = bundle_of(text, **settings)
    bundle = replace(bundle, study=with_nulls(bundle.study))
    path = folder / "report.html"
    path.write_bytes(report_file(bundle)["report.html"])
    return path.as_uri()


@pytest.fixture
def page(browser: Browser) -> Page:
    context = browser.new_context(viewport={"width": 1366, "height": 768})
    yield context.new_page()
    context.close()


@pytest.mark.parametrize("text", [karate_text(), NASTY], ids=["karate", "nasty"])
def test_it_opens_without_a_word_and_asks_nobody(page, tmp_path, text):
    told: list[str] = []
    page.on("console", lambda message: told.append(message.text))
    page.on("pageerror", lambda error: told.append(str(error)))
    page.on("dialog", lambda dialog: (told.append(dialog.message), dialog.dismiss()))
    requests: list[str] = []
    page.on("request", lambda request: requests.append(request.url))
    address = _write(tmp_path, text, names={"M1": "<img src=x onerror=alert(1)>"})
    page.goto(address)
    assert told == []
    assert requests == [address]
    assert page.evaluate("document.scripts.length + document.images.length") == 0
    assert page.locator("figure.map svg circle").count() > 0


@pytest.mark.parametrize("width", [1366, 800, 390])
def test_nothing_sticks_out_at_the_side(page, tmp_path, width):
    page.set_viewport_size({"width": width, "height": 768})
    page.goto(_write(tmp_path, NASTY))
    assert page.evaluate("document.documentElement.scrollWidth <= document.documentElement.clientWidth")


def test_the_genes_unfold_by_keyboard(page, tmp_path):
    page.goto(_write(tmp_path, karate_text()))
    page.get_by_text("Genes of each module").focus()
    page.keyboard.press("Enter")
    page.locator("details.module summary").first.focus()
    page.keyboard.press("Enter")
    assert page.get_by_text("n33", exact=True).first.is_visible()


def test_it_meets_the_rules_for_readers_of_all_kinds(page, tmp_path):
    page.goto(_write(tmp_path, karate_text()))
    found = Axe().run(page, options={"runOnly": ["wcag2a", "wcag2aa", "wcag21aa", "wcag22aa"]})
    assert found.response["violations"] == []


def test_on_paper_the_folded_parts_are_there(page, tmp_path):
    page.goto(_write(tmp_path, karate_text()))
    page.emulate_media(media="print")
    assert (
        page.locator("details.module .genes").first.evaluate("element => element.getBoundingClientRect().height") > 10
    )
    assert len(page.pdf(format="A4")) > 10_000
