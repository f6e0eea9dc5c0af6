"""Files named by what they contain, written whole or not at all."""

from __future__ import annotations

import contextlib
import hashlib
import io
import os
import tempfile
import time
import zipfile
from collections.abc import Mapping
from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray

from app.workspace.errors import WorkspaceError

DRAFT = "draft-"
DRAFT_KEPT_SECONDS = 3600.0


class ContentFiles:
    """A folder of files whose names are the SHA-256 of their content.

    A name that stands in the database therefore says what must be in the file, and reading proves it.
    """

    def __init__(self, folder: Path) -> None:
        self.folder = folder

    def keep(self, content: bytes, ending: str) -> str:
        """Write content, unless it is there already, and return its name.

        Raises
        ------
        WorkspaceError
            Where the folder cannot be written; nothing half-written stays under the final name.
        """
        name = hashlib.sha256(content).hexdigest() + ending
        path = self.path(name)
        try:
            if not path.exists() or path.read_bytes() != content:
                path.parent.mkdir(parents=True, exist_ok=True)
                write_atomically(path, content)
        except OSError as error:
            raise WorkspaceError(
                f"{path.parent}: could not be written ({error.strerror}); nothing that was saved before is lost: "
                "free some space or see to the folder's permissions, then try again"
            ) from error
        return name

    def read(self, name: str) -> bytes:
        """Return the content of a file.

        Raises
        ------
        WorkspaceError
            Where the file is missing, or no longer holds what was written.
        """
        path = self.path(name)
        try:
            content = path.read_bytes()
        except OSError as error:
            raise WorkspaceError(f"{path}: could not be read ({error.strerror})") from error
        if hashlib.sha256(content).hexdigest() != name.partition(".")[0]:
            raise WorkspaceError(f"{path}: is damaged, it no longer holds what was saved")
        return content

    def path(self, name: str) -> Path:
        """Return where the file of that name stands."""
        return self.folder / name[:2] / name

    def sweep_drafts(self) -> None:
        """Remove what writers left behind that were killed more than an hour ago."""
        for draft in self.folder.glob(f"*/{DRAFT}*"):
            with contextlib.suppress(FileNotFoundError):  # its writer has just finished it
                if time.time() - draft.stat().st_mtime > DRAFT_KEPT_SECONDS:
                    draft.unlink()


def write_atomically(path: Path, content: bytes) -> None:
    """Write a file so that at every moment the name stands for the old content or for the new, on disk too."""
    handle, draft = tempfile.mkstemp(prefix=DRAFT, dir=path.parent)
    try:
        with os.fdopen(handle, "wb") as file:
            file.write(content)
            file.flush()
            os.fsync(file.fileno())
        Path(draft).replace(path)
    except BaseException:
        Path(draft).unlink(missing_ok=True)
        raise
    _settle(path.parent)


def _settle(folder: Path) -> None:
    """Have the folder's own listing reach the disk; Windows has no such call and needs none."""
    if os.name != "posix":
        return
    handle = os.open(folder, os.O_RDONLY)
    try:
        os.fsync(handle)
    finally:
        os.close(handle)


def pack_arrays(arrays: Mapping[str, NDArray[Any]]) -> bytes:
    """Return arrays as the bytes of an npz file: the same arrays always give the same bytes, and no pickle.

    Raises
    ------
    TypeError
        For an array of Python objects.
    """
    buffer = io.BytesIO()
    with zipfile.ZipFile(buffer, "w", zipfile.ZIP_STORED) as archive:
        for name, array in arrays.items():
            values = np.asanyarray(array)
            if values.dtype.hasobject:
                raise TypeError(f"array {name!r} holds Python objects; keep text as JSON")
            with archive.open(zipfile.ZipInfo(f"{name}.npy"), "w", force_zip64=True) as file:
                np.lib.format.write_array(file, values, allow_pickle=False)
    return buffer.getvalue()


def unpack_arrays(content: bytes) -> dict[str, NDArray[Any]]:
    """Return the arrays of an npz file, read-only; pickles are never loaded."""
    with np.load(io.BytesIO(content), allow_pickle=False) as archive:
        arrays = {name: archive[name] for name in archive.files}
    for array in arrays.values():
        array.flags.writeable = False
    return arrays
