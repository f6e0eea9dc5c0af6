"""Edge lists: one interaction per line, two columns of names, perhaps a weight, perhaps a header."""

from __future__ import annotations

import re
from collections.abc import Iterator
from dataclasses import dataclass
from typing import ClassVar

from analysis.errors import InputError
from analysis.intake.columns import Columns, find_columns
from analysis.intake.header import Header, commented_header, find_header
from analysis.intake.header_names import weight_rank
from analysis.intake.interactions import Interactions
from analysis.intake.lines import COMMENT_MARKS, Block, blocks
from analysis.intake.rows import RowCollector
from analysis.intake.separator import find_separator
from analysis.intake.splitting import QUOTES_OPEN, split
from analysis.intake.table import Table
from analysis.intake.unpacking import TEXT_WANTED
from analysis.intake.wording import shown
from analysis.progress import Progress, silent

SAMPLE = 2_000
"""Rows from which separator, header and columns are told."""
FIRST_BLOCK = 1 << 17
FOREIGN = re.compile(r"\s*(?:<[!?a-zA-Z]|[{\[]\s*[\"{\[\d])")
"""How mark-up and JSON begin; no label does."""

ONE_COLUMN = "expected two columns of names, parted by tabs, commas, semicolons or blanks"


@dataclass(frozen=True)
class EdgeList:
    """Delimited text with one interaction per line."""

    key: ClassVar[str] = "edge-list"
    name: ClassVar[str] = "edge list"

    def recognise(self, head: str) -> float:
        """Return how surely the first characters of a text are an edge list, in [0, 1].

        Any text but mark-up and JSON may be one, so the figure is low: a format with marks of its own wins.
        """
        return 0.0 if FOREIGN.match(head) else 0.1

    def parse(
        self,
        text: str,
        source: str,
        *,
        weight: str | None = None,
        strict: bool = False,
        progress: Progress = silent,
    ) -> Interactions:
        """Return the rows of an edge list.

        Parameters
        ----------
        text : str
            With newlines alone at the ends of lines.
        source : str
            File name, for messages.
        weight : str or None
            None to guess the weight column, `"none"` to leave weights out, else its name or number (from 1).
        strict : bool
            Raise where a weight is text, rather than reject its row.
        progress : Progress
            Told after each block of lines.

        Raises
        ------
        InputError
            Where there are no rows or no two columns, the weight column is not there, or `strict` finds text.
        """
        layout = _find_layout(text, source)
        columns = find_columns(layout.table(source), weight)
        collector = _collect(text, layout, RowCollector(source, columns, strict, layout.separator), progress)
        if layout.header_line is not None and layout.in_doubt and collector.knows(layout.labels(columns)):
            # The first row was taken for a header, and its labels are those of nodes: it was a row after all.
            layout = layout.without_header()
            columns = find_columns(layout.table(source), weight)
            collector = _collect(text, layout, RowCollector(source, columns, strict, layout.separator), progress)
        found = _interactions(layout, columns, collector)
        if not found.rows:
            raise InputError(source, "a header and nothing below it", TEXT_WANTED, layout.header_line)
        return found


@dataclass(frozen=True)
class Layout:
    """How the text is laid out.

    Attributes
    ----------
    separator : str
        A key of `SEPARATORS`.
    header : Header or None
        Names of the columns.
    header_line : int or None
        The line of the header; None where there is none or it stands in a comment.
    sample : list of list of str
        The first rows, without the header.
    first : list of str
        The first row, header or not.
    """

    separator: str
    header: Header | None
    header_line: int | None
    sample: list[list[str]]
    first: list[str]

    @property
    def guessed(self) -> bool:
        """Tell whether the header was found without a known name of a label column."""
        return self.header is not None and self.header.pair is None

    @property
    def in_doubt(self) -> bool:
        """Tell whether the header carries no known name at all."""
        cells = () if self.header is None else self.header.cells
        return self.guessed and not any(weight_rank(cell) is not None for cell in cells)

    def table(self, source: str) -> Table:
        """Return what the search for the columns needs."""
        return Table(source, self.header, self.sample, self.separator)

    def labels(self, columns: Columns) -> tuple[str, ...]:
        """Return the header's cells over the label columns."""
        cells = () if self.header is None else self.header.cells
        places = (columns.source.number - 1, columns.target.number - 1)
        return tuple(cells[place] for place in places if place < len(cells))

    def without_header(self) -> Layout:
        """Return the layout with the first row as a row of data."""
        return Layout(self.separator, None, None, [self.first, *self.sample], self.first)


def _find_layout(text: str, source: str) -> Layout:
    """Tell separator and header from the first rows."""
    block = _first_rows(text, source)
    lines = block.lines[: SAMPLE + 1]
    separator = find_separator(lines)
    if separator is None:
        raise _one_column(source, lines[0], block.numbers[0])
    cells = split(lines, separator)
    first, sample = cells.rows[0], cells.rows[1:]
    header = find_header(first, sample)
    if header is not None:
        return Layout(separator, header, block.numbers[cells.places[0]], sample, first)
    return Layout(separator, _header_in_comment(block.last_comment, first, separator), None, cells.rows, first)


def _one_column(source: str, line: str, number: int) -> InputError:
    """Return the error for a text that no separator parts."""
    if split([line], "tab").broken:
        return InputError(source, QUOTES_OPEN, "expected quotes in pairs, each pair around one cell", number)
    return InputError(source, f"one column ({shown(line.strip())}) and no separator", ONE_COLUMN, number)


def _first_rows(text: str, source: str) -> Block:
    """Return the first block that has rows.

    Raises
    ------
    InputError
        Where the whole text has none.
    """
    seen = Block()
    for block in blocks(text, FIRST_BLOCK):
        if block.lines:
            return block
        seen.comments += block.comments
        seen.rejected += block.rejected
    if seen.rejected:
        row = seen.rejected[0]
        raise InputError(source, row.reason, TEXT_WANTED, row.line)
    if seen.comments:
        raise InputError(source, "only comments, no rows", TEXT_WANTED)
    raise InputError(source, "the file is empty", TEXT_WANTED)


def _header_in_comment(comment: str | None, first: list[str], separator: str) -> Header | None:
    if comment is None:
        return None
    mark = next((mark for mark in COMMENT_MARKS if comment.startswith(mark)), "")
    cells = split([comment.removeprefix(mark).strip()], separator).rows
    return commented_header(comment, first, cells[0]) if cells else None


def _collect(text: str, layout: Layout, collector: RowCollector, progress: Progress) -> RowCollector:
    """Take in all rows, block by block."""
    for done, block in _with_progress(text):
        collector.take(block, split(block.lines, layout.separator), layout.header_line)
        progress(done, "reading rows")
    return collector


def _with_progress(text: str) -> Iterator[tuple[float, Block]]:
    """Yield the blocks with the share of the text that is read after each."""
    read = 0
    for block in blocks(text):
        read += sum(map(len, block.lines)) + len(block.lines)
        yield min(1.0, read / len(text)), block


def _interactions(layout: Layout, columns: Columns, collector: RowCollector) -> Interactions:
    """Put together what the collector took in."""
    sources, targets, weights = collector.arrays()
    warnings = [*columns.warnings, *collector.warnings()]
    if layout.in_doubt:
        warnings.insert(0, {"kind": "header_guessed", "line": layout.header_line})
    header_is_comment = layout.header is not None and layout.header_line is None
    return Interactions(
        format=EdgeList.name,
        names=collector.names,
        sources=sources,
        targets=targets,
        weights=weights,
        rejected=tuple(sorted(collector.rejected, key=lambda row: row.line)),
        separator=layout.separator,
        header=None if layout.header is None else layout.header.cells,
        columns=columns.roles,
        comments=collector.comments - header_is_comment,
        blank_lines=collector.blank_lines,
        warnings=tuple(warnings),
    )
