"""`membership.csv` read back: modules as lists of named genes, with the confidence of each membership."""

from __future__ import annotations

import csv
import math
from collections.abc import Sequence

import numpy as np

from analysis.errors import InputError
from analysis.handover.csv_table import unguarded
from analysis.intake.decoding import decode
from analysis.intake.unpacking import unpack
from analysis.meaning import ModuleGenes
from analysis.network import locked

GENE, MODULE, CONFIDENCE = "gene", "module", "confidence"
WANTED = "give the membership.csv of an earlier output, or a table with the columns gene and module"


def parse_membership(data: bytes, source: str, others: Sequence[str] = ()) -> ModuleGenes:
    """Return the modules of a membership table.

    Parameters
    ----------
    data : bytes
        A table parted by commas or tabs, with a header that names `gene` and `module` and may name `confidence`; one
        row per gene and module.
    source : str
        Its name, for messages.
    others : sequence of str
        Further genes of the network, which are in no module.

    Raises
    ------
    InputError
        Where the columns are not there, or a row lacks a gene or a module.
    """
    if not data.strip():
        raise InputError(source, "the file is empty", WANTED)
    text, _ = decode(unpack(data, source), source)
    separator = "\t" if "\t" in text.partition("\n")[0] else ","
    reader = csv.reader(text.split("\n"), delimiter=separator)
    header = [cell.strip() for cell in next(reader, [])]
    if missing := [name for name in (GENE, MODULE) if name not in header]:
        raise InputError(source, f"there is no column {missing[0]!r}", WANTED, 1)
    members: dict[str, dict[str, float]] = {}
    for cells in reader:
        if not any(cell.strip() for cell in cells):
            continue
        gene, module, confidence = _row(cells, header, source, reader.line_num)
        members.setdefault(module, {})[gene] = confidence
    if not members:
        raise InputError(source, "the table has no rows", WANTED)
    genes = sorted({gene for group in members.values() for gene in group} | set(others))  # as a network has them
    place = {gene: index for index, gene in enumerate(genes)}
    rows = [sorted(group.items()) for group in members.values()]
    return ModuleGenes(
        tuple(genes),
        tuple(members),
        tuple(locked(np.array([place[gene] for gene, _ in row], np.int32)) for row in rows),
        tuple(locked(np.array([value for _, value in row], np.float64)) for row in rows),
    )


def _row(cells: Sequence[str], header: Sequence[str], source: str, line: int) -> tuple[str, str, float]:
    values = dict(zip(header, cells, strict=False))
    gene, module = (unguarded(values.get(name, "")).strip() for name in (GENE, MODULE))
    if not gene or not module:
        raise InputError(source, "a row lacks its gene or its module", "mend the row, or remove it", line)
    text = values.get(CONFIDENCE, "").strip()
    try:
        confidence = float(text) if text else math.nan
    except ValueError:
        raise InputError(source, f"confidence {text!r} is not a number", "mend it, or leave it empty", line) from None
    return gene, module, confidence
