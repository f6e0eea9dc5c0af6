"""Where a Chromium is for the browser tests, and how one comes onto the machine."""

from __future__ import annotations

import os
import shutil
import subprocess
from pathlib import Path

ENVIRONMENT = "CORYMB_CHROMIUM"
COMMANDS = ("chromium", "chromium-browser", "google-chrome", "google-chrome-stable")
ELSEWHERE = (
    "/Applications/Google Chrome.app/Contents/MacOS/Google Chrome",
    "/Applications/Chromium.app/Contents/MacOS/Chromium",
    "C:/Program Files/Google/Chrome/Application/chrome.exe",
    "C:/Program Files (x86)/Google/Chrome/Application/chrome.exe",
)
"""Where installers put it on systems that keep it off the search path."""

MISSING = (
    "The browser tests need Chromium, and none was found: install the package `chromium` (or Google Chrome), "
    f"or name its program in the environment variable {ENVIRONMENT}."
)
FLAGS = ("--no-sandbox", "--disable-gpu", "--disable-background-networking")
"""Without its sandbox it also starts as root, as in CI; it opens our own pages alone. No GPU: the worst case."""


def find_chromium() -> Path | None:
    """Return the program: the one that the environment names, else one on the search path, else in the usual places."""
    named = os.environ.get(ENVIRONMENT)
    if named:
        path = Path(named)
        return path if path.is_file() else None
    for command in COMMANDS:
        found = shutil.which(command)
        if found:
            return Path(found)
    return next((path for path in map(Path, ELSEWHERE) if path.is_file()), None)


def bring_chromium() -> Path | None:
    """Return the program; install it first where it is missing, there is apt-get, and we may use it."""
    found = find_chromium()
    right = _right_to_install()
    if found is not None or right is None or os.environ.get(ENVIRONMENT):
        return found
    environment = {**os.environ, "DEBIAN_FRONTEND": "noninteractive"}
    for step in (("update",), ("install", "-y", "--no-install-recommends", "chromium")):
        done = subprocess.run([*right, "apt-get", *step], env=environment, stdin=subprocess.DEVNULL, check=False)
        if done.returncode != 0:
            return None
    return find_chromium()


def _right_to_install() -> list[str] | None:
    """Return what goes before apt-get: nothing for root, `sudo -n` where no password is asked; else None."""
    if shutil.which("apt-get") is None:
        return None
    if os.geteuid() == 0:
        return []
    if shutil.which("sudo") is None:
        return None
    allowed = subprocess.run(["sudo", "-n", "true"], stdin=subprocess.DEVNULL, capture_output=True, check=False)
    return ["sudo", "-n"] if allowed.returncode == 0 else None
