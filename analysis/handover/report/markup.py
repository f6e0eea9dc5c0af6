"""HTML and SVG by small pieces, in which every text is escaped unless it was made here."""

from __future__ import annotations

import html
import re
from collections.abc import Iterable

NEVER_IN_HTML = re.compile("[\x00-\x08\x0b\x0c\x0e-\x1f\x7f-\x9f\ud800-\udfff\ufdd0-\ufdef\ufffe\uffff]")
"""Characters that a document may not hold (WHATWG HTML, 13.2.3.5: control characters, surrogates, noncharacters)."""
VOID = frozenset(["br", "meta", "circle", "path", "line", "rect"])
"""Elements that are written without content."""


class Markup(str):
    """Text that is markup already."""

    __slots__ = ()


Child = str | Iterable["Child"] | None


def tag(name: str, /, *children: Child, **attributes: str | float | None) -> Markup:
    """Return one element.

    Parameters
    ----------
    children
        Texts, which are escaped; `Markup`, which is not; lists of them; None is left out.
    attributes
        `class_` stands for `class`, `stroke_width` for `stroke-width`; None is left out. Numbers are cut to two
        decimals.
    """
    pairs = "".join(
        f' {key.rstrip("_").replace("_", "-")}="{_value(value)}"'
        for key, value in attributes.items()
        if value is not None
    )
    if name in VOID and not children:
        return Markup(f"<{name}{pairs}/>")
    return Markup(f"<{name}{pairs}>{join(children)}</{name}>")


def join(children: Child) -> Markup:
    """Return the children one after another, texts escaped."""
    if children is None:
        return Markup()
    if isinstance(children, Markup):
        return children
    if isinstance(children, str):
        return Markup(escaped(children))
    return Markup("".join(join(child) for child in children))


def escaped(text: str) -> str:
    """Return a text that is safe between tags and inside quotes."""
    return html.escape(NEVER_IN_HTML.sub("\ufffd", text), quote=True)


def short(text: str, limit: int = 60) -> str:
    """Return the text cut to `limit` characters."""
    return text if len(text) <= limit else text[: limit - 1] + "…"


def number(value: float) -> str:
    """Return a coordinate with at most two decimals."""
    text = f"{value:.2f}".rstrip("0").rstrip(".")
    return "0" if text == "-0" else text


def _value(value: str | float) -> str:
    return escaped(value) if isinstance(value, str) else number(value)
