"""The Trust station in a real Chromium: what comes in piece by piece, what can be stopped, what is said in the end."""

from __future__ import annotations

import re

from playwright.sync_api import expect

from analysis.evidence import run_study
from analysis.study import StudySettings
from tests.browser.networks import les_miserables
from tests.browser.screen import Screen

NULLS = 100
SOME_NULLS = re.compile(r"Modularity of [1-9]\d? random networks")
"""Fewer than 100: the figure grows while they are drawn."""


def test_chance_streams_in_behind_a_bar_and_can_be_stopped(screen: Screen):
    screen.go("Trust")
    bar = screen.page.locator(".progress", has_text="random networks")
    expect(bar).to_be_visible()
    figure = screen.pane.get_by_role("figure").filter(has_text=SOME_NULLS)
    expect(figure).to_be_visible()
    bar.get_by_role("button", name="Stop").click()
    expect(bar).to_have_count(0)
    again = screen.page.locator("#pane-actions").get_by_role("button", name="Compare with chance")
    again.click()
    expect(bar).to_be_visible()
    bar.get_by_role("button", name="Stop").click()
    expect(again).to_be_visible()


def test_the_verdict_is_that_of_the_analysis(small: Screen):
    study = run_study(les_miserables(), StudySettings(nulls=NULLS))
    small.go("Trust")
    expect(small.pane.locator(".verdict").first).to_have_text(study.sentences[0])
    expect(small.pane.get_by_role("figure").filter(has_text=f"Modularity of {NULLS} random networks")).to_be_visible()
    expect(small.pane.get_by_role("heading", name="Under noise")).to_be_visible()
    expect(small.pane.get_by_role("figure").filter(has_text="variation of information")).to_be_visible()
    strip = small.pane.get_by_role("table", name="Modules by stability").locator("tbody tr")
    expect(strip).to_have_count(int((study.modules.sizes >= 3).sum()))
    strip.first.get_by_role("button", name="M1").click()
    expect(small.pane.locator("h1")).to_have_text("M1")
    small.page.keyboard.press("Escape")
    expect(small.crumbs()).to_have_text("Trust")
