"""From a cell to a weight, or to the reason why it is none."""

from __future__ import annotations

import math
import re
from collections.abc import Sequence

import numpy as np

from analysis.intake.wording import shown
from analysis.network import FloatArray

MISSING = frozenset(["", "na", "n/a", "#n/a", "nan", "null", "none", "nil", "missing", "unknown", "-", "--", ".", "?"])
"""Cells, in lower case, that stand for a value that is not there: common practice, no source."""

DECIMAL_COMMA = re.compile(r"[+-]?\d+,\d+(?:[eE][+-]?\d+)?")
NOT_A_NUMBER = "is not a number"


def is_missing(cell: str) -> bool:
    """Tell whether the cell says that there is no value."""
    return cell.strip().lower() in MISSING


def is_number(cell: str, decimal: str = ".") -> bool:
    """Tell whether the cell is a number, infinite ones included, missing ones not."""
    return not is_missing(cell) and not math.isnan(as_float(cell, decimal))


def as_float(cell: str, decimal: str = ".") -> float:
    """Return the number in a cell, NaN where there is none.

    Python's own reading, without what only Python writes (`1_000`, digits of other scripts).
    """
    cell = cell.strip()
    if decimal == "," and DECIMAL_COMMA.fullmatch(cell):
        cell = cell.replace(",", ".")
    if "_" in cell or not cell.isascii():
        return math.nan
    try:
        return float(cell)
    except ValueError:
        return math.nan


def as_floats(cells: Sequence[str], decimal: str = ".") -> FloatArray:
    """Return the numbers in many cells, NaN where there is none; shape (cells,)."""
    if decimal == ".":
        together = "".join(cells)
        if "_" not in together and together.isascii():
            try:
                return np.fromiter(map(float, cells), np.float64, len(cells))
            except ValueError:
                pass  # at least one cell is no number: look at each by itself
    return np.fromiter((as_float(cell, decimal) for cell in cells), np.float64, len(cells))


def usable(values: FloatArray) -> np.ndarray[tuple[int, ...], np.dtype[np.bool_]]:
    """Tell which numbers can be the weight of an edge: positive and finite."""
    return np.isfinite(values) & (values > 0)


def objection(cell: str, value: float) -> str:
    """Return what is wrong with a weight that cannot be used."""
    if is_missing(cell):
        return f"weight is missing ({shown(cell.strip())})" if cell.strip() else "weight is missing (empty)"
    if math.isnan(value):
        return f"weight {shown(cell.strip())} {NOT_A_NUMBER}"
    if math.isinf(value):
        return f"weight {shown(cell.strip())} is infinite"
    if value == 0:
        return "weight is zero"
    return f"weight {shown(cell.strip())} is negative"


def decimal_of(cells: Sequence[str], separator: str) -> str:
    """Return the decimal sign of a column: a comma where commas stand in numbers and no point does."""
    cells = [cell for cell in cells if not is_missing(cell)]
    if separator == "comma" or any("." in cell for cell in cells):
        return "."
    return "," if any(DECIMAL_COMMA.fullmatch(cell.strip()) for cell in cells) else "."
