"""From bytes to text with one newline at the end of each line."""

from __future__ import annotations

import codecs
from typing import Any

from analysis.errors import InputError
from analysis.intake.unpacking import UTF_16


def decode(data: bytes, source: str) -> tuple[str, tuple[dict[str, Any], ...]]:
    """Return the text and what there is to warn of.

    UTF-8 is expected, with or without a byte order mark; UTF-16 is read where a mark announces it (spreadsheets
    write it so); anything else is read as Latin-1, which never fails and may be wrong: a warning says so.

    Raises
    ------
    InputError
        Where a file announces UTF-16 and is not.
    """
    warnings: tuple[dict[str, Any], ...] = ()
    if data.startswith(UTF_16):
        text = _utf_16(data, source)
    else:
        try:
            text = data.removeprefix(codecs.BOM_UTF8).decode("utf-8")
        except UnicodeDecodeError as error:
            text = data.removeprefix(codecs.BOM_UTF8).decode("latin-1")
            line = data.count(b"\n", 0, error.start) + 1
            warnings = ({"kind": "encoding", "read_as": "latin-1", "line": line},)
    if "\r" in text:
        text = text.replace("\r\n", "\n").replace("\r", "\n")
    return text, warnings


def _utf_16(data: bytes, source: str) -> str:
    try:
        return data.decode("utf-16")
    except UnicodeDecodeError:
        raise InputError(
            source, "the file announces UTF-16 and does not keep to it", "save it as text in UTF-8"
        ) from None
