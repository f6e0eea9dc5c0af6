"""Ontologies in OBO format: terms, and the way from each to the more general ones.

After the OBO Flat File Format 1.2 and 1.4, as far as propagation needs them: stanzas `[Term]` with `id`, `name`,
`namespace`, `alt_id`, `is_a`, `relationship: part_of`, `is_obsolete`.
"""

from __future__ import annotations

import re
from collections.abc import Iterator
from dataclasses import dataclass, field
from pathlib import Path

from analysis.errors import InputError
from analysis.intake.decoding import decode
from analysis.intake.opener import read_bytes
from analysis.intake.unpacking import unpack

PARENTS = ("is_a", "part_of")
"""Relations along which an annotation also holds for the more general term (Gene Ontology Consortium, "Ontology
relations": is_a and part_of are safe for grouping annotations; regulates is not)."""

TAG = re.compile(r"([A-Za-z_-]+):\s*(.*)")
REMARK = re.compile(r"(?<!\\)\s!\s.*$")
QUALIFIERS = re.compile(r"\s*\{[^{}]*\}\s*$")


@dataclass
class Term:
    """One term.

    Attributes
    ----------
    id, name, namespace : str
    parents : list of str
        Terms that it is, or is part of.
    obsolete : bool
    """

    id: str
    name: str = ""
    namespace: str = ""
    parents: list[str] = field(default_factory=list)
    obsolete: bool = False


@dataclass(frozen=True, eq=False)
class Ontology:
    """Terms by id.

    Attributes
    ----------
    terms : dict of Term
    alternatives : dict of str
        The id in use, by each alternative id.
    version : str
        The file's `data-version`; empty where it has none.
    source : str
    sha256 : str
        Of the file's bytes; empty where it did not come from a file.
    """

    terms: dict[str, Term]
    alternatives: dict[str, str]
    version: str = ""
    source: str = ""
    sha256: str = ""

    def current(self, term: str) -> str | None:
        """Return the id in use for a term; None where it is unknown or obsolete."""
        found = self.terms.get(self.alternatives.get(term, term))
        return None if found is None or found.obsolete else found.id

    def upward(self, term: str) -> set[str]:
        """Return a term and all terms above it along `PARENTS`."""
        reached = {term}
        waiting = [term]
        while waiting:
            for parent in self.terms[waiting.pop()].parents:
                above = self.current(parent)
                if above is not None and above not in reached:
                    reached.add(above)
                    waiting.append(above)
        return reached


def read_ontology(path: Path) -> Ontology:
    """Read an OBO file; see `parse_ontology`."""
    return parse_ontology(read_bytes(path), str(path))


def parse_ontology(data: bytes, source: str) -> Ontology:
    """Read the bytes of an OBO file.

    Raises
    ------
    InputError
        Where no term stands in it.
    """
    import hashlib

    text, _ = decode(unpack(data, source), source)
    terms: dict[str, Term] = {}
    alternatives: dict[str, str] = {}
    version = ""
    for kind, tags in _stanzas(text):
        if kind == "Term" and (term := _term(tags)) is not None:
            terms[term.id] = term
            alternatives.update((value, term.id) for tag, value in tags if tag == "alt_id")
        elif not kind:
            version = next((value for tag, value in tags if tag == "data-version"), "")
    if not terms:
        raise InputError(source, "no [Term] with an id", "give an ontology in OBO format, such as go-basic.obo")
    alternatives = {other: term for other, term in alternatives.items() if other not in terms}
    return Ontology(terms, alternatives, version, source, hashlib.sha256(data).hexdigest())


def _stanzas(text: str) -> Iterator[tuple[str, list[tuple[str, str]]]]:
    """Yield each stanza's kind (empty for the header) with its tags and values, remarks and qualifiers cut off."""
    kind, tags = "", list[tuple[str, str]]()
    for raw in text.split("\n"):
        line = raw.strip()
        if line.startswith("[") and line.endswith("]"):
            yield kind, tags
            kind, tags = line[1:-1], []
        elif match := TAG.fullmatch(line):
            tags.append((match[1], QUALIFIERS.sub("", REMARK.sub("", match[2])).strip()))
    yield kind, tags


def _term(tags: list[tuple[str, str]]) -> Term | None:
    single = dict(reversed(tags))
    if not single.get("id"):
        return None
    term = Term(single["id"], single.get("name", ""), single.get("namespace", ""))
    term.obsolete = single.get("is_obsolete") == "true"
    for tag, value in tags:
        relation, _, target = (tag, "", value) if tag == "is_a" else value.partition(" ")
        if tag in {"is_a", "relationship"} and relation in PARENTS and target:
            term.parents.append(target.split()[0])
    return term
