"""From lines to cells, under each of the four separators, with or without quotes."""

from __future__ import annotations

import csv
import re
from collections.abc import Sequence
from dataclasses import dataclass, field

from analysis.intake.lines import LONGEST_CELL_LINES

SEPARATORS = {"tab": "\t", "semicolon": ";", "comma": ",", "blanks": " "}
"""By rank: where two would do, the first is taken."""

QUOTES_OPEN = "quotes are opened and not closed"
BLANKS_OR_QUOTED = re.compile(r'"((?:[^"]|"")*)"(?=\s|$)|(\S+)')


@dataclass
class Cells:
    """Rows of cells.

    Attributes
    ----------
    rows : list of list of str
        Cells of each row, neither trimmed nor of equal number.
    places : sequence of int
        Which of the given lines each row begins at.
    broken : list of int
        Lines whose quotes do not close.
    """

    rows: list[list[str]] = field(default_factory=list)
    places: Sequence[int] = ()
    broken: list[int] = field(default_factory=list)


def split(lines: list[str], separator: str) -> Cells:
    """Split lines into cells.

    Parameters
    ----------
    lines : list of str
        Without line ends.
    separator : str
        A key of `SEPARATORS`.
    """
    quoted = any('"' in line for line in lines)
    if separator == "blanks":
        return _by_blanks(lines) if quoted else Cells([line.split() for line in lines], range(len(lines)))
    sign = SEPARATORS[separator]
    if not quoted:
        return Cells([line.split(sign) for line in lines], range(len(lines)))
    try:
        rows = list(csv.reader(lines, delimiter=sign, skipinitialspace=sign != "\t", strict=True))
    except csv.Error:
        rows = []
    if len(rows) == len(lines):
        return Cells(rows, range(len(lines)))
    return _one_by_one(lines, sign)


def _by_blanks(lines: list[str]) -> Cells:
    """Split at runs of blanks outside quotes."""
    cells, places = Cells(), []
    for place, line in enumerate(lines):
        found = [(plain, plain or quoted.replace('""', '"')) for quoted, plain in BLANKS_OR_QUOTED.findall(line)]
        if any(plain.startswith('"') for plain, _ in found):
            cells.broken.append(place)
        else:
            cells.rows.append([cell for _, cell in found])
            places.append(place)
    cells.places = places
    return cells


def _one_by_one(lines: list[str], sign: str) -> Cells:
    """Split line by line, joining those that one quoted cell spans."""
    cells, places = Cells(), []
    place = 0
    while place < len(lines):
        span, row = _spanned(lines, place, sign)
        if row is None:
            cells.broken.append(place)
        else:
            cells.rows.append(row)
            places.append(place)
        place += span
    cells.places = places
    return cells


def _spanned(lines: list[str], place: int, sign: str) -> tuple[int, list[str] | None]:
    """Return the number of lines that a row takes and its cells; None where its quotes never close."""
    row = _quoted_row(lines[place], sign)
    if row is not None:
        return 1, row
    if lines[place].count('"') % 2:
        for span in range(2, LONGEST_CELL_LINES + 1):
            joined = lines[place : place + span]
            if len(joined) < span:
                break
            if joined[-1].count('"') % 2:
                row = _quoted_row("\n".join(joined), sign)
                return (1, None) if row is None else (span, row)
    return 1, None


def _quoted_row(line: str, sign: str) -> list[str] | None:
    """Return the cells of a row, None where its quotes do not close or text follows them."""
    try:
        rows = list(csv.reader([line], delimiter=sign, skipinitialspace=sign != "\t", strict=True))
    except csv.Error:
        return None
    return rows[0] if len(rows) == 1 else None
