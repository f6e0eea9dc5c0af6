"""The references as BibTeX."""

from __future__ import annotations

import re
from collections.abc import Sequence

from analysis.handover.report.citations import REFERENCES
from analysis.version import VERSION

_REFERENCE = re.compile(
    r"(?P<authors>.+?) \((?P<year>\d{4})\)\. (?P<title>.+?)\. (?P<journal>.+?)"
    r"(?P<volume> \d+)?(?:, (?P<pages>[\w–]+))?\."
)
_SPECIAL = re.compile(r"([&%$#_{}])")
_SELF = (
    "@misc{corymb,\n"
    "  title = {{corymb}: modules of biological networks and how far each can be believed},\n"
    f"  note = {{Version {VERSION}}},\n"
    "}\n"
)


def bibliography(keys: Sequence[str]) -> str:
    """Return a BibTeX file of these references and of corymb itself."""
    return "\n".join([*(_entry(key, REFERENCES[key]) for key in keys), _SELF])


def _entry(key: str, reference: str) -> str:
    """Return one entry; what has neither volume nor pages is a book."""
    match = _REFERENCE.fullmatch(reference)
    if match is None:
        raise ValueError(f"the reference {key!r} is not written like the others")
    parts = match.groupdict()
    article = bool(parts["volume"] or parts["pages"])
    values = {
        "author": " and ".join(_author(author) for author in parts["authors"].split(", ")),
        "title": f"{{{_escaped(parts['title'])}}}",
        "journal" if article else "publisher": _escaped(parts["journal"]),
        "volume": (parts["volume"] or "").strip(),
        "pages": (parts["pages"] or "").replace("–", "--"),
        "year": parts["year"],
    }
    lines = "".join(f"  {name} = {{{value}}},\n" for name, value in values.items() if value)
    return f"@{'article' if article else 'book'}{{{key}{parts['year']},\n{lines}}}\n"


def _author(author: str) -> str:
    """Turn `Traag VA` into `Traag, V. A.`, and `Hu M-B` into `Hu, M.-B.`."""
    name, initials = author.rsplit(" ", 1)
    dotted = re.sub(r"([^-])", r"\1.", initials)
    return f"{name}, {re.sub(r'(?<=[.])(?=[^-.])', ' ', dotted)}"


def _escaped(text: str) -> str:
    return _SPECIAL.sub(r"\\\1", text)
