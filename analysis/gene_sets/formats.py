"""The formats of gene-set files: one file each, one line here; the first that recognises a file reads it."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

from analysis.errors import InputError
from analysis.gene_sets import annotation_file, pairs, set_lines
from analysis.gene_sets.draft import Draft
from analysis.gene_sets.sample import Request, Sample
from analysis.intake.wording import shown


@dataclass(frozen=True)
class SetFormat:
    """One format.

    Attributes
    ----------
    key, title : str
    recognises : callable
        Tells from a sample whether a file is of this format.
    parse : callable
        Takes all lines and the request, returns the draft.
    """

    key: str
    title: str
    recognises: Callable[[Sample], bool]
    parse: Callable[[Sequence[str], Request], Draft]


FORMATS: dict[str, SetFormat] = {
    module.KEY: SetFormat(module.KEY, module.TITLE, module.recognises, module.parse)
    for module in (annotation_file, pairs, set_lines)
}


def recognise(lines: Sequence[str], source: str) -> SetFormat:
    """Return the format of a file.

    Raises
    ------
    InputError
        Where it is of none.
    """
    sample = Sample.of(lines)
    for each in FORMATS.values():
        if each.recognises(sample):
            return each
    first = next(iter(sample.rows), "")
    line = next((number for number, text in enumerate(lines, start=1) if text == first), None)
    found = f"these are no gene sets: {shown(first)}" if first else "there is no row but comments"
    raise InputError(source, found, expected(), line)


def expected() -> str:
    """Return a phrase that names the formats."""
    return "expected " + "; or ".join(each.title for each in FORMATS.values())
