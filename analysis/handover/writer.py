"""The one place where what is handed over touches the disk: a folder, whole or not at all, or one zip."""

from __future__ import annotations

import io
import os
import secrets
import shutil
import zipfile
from collections.abc import Iterator, Mapping
from contextlib import contextmanager
from fnmatch import fnmatchcase
from pathlib import Path, PurePosixPath

from analysis.errors import InputError

MARKS = ("summary.json", "recipe.toml")
"""Files by which an earlier output is known."""
PORTRAIT_MARK = "portrait.json"
"""By which a portrait is known, which has no recipe."""

OWN_FILES = (
    *MARKS,
    "membership.csv",
    "modules.csv",
    "gene_lists/M*.txt",
    "gene_lists/background.txt",
    "report.html",
    "enrichment.csv",
    "spread.csv",
    "references.bib",
    "network.graphml",
    "membership.tsv",
    "membership.xlsx",
    "membership.parquet",
    "gene_lists_core/M*.txt",
    "gene_lists_core/background.txt",
    "module_sets.tsv",
    "module_sets_core.tsv",
    "map.svg",
    "map.pdf",
    "figure_data/map.csv",
    "figure_data/sizes.csv",
    "figure_data/confidence.csv",
    "figure_data/null_networks.csv",
    "sweep.csv",
    "flows.csv",
    "flows.svg",
    "matches.csv",
    "moved_genes.csv",
    "preservation.csv",
    "portrait.json",
    "summary.csv",
    "hubs.csv",
    "figures/*.svg",
    "figure_data/*.csv",
)
"""Patterns of everything that corymb writes into a folder; whatever else lies there belongs to somebody."""

ZIP_EPOCH = (1980, 1, 1, 0, 0, 0)
"""The earliest date that a zip can hold, so that the same files give the same bytes."""


def as_zip(files: Mapping[str, bytes]) -> bytes:
    """Return one zip of the files, in the order of their names, the same bytes for the same files."""
    target = io.BytesIO()
    with zipfile.ZipFile(target, "w", zipfile.ZIP_DEFLATED) as archive:
        for name in sorted(files):
            entry = zipfile.ZipInfo(name, ZIP_EPOCH)
            entry.compress_type = zipfile.ZIP_DEFLATED
            entry.create_system = 3
            entry.external_attr = 0o644 << 16
            archive.writestr(entry, files[name])
    return target.getvalue()


def write_folder(files: Mapping[str, bytes], out: Path) -> None:
    """Write the files into the folder `out`, atomically.

    Everything is written into a hidden folder beside `out`, which then takes its name; if the work is cut short, `out`
    is what it was before. An earlier output is replaced as a whole.

    Raises
    ------
    InputError
        Where `out` may not be replaced (see `check_folder`) or the disk refuses.
    """
    check_folder(out)
    target = out.resolve()
    draft = _beside(target, "draft")
    try:
        with _disk_errors(out):
            target.parent.mkdir(parents=True, exist_ok=True)
            draft.mkdir()
            for name, content in files.items():
                _write(draft / _inside(name), content)
            for folder in {draft, *(path for path in draft.rglob("*") if path.is_dir())}:
                _sync_folder(folder)
            _put(draft, target)
    finally:
        shutil.rmtree(draft, ignore_errors=True)


def check_folder(out: Path) -> None:
    """Raise `InputError` where a folder may not be written or replaced; worth asking before long work.

    `out` may be missing, empty, or an earlier output of corymb with nothing else in it.
    """
    with _disk_errors(out):
        target = out.resolve()
        if not target.exists():
            _check_parent(out, target)
            return
        if not target.is_dir():
            raise InputError(str(out), "this is a file", "name a folder to write into")
        if Path.cwd().is_relative_to(target):
            raise InputError(str(out), "this is the folder at hand or above it", "name a new folder in it")
        content = sorted(_files_in(target))
    foreign = [name for name in content if not any(fnmatchcase(name, pattern) for pattern in OWN_FILES)]
    if foreign:
        raise InputError(
            str(out), f"the folder holds something else ({foreign[0]!r})", "name a new folder, or empty this one"
        )
    if content and not set(MARKS) <= set(content) and PORTRAIT_MARK not in content:
        raise InputError(
            str(out),
            f"the folder is no whole output of corymb ({content[0]!r})",
            "name a new folder, or empty this one",
        )


def _check_parent(out: Path, target: Path) -> None:
    """Find the first folder above that exists, which must be a folder that may be written."""
    above = next(folder for folder in target.parents if folder.exists())
    if not above.is_dir():
        raise InputError(str(out), f"{above} is a file", "name a folder in a folder")
    if not os.access(above, os.W_OK | os.X_OK):
        raise InputError(str(out), f"the folder {above} may not be written", "name a folder where you may write")


def _files_in(folder: Path) -> Iterator[str]:
    """Relative names of everything that is not a folder, links not followed; of empty folders too."""
    for place, folders, names in os.walk(folder):
        inside = Path(place).relative_to(folder)
        yield from ((inside / name).as_posix() for name in names)
        if not folders and not names and inside.parts:
            yield f"{inside.as_posix()}/"


def _put(draft: Path, target: Path) -> None:
    """Give the draft its name; what stood there is put aside first, and back if that fails."""
    if not target.exists():
        draft.rename(target)
    else:
        old = _beside(target, "old")
        target.rename(old)
        try:
            draft.rename(target)
        except OSError:
            old.rename(target)
            raise
        shutil.rmtree(old, ignore_errors=True)
    _sync_folder(target.parent)


def _beside(target: Path, purpose: str) -> Path:
    return target.with_name(f".{target.name}.{purpose}-{secrets.token_hex(4)}")


def _inside(name: str) -> PurePosixPath:
    """Refuse names that lead out of the folder: a fault in an exporter."""
    path = PurePosixPath(name)
    if path.is_absolute() or ".." in path.parts or "\\" in name:
        raise ValueError(f"{name!r} does not stay in its folder")
    return path


def _write(path: Path, content: bytes) -> None:
    path.parent.mkdir(parents=True, exist_ok=True)
    with path.open("xb") as handle:
        handle.write(content)
        handle.flush()
        os.fsync(handle.fileno())


def _sync_folder(folder: Path) -> None:
    """Have the names of a folder on disk; systems that cannot open a folder do without."""
    if os.name != "posix":
        return
    handle = os.open(folder, os.O_RDONLY)
    try:
        os.fsync(handle)
    finally:
        os.close(handle)


@contextmanager
def _disk_errors(out: Path) -> Iterator[None]:
    try:
        yield
    except (OSError, RuntimeError) as error:
        reason = getattr(error, "strerror", None) or str(error)
        raise InputError(
            str(out), f"the folder cannot be written ({reason})", "name another folder, or make room and try again"
        ) from None
