"""Names that columns of interaction tables usually carry, and what they say about the column.

Common practice, no source: gathered from the words of the trade, not from any one product.
"""

from __future__ import annotations

import re
from collections.abc import Sequence
from itertools import pairwise

PAIRS = frozenset(
    {
        ("source", "target"),
        ("from", "to"),
        ("bait", "prey"),
        ("regulator", "target"),
        ("tf", "target"),
        ("head", "tail"),
        ("first", "second"),
        ("left", "right"),
        ("start", "end"),
        ("one", "two"),
        ("a", "b"),
        ("1", "2"),
        ("0", "1"),
        ("x", "y"),
        ("u", "v"),
        ("i", "j"),
    }
)
"""The two words by which the names of the two label columns differ."""

_ALONE = "source target from to bait prey regulator tf head tail first second left right"
ALONE = frozenset(_ALONE.split())
"""Those of them that name a column by themselves; the others need a noun: `gene a`, `node1`."""

_NOUNS = (
    "gene protein node interactor symbol id ids name official entrez ensembl uniprot locus orf systematic "
    "accession vertex participant molecule unique identifier label partner alias item entity element var "
    "variable feature probe transcript metabolite standard primary of the"
)
NOUNS = frozenset(_NOUNS.split())
"""What a label column may hold."""

UNLIKE_PAIRS = frozenset(
    {
        ("gene", "partner"),
        ("gene", "interactor"),
        ("gene", "neighbour"),
        ("gene", "neighbor"),
        ("protein", "partner"),
        ("protein", "interactor"),
        ("protein", "neighbour"),
        ("protein", "neighbor"),
        ("node", "neighbour"),
        ("node", "neighbor"),
        ("regulator", "gene"),
        ("tf", "gene"),
        ("row", "column"),
        ("row", "col"),
    }
)
"""Pairs of whole names without a word in common."""

WEIGHTS = (
    "weight",
    "edge weight",
    "combined score",
    "confidence",
    "confidence score",
    "confidence value",
    "score",
    "edge score",
    "interaction score",
    "correlation",
    "cor",
    "corr",
    "pcc",
    "similarity",
    "strength",
    "probability",
    "mutual information",
    "value",
)
"""Names of weight columns, the surest first."""

WEIGHT_WORDS = ("weight", "confidence", "score", "correlation", "similarity", "strength", "probability")
DISTANCES = frozenset(["distance", "dist", "dissimilarity"])
ERRORS = frozenset(["pvalue", "pval", "qvalue", "qval", "padj", "fdr", "evalue", "eval"])
"""Words of columns in which a small value means close, or sure."""

_OTHER_NUMBERS = "id ids index taxid taxon tax pmid pubmed year date start end position length row rank number no"
OTHER_NUMBERS = frozenset(_OTHER_NUMBERS.split())
"""Words of columns whose numbers are no measure of an interaction."""


MOST_CANDIDATES = 100
"""Columns compared with one another: an edge list has a handful, a matrix has thousands."""

SIDES = frozenset(side for pair in PAIRS | UNLIKE_PAIRS for side in pair)


def words(cell: str) -> tuple[str, ...]:
    """Return the words of a column's name in lower case: `GeneA` and `gene_a` both give `gene, a`."""
    parted = re.sub(r"(?<=[a-z])(?=[A-Z])", " ", cell.replace("(s)", ""))
    return tuple(re.findall(r"[a-z]+|\d+", parted.lower()))


def find_pair(cells: Sequence[str]) -> tuple[int, int] | None:
    """Return the places of the two label columns where their names say so."""
    named = [(place, words(cell)) for place, cell in enumerate(cells)]
    candidates = [(place, found) for place, found in named if found and set(found) <= NOUNS | SIDES]
    candidates = candidates[:MOST_CANDIDATES]
    for place, first in candidates:
        for other, second in candidates:
            if other != place and _are_pair(first, second):
                return place, other
    return None


def _are_pair(first: tuple[str, ...], second: tuple[str, ...]) -> bool:
    """Tell whether two names differ in one word, that word is a pair of sides, and the rest are nouns."""
    if len(first) == len(second) == 1 and (first[0], second[0]) in UNLIKE_PAIRS:
        return True
    if len(first) != len(second):
        return False
    unlike = [(one, two) for one, two in zip(first, second, strict=True) if one != two]
    alike = {one for one, two in zip(first, second, strict=True) if one == two}
    if len(unlike) != 1 or unlike[0] not in PAIRS or not alike <= NOUNS:
        return False
    return bool(alike) or set(unlike[0]) <= ALONE


def is_distance(cell: str) -> bool:
    """Tell whether the name of a column says that small values mean close, or sure."""
    found = words(cell)
    joined = {one + two for one, two in pairwise(found)} | set(found)
    return found in (("p",), ("q",)) or bool(joined & (DISTANCES | ERRORS))


def weight_rank(cell: str) -> int | None:
    """Return how surely the name is that of a weight column, 0 the surest; None where it is not."""
    if is_distance(cell):
        return len(WEIGHTS) + 1 if DISTANCES & set(words(cell)) else None
    name = " ".join(words(cell))
    if name in WEIGHTS:
        return WEIGHTS.index(name)
    return len(WEIGHTS) if set(words(cell)) & set(WEIGHT_WORDS) else None


def is_other_number(cell: str) -> bool:
    """Tell whether the name of a column says that its numbers are no weights."""
    return bool(set(words(cell)) & OTHER_NUMBERS) or is_distance(cell)
