"""Tables as CSV: UTF-8, one header line, bare line feeds, numbers that read back exactly.

A CSV has no types. Names are written as they are, `SEPT2` and `1-Mar` too, so that programs read back what was written;
whether a spreadsheet makes a date of them is decided where it is opened (the report says how to import columns as
text). Only text that a spreadsheet would run as a formula is changed: an apostrophe goes before it, and `unguarded`
takes it off again.
"""

from __future__ import annotations

import math
from collections.abc import Iterable
from typing import TYPE_CHECKING, Any

import numpy as np

if TYPE_CHECKING:
    import pandas as pd

FORMULA_STARTS = ("=", "+", "-", "@", "\t", "\r", "\n", "＝", "＋", "－", "＠")
"""First characters of a cell that spreadsheets may take for a formula (OWASP, "CSV Injection")."""
QUOTED = frozenset(',"\r\n\t')


def csv_bytes(table: pd.DataFrame, separator: str = ",") -> bytes:
    """Return the table as CSV, or with tabs, columns in their order, without the index."""
    columns = [_cells(table[name].tolist()) for name in table.columns]
    lines = [separator.join(_quoted(str(name)) for name in table.columns)]
    lines += [separator.join(cells) for cells in zip(*columns, strict=True)]
    return ("\n".join(lines) + "\n").encode()


def guarded(text: str) -> str:
    """Return the text with an apostrophe before it where a spreadsheet could run it as a formula.

    Texts that already are an apostrophe before a formula get another one, so that the change can always be undone.
    """
    return f"'{text}" if _is_formula(text) else text


def unguarded(cell: str) -> str:
    """Return the text that `guarded` was given."""
    return cell[1:] if cell.startswith("'") and _is_formula(cell[1:]) else cell


def _is_formula(text: str) -> bool:
    return text.lstrip(" '").startswith(FORMULA_STARTS)


def _cells(values: Iterable[Any]) -> list[str]:
    return [_cell(value) for value in values]


def _cell(value: Any) -> str:
    """Return one cell: empty where missing, `true`/`false`, integers as such, floats so that they read back exactly."""
    if isinstance(value, str):
        return _quoted(guarded(value))
    if value is None:
        return ""
    if isinstance(value, (bool, np.bool_)):
        return "true" if value else "false"
    if isinstance(value, (int, np.integer)):
        return str(int(value))
    number = float(value)
    return "" if math.isnan(number) else repr(number)


def _quoted(text: str) -> str:
    if QUOTED.isdisjoint(text) and text == text.strip():
        return text
    return '"' + text.replace('"', '""') + '"'
