"""The one function of the intake that opens a file."""

from __future__ import annotations

import stat
from pathlib import Path

from analysis.errors import InputError

LARGEST_FILE = 2_000_000_000
"""Bytes that a file may have, before and after unpacking."""

CHUNK = 1 << 20


def read_bytes(path: Path, limit: int = LARGEST_FILE) -> bytes:
    """Return the content of a file.

    Parameters
    ----------
    path : Path
        A regular file or a pipe.
    limit : int
        Most bytes to take.

    Raises
    ------
    InputError
        Where the file is missing, a folder, a device, too large, or may not be read.
    """
    where = str(path)
    try:
        _check_kind(where, path.stat(), limit)
        return _content(where, path, limit)
    except FileNotFoundError:
        raise InputError(where, "there is no such file", "check the name and the folder") from None
    except PermissionError:
        raise InputError(
            where, "the file may not be read", "ask its owner for permission to read it, or copy it"
        ) from None
    except (OSError, ValueError) as error:
        reason = getattr(error, "strerror", None) or str(error)
        raise InputError(where, f"the file cannot be read ({reason})", "check the name and the disk") from None


def _check_kind(where: str, status: object, limit: int) -> None:
    """Refuse folders, devices and files beyond the limit before a byte is read."""
    mode: int = getattr(status, "st_mode", 0)
    if stat.S_ISDIR(mode):
        raise InputError(where, "this is a folder", "name a file in it")
    if not (stat.S_ISREG(mode) or stat.S_ISFIFO(mode)):
        raise InputError(where, "this is a device, not a file", "name a file with one interaction per line")
    if getattr(status, "st_size", 0) > limit:
        raise too_large(where, limit)


def _content(where: str, path: Path, limit: int) -> bytes:
    """Read in pieces, so that a pipe without end stops at the limit."""
    taken = bytearray()
    with path.open("rb") as handle:
        while piece := handle.read1(CHUNK):
            taken += piece
            if len(taken) > limit:
                raise too_large(where, limit)
    return bytes(taken)


def too_large(where: str, limit: int) -> InputError:
    """Return the error for content beyond the limit."""
    return InputError(
        where,
        f"more than {limit:,} bytes of content",
        "cut the network first, by a higher score for instance, or split it",
    )
