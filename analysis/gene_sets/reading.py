"""From a file, or the bytes of one, to gene sets and the report on how they were read."""

from __future__ import annotations

import hashlib
from collections.abc import Container
from dataclasses import dataclass
from pathlib import Path, PurePath

from analysis.errors import InputError, SettingError
from analysis.gene_sets.aliases import NameRow
from analysis.gene_sets.annotation_file import KEY as ANNOTATIONS
from analysis.gene_sets.collection import GeneSets
from analysis.gene_sets.draft import Draft
from analysis.gene_sets.formats import FORMATS, expected, recognise
from analysis.gene_sets.ontology import Ontology
from analysis.gene_sets.report import SetReport
from analysis.gene_sets.sample import Request
from analysis.intake.decoding import decode
from analysis.intake.names import damaged
from analysis.intake.opener import read_bytes
from analysis.intake.unpacking import unpack
from analysis.intake.wording import counted, listed, shown
from analysis.progress import Progress, silent

NO_DATA = ("ND",)
"""Evidence code that says that nothing is known (Gene Ontology Consortium, "Guide to GO evidence codes")."""


@dataclass(frozen=True)
class SetReading:
    """Gene sets as they stand in a file.

    Attributes
    ----------
    sets : GeneSets
        In the file's own names.
    report : SetReport
    synonyms : tuple of NameRow
        Names of the same genes, where the file itself gives them.
    """

    sets: GeneSets
    report: SetReport
    synonyms: tuple[NameRow, ...] = ()


def read_gene_sets(
    path: Path,
    *,
    evidence_out: tuple[str, ...] | None = None,
    aspect: str | None = None,
    ontology: Ontology | None = None,
    known: Container[str] | None = None,
    progress: Progress = silent,
) -> SetReading:
    """Read gene sets from a file; see `parse_gene_sets`."""
    return parse_gene_sets(
        read_bytes(path),
        str(path),
        evidence_out=evidence_out,
        aspect=aspect,
        ontology=ontology,
        known=known,
        progress=progress,
    )


def parse_gene_sets(
    data: bytes,
    source: str,
    *,
    evidence_out: tuple[str, ...] | None = None,
    aspect: str | None = None,
    ontology: Ontology | None = None,
    known: Container[str] | None = None,
    progress: Progress = silent,
) -> SetReading:
    """Read gene sets from the bytes of a file, as it is or packed with gzip.

    Parameters
    ----------
    data : bytes
    source : str
        The file's name.
    evidence_out, aspect, ontology
        For annotation files only; see `Request`. None for the default: `ND` is left out, all aspects are taken,
        nothing is propagated.
    known : container of str, optional
        The network's names.
    progress : Progress

    Raises
    ------
    InputError
        Where the bytes are no gene sets.
    SettingError
        Where a setting for annotations is given for another format, or is out of range.
    """
    progress(0.0, "reading the gene sets")
    if not data.strip():
        raise InputError(source, "the file is empty", expected())
    text, warnings = decode(unpack(data, source), source)
    lines = text.split("\n")
    form = recognise(lines, source)
    if form.key != ANNOTATIONS and (evidence_out is not None or aspect is not None or ontology is not None):
        raise SettingError(
            f"evidence codes, aspect and ontology belong to {FORMATS[ANNOTATIONS].title}; {source} has {form.title}"
        )
    progress(0.2, "reading the gene sets")
    draft = form.parse(
        lines, Request(source, NO_DATA if evidence_out is None else evidence_out, aspect, ontology, known)
    )
    if not draft.sets:
        raise _nothing(draft, source)
    if warnings:
        draft.notes.append("The text is no UTF-8 and was read as Latin-1; names with accents may be wrong.")
    progress(0.9, "reading the gene sets")
    sets = GeneSets.from_names(
        ((name, draft.descriptions.get(name, ""), genes) for name, genes in draft.sets.items()),
        label=PurePath(source.replace("\\", "/")).name,
        provenance={"file": PurePath(source).name, "sha256": hashlib.sha256(data).hexdigest(), **draft.chosen},
    )
    draft.notes += _damage(sets)
    progress(1.0, "read")
    return SetReading(sets, _report(draft, sets, source, form.key), tuple(draft.synonyms))


def _report(draft: Draft, sets: GeneSets, source: str, key: str) -> SetReport:
    return SetReport(
        source=PurePath(source.replace("\\", "/")).name,
        format=key,
        rows=draft.rows,
        sets=len(sets),
        genes=len(sets.genes),
        memberships=int(sets.sizes.sum()),
        repeated=draft.repeated,
        joined=tuple(draft.joined),
        rejected=tuple(draft.rejected),
        notes=tuple(draft.notes),
    )


def _damage(sets: GeneSets) -> list[str]:
    names = damaged(sets.genes)
    if not names:
        return []
    return [
        f"{counted(len(names), 'name')} {'looks' if len(names) == 1 else 'look'} as if a spreadsheet had made a date "
        f"or a number of it, for instance {listed(shown(name) for name in names[:3])}."
    ]


def _nothing(draft: Draft, source: str) -> InputError:
    if not draft.rejected:
        return InputError(source, "there is no gene set", expected())
    first = draft.rejected[0]
    return InputError(source, first.reason, expected(), first.line)
