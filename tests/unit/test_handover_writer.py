"""The writer: a folder is whole or not there, and nothing of anybody's is lost."""

from __future__ import annotations

import io
import shutil
import subprocess
import sys
import time
import zipfile
from pathlib import Path

import pytest

from analysis.errors import InputError
from analysis.handover import as_zip, check_folder, write_folder

FILES = {"summary.json": b"{}", "recipe.toml": b"", "gene_lists/M1.txt": b"a\n", "membership.csv": b"gene\n"}
REPOSITORY = Path(__file__).resolve().parents[2]

# Writes two kinds of output in turn into one folder until it is killed; each kind has one letter in all of its files.
WRITE_FOR_EVER = """
import itertools, sys
from pathlib import Path
from analysis.handover import write_folder
names = ["summary.json", "recipe.toml", *(f"gene_lists/M{number}.txt" for number in range(1, 60))]
print("ready", flush=True)
for letter in itertools.cycle("ab"):
    write_folder({name: letter.encode() * 5000 for name in names}, Path(sys.argv[1]))
"""


def _content(folder: Path) -> dict[str, bytes]:
    return {path.relative_to(folder).as_posix(): path.read_bytes() for path in folder.rglob("*") if path.is_file()}


def _names(folder: Path) -> list[str]:
    return sorted(path.name for path in folder.iterdir())


def test_a_new_folder_holds_the_files_and_nothing_else_is_left(tmp_path):
    write_folder(FILES, tmp_path / "deep" / "out")
    assert _content(tmp_path / "deep" / "out") == FILES
    assert _names(tmp_path / "deep") == ["out"]


def test_an_empty_folder_and_an_earlier_output_are_replaced(tmp_path):
    out = tmp_path / "out"
    out.mkdir()
    write_folder(FILES | {"gene_lists/M2.txt": b"b\n"}, out)
    write_folder(FILES, out)
    assert _content(out) == FILES
    assert _names(tmp_path) == ["out"]


@pytest.mark.parametrize("foreign", ["notes.txt", "gene_lists/mine.txt", "more/x.csv", "gene_lists/deep/M1.txt"])
def test_a_folder_with_something_else_in_it_is_left_alone(tmp_path, foreign):
    write_folder(FILES, tmp_path / "out")
    path = tmp_path / "out" / foreign
    path.parent.mkdir(exist_ok=True)
    path.write_text("mine")
    before = _content(tmp_path / "out")
    with pytest.raises(InputError, match=r"holds something else .*new folder"):
        write_folder(FILES, tmp_path / "out")
    assert _content(tmp_path / "out") == before


def test_a_folder_that_is_no_whole_output_is_left_alone(tmp_path):
    (tmp_path / "out").mkdir()
    (tmp_path / "out" / "membership.csv").write_text("gene\n")
    with pytest.raises(InputError, match="no whole output"):
        check_folder(tmp_path / "out")


def test_empty_folders_of_others_count_too(tmp_path):
    (tmp_path / "out" / "plans").mkdir(parents=True)
    with pytest.raises(InputError, match="something else"):
        check_folder(tmp_path / "out")


def test_a_file_in_the_place_is_left_alone(tmp_path):
    path = tmp_path / "out"
    path.write_text("mine")
    with pytest.raises(InputError, match="this is a file"):
        write_folder(FILES, path)
    with pytest.raises(InputError, match="is a file"):
        write_folder(FILES, path / "below")
    assert path.read_text() == "mine"


def test_the_folder_at_hand_is_not_pulled_away(tmp_path, monkeypatch):
    (tmp_path / "out" / "in").mkdir(parents=True)
    monkeypatch.chdir(tmp_path / "out" / "in")
    for place in (Path(), Path("..")):
        with pytest.raises(InputError, match="folder at hand"):
            write_folder(FILES, place)


def test_a_link_to_a_folder_stays_a_link(tmp_path):
    (tmp_path / "real").mkdir()
    (tmp_path / "link").symlink_to(tmp_path / "real")
    write_folder(FILES, tmp_path / "link")
    assert (tmp_path / "link").is_symlink()
    assert _content(tmp_path / "real") == FILES


@pytest.mark.parametrize("name", ["/etc/x", "../x", "a/../../x", "a\\x"])
def test_names_that_lead_out_are_a_fault(tmp_path, name):
    with pytest.raises(ValueError, match="does not stay"):
        write_folder({**FILES, name: b""}, tmp_path / "out")
    assert _names(tmp_path) == []


def test_a_disk_that_refuses_is_told_and_the_old_output_stays(tmp_path):
    write_folder(FILES, tmp_path / "out")
    too_long = {**FILES, f"gene_lists/M{'1' * 300}.txt": b""}
    with pytest.raises(InputError, match=r"cannot be written .*another folder"):
        write_folder(too_long, tmp_path / "out")
    assert _content(tmp_path / "out") == FILES
    assert _names(tmp_path) == ["out"]


@pytest.mark.parametrize("delay", [0.01, 0.05, 0.13, 0.22])
def test_killed_at_any_moment_the_folder_is_whole_or_not_there(tmp_path, delay):
    out = tmp_path / "out"
    command = [sys.executable, "-c", WRITE_FOR_EVER, str(out)]
    with subprocess.Popen(command, cwd=REPOSITORY, stdout=subprocess.PIPE, text=True) as writer:
        assert writer.stdout is not None
        assert writer.stdout.readline() == "ready\n"
        time.sleep(delay)
        writer.kill()
    if out.exists():
        found = _content(out)
        assert len(found) == 61
        assert len({content[:1] for content in found.values()}) == 1
        assert {len(content) for content in found.values()} == {5000}
    shutil.rmtree(tmp_path)
    tmp_path.mkdir()


def test_the_same_files_give_the_same_zip():
    one = as_zip(FILES)
    assert one == as_zip(dict(reversed(FILES.items())))
    with zipfile.ZipFile(io.BytesIO(one)) as archive:
        assert archive.testzip() is None
        assert {name: archive.read(name) for name in archive.namelist()} == FILES
