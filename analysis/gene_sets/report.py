"""What was read from a gene-set file, and what of it the network knows."""

from __future__ import annotations

from dataclasses import asdict, dataclass
from typing import Any

from analysis.intake.report import Rejected
from analysis.intake.wording import counted, listed, shown

EXAMPLES = 3


@dataclass(frozen=True)
class SetReport:
    """How a gene-set file was read.

    Attributes
    ----------
    source, format : str
        File name; key in `FORMATS`.
    rows, sets, genes, memberships : int
        Rows read; sets, different genes and pairs of the two that they gave.
    repeated : int
        Times that a gene stood in the same set again.
    joined : tuple of str
        Sets that stood on more than one line.
    rejected : tuple of Rejected
        Rows that gave nothing.
    notes : tuple of str
        Sentences on what was chosen or left out.
    """

    source: str
    format: str
    rows: int
    sets: int
    genes: int
    memberships: int
    repeated: int
    joined: tuple[str, ...]
    rejected: tuple[Rejected, ...]
    notes: tuple[str, ...]

    def as_json(self) -> dict[str, Any]:
        """Return the report as plain values."""
        return asdict(self)

    def sentences(self) -> list[str]:
        """Return the report in plain words."""
        found = [
            f"{self.source}: {counted(self.sets, 'set')} over {counted(self.genes, 'gene')} "
            f"({counted(self.memberships, 'membership')}), read as {self.format}.",
            *self.notes,
        ]
        if self.repeated:
            found.append(f"{counted(self.repeated, 'repeat')} of a gene within its set {_was(self.repeated)} left out.")
        if self.joined:
            some = listed(shown(name) for name in self.joined[:EXAMPLES])
            found.append(
                f"{counted(len(self.joined), 'set')} stood on several lines, whose genes were joined, for instance "
                f"{some}."
            )
        if self.rejected:
            first = self.rejected[0]
            found.append(
                f"{counted(len(self.rejected), 'row')} gave nothing; the first is line {first.line}: {first.reason}."
            )
        return found


@dataclass(frozen=True)
class MatchReport:
    """Which names of the sets the network knows.

    Attributes
    ----------
    named : int
        Different genes that the sets name.
    exact, by_alias : int
        Of these, found as written; found by another name of the same gene.
    ambiguous, unmatched : tuple of str
        Names that may mean several genes of the network; names that mean none.
    also_synonyms : tuple of str
        Names found as written that are a synonym of another gene of the network too.
    by_case : int
        Unmatched names that would match if case were ignored.
    merged : int
        Names that mean a gene which another name of the sets means too.
    known : int
        Genes of the network in at least one set.
    universe : int
        Genes of the network.
    empty_sets : int
        Sets of which the network knows no gene.
    sets : int
        Sets in all.
    """

    named: int
    exact: int
    by_alias: int
    ambiguous: tuple[str, ...]
    unmatched: tuple[str, ...]
    also_synonyms: tuple[str, ...]
    by_case: int
    merged: int
    known: int
    universe: int
    empty_sets: int
    sets: int

    def as_json(self) -> dict[str, Any]:
        """Return the counts as plain values."""
        plain = asdict(self)
        for key in ("ambiguous", "unmatched", "also_synonyms"):
            plain[key] = list(plain[key])
        return plain

    def sentences(self) -> list[str]:
        """Return the counts in plain words."""
        aliases = f", {self.by_alias:,} of them by an alias" if self.by_alias else ""
        known = self.exact + self.by_alias
        found = [
            f"The network knows {known:,} of the {self.named:,} genes that the sets name{aliases}; "
            f"the sets know {self.known:,} of the network's {self.universe:,} genes."
        ]
        if self.unmatched:
            found.append(
                f"{counted(len(self.unmatched), 'name')} {_is(self.unmatched)} not in the network{_eg(self.unmatched)}."
            )
        if self.by_case:
            found.append(
                f"{self.by_case:,} of these would match if capitals did not count; another species may be meant, so "
                "they were left out."
            )
        if self.ambiguous:
            found.append(
                f"{counted(len(self.ambiguous), 'name')} may mean several genes and {_was(len(self.ambiguous))} left "
                f"out{_eg(self.ambiguous)}."
            )
        if self.also_synonyms:
            found.append(
                f"{counted(len(self.also_synonyms), 'name')} {_is(self.also_synonyms)} taken as written, though also a "
                f"synonym of another gene{_eg(self.also_synonyms)}."
            )
        if self.empty_sets:
            found.append(f"Of {self.empty_sets:,} of the {self.sets:,} sets the network knows no gene.")
        return found


def _eg(names: tuple[str, ...]) -> str:
    return f", for instance {listed(shown(name) for name in names[:EXAMPLES])}"


def _is(names: tuple[str, ...]) -> str:
    return "is" if len(names) == 1 else "are"


def _was(count: int) -> str:
    return "was" if count == 1 else "were"
