"""A dashboard of one's own for each test file, and a window on it that must stay silent."""

from __future__ import annotations

import shutil
from collections.abc import Callable, Iterator
from pathlib import Path
from typing import TYPE_CHECKING

import pytest
from playwright.sync_api import expect

from tests.browser.networks import write_les_miserables
from tests.browser.screen import PATIENCE, Screen
from tests.dashboard import served

if TYPE_CHECKING:
    from playwright.sync_api import Browser

LAPTOP = {"width": 1366, "height": 768}


@pytest.fixture(scope="session")
def prepared(browser: Browser, tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Return a workspace in which the sample network's map, ruler and first clustering are done, by the dashboard."""
    expect.set_options(timeout=PATIENCE / 3)
    workspace = tmp_path_factory.mktemp("prepared") / "workspace"
    with served(workspace) as address:
        context = browser.new_context(viewport=LAPTOP)
        screen = Screen(context, address)
        screen.open()
        screen.fill_ruler()
        context.close()
    return workspace


@pytest.fixture(scope="module")
def workspace(prepared: Path, tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Return this file's own copy of the prepared workspace."""
    return Path(shutil.copytree(prepared, tmp_path_factory.mktemp("copy") / "workspace"))


@pytest.fixture(scope="module")
def address(workspace: Path) -> Iterator[str]:
    """Serve this file's workspace, which opens on the sample network."""
    with served(workspace) as url:
        yield url


@pytest.fixture
def opened(browser: Browser) -> Iterator[Callable[..., Screen]]:
    """Return a function that opens a window; afterwards all of them must have been silent and asked no other host."""
    screens: list[Screen] = []

    def open_one(address: str, **settings: object) -> Screen:
        screen = Screen(browser.new_context(**{"viewport": LAPTOP, **settings}), address)
        screens.append(screen)
        screen.open()
        return screen

    yield open_one
    for screen in screens:
        screen.context.close()
    assert [text for screen in screens for text in screen.said] == []
    assert [url for screen in screens for url in screen.asked_elsewhere] == []


@pytest.fixture
def screen(opened: Callable[..., Screen], address: str) -> Screen:
    """Open a window of a laptop's size on this file's dashboard."""
    return opened(address)


@pytest.fixture(scope="module")
def small_address(tmp_path_factory: pytest.TempPathFactory) -> Iterator[str]:
    """Serve les misérables, read from a file, for the tests of this file."""
    folder = tmp_path_factory.mktemp("small")
    with served(folder / "workspace", str(write_les_miserables(folder))) as url:
        yield url


@pytest.fixture
def small(opened: Callable[..., Screen], small_address: str) -> Screen:
    """Open a window on les misérables."""
    return opened(small_address)
