"""A table before its columns have roles: header, some rows, separator."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

from analysis.intake.header import Header, column_of, share_of_numbers, trimmed

NO_WEIGHTS = "none"
"""What the user gives to leave weights out."""

FEW = 3
"""Rows from which on a column that never changes is worth a word."""


@dataclass(frozen=True)
class Table:
    """What is known of a table from its first rows; `source` is the file's name."""

    source: str
    header: Header | None
    sample: Sequence[Sequence[str]]
    separator: str

    @property
    def width(self) -> int:
        """Return the number of columns, empty ones at the end left out."""
        named = 0 if self.header is None else len(trimmed(self.header.cells))
        return max([named, *(len(trimmed(row)) for row in self.sample)])

    def name(self, place: int) -> str:
        """Return the column's name in the header; empty where it has none."""
        cells = () if self.header is None else self.header.cells
        return cells[place] if place < len(cells) else ""

    def address(self, place: int) -> str:
        """Return what the user can call the column by: its name, or its number where the name would not do."""
        name = self.name(place)
        cells = () if self.header is None else self.header.cells
        clear = name and cells.count(name) == 1 and not name.isdecimal() and name.lower() != NO_WEIGHTS
        return name if clear else str(place + 1)


def label_doubts(table: Table, labels: tuple[int, int]) -> list[dict[str, Any]]:
    """Return warnings where a label column looks like something else.

    A column of measures beside a column of names comes from a matrix or a table of values; a second column that
    never changes before a third of words is the kind of the interaction rather than its other end.
    """
    first, second = ([cell.strip() for cell in column_of(table.sample, place)] for place in labels)
    warnings: list[dict[str, Any]] = []
    if len(second) < FEW:
        return warnings
    if share_of_numbers(first) == 0 and share_of_numbers(second) == 1 and any("." in cell for cell in second):
        warnings.append({"kind": "numbers_as_names", "column": table.address(labels[1])})
    third = [cell.strip() for cell in column_of(table.sample, labels[1] + 1)]
    varied = len(set(third)) > 1 and share_of_numbers(third) == 0
    if len(set(second)) == 1 and len(set(first)) > 1 and varied:
        constant = {"kind": "constant_label_column", "column": table.address(labels[1]), "value": second[0]}
        warnings.append(constant)
    return warnings
