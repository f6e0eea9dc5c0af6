"""The gate itself: it stops where something is wrong, and brings Chromium only where it may."""

from __future__ import annotations

from pathlib import Path

import pytest

from tests.__main__ import Step, main, run_all, steps
from tests.chromium import COMMANDS, ENVIRONMENT, MISSING, bring_chromium, find_chromium

FINE, WRONG = ("-c", "pass"), ("-c", "raise SystemExit(3)")
APT_GET = """#!/bin/sh
echo "$@" >> {log}
if [ "$1" = install ]; then printf '#!/bin/sh\\n' > {folder}/chromium; /bin/chmod +x {folder}/chromium; fi
exit {status}
"""
SUDO = '#!/bin/sh\nshift\n[ "$1" = true ] && exit 0\nexec "$@"\n'


def test_it_stops_at_the_first_tool_that_is_not_content(capfd: pytest.CaptureFixture[str]):
    assert run_all([Step("one", FINE), Step("two", WRONG), Step("three", FINE)]) == 1
    told = capfd.readouterr().out.splitlines()
    assert any(line.startswith("  one: passed in") for line in told)
    assert any(line.startswith("  two: FAILED in") for line in told)
    assert "  three: not run" in told
    assert told[-1] == "Stopped at: two."


def test_it_says_when_all_is_well(capfd: pytest.CaptureFixture[str]):
    assert run_all([Step("one", FINE)]) == 0
    assert capfd.readouterr().out.splitlines()[-1] == "All checks passed."


def test_quick_leaves_out_the_browser_and_nothing_else():
    assert [step.arguments for step in steps(quick=True)][:-1] == [step.arguments for step in steps(quick=False)][:-1]
    assert steps(quick=False)[-1].arguments == ("-m", "pytest")
    assert steps(quick=True)[-1].arguments == ("-m", "pytest", "-m", "not browser")


def test_without_chromium_it_fails_in_one_sentence(monkeypatch: pytest.MonkeyPatch, capfd: pytest.CaptureFixture[str]):
    monkeypatch.setenv(ENVIRONMENT, "/no/such/program")
    assert main([]) == 1
    assert capfd.readouterr() == ("", f"{MISSING}\n")


@pytest.fixture
def bare(monkeypatch: pytest.MonkeyPatch, tmp_path: Path) -> Path:
    """Make a machine with nothing on its search path but what a test puts there."""
    monkeypatch.setenv("PATH", str(tmp_path))
    monkeypatch.delenv(ENVIRONMENT, raising=False)
    monkeypatch.setattr("tests.chromium.ELSEWHERE", ())
    return tmp_path


def program(folder: Path, name: str, text: str = "#!/bin/sh\n") -> Path:
    path = folder / name
    path.write_text(text)
    path.chmod(0o755)
    return path


@pytest.mark.parametrize("command", COMMANDS)
def test_a_chromium_on_the_search_path_is_found(bare: Path, command: str):
    assert find_chromium() is None
    there = program(bare, command)
    assert find_chromium() == there


def test_the_one_that_the_environment_names_comes_first(bare: Path, monkeypatch: pytest.MonkeyPatch):
    program(bare, "chromium")
    named = program(bare, "mine")
    monkeypatch.setenv(ENVIRONMENT, str(named))
    assert find_chromium() == named


def test_nothing_is_installed_where_there_is_no_way_to(bare: Path):
    assert bring_chromium() is None


@pytest.mark.parametrize(("status", "comes"), [(0, True), (100, False)])
def test_it_is_installed_where_it_is_missing_and_may_be(bare: Path, status: int, comes: bool):
    log = bare / "log"
    program(bare, "apt-get", APT_GET.format(log=log, folder=bare, status=status))
    program(bare, "sudo", SUDO)
    assert (bring_chromium() is not None) is comes
    done = log.read_text().splitlines()
    assert done[0] == "update"
    assert done[1:] == (["install -y --no-install-recommends chromium"] if comes else [])
