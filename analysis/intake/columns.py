"""Which column is the source, which the target, which the weight, and how that was found."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

from analysis.errors import InputError
from analysis.intake.header import MOST, column_of, first_two, share_of_numbers
from analysis.intake.header_names import WEIGHTS, is_distance, is_other_number, weight_rank
from analysis.intake.report import Role
from analysis.intake.table import NO_WEIGHTS, Table, label_doubts
from analysis.intake.weights import decimal_of
from analysis.intake.wording import listed, shown

SUREST = WEIGHTS.index("interaction score")
"""Rank up to which a name means a weight even where the column holds no numbers: a fault to be told."""

MOST_LISTED = 20
"""Columns that a message lists."""


@dataclass(frozen=True)
class Columns:
    """The roles of the columns.

    Attributes
    ----------
    source, target : Role
        The label columns.
    weight : Role or None
        The weight column, where weights are used.
    decimal : str
        Decimal sign of the weights: a point or a comma.
    warnings : tuple of dict
        What there is to say about the choice.
    """

    source: Role
    target: Role
    weight: Role | None
    decimal: str
    warnings: tuple[dict[str, Any], ...]

    @property
    def needed(self) -> int:
        """Return the number of cells that a row must have."""
        return max(role.number for role in self.roles.values())

    @property
    def roles(self) -> dict[str, Role]:
        """Return the roles by name: `source`, `target` and, where there is one, `weight`."""
        roles = {"source": self.source, "target": self.target}
        return roles if self.weight is None else {**roles, "weight": self.weight}


def find_columns(table: Table, weight: str | None) -> Columns:
    """Give the columns of a table their roles.

    Parameters
    ----------
    table : Table
        Header, sample of rows, separator.
    weight : str or None
        None to guess, `"none"` to leave weights out, else the name or the number (from 1) of the column.

    Raises
    ------
    InputError
        Where the weight column is not there, or no two label columns are left.
    """
    place = _given(table, weight)
    labels, how = _labels(table, place)
    warnings = label_doubts(table, labels)
    role = None
    if weight is None:
        place, found = _guess(table, labels)
        role = None if place is None else Role(table.address(place), place + 1, found)
        warnings += _left_out(table, labels, place)
    elif place is not None:
        role = Role(table.address(place), place + 1, "given")
    decimal = "."
    if role is not None and place is not None:
        decimal = decimal_of(column_of(table.sample, place), table.separator)
        if is_distance(table.name(place)):
            warnings.append({"kind": "distance_column", "column": role.column})
        if decimal == ",":
            warnings.append({"kind": "decimal_comma", "column": role.column})
    source, target = (Role(table.address(label), label + 1, how) for label in labels)
    return Columns(source, target, role, decimal, tuple(warnings))


def _given(table: Table, weight: str | None) -> int | None:
    """Return the place of the column that the user named, None where there is none to look for."""
    if weight is None or weight.strip().lower() == NO_WEIGHTS:
        return None
    wanted = weight.strip()
    cells = [] if table.header is None else list(table.header.cells)
    if wanted and wanted in cells:
        return cells.index(wanted)
    alike = [place for place, cell in enumerate(cells) if wanted and cell.lower() == wanted.lower()]
    if len(alike) == 1:
        return alike[0]
    if wanted.isascii() and wanted.isdecimal() and 1 <= int(wanted) <= table.width:
        return int(wanted) - 1
    raise InputError(
        table.source,
        f"there is no column {shown(wanted)}",
        f"{_columns_there(table)}; give one of them as --weight, or --weight none",
    )


def _columns_there(table: Table) -> str:
    """Return a phrase that lists the columns."""
    names = [shown(cell) for cell in (table.header.cells if table.header else ()) if cell]
    numbers = f"numbered 1 to {table.width}"
    if not names:
        return f"the columns have no names and are {numbers}"
    more = f" and {len(names) - MOST_LISTED} more" if len(names) > MOST_LISTED else ""
    names = names[:MOST_LISTED]
    return f"the columns are {', '.join(names) + more if more else listed(names)}, {numbers}"


def _labels(table: Table, weight: int | None) -> tuple[tuple[int, int], str]:
    """Return the places of the label columns and how they were found."""
    pair = None if table.header is None else table.header.pair
    if pair is not None and weight not in pair:
        return pair, "named"
    start = 0 if table.header is None else first_two(table.header.cells)[0]
    free = [place for place in range(start, table.width) if place != weight]
    if len(free) < 2:
        raise InputError(
            table.source,
            f"only {len(free)} column is left beside the weights",
            "an edge list needs two columns of names beside the weight column",
        )
    return (free[0], free[1]), "guessed: the first two columns"


def _guess(table: Table, labels: tuple[int, int]) -> tuple[int | None, str]:
    """Return the place of the weight column and how it was found, None where there is none."""
    others = [place for place in range(table.width) if place not in labels]
    numeric = [place for place in others if _holds_numbers(table, place)]
    ranked = [(weight_rank(table.name(place)), place) for place in others]
    named = sorted((rank, place not in numeric, place) for rank, place in ranked if rank is not None)
    by_name = [place for _, text, place in named if not text]
    by_name = by_name or [place for rank, _, place in named if rank <= SUREST]
    if by_name:
        return by_name[0], "named"
    free = [place for place in numeric if place > max(labels) and not is_other_number(table.name(place))]
    if free:
        return free[0], "guessed: the first column of numbers"
    return None, ""


def _holds_numbers(table: Table, place: int) -> bool:
    decimal = "." if table.separator == "comma" else ","
    return share_of_numbers(column_of(table.sample, place), decimal) >= MOST


def _left_out(table: Table, labels: tuple[int, int], weight: int | None) -> list[dict[str, Any]]:
    """Warn of further columns of numbers where none was taken for the weight."""
    if weight is not None:
        return []
    free = [place for place in range(table.width) if place not in labels and _holds_numbers(table, place)]
    start = 0 if table.header is None else first_two(table.header.cells)[0]
    free = [place for place in free if place >= start]
    return [{"kind": "unused_numbers", "columns": [table.address(place) for place in free]}] if free else []
