"""Two-column tables: a gene and a set in each row, in either order, told apart by their content."""

from __future__ import annotations

import csv
from collections.abc import Container, Sequence
from functools import partial

from analysis.gene_sets.draft import Draft, cleaned
from analysis.gene_sets.sample import Request, Sample
from analysis.intake.wording import shown

KEY = "two columns"
TITLE = "two columns, a gene and a set in each row"
SEPARATORS = ("\t", ";", ",")
MOST = 0.8
GENE_WORDS = frozenset(
    [
        "gene",
        "genes",
        "symbol",
        "gene_symbol",
        "gene_name",
        "gene_id",
        "protein",
        "locus",
        "locus_tag",
        "geneid",
        "member",
    ]
)
SET_WORDS = frozenset(
    [
        "set",
        "set_name",
        "gene_set",
        "geneset",
        "term",
        "term_id",
        "go",
        "go_id",
        "pathway",
        "pathway_id",
        "pathway_name",
        "category",
        "class",
        "process",
        "function",
        "complex",
        "annotation",
        "group",
    ]
)


def recognises(sample: Sample) -> bool:
    """Whether most rows have exactly two cells under one separator."""
    return separator_of(sample) is not None


def separator_of(sample: Sample) -> str | None:
    """Return the separator that parts most rows in two; None where none does."""
    for sign in SEPARATORS:
        if sample.share(partial(_has_two, sign=sign)) >= MOST:
            return sign
    return None


def parse(lines: Sequence[str], request: Request) -> Draft:
    """Read the sets; see `order_of` for how the columns are told apart."""
    draft = Draft()
    sign = separator_of(Sample.of(lines)) or "\t"
    rows: list[tuple[str, str]] = []
    for number, line in enumerate(lines, start=1):
        if not line.strip() or line.startswith("#"):
            continue
        draft.rows += 1
        cells = [cleaned(cell) for cell in _cells(line, sign)]
        if len(cells) != 2 or not all(cells):
            draft.reject(number, f"two cells were expected, a gene and a set: {shown(line)}")
        else:
            rows.append((cells[0], cells[1]))
    if rows and (header := _header_order(rows[0])) is not None:
        draft.rows -= 1
        gene_first, how = header, f"as the header says ({', '.join(rows.pop(0))})"
    else:
        gene_first, how = order_of(rows, request.known)
    draft.notes.append(f"The {'first' if gene_first else 'second'} column is taken for the genes, {how}.")
    for one, other in rows:
        draft.add(*((other, one) if gene_first else (one, other)))
    return draft


def order_of(rows: Sequence[tuple[str, str]], known: Container[str] | None) -> tuple[bool, str]:
    """Return whether genes stand first, and how that was found.

    By the network's names where one column holds more of them; else the column with fewer different entries is that
    of the sets.
    """
    first, second = ({row[place] for row in rows} for place in (0, 1))
    if known is not None:
        shares = [sum(name in known for name in names) / max(len(names), 1) for names in (first, second)]
        if shares[0] != shares[1]:
            return shares[0] > shares[1], "since it holds names of the network"
    return len(first) >= len(second), "since it has more different entries than the other"


def _header_order(row: tuple[str, str]) -> bool | None:
    """Return whether a header puts genes first; None where the row is no header."""
    one, other = (cell.strip().lower().replace(" ", "_") for cell in row)
    if one in GENE_WORDS and other in SET_WORDS:
        return True
    return False if one in SET_WORDS and other in GENE_WORDS else None


def _has_two(line: str, sign: str) -> bool:
    return len(_cells(line, sign)) == 2 and (sign == "\t" or "\t" not in line)


def _cells(line: str, sign: str) -> list[str]:
    """Return the cells of a row; quotes shield commas and semicolons, a trailing separator is no cell."""
    if sign != "\t" and '"' in line:
        cells = next(csv.reader([line], delimiter=sign, skipinitialspace=True), [])
    else:
        cells = line.split(sign)
    return cells[:-1] if len(cells) > 2 and not cells[-1].strip() else cells
