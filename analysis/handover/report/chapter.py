"""Further chapters of a report: sentences first, then a table as it is."""

from __future__ import annotations

from typing import Any

from analysis.handover.bundle import Section
from analysis.handover.report.markup import Markup, short, tag
from analysis.handover.report.wording import chance, count, figure

CHANCES = ("p_value", "q_value", "p-value", "q-value")
LONGEST = 60
FOCUSED = {"tabindex": "0", "role": "group", "aria_label": "Table"}
"""A wide table can be moved sideways from the keyboard."""


def chapter(section: Section) -> Markup:
    """Return the chapter."""
    sentences = [tag("p", sentence) for sentence in section.sentences[:1]]
    rest = tag("ul", [tag("li", sentence) for sentence in section.sentences[1:]], class_="more")
    return tag("section", tag("h2", section.title), sentences, rest, _table(section))


def _table(section: Section) -> Markup | None:
    table = section.table
    if table is None or table.empty:
        return None
    numeric = {name for name in table.columns if table[name].dtype.kind in "if"}
    heads = [tag("th", str(name), class_="n" if name in numeric else None, scope="col") for name in table.columns]
    rows = [
        tag("tr", [_cell(str(name), value, number=name in numeric) for name, value in record.items()])
        for record in table.to_dict("records")
    ]
    return tag("div", tag("table", tag("thead", tag("tr", heads)), tag("tbody", rows)), class_="wide", **FOCUSED)


def _cell(name: str, value: Any, *, number: bool) -> Markup:
    if not number:
        return tag("td", short("" if value is None else str(value), LONGEST))
    text = chance(value) if name in CHANCES else count(value) if isinstance(value, int) else figure(value)
    return tag("td", text, class_="n")
