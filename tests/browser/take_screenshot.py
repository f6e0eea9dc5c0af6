"""Makes the README's picture from the real program: the sample network, its modules, the passport of one of them.

Run from the top of the repository: `python -m tests.browser.take_screenshot [--module M4] [--out PICTURE]`.
"""

from __future__ import annotations

import argparse
import sys
import tempfile
from pathlib import Path

from playwright.sync_api import Page, ViewportSize, sync_playwright

from tests.chromium import FLAGS, MISSING, find_chromium
from tests.dashboard import TOP, served

PICTURE = TOP / "assets" / "pictures" / "dashboard.png"
SIZE: ViewportSize = {"width": 1366, "height": 768}
PATIENCE_MILLISECONDS = 180_000
REST_MILLISECONDS = 1_500

WORK_IS_DONE = """() => {
  const text = (id) => document.getElementById(id)?.textContent ?? "";
  return text("progress-area") === "" && text("state-count") !== "" && text("state-suggestion") !== "";
}"""
PASSPORT_IS_OPEN = """(module) => {
  const text = (id) => document.getElementById(id)?.textContent ?? "";
  return text("pane-head").includes("passport") && text("pane-body").startsWith(module);
}"""


def open_passport(page: Page, module: str) -> None:
    """Wait for the study and the ruler, open a module's passport by typing its number, and show the whole map."""
    page.wait_for_function(WORK_IS_DONE, timeout=PATIENCE_MILLISECONDS)
    page.fill("#find", module)
    page.press("#find", "Enter")
    page.wait_for_function(PASSPORT_IS_OPEN, arg=module)
    page.wait_for_timeout(REST_MILLISECONDS)  # the map flies to the module
    page.locator("#map").focus()
    page.keyboard.press("0")
    page.evaluate("document.activeElement.blur()")
    page.wait_for_timeout(REST_MILLISECONDS)  # and back; it is redrawn once it rests


def take(picture: Path, module: str) -> None:
    """Serve the dashboard on an empty workspace and write the picture."""
    chromium_path = find_chromium()
    if chromium_path is None:
        sys.exit(MISSING)
    picture.parent.mkdir(parents=True, exist_ok=True)
    with (
        tempfile.TemporaryDirectory() as workspace,
        served(Path(workspace)) as address,
        sync_playwright() as playwright,
    ):
        chromium = playwright.chromium.launch(executable_path=str(chromium_path), args=list(FLAGS))
        page = chromium.new_page(viewport=SIZE)
        page.goto(address)
        open_passport(page, module)
        page.screenshot(path=picture)
        chromium.close()


def main() -> None:
    """Take the picture."""
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    parser.add_argument("--module", default="M4", help="whose passport is open (default: %(default)s)")
    parser.add_argument("--out", type=Path, default=PICTURE)
    given = parser.parse_args()
    take(given.out, given.module)
    print(f"{given.out}: {given.out.stat().st_size / 1000:.0f} kB")  # noqa: T201


if __name__ == "__main__":
    main()
