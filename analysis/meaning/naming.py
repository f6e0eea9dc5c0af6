"""Names proposed for modules from the sets they are enriched in; a person accepts one or types another."""

from __future__ import annotations

import re
from dataclasses import dataclass

from analysis.gene_sets import GeneSets
from analysis.meaning.enrichment import Enrichment
from analysis.meaning.folding import Fold

ENOUGH = 1 / 3
"""Share of a module's genes from which on one set may name it alone: a convention, no source."""

LONGEST = 80
ACCESSION = re.compile(r"[A-Za-z]{1,12}[:_-]?\d{3,}")


@dataclass(frozen=True)
class Proposal:
    """A name for a module.

    Attributes
    ----------
    name : str
    reason : str
        One sentence.
    """

    name: str
    reason: str


def title_of(sets: GeneSets, position: int) -> str:
    """Return the words by which a set is called: its name, or its description where the name is an accession number."""
    name, description = sets.names[position], sets.descriptions[position]
    words = description if ACCESSION.fullmatch(name) and description else name
    return " ".join(words.replace("_", " ").split())


def propose(enrichment: Enrichment, module: int, folds: list[Fold]) -> Proposal | None:
    """Return a name from a module's best sets; None where it is enriched in none.

    The strongest set names the module where it holds at least a third of its genes in the background; else the two
    strongest that are not redundant do so together.
    """
    if not folds:
        return None
    size = int(enrichment.modules.sizes[module])
    best = folds[0].pair
    first = title_of(enrichment.sets, int(enrichment.gene_set[best]))
    held = int(enrichment.overlap[best])
    reason = f"{held} of its {size} genes in the background are in {first!r} (q = {enrichment.q_value[best]:.1e})"
    if held >= ENOUGH * size or len(folds) == 1:
        return Proposal(_cut(first), f"{reason}.")
    second = folds[1].pair
    other = title_of(enrichment.sets, int(enrichment.gene_set[second]))
    return Proposal(_cut(f"{first} / {other}"), f"{reason}, {int(enrichment.overlap[second])} in {other!r}.")


def _cut(name: str) -> str:
    return name if len(name) <= LONGEST else name[: LONGEST - 1].rstrip() + "…"
