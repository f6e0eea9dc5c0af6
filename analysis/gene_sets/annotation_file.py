"""GAF 2.2, the annotation file of the Gene Ontology Consortium: one annotation of a gene product with a term a row.

Columns used ("GO Annotation File (GAF) format 2.2"): 1 database, 2 identifier, 3 symbol, 4 relation, before it `NOT|`
where the annotation is denied, 5 term, 7 evidence code, 9 aspect, 11 synonyms parted by `|`. Lines that begin with `!`
are remarks. Versions 2.0 and 2.1 have the same columns and are read too.
"""

from __future__ import annotations

import re
from collections import Counter, defaultdict
from collections.abc import Sequence

from analysis.errors import InputError
from analysis.gene_sets.aliases import NameRow
from analysis.gene_sets.draft import Draft
from analysis.gene_sets.ontology import Ontology
from analysis.gene_sets.sample import ASPECTS, Request, Sample
from analysis.intake.wording import counted, listed, shown

KEY = "GAF"
TITLE = "GAF 2.2, annotations of the Gene Ontology Consortium"
FEWEST_CELLS = 15
VERSION = re.compile(r"!\s*gaf-version:\s*(\S+)", re.IGNORECASE)
TERM = re.compile(r"[A-Za-z]+:\S+")
Annotated = defaultdict[str, set[str]]
"""Genes by term."""


def recognises(sample: Sample) -> bool:
    """Whether a remark names the version, or most rows have the columns of an annotation."""
    if any(VERSION.match(line) for line in sample.remarks):
        return True
    return sample.share(_looks_right) >= 0.9


def _looks_right(line: str) -> bool:
    cells = line.split("\t")
    return len(cells) >= FEWEST_CELLS and bool(TERM.fullmatch(cells[4])) and cells[8] in ASPECTS


def parse(lines: Sequence[str], request: Request) -> Draft:
    """Read the annotations into one set a term.

    Denied annotations (`NOT`) put no gene into a set; they also take the gene out of that set and, with an ontology,
    out of all sets below it, whatever other rows say, since what is not true of a term is not true of its special
    cases.

    Raises
    ------
    InputError
        Where nothing is left.
    """
    draft = Draft()
    counts: Counter[str] = Counter()
    codes: Counter[str] = Counter()
    asserted: Annotated = defaultdict(set)
    denied: Annotated = defaultdict(set)
    for number, line in enumerate(lines, start=1):
        if not line.strip() or line.startswith("!"):
            continue
        draft.rows += 1
        cells = line.split("\t")
        if fault := _fault(cells):
            draft.reject(number, fault)
            continue
        codes[cells[6].strip()] += 1
        reason = _left_out(cells, request)
        counts[reason] += 1
        if reason == "denied":
            denied[cells[4].strip()].add(cells[1].strip())
        elif not reason:
            asserted[cells[4].strip()].add(cells[1].strip())
            _note_names(draft, cells)
    _fill(draft, request, asserted, denied)
    draft.synonyms = list(dict.fromkeys(draft.synonyms))
    draft.notes = [*_selection_notes(request, counts, codes), *draft.notes]
    draft.chosen = _chosen(request)
    if not draft.sets:
        raise InputError(
            request.source,
            f"no annotation is left of {counted(draft.rows, 'row')}",
            "leave out fewer evidence codes, choose another aspect, or check that the file is GAF",
        )
    return draft


def _fault(cells: Sequence[str]) -> str:
    if len(cells) < FEWEST_CELLS:
        return f"{counted(len(cells), 'column')} where GAF has 17"
    if not cells[1].strip():
        return "no identifier in column 2"
    return "" if TERM.fullmatch(cells[4].strip()) else f"no term in column 5: {shown(cells[4])}"


def _left_out(cells: Sequence[str], request: Request) -> str:
    """Return why an annotation is not among the asserted ones; empty where it is."""
    if cells[6].strip() in request.evidence_out:
        return "evidence"
    if request.ontology is None and request.aspect is not None and cells[8].strip() != request.aspect:
        return "aspect"
    return "denied" if "NOT" in cells[3].split("|") else ""


def _note_names(draft: Draft, cells: Sequence[str]) -> None:
    identifier, symbol = cells[1].strip(), cells[2].strip()
    names = dict.fromkeys(name for name in (identifier, symbol, f"{cells[0].strip()}:{identifier}") if name)
    synonyms = tuple(name.strip() for name in cells[10].split("|") if name.strip() and name.strip() not in names)
    draft.synonyms.append(NameRow(tuple(names), synonyms))


def _fill(draft: Draft, request: Request, asserted: Annotated, denied: Annotated) -> None:
    """Put the genes into sets, propagated where there is an ontology, and honour what is denied."""
    ontology = request.ontology
    if ontology is None:
        above = {term: {term} for term in asserted}
    else:
        asserted, unknown = _renamed(asserted, ontology)
        denied, _ = _renamed(denied, ontology)
        if unknown:
            draft.notes.append(
                f"{counted(len(unknown), 'term')} with annotations {'is' if len(unknown) == 1 else 'are'} obsolete or "
                f"not in {ontology.source} and left out, for instance {listed(sorted(unknown)[:3])}."
            )
        above = {term: ontology.upward(term) for term in asserted}
    reached: Annotated = defaultdict(set)
    for term, genes in asserted.items():
        for higher in above[term]:
            reached[higher] |= genes
    removed = _take_denied(reached, denied, ontology)
    if removed:
        draft.notes.append(f"{counted(removed, 'membership')} contradicted by a NOT row {_was(removed)} taken back.")
    for term in sorted(reached):
        if ontology is not None and not _wanted(ontology, term, request.aspect):
            continue
        for gene in sorted(reached[term]):
            draft.add(term, gene)
        if ontology is not None:
            draft.descriptions[term] = ontology.terms[term].name


def _renamed(annotated: Annotated, ontology: Ontology) -> tuple[Annotated, set[str]]:
    """Return the annotations by the ids in use, and the terms that have none."""
    renamed: Annotated = defaultdict(set)
    unknown: set[str] = set()
    for term, genes in annotated.items():
        current = ontology.current(term)
        if current is None:
            unknown.add(term)
        else:
            renamed[current] |= genes
    return renamed, unknown


def _take_denied(reached: Annotated, denied: Annotated, ontology: Ontology | None) -> int:
    """Take denied genes out of their sets and of those below; return how many memberships that ended."""
    removed = 0
    for term in reached:
        over = {term} if ontology is None else ontology.upward(term)
        for higher in over & denied.keys():
            gone = reached[term] & denied[higher]
            removed += len(gone)
            reached[term] -= gone
    return removed


def _wanted(ontology: Ontology, term: str, aspect: str | None) -> bool:
    return aspect is None or ontology.terms[term].namespace == ASPECTS[aspect]


def _selection_notes(request: Request, counts: Counter[str], codes: Counter[str]) -> list[str]:
    notes = []
    if counts["evidence"]:
        found = [code for code in request.evidence_out if codes[code]]
        notes.append(
            f"{counted(counts['evidence'], 'annotation')} with evidence {listed(found)} {_was(counts['evidence'])} "
            "left out."
        )
    if absent := [code for code in request.evidence_out if not codes[code] and code != "ND"]:
        notes.append(f"No annotation has the evidence code {listed(absent)}; the file has {listed(sorted(codes))}.")
    if counts["aspect"]:
        notes.append(f"{counted(counts['aspect'], 'annotation')} of other aspects {_was(counts['aspect'])} left out.")
    if counts["denied"]:
        notes.append(
            f"{counted(counts['denied'], 'row')} with NOT {'says' if counts['denied'] == 1 else 'say'} what a gene "
            "does not do and put no gene into a set."
        )
    if request.ontology is None:
        notes.append(
            "Annotations stand as written, without the more general terms; give an OBO file to propagate them."
        )
    else:
        version = f" ({request.ontology.version})" if request.ontology.version else ""
        notes.append(f"Annotations hold for more general terms too, along is_a and part_of{version}.")
    return notes


def _was(count: int) -> str:
    return "was" if count == 1 else "were"


def _chosen(request: Request) -> dict[str, str]:
    chosen = {"evidence_out": ",".join(request.evidence_out), "aspect": request.aspect or "all"}
    if request.ontology is not None:
        chosen |= {"ontology": request.ontology.version or request.ontology.source}
    return chosen
