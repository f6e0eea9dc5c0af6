"""Which of tab, semicolon, comma and blanks parts the cells: told by the content, never by the file's name."""

from __future__ import annotations

from analysis.intake.splitting import SEPARATORS, split
from analysis.intake.weights import is_number

NEARLY_AS_GOOD = 0.8
"""A separator of higher rank wins where it parts this share of the lines that the best one parts."""


def find_separator(lines: list[str]) -> str | None:
    """Return the key of the separator, None where none gives two cells in any line.

    Each candidate is judged by the share of lines in which it gives two cells or more. Ranks settle ties: a tab
    is hardly ever part of a name, a semicolon seldom, a comma now and then (`ADE5,7`), a blank often.
    """
    shares = {separator: _share_parted(lines, separator) for separator in SEPARATORS}
    best = max(shares.values())
    if best == 0:
        return None
    found = next(separator for separator, share in shares.items() if share > 0 and share >= NEARLY_AS_GOOD * best)
    if found == "comma" and _commas_inside_cells(lines):
        return "blanks"
    return found


def _share_parted(lines: list[str], separator: str) -> float:
    rows = split(lines, separator).rows
    return sum(len(row) > 1 and any(cell.strip() for cell in row[1:]) for row in rows) / len(lines)


def _commas_inside_cells(lines: list[str]) -> bool:
    """Tell whether every comma belongs to a cell parted by blanks, as in `ADE5,7 ARG5,6 0,5`.

    So it is where no comma is followed by a blank and the third word of every line is a number by itself.
    """
    if any(", " in line for line in lines):
        return False
    rows = split(lines, "blanks").rows
    return bool(rows) and all(len(row) > 2 and is_number(row[2], ",") for row in rows)
