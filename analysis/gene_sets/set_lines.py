"""Tab-separated set lines: the set's name, a description, then its genes, one set a line."""

from __future__ import annotations

from collections.abc import Sequence

from analysis.errors import InputError
from analysis.gene_sets.draft import Draft, cleaned
from analysis.gene_sets.sample import Request, Sample
from analysis.intake.wording import counted, shown

KEY = "set lines"
TITLE = "tab-separated set lines (set, description, genes)"
FEWEST_CELLS = 3
MOST = 0.5
"""Share of the rows that must look so."""

ENOUGH_SETS = 3


def recognises(sample: Sample) -> bool:
    """Whether most rows have a name, a description and a gene."""
    return sample.share(lambda line: line.count("\t") >= FEWEST_CELLS - 1) >= MOST


def parse(lines: Sequence[str], request: Request) -> Draft:
    """Read the sets.

    Raises
    ------
    InputError
        Where every line has one gene: a table of another kind.
    """
    draft = Draft()
    seen: dict[str, int] = {}
    longest = 0
    for number, line in enumerate(lines, start=1):
        if not line.strip() or line.startswith("#"):
            continue
        draft.rows += 1
        name, genes = _take(draft, number, line)
        if name and genes:
            seen[name] = seen.get(name, 0) + 1
            longest = max(longest, len(genes))
            for gene in genes:
                draft.add(name, gene)
    draft.joined = [name for name, count in seen.items() if count > 1]
    if longest == 1 and len(draft.sets) >= ENOUGH_SETS:
        raise InputError(
            request.source,
            f"{counted(draft.rows, 'row')} of three columns, with one gene each if these were set lines",
            "give one line a set (name, description, genes), or two columns: the gene and the set",
        )
    return draft


def _take(draft: Draft, number: int, line: str) -> tuple[str, list[str]]:
    """Return name and genes of a line; note the description, or why the line gives nothing."""
    cells = [cleaned(cell) for cell in line.split("\t")]
    name, description, genes = cells[0], cells[1] if len(cells) > 1 else "", [cell for cell in cells[2:] if cell]
    if not name:
        draft.reject(number, "the set has no name")
    elif not genes:
        draft.reject(number, f"the set {shown(name)} has no genes")
    else:
        draft.descriptions.setdefault(name, description)
    return name, genes
