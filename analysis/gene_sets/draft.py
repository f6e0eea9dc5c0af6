"""What a format hands on: the sets as they stand in the file, and what was left out of them."""

from __future__ import annotations

from dataclasses import dataclass, field

from analysis.gene_sets.aliases import NameRow
from analysis.intake.report import Rejected


@dataclass
class Draft:
    """Sets under construction.

    Attributes
    ----------
    rows : int
        Rows that are neither blank nor comments.
    sets : dict
        Genes of each set by its name, in the order of the file; a dict without values keeps them once.
    descriptions : dict
        Description of each set by its name, where there is one.
    rejected : list of Rejected
        Rows that gave nothing, with the reason.
    repeated : int
        Times that a gene stood in a set again.
    joined : list of str
        Names of sets that stood on more than one line; their genes were joined.
    notes : list of str
        Sentences on what was chosen or left out.
    synonyms : list of NameRow
        Names of one gene each, where the file itself gives them.
    chosen : dict
        Settings that decided the sets, for the provenance.
    """

    rows: int = 0
    sets: dict[str, dict[str, None]] = field(default_factory=dict)
    descriptions: dict[str, str] = field(default_factory=dict)
    rejected: list[Rejected] = field(default_factory=list)
    repeated: int = 0
    joined: list[str] = field(default_factory=list)
    notes: list[str] = field(default_factory=list)
    synonyms: list[NameRow] = field(default_factory=list)
    chosen: dict[str, str] = field(default_factory=dict)

    def add(self, name: str, gene: str) -> None:
        """Put a gene into a set."""
        members = self.sets.setdefault(name, {})
        self.repeated += gene in members
        members[gene] = None

    def reject(self, line: int, reason: str) -> None:
        """Note a row that gave nothing."""
        self.rejected.append(Rejected(line, reason))


def cleaned(cell: str) -> str:
    """Return a cell without blanks and quotes around it."""
    text = cell.strip()
    if len(text) >= 2 and text[0] == text[-1] == '"':
        text = text[1:-1].replace('""', '"').strip()
    return text
