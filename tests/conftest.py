"""What tests of every kind may ask for: published networks, and a real Chromium."""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path
from typing import TYPE_CHECKING

import networkx as nx
import pytest

from analysis.network import Network
from tests.chromium import FLAGS, MISSING, find_chromium
from tests.planted import from_networkx

if TYPE_CHECKING:
    from playwright.sync_api import Browser

BROWSER_TESTS = Path(__file__).parent / "browser"


def pytest_collection_modifyitems(items: list[pytest.Item]) -> None:
    """Mark what lies in `tests/browser`, so that `python -m tests --quick` can leave it out."""
    for item in items:
        if BROWSER_TESTS in item.path.parents:
            item.add_marker(pytest.mark.browser)


@pytest.fixture(scope="session")
def chromium_path() -> Path:
    """Chromium's program. Without one the test fails; it is never skipped."""
    found = find_chromium()
    if found is None:
        pytest.fail(MISSING, pytrace=False)
    return found


@pytest.fixture(scope="session")
def browser(chromium_path: Path) -> Iterator[Browser]:
    """One headless Chromium for the whole session; each test opens contexts of its own in it."""
    from playwright.sync_api import sync_playwright

    with sync_playwright() as playwright:
        chromium = playwright.chromium.launch(executable_path=str(chromium_path), args=list(FLAGS))
        yield chromium
        chromium.close()


@pytest.fixture(scope="session")
def karate() -> Network:
    """Zachary's karate club, 34 nodes and 78 edges, without weights; by networkx."""
    return from_networkx(nx.karate_club_graph())


@pytest.fixture(scope="session")
def les_miserables() -> Network:
    """Knuth's les misérables, 77 nodes and 254 edges, without weights; by networkx."""
    return from_networkx(nx.les_miserables_graph())


@pytest.fixture(scope="session")
def sample_file() -> Path:
    """Return the file of the sample network."""
    return Path(__file__).parents[1] / "sample_networks" / "saltmarsh_moss_interactions.tsv"
