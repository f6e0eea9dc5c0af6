"""From the names that gene sets use to those that the network uses."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass, field

import numpy as np

from analysis.errors import InputError
from analysis.gene_sets.aliases import Aliases, Resolver
from analysis.gene_sets.collection import GeneSets
from analysis.gene_sets.report import MatchReport
from analysis.intake.wording import listed, shown
from analysis.network import IntArray, locked

EXAMPLES = 3


@dataclass
class _Names:
    """Where each name of the sets went."""

    place: dict[str, int] = field(default_factory=dict)
    exact: int = 0
    by_alias: int = 0
    ambiguous: list[str] = field(default_factory=list)
    unmatched: list[str] = field(default_factory=list)
    also_synonyms: list[str] = field(default_factory=list)


def match(sets: GeneSets, genes: Sequence[str], aliases: Aliases = Aliases()) -> tuple[GeneSets, MatchReport]:  # noqa: B008
    """Return the sets over the network's genes, and what of them matched.

    A name is taken as written where the network has it; else by the alias table. A name that may mean several genes of
    the network is left out. Sets stay in their order, also those that become empty.

    Parameters
    ----------
    sets : GeneSets
        As read from a file.
    genes : sequence of str
        Names of the network, each once: the universe of what is returned.
    aliases : Aliases
        Names of the same genes.

    Raises
    ------
    InputError
        Where the network knows none of the names.
    """
    index = {gene: place for place, gene in enumerate(genes)}
    names = _resolve(sets.genes, index, aliases)
    if not names.place:
        raise _nothing_matched(sets, genes, aliases)
    where = np.array([names.place.get(gene, -1) for gene in sets.genes], np.int64)
    members = [_mapped(where, group) for group in sets.members]
    matched = GeneSets(tuple(genes), sets.names, sets.descriptions, tuple(members), sets.label, sets.provenance)
    folded = {gene.casefold() for gene in genes}
    report = MatchReport(
        named=len(sets.genes),
        exact=names.exact,
        by_alias=names.by_alias,
        ambiguous=tuple(names.ambiguous),
        unmatched=tuple(names.unmatched),
        also_synonyms=tuple(names.also_synonyms),
        by_case=sum(name.casefold() in folded for name in names.unmatched),
        merged=len(names.place) - len(set(names.place.values())),
        known=int(matched.known.sum()),
        universe=len(genes),
        empty_sets=int((matched.sizes == 0).sum()),
        sets=len(sets),
    )
    return matched, report


def _resolve(wanted: Iterable[str], index: dict[str, int], aliases: Aliases) -> _Names:
    resolver = Resolver(aliases, index)
    names = _Names()
    for name in wanted:
        targets = resolver.targets(name) if aliases.rows else set()
        if name in index:
            names.exact += 1
            names.place[name] = index[name]
            if targets - {name}:
                names.also_synonyms.append(name)
        elif len(targets) == 1:
            names.by_alias += 1
            names.place[name] = index[targets.pop()]
        else:
            (names.ambiguous if targets else names.unmatched).append(name)
    return names


def _mapped(where: np.ndarray[tuple[int], np.dtype[np.int64]], group: IntArray) -> IntArray:
    found = np.unique(where[group])
    return locked(found[found >= 0].astype(np.int32))


def _nothing_matched(sets: GeneSets, genes: Sequence[str], aliases: Aliases) -> InputError:
    theirs = listed(shown(gene) for gene in sets.genes[:EXAMPLES])
    ours = listed(shown(gene) for gene in genes[:EXAMPLES])
    remedy = "check that they are of the same organism, or give an alias table that names both"
    if aliases.source:
        remedy = f"check that they are of the same organism and that {aliases.source} names both"
    return InputError(
        sets.label,
        f"the network knows none of the {len(sets.genes):,} genes that the sets name; the sets say {theirs}, the "
        f"network {ours}",
        remedy,
    )
