"""What a format is asked with: a sample of the file to be recognised by, and how the file is to be taken."""

from __future__ import annotations

from collections.abc import Callable, Container, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

from analysis.errors import SettingError

if TYPE_CHECKING:
    from analysis.gene_sets.ontology import Ontology

SAMPLED = 200
ASPECTS = {"P": "biological_process", "F": "molecular_function", "C": "cellular_component"}


@dataclass(frozen=True)
class Sample:
    """The first rows of a file.

    Attributes
    ----------
    rows : tuple of str
        Lines that are neither blank nor begin with `#` or `!`.
    remarks : tuple of str
        Lines among them that begin with `!`.
    """

    rows: tuple[str, ...]
    remarks: tuple[str, ...] = ()

    @classmethod
    def of(cls, lines: Sequence[str]) -> Sample:
        """Take the sample."""
        rows: list[str] = []
        remarks: list[str] = []
        for line in lines:
            if line.startswith("!"):
                remarks.append(line)
            elif line.strip() and not line.startswith("#"):
                rows.append(line)
            if len(rows) == SAMPLED:
                break
        return cls(tuple(rows), tuple(remarks[:SAMPLED]))

    def share(self, test: Callable[[str], bool]) -> float:
        """Return the share of the rows that pass a test; 0 where there is no row."""
        return sum(map(test, self.rows)) / len(self.rows) if self.rows else 0.0


@dataclass(frozen=True)
class Request:
    """How a file is to be taken.

    Attributes
    ----------
    source : str
        Its name, for messages.
    evidence_out : tuple of str
        Evidence codes of annotations to leave out (annotation files only). `ND`, no biological data available, says
        that nothing is known.
    aspect : str or None
        `P`, `F` or `C` for process, function or component (annotation files only); None for all.
    ontology : Ontology or None
        Terms along which annotations are propagated (annotation files only).
    known : container of str or None
        Names that the network uses, by which a column of genes is told from one of sets.
    """

    source: str
    evidence_out: tuple[str, ...] = ("ND",)
    aspect: str | None = None
    ontology: Ontology | None = None
    known: Container[str] | None = None

    def __post_init__(self) -> None:
        if self.aspect is not None and self.aspect not in ASPECTS:
            raise SettingError(f"--aspect is {self.aspect!r}; give P (process), F (function) or C (component)")
