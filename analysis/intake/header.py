"""Is the first row a header? Rather no than yes: an eaten row of data is a loss that nobody sees."""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise

from analysis.intake.header_names import find_pair, weight_rank
from analysis.intake.weights import is_missing, is_number

MOST = 0.5
"""Share of the values of a column that must be numbers for it to count as a column of numbers."""
NUMBERED = re.compile(r"(.*\D)\d+")


@dataclass(frozen=True)
class Header:
    """Names of the columns.

    Attributes
    ----------
    cells : tuple of str
        One per column, trimmed; empty for row names that the header leaves out.
    pair : (int, int) or None
        Places of the label columns, where their names say so.
    """

    cells: tuple[str, ...]
    pair: tuple[int, int] | None


def find_header(first: Sequence[str], sample: Sequence[Sequence[str]]) -> Header | None:
    """Return the header where the first row is one.

    It is one where it names both label columns in known words, or where a column of numbers begins with a word.
    It is none where it contains a number, or where its labels come back below, or look like those below
    (`gene1 gene2` over `gene2 gene3`), unless a known word for a weight stands over numbers (`a b score`).

    Parameters
    ----------
    first : sequence of str
        Cells of the first row.
    sample : sequence of sequences of str
        The rows below it, or the first some of them.
    """
    cells = [cell.strip() for cell in first]
    if _numbers_its_columns(cells, sample):
        return Header(tuple(cells), None)
    if any(is_number(cell) for cell in cells):
        return None
    cells = _with_row_names(cells, sample)
    pair = find_pair(cells)
    if not (_names_all(cells, pair) if not sample else pair or _stands_over_numbers(cells, sample)):
        return None
    if not _names_a_weight(cells, sample) and _like_data(cells, pair or first_two(cells), sample):
        return None
    return Header(tuple(cells), pair)


def commented_header(comment: str | None, first: Sequence[str], cells: Sequence[str]) -> Header | None:
    """Return the header that stands in a comment above the first row, where it names both label columns."""
    names = [cell.strip() for cell in cells]
    if comment is None or len(names) != len(first):
        return None
    pair = find_pair(names)
    return Header(tuple(names), pair) if pair else None


def first_two(cells: Sequence[str]) -> tuple[int, int]:
    """Return the first two places, leaving out row numbers under an empty name."""
    start = 1 if len(cells) > 2 and not cells[0] else 0
    return start, start + 1


def share_of_numbers(values: Sequence[str], decimal: str = ".") -> float:
    """Return the share of numbers among the values that are there."""
    there = [value for value in values if not is_missing(value)]
    return sum(is_number(value, decimal) for value in there) / len(there) if there else 0.0


def column_of(sample: Sequence[Sequence[str]], place: int) -> list[str]:
    """Return the cells of one column, from the rows that have it."""
    return [row[place] for row in sample if len(row) > place]


def _numbers_its_columns(cells: Sequence[str], sample: Sequence[Sequence[str]]) -> bool:
    """Tell whether the first row counts `0, 1, 2 …`, as data frames without names do, over labels that are words."""
    if len(sample) < 2 or list(cells) != [str(place) for place in range(len(cells))]:
        return False
    return not any(is_number(cell) for row in sample for cell in row[:2])


def _with_row_names(cells: list[str], sample: Sequence[Sequence[str]]) -> list[str]:
    """Put an empty name in front where the header leaves out the row names, as R writes tables.

    Every row then has one cell more than the header. A column of weights without a name looks the same; what
    stands under the weight's name decides, or else whether the first column counts upwards.
    """
    if {len(trimmed(row)) for row in sample} != {len(cells) + 1}:
        return cells
    named = [place for place, cell in enumerate(cells) if weight_rank(cell) is not None]
    if named:
        here, next_to_it = (share_of_numbers(column_of(sample, named[0] + step)) for step in (0, 1))
        return ["", *cells] if here < MOST <= next_to_it else cells
    counts_up = _counts_up(column_of(sample, 0))
    measured = any("." in cell and is_number(cell) for cell in column_of(sample, len(cells)))
    return ["", *cells] if counts_up and not measured else cells


def _counts_up(values: Sequence[str]) -> bool:
    """Tell whether all values are whole numbers, each larger than the one before."""
    if not all(value.strip().isdecimal() for value in values):
        return False
    return all(int(one) < int(two) for one, two in pairwise(values))


def trimmed(row: Sequence[str]) -> Sequence[str]:
    """Return the row without the empty cells at its end."""
    width = len(row)
    while width and not row[width - 1].strip():
        width -= 1
    return row[:width]


def _names_all(cells: Sequence[str], pair: tuple[int, int] | None) -> bool:
    """Tell whether a lone row names its columns beyond doubt."""
    if pair is None:
        return False
    return any(weight_rank(cell) is not None for cell in cells) or not any(
        character.isdigit() for place in pair for character in cells[place]
    )


def _stands_over_numbers(cells: Sequence[str], sample: Sequence[Sequence[str]]) -> bool:
    """Tell whether a word stands over a column of numbers.

    In the two label columns all values must be numbers, since numbers and symbols are mixed as labels.
    """
    labels = first_two(cells)
    for place, cell in enumerate(cells):
        share = 0.0 if is_missing(cell) else share_of_numbers(column_of(sample, place), ",")
        if place in labels:
            share = share if share == 1.0 and len(sample) > 1 else 0.0
        if share >= MOST:
            return True
    return False


def _names_a_weight(cells: Sequence[str], sample: Sequence[Sequence[str]]) -> bool:
    """Tell whether a known word for a weight stands over numbers."""
    labels = first_two(cells)
    return any(
        weight_rank(cell) is not None and share_of_numbers(column_of(sample, place), ",") >= MOST
        for place, cell in enumerate(cells)
        if place not in labels
    )


def _like_data(cells: Sequence[str], labels: tuple[int, int], sample: Sequence[Sequence[str]]) -> bool:
    """Tell whether the labels of the first row come back below, or are numbered like those below."""
    others = [row for row in sample if [cell.strip() for cell in row] != list(cells)]
    below = [cell.strip() for place in labels for cell in column_of(others, place)]
    known = set(below)
    for place in labels:
        if place >= len(cells):
            continue
        if cells[place] in known:
            return True
        stem = _stem(cells[place])
        if stem and sum(_stem(label) == stem for label in below) >= MOST * len(below):
            return True
    return False


def _stem(label: str) -> str | None:
    """Return what stands before the number at the end, None where there is none."""
    found = NUMBERED.fullmatch(label)
    return found.group(1).lower() if found else None
