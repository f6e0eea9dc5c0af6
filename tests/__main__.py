"""All checks in one command, here and in CI: `python -m tests`; without the browser's: `python -m tests --quick`."""

from __future__ import annotations

import argparse
import subprocess
import sys
import time
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path

from tests.chromium import MISSING, bring_chromium

TOP = Path(__file__).resolve().parents[1]
LINT_IMPORTS = "import sys; from importlinter.cli import lint_imports_command; sys.exit(lint_imports_command())"


@dataclass(frozen=True)
class Step:
    """One tool of the gate.

    Attributes
    ----------
    name : str
        What it checks.
    arguments : tuple of str
        For this Python.
    """

    name: str
    arguments: tuple[str, ...]

    def run(self) -> bool:
        """Return whether the tool is content."""
        return subprocess.run([sys.executable, *self.arguments], cwd=TOP, check=False).returncode == 0


def steps(*, quick: bool) -> list[Step]:
    """Return the steps in order: the quickest to fail come first."""
    leave_out = ("-m", "not browser") if quick else ()
    return [
        Step("format", ("-m", "ruff", "format", "--check", ".")),
        Step("lint", ("-m", "ruff", "check", ".")),
        Step("types", ("-m", "mypy", "-p", "analysis", "-p", "app")),
        Step("import contracts", ("-c", LINT_IMPORTS)),
        Step("tests without a browser" if quick else "tests", ("-m", "pytest", *leave_out)),
    ]


def run_all(todo: Sequence[Step]) -> int:
    """Run the steps up to the first that fails, say how each went, and return the exit status."""
    lines: list[str] = []
    failed = ""
    for step in todo:
        if failed:
            lines.append(f"  {step.name}: not run")
            continue
        print(f"\n== {step.name}", flush=True)
        start = time.monotonic()
        failed = "" if step.run() else step.name
        lines.append(f"  {step.name}: {'FAILED' if failed else 'passed'} in {time.monotonic() - start:.0f} s")
    print("\n== summary", *lines, sep="\n")
    print(f"Stopped at: {failed}." if failed else "All checks passed.", flush=True)
    return 1 if failed else 0


def main(argv: Sequence[str] | None = None) -> int:
    """Run the gate; return the exit status."""
    parser = argparse.ArgumentParser(prog="python -m tests", description="Runs all checks.")
    parser.add_argument("--quick", action="store_true", help="leave out the tests that need a browser")
    quick = parser.parse_args(argv).quick
    if not quick and bring_chromium() is None:
        print(MISSING, file=sys.stderr)
        return 1
    return run_all(steps(quick=quick))


if __name__ == "__main__":
    sys.exit(main())
