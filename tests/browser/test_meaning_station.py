"""The Meaning station in a real Chromium: sample sets, a name from a proposal, the passport, a file that is none."""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path
from typing import TYPE_CHECKING

import pytest

from tests.dashboard import served

if TYPE_CHECKING:
    from playwright.sync_api import Browser, Page

PATIENCE = 60_000


@pytest.fixture(scope="module")
def address(tmp_path_factory) -> Iterator[str]:
    with served(tmp_path_factory.mktemp("workspace")) as found:
        yield found


@pytest.fixture
def page(browser: Browser, address: str) -> Iterator[Page]:
    context = browser.new_context(viewport={"width": 1366, "height": 768})
    page = context.new_page()
    faults: list[str] = []
    page.on("pageerror", lambda error: faults.append(str(error)))
    page.set_default_timeout(PATIENCE)
    page.goto(address)
    # once the clustering is there, nothing draws the pane anew
    page.locator('#path button[data-state="done"]', has_text="Modules").wait_for(timeout=2 * PATIENCE)
    page.get_by_role("button", name="Meaning").click()
    yield page
    context.close()
    assert faults == []


def test_sample_sets_a_name_and_the_passport(page: Page):
    page.get_by_role("button", name="Take the sample gene sets").first.click()
    page.get_by_role("table", name="Modules and their gene sets").wait_for()
    assert "gene set" in page.locator("#pane-body .verdict").inner_text()
    assert page.get_by_role("table", name="Gene sets over modules").count() == 1
    assert page.locator("#pane-body figure img").count() == 1
    assert page.locator("#enrichment-grid .ag-row").count() > 3

    proposed = page.locator(".naming input").first.input_value()
    assert proposed
    page.get_by_role("button", name="Name M1", exact=True).click()
    page.wait_for_function("() => document.querySelector('.naming button').textContent === 'Named'", timeout=PATIENCE)
    page.locator("#pane-body").get_by_role("button", name="M1", exact=True).first.click()
    page.get_by_role("table", name="Gene sets of the module").wait_for()
    assert f"“{proposed}”" in page.locator("#pane-body .passport-title").inner_text()

    page.get_by_role("table", name="Gene sets of the module").get_by_role("button").first.click()
    page.get_by_role("table", name="Genes found").wait_for()  # the set's genes are lit and listed


def test_another_name_is_typed_and_the_circle_is_named(page: Page):
    if page.get_by_role("button", name="Take the sample gene sets").count():
        page.get_by_role("button", name="Take the sample gene sets").first.click()
    page.get_by_role("table", name="Modules and their gene sets").wait_for()
    page.locator(".naming input").nth(1).fill("the transport group")
    page.locator(".naming button").nth(1).click()
    page.wait_for_function(
        "() => document.querySelectorAll('.naming button')[1].textContent === 'Named'", timeout=PATIENCE
    )
    assert page.locator(".naming input").nth(1).input_value() == "the transport group"
    page.get_by_role("button", name="yes", exact=True).click()
    page.get_by_text("the agreement is circular").wait_for()


def test_a_file_that_is_none_says_so_and_an_own_file_is_taken(page: Page, tmp_path: Path):
    wrong, right = tmp_path / "wrong.txt", tmp_path / "mine.tsv"
    wrong.write_text("no gene sets here\n", encoding="utf-8")
    with page.expect_file_chooser() as chooser:
        page.locator(".drop[data-upload]").click()
    chooser.value.set_files(wrong)
    page.get_by_text("these are no gene sets").first.wait_for()
    source = Path(__file__).parents[2] / "sample_networks" / "saltmarsh_moss_gene_sets.tsv"
    right.write_text("\n".join(source.read_text(encoding="utf-8").splitlines()[:40]) + "\n", encoding="utf-8")
    with page.expect_file_chooser() as chooser:
        page.locator(".drop[data-upload]").click()
    chooser.value.set_files(right)
    page.get_by_text("mine.tsv", exact=True).first.wait_for()
