"""The formats that the intake reads. A new one is a file of its own and a line here."""

from __future__ import annotations

from typing import Protocol

from analysis.errors import InputError
from analysis.intake.edge_list import EdgeList
from analysis.intake.interactions import Interactions
from analysis.intake.wording import listed, with_article
from analysis.progress import Progress, silent

HEAD = 1 << 16
"""Characters of a text by which its format is told."""


class Format(Protocol):
    """A way to write a network as text."""

    @property
    def key(self) -> str:
        """Return the key in `FORMATS`."""
        ...

    @property
    def name(self) -> str:
        """Return what the format is called in a sentence."""
        ...

    def recognise(self, head: str) -> float:
        """Return how surely a text that begins so has this format: 0 not at all, 1 beyond doubt."""
        ...

    def parse(
        self,
        text: str,
        source: str,
        *,
        weight: str | None = None,
        strict: bool = False,
        progress: Progress = silent,
    ) -> Interactions:
        """Return the rows of the text; raise `InputError` where it cannot be used."""
        ...


FORMATS: dict[str, Format] = {form.key: form for form in (EdgeList(),)}


def recognise(text: str, source: str) -> Format:
    """Return the format that is surest of the text.

    Raises
    ------
    InputError
        Where none knows it.
    """
    head = text[:HEAD]
    scores = {key: form.recognise(head) for key, form in FORMATS.items()}
    best = max(scores, key=scores.__getitem__)
    if scores[best] <= 0:
        known = listed(with_article(form.name) for form in FORMATS.values())
        raise InputError(source, f"the text looks like {_looks_like(head)}", f"expected {known}", line=1)
    return FORMATS[best]


def _looks_like(head: str) -> str:
    """Return what a text of no known format seems to be."""
    start = head.lstrip()[:200].lower()
    if start.startswith(("<!doctype html", "<html")):
        return "a web page, as a failed download leaves behind"
    if start.startswith("<"):
        return "mark-up (XML)"
    return "JSON" if start.startswith(("{", "[")) else "nothing that is known here"
