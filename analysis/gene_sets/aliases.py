"""Aliases: which names mean the same gene, and how a name of one table is found in another.

A row of an alias table holds the names of one gene. Names in a column of synonyms yield to all others: a synonym of one
gene that is the symbol of another means the other.
"""

from __future__ import annotations

import csv
import re
from collections import defaultdict
from collections.abc import Container, Iterable, Sequence
from dataclasses import dataclass
from pathlib import Path

from analysis.errors import InputError
from analysis.intake.decoding import decode
from analysis.intake.opener import read_bytes
from analysis.intake.unpacking import unpack

SYNONYM_COLUMN = re.compile(r"(synonym|alias|previous|prev|old|former|other|alternative)", re.IGNORECASE)
NAME_COLUMN = re.compile(r"(gene|symbol|name|locus|id|accession|protein|tag|entry)", re.IGNORECASE)
LISTED = re.compile(r"[|;]")
"""What parts several names in one cell."""

LEADING = 2
"""Columns that hold names of first rank where no header tells the synonyms apart."""


@dataclass(frozen=True)
class NameRow:
    """Names of one gene.

    Attributes
    ----------
    names : tuple of str
        Identifiers and the symbol.
    synonyms : tuple of str
        Names that yield to those of other genes.
    """

    names: tuple[str, ...]
    synonyms: tuple[str, ...] = ()


@dataclass(frozen=True)
class Aliases:
    """An alias table.

    Attributes
    ----------
    rows : tuple of NameRow
    source : str
        Its file, for messages; empty where the names came with the gene sets.
    """

    rows: tuple[NameRow, ...] = ()
    source: str = ""

    def joined(self, others: Iterable[NameRow]) -> Aliases:
        """Return the table with further rows."""
        return Aliases((*self.rows, *others), self.source)


class Resolver:
    """Finds names of one table among the names that another uses.

    Parameters
    ----------
    aliases : Aliases
    known : container of str
        The names that are wanted: the network's.
    """

    def __init__(self, aliases: Aliases, known: Container[str]) -> None:
        self._rows = aliases.rows
        self._known = known
        self._first: defaultdict[str, list[int]] = defaultdict(list)
        self._second: defaultdict[str, list[int]] = defaultdict(list)
        for place, row in enumerate(aliases.rows):
            for name in dict.fromkeys(row.names):
                self._first[name].append(place)
            for name in dict.fromkeys(row.synonyms):
                self._second[name].append(place)

    def targets(self, name: str) -> set[str]:
        """Return the known names of the genes that a name may mean: none, one, or several where it is ambiguous."""
        found: set[str] = set()
        for place in self._places(name):
            found |= self._of_row(place)
        return found

    def _places(self, name: str) -> list[int]:
        return self._first.get(name) or self._second.get(name) or []

    def _of_row(self, place: int) -> set[str]:
        """Return the known names that mean the row's gene: of first rank where there are any."""
        row = self._rows[place]
        found = {name for name in row.names if name in self._known}
        return found or {name for name in row.synonyms if name in self._known and self._places(name) == [place]}


def read_aliases(path: Path) -> Aliases:
    """Read an alias table from a file; see `parse_aliases`."""
    return parse_aliases(read_bytes(path), str(path))


def parse_aliases(data: bytes, source: str) -> Aliases:
    """Read an alias table: one gene a row, one name a cell, or several parted by `|` or `;`.

    A header is known by its words. Columns that it calls synonyms, aliases, previous or old names hold names of second
    rank; without a header those are all columns after the second.

    Raises
    ------
    InputError
        Where the bytes are no such table.
    """
    text, _ = decode(unpack(data, source), source)
    lines = [line for line in text.split("\n") if line.strip() and not line.startswith("#")]
    separator = "\t" if any("\t" in line for line in lines) else ","
    table = list(csv.reader(lines, delimiter=separator, quoting=csv.QUOTE_NONE if separator == "\t" else 0))
    header = table[0] if table and _is_header(table[0]) else None
    second = _second_rank(header)
    rows = [_row(cells, second) for cells in (table[1:] if header else table)]
    rows = [row for row in rows if len(row.names) + len(row.synonyms) > 1]
    if not rows:
        raise InputError(
            source,
            "no row holds two names",
            "an alias table has the names of one gene in each row: identifier, symbol, synonyms, parted by tabs",
        )
    return Aliases(tuple(rows), source)


def _is_header(cells: Sequence[str]) -> bool:
    """Whether every cell is a word for names, rather than a name."""
    words = [cell.strip() for cell in cells if cell.strip()]
    wanted = [cell for cell in words if SYNONYM_COLUMN.search(cell) or NAME_COLUMN.search(cell)]
    return len(words) > 1 and len(wanted) == len(words)


def _second_rank(header: Sequence[str] | None) -> Container[int]:
    if header is None:
        return range(LEADING, 1_000_000)
    return {place for place, cell in enumerate(header) if SYNONYM_COLUMN.search(cell)}


def _row(cells: Sequence[str], second: Container[int]) -> NameRow:
    names: dict[str, None] = {}
    synonyms: dict[str, None] = {}
    for place, cell in enumerate(cells):
        target = synonyms if place in second else names
        target.update((name.strip(), None) for name in LISTED.split(cell) if name.strip())
    return NameRow(tuple(names), tuple(name for name in synonyms if name not in names))
