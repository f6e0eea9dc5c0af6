"""From cells to codes and weights, and to the reasons why a row gives none."""

from __future__ import annotations

from itertools import islice
from operator import ne
from typing import Any

import numpy as np
from numpy.typing import NDArray

from analysis.errors import InputError
from analysis.intake.columns import Columns
from analysis.intake.lines import Block
from analysis.intake.report import Rejected
from analysis.intake.splitting import QUOTES_OPEN, Cells
from analysis.intake.weights import NOT_A_NUMBER, as_floats, objection, usable
from analysis.intake.wording import counted
from analysis.network import FloatArray, IntArray

HEADER_AGAIN = "the header again"
"""Files that were joined end to end carry their headers inside."""

LONGEST_LABEL = 1_000
"""Characters of a label; a longer one is a text that slipped into the column."""


class RowCollector:
    """Takes in blocks of cells and keeps integers and floats alone.

    Parameters
    ----------
    source : str
        File name, for messages.
    columns : Columns
        The roles of the columns.
    strict : bool
        Raise where a weight is text.
    separator : str
        What parts the cells; blanks around labels are worth a word where it is not blanks themselves.
    """

    def __init__(self, source: str, columns: Columns, strict: bool, separator: str) -> None:
        self.comments = 0
        self.blank_lines = 0
        self.rejected: list[Rejected] = []
        self._source = source
        self._columns = columns
        self._strict = strict
        self._separator = separator
        self._codes: dict[str, int] = {}
        self._bad_labels: dict[int, str] = {}
        self._trimmed = 0
        self._header: list[str] | None = None
        self._ends: tuple[list[IntArray], list[IntArray]] = ([], [])
        self._weights: list[FloatArray] = []

    @property
    def names(self) -> list[str]:
        """Return every label met, by code."""
        return list(self._codes)

    def knows(self, labels: tuple[str, ...]) -> bool:
        """Tell whether one of the labels was met in a row."""
        return any(label and label in self._codes for label in labels)

    def take(self, block: Block, cells: Cells, header_line: int | None) -> None:
        """Take in a block of lines and its cells, leaving out the header.

        Raises
        ------
        InputError
            Where `strict` is set and a weight is text.
        """
        self.comments += block.comments
        self.blank_lines += block.blank_lines
        self.rejected += block.rejected
        self.rejected += [Rejected(block.numbers[place], QUOTES_OPEN) for place in cells.broken]
        rows, lines = cells.rows, [block.numbers[place] for place in cells.places]
        if header_line in lines[:1]:
            self._header, rows, lines = rows[0], rows[1:], lines[1:]
        needed = self._columns.needed
        again = {place for place, row in enumerate(rows) if row == self._header}
        self.rejected += [Rejected(lines[place], HEADER_AGAIN) for place in again]
        short = {place for place, row in enumerate(rows) if len(row) < needed} - again
        self.rejected += [Rejected(lines[place], self._too_few(rows[place])) for place in short]
        if dropped := again | short:
            kept = [place for place in range(len(rows)) if place not in dropped]
            rows, lines = [rows[place] for place in kept], [lines[place] for place in kept]
        if rows:
            self._take_rows(rows, lines)

    def _too_few(self, row: list[str]) -> str:
        """Return the objection to a row that ends before the columns in use."""
        return f"too few columns: {counted(len(row), 'column')} where {self._columns.needed} are needed"

    def _take_rows(self, rows: list[list[str]], lines: list[int]) -> None:
        """Code the labels, read the weights, and reject what cannot be used."""
        ends = [self._coded(rows, role.number - 1) for role in (self._columns.source, self._columns.target)]
        bad = np.isin(ends[0], list(self._bad_labels)) | np.isin(ends[1], list(self._bad_labels))
        values, cells = self._weights_of(rows)
        good = ~bad if values is None else ~bad & usable(values)
        for place in np.flatnonzero(~good).tolist():
            if bad[place]:
                reason = self._label_objection(int(ends[0][place]), int(ends[1][place]))
            else:
                reason = self._weight_objection(cells[place], values, place, lines[place])
            self.rejected.append(Rejected(lines[place], reason))
        for kept, codes in zip(self._ends, ends, strict=True):
            kept.append(codes[good])
        if values is not None:
            self._weights.append(values[good])

    def _coded(self, rows: list[list[str]], place: int) -> IntArray:
        """Return the codes of one label column, giving new labels new codes."""
        raw = [row[place] for row in rows]
        labels = list(map(str.strip, raw))
        self._trimmed += sum(map(ne, raw, labels))
        codes = self._codes
        before = len(codes)
        for label in labels:
            if label not in codes:
                codes[label] = len(codes)
        for label in list(islice(codes, before, None)):
            objection_to_label = _objection(label)
            if objection_to_label:
                self._bad_labels[codes[label]] = objection_to_label
        return np.fromiter(map(codes.__getitem__, labels), np.int32, len(labels))

    def _weights_of(self, rows: list[list[str]]) -> tuple[FloatArray | None, list[str]]:
        """Return the weights, NaN where there is none, and the cells they stand in."""
        role = self._columns.weight
        if role is None:
            return None, []
        cells = [row[role.number - 1] for row in rows]
        return as_floats(cells, self._columns.decimal), cells

    def _label_objection(self, source: int, target: int) -> str:
        """Return what is wrong with the first bad label of a row."""
        if source in self._bad_labels:
            return f"{self._bad_labels[source]} in column {self._columns.source.number}"
        return f"{self._bad_labels[target]} in column {self._columns.target.number}"

    def _weight_objection(self, cell: str, values: NDArray[Any] | None, place: int, line: int) -> str:
        """Return what is wrong with a weight; raise where it is text and that is not allowed."""
        reason = objection(cell, np.nan if values is None else float(values[place]))
        if self._strict and reason.endswith(NOT_A_NUMBER):
            remedy = "give a number or leave the column out with --weight none"
            raise InputError(self._source, reason, remedy, line)
        return reason

    def arrays(self) -> tuple[IntArray, IntArray, FloatArray | None]:
        """Return sources, targets and weights of the usable rows; shape (usable rows,) each."""
        none = np.zeros(0, np.int32)
        sources, targets = (np.concatenate([none, *codes]) for codes in self._ends)
        if self._columns.weight is None:
            return sources, targets, None
        return sources, targets, np.concatenate([np.zeros(0), *self._weights])

    def warnings(self) -> list[dict[str, Any]]:
        """Return what there is to say about the cells."""
        if self._separator == "blanks" or not self._trimmed:
            return []
        return [{"kind": "blanks_trimmed", "count": self._trimmed}]


def _objection(label: str) -> str:
    """Return what is wrong with a label, empty where nothing is."""
    if not label:
        return "empty label"
    if len(label) > LONGEST_LABEL:
        return f"label too long: {len(label):,} characters"
    return "line break inside a label" if "\n" in label else ""
