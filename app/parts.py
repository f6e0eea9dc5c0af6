"""Small parts of which the reading pane is made. Pure functions of plain values."""

from __future__ import annotations

import json
import math
from collections.abc import Iterator, Sequence
from typing import Any
from urllib.parse import quote

from dash import html
from dash.development.base_component import Component

from app.map.colours import GREY, PALETTE

NOTHING = "–"
PICKS = frozenset({"pick-gene", "pick-module"})
"""Types of the ids of links, in tables only, that open a passport."""
SMALL = 1e-4
"""From here down figures are written with an exponent."""


def sentence(text: str, *, first: bool = False) -> html.P:
    """Return a sentence; the first one is the verdict, set larger."""
    unbroken = text.replace(" %", "\u00a0%").replace("p = ", "p\u00a0=\u00a0")
    return html.P(unbroken, className="verdict" if first else "hint sentence")


def sentences(texts: Sequence[str]) -> list[html.P]:
    """Return sentences, the first as the verdict."""
    return [sentence(text, first=position == 0) for position, text in enumerate(texts)]


def notice(text: str) -> html.Div:
    """Return a caution."""
    return html.Div(text, className="notice", role="note")


def fault(text: str) -> html.Div:
    """Return the message of an error."""
    return html.Div(text, className="fault", role="alert")


def heading(text: str) -> html.H2:
    """Return a heading inside the pane."""
    return html.H2(text, className="pane-heading")


def swatch(hue: int | None) -> html.Span:
    """Return a small square in a module's colour; grey for none."""
    colour = GREY if hue is None else PALETTE[hue % len(PALETTE)]
    return html.Span(className="swatch", style={"background": colour}, **{"aria-hidden": "true"})


def bar(value: float, *, doubt: bool = False) -> html.Span:
    """Return a bar from 0 to 1; doubt is drawn in ochre."""
    width = 0.0 if math.isnan(value) else min(max(value, 0.0), 1.0)
    fill = html.Span(style={"width": f"{100 * width:.1f}%"})
    return html.Span(fill, className="bar", **{"data-doubt": "yes" if doubt else "no", "aria-hidden": "true"})


def number(value: float | None, digits: int = 2) -> str:
    """Return a figure for the screen, a dash where it is missing; small ones keep two figures that count."""
    if value is None or (isinstance(value, float) and math.isnan(value)):
        return NOTHING
    if isinstance(value, int) or (float(value).is_integer() and abs(value) >= 10):
        return f"{int(value):,}"
    if abs(value) >= 10**-digits or value == 0:
        return f"{value:.{digits}f}"
    return f"{value:.2g}" if abs(value) >= SMALL else f"{value:.1e}"


def button(text: str, part_id: Any, *, kind: str = "button", **extra: Any) -> html.Button:
    """Return a button; `kind` is its class."""
    return html.Button(text, id=part_id, className=kind, type="button", n_clicks=0, **extra)


def link(text: str, part_id: Any) -> html.Button:
    """Return a button that reads as a link."""
    return button(text, part_id, kind="link")


def table(head: Sequence[str], rows: Sequence[Sequence[Any]], *, numeric: Sequence[int] = (), name: str) -> Component:
    """Return a plain table; `numeric` names the columns that are set to the right.

    Where all that can be pressed in it are genes and modules, it is a single component that `assets/tables.js` turns
    into the table: Dash needs seconds for some hundred rows made of components.
    """
    whole = _table(head, rows, numeric=numeric, name=name)
    if any(part.id["type"] not in PICKS for part in _parts(whole) if getattr(part, "id", None)):
        return whole
    return html.Div(**{"data-table": json.dumps(whole, default=_plain)})


def _plain(part: Component) -> dict[str, Any]:
    written = part.to_plotly_json()
    return {"type": written["type"], "props": written["props"]}


def _parts(part: Any) -> Iterator[Component]:
    """Return a component and all inside it."""
    if isinstance(part, list | tuple):
        for each in part:
            yield from _parts(each)
    elif isinstance(part, Component):
        yield part
        yield from _parts(getattr(part, "children", None))


def _table(head: Sequence[str], rows: Sequence[Sequence[Any]], *, numeric: Sequence[int], name: str) -> html.Table:

    def cell(kind: Any, position: int, content: Any) -> Any:
        extra = {"scope": "col"} if kind is html.Th else {}
        return kind(content, className="number" if position in numeric else "", **extra)

    return html.Table(
        [
            html.Thead(html.Tr([cell(html.Th, position, text) for position, text in enumerate(head)])),
            html.Tbody([html.Tr([cell(html.Td, place, each) for place, each in enumerate(row)]) for row in rows]),
        ],
        className="table",
        **{"aria-label": name},
    )


def figure(svg: str, words: str) -> html.Figure:
    """Return a figure drawn as SVG, with its one-sentence reading below."""
    alone = svg.replace("<svg ", '<svg xmlns="http://www.w3.org/2000/svg" font-family="sans-serif" font-size="12" ', 1)
    return html.Figure(
        [html.Img(src=f"data:image/svg+xml,{quote(alone)}", alt=words), html.Figcaption(words, className="hint")],
        className="figure",
    )


def field(label: str, control: Any, hint: str = "") -> html.Label:
    """Return a labelled control with a hint below."""
    parts = [html.Span(label, className="field-label"), control]
    return html.Label([*parts, html.Span(hint, className="hint")] if hint else parts, className="field")
