"""The map with its legend as files of their own: `map.svg` and `map.pdf`."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from analysis.colours import SMALL, SMALLEST_COLOURED, module_colour
from analysis.handover.bundle import Bundle
from analysis.handover.report.map_figure import MOST_GENES, WIDTH, Sheet, draw_map, fit, module_middles, shown_edges
from analysis.handover.report.markup import Markup, short, tag
from analysis.handover.report.pdf import WIDE, Drawing
from analysis.handover.report.wording import count
from analysis.modules import NO_MODULE
from analysis.study import Study

PAPER, INK, EDGE = "#fbfaf6", "#1d2a2f", "#56636a"
COLUMNS, LINE, EDGE_OF_SHEET = 4, 22.0, 24.0
MOST_NAMED = 40
POINTS_WIDE = 510.0
"""Width of the PDF page: 18 cm, the width of a page of print."""


@dataclass(frozen=True)
class Entry:
    """One line of the legend: where it stands, its colour (none for bare words), its text."""

    x: float
    y: float
    colour: str | None
    text: str


def map_svg_file(bundle: Bundle) -> dict[str, bytes]:
    """Return `map.svg`: the map of the report with a legend, to be edited or printed."""
    sheet = fit(bundle.positions)
    entries, height = legend(bundle.study, sheet.height)
    drawn = draw_map(bundle.study, bundle.positions).picture
    inner = Markup(drawn.replace("<svg ", f'<svg x="0" y="0" width="{WIDTH:.0f}" height="{sheet.height:.0f}" ', 1))
    picture = tag(
        "svg",
        tag("rect", width=WIDTH, height=height, fill=PAPER),
        inner,
        tag("g", [_entry(entry) for entry in entries], fill=INK),
        xmlns="http://www.w3.org/2000/svg",
        viewBox=f"0 0 {WIDTH:.0f} {height:.0f}",
        width=WIDTH,
        height=height,
        font_family="Atkinson Hyperlegible, Helvetica, Arial, sans-serif",
        font_size=13,
    )
    return {"map.svg": f'<?xml version="1.0" encoding="UTF-8"?>\n{picture}\n'.encode()}


def map_pdf_file(bundle: Bundle) -> dict[str, bytes]:
    """Return `map.pdf`: the same as vectors, shading with plain edges in place of soft ones."""
    study, sheet = bundle.study, fit(bundle.positions)
    entries, height = legend(study, sheet.height)
    scale = POINTS_WIDE / WIDTH
    drawing = Drawing(POINTS_WIDE, height * scale, scale)
    drawing.style(fill=PAPER)
    drawing.box(0, 0, WIDTH, height)
    middles = module_middles(study, sheet.points)
    if study.network.node_count <= MOST_GENES:
        _shade(drawing, study, sheet)
        _edges(drawing, study, sheet)
        _genes(drawing, study, sheet)
    else:
        _modules(drawing, study, sheet, middles)
    _plates(drawing, study, middles)
    _legend(drawing, entries)
    return {"map.pdf": drawing.page(f"Modules of {short(study.network.label)}")}


def legend(study: Study, top: float) -> tuple[list[Entry], float]:
    """Return the lines of the legend below a map of this height, and the height of both together."""
    coloured = [module for module, size in enumerate(study.modules.sizes.tolist()) if size >= SMALLEST_COLOURED]
    shown = coloured[:MOST_NAMED]
    step = (WIDTH - 2 * EDGE_OF_SHEET) / COLUMNS
    entries = []
    for place, module in enumerate(shown):
        size = int(study.modules.sizes[module])
        name = study.settings.names.get(f"M{module + 1}", "")
        text = f"M{module + 1}{' ' + short(name, 18) if name else ''} ({count(size, 'gene')})"
        x, y = EDGE_OF_SHEET + place % COLUMNS * step, top + LINE * (1 + place // COLUMNS)
        entries.append(Entry(x, y, module_colour(module, size), text))
    below = top + LINE * (1 + -(-len(shown) // COLUMNS))
    more = f" {count(len(coloured) - len(shown), 'further module')} not listed." if len(coloured) > len(shown) else ""
    what = "a gene, sized by its degree" if study.network.node_count <= MOST_GENES else "a module, sized by its genes"
    words = f"A disc is {what}; grey: in a module under {SMALLEST_COLOURED} genes, or in none.{more}"
    return [*entries, Entry(EDGE_OF_SHEET, below, None, words)], below + LINE


def _entry(entry: Entry) -> Markup:
    if entry.colour is None:
        return tag("text", entry.text, x=entry.x, y=entry.y)
    box = tag("rect", x=entry.x, y=entry.y - 10, width=11, height=11, rx=3, fill=entry.colour)
    return tag("g", box, tag("text", entry.text, x=entry.x + 18, y=entry.y))


def _legend(drawing: Drawing, entries: list[Entry]) -> None:
    for entry in entries:
        if entry.colour is not None:
            drawing.style(fill=entry.colour)
            drawing.box(entry.x, entry.y - 10, 11, 11)
        drawing.style(fill=INK)
        drawing.text(entry.text, entry.x + (18 if entry.colour else 0), entry.y, 13)


def _shade(drawing: Drawing, study: Study, sheet: Sheet) -> None:
    for module, members in enumerate(study.modules.members):
        if len(members) >= SMALLEST_COLOURED:
            drawing.style(stroke=module_colour(module, len(members)), width=1.7 * sheet.unit, alpha=0.2)
            drawing.segments(((x, y, x, y) for x, y in sheet.points[members].tolist()), round_caps=True)


def _edges(drawing: Drawing, study: Study, sheet: Sheet) -> None:
    shown = shown_edges(study.network)
    sources, targets = study.network.sources[shown], study.network.targets[shown]
    labels = study.modules.labels
    inside = (labels[sources] == labels[targets]) & (labels[sources] != NO_MODULE)
    faint = float(np.clip(9.0 / np.sqrt(max(len(shown), 1)), 0.05, 0.45))
    for chosen, alpha in ((~inside, faint), (inside, min(1.9 * faint, 0.6))):
        drawing.style(stroke=EDGE, width=max(min(0.045 * sheet.unit, 1.0), 0.5), alpha=alpha)
        ends = np.column_stack([sheet.points[sources[chosen]], sheet.points[targets[chosen]]])
        drawing.segments((x, y, u, v) for x, y, u, v in ends.tolist())


def _genes(drawing: Drawing, study: Study, sheet: Sheet) -> None:
    labels, sizes = study.modules.labels, study.modules.sizes
    top = max(float(study.network.degree.max(initial=1)), 1.0)
    radii = np.clip(sheet.unit * (0.13 + 0.25 * np.sqrt(study.network.degree / top)), 1.4, 9.0)
    for node in np.lexsort((study.network.degree, labels != NO_MODULE)).tolist():
        label = int(labels[node])
        colour = SMALL if label == NO_MODULE else module_colour(label, int(sizes[label]))
        rim = INK if study.modules.homes[node] > 1 else PAPER
        drawing.style(fill=colour, stroke=rim, width=max(min(0.05 * sheet.unit, 1.2), 0.4))
        x, y = sheet.points[node].tolist()
        drawing.disc(x, y, float(radii[node]))


def _modules(drawing: Drawing, study: Study, sheet: Sheet, middles: NDArray[np.float64]) -> None:
    for module, size in enumerate(study.modules.sizes.tolist()):
        if size >= SMALLEST_COLOURED:
            drawing.style(fill=module_colour(module, size), stroke=PAPER, width=1, alpha=0.82)
            x, y = middles[module].tolist()
            drawing.disc(x, y, max(0.55 * sheet.unit * size**0.5, 2.0))


def _plates(drawing: Drawing, study: Study, middles: NDArray[np.float64]) -> None:
    """Set the number of each module that has a colour of its own, the largest first, none upon another."""
    placed: list[tuple[float, float, float]] = []
    for module, size in enumerate(study.modules.sizes.tolist()):
        name = study.settings.names.get(f"M{module + 1}", "")
        text = f"M{module + 1} {short(name, 24)}" if name else f"M{module + 1}"
        (x, y), half = middles[module].tolist(), WIDE * 14 * len(text) / 2 + 6
        crowded = any(abs(x - u) < half + other and abs(y - v) < LINE + 1 for u, v, other in placed)
        if size < SMALLEST_COLOURED or crowded:
            continue
        placed.append((x, y, half))
        drawing.style(fill="#ffffff", alpha=0.88)
        drawing.box(x - half, y - LINE / 2, 2 * half, LINE)
        drawing.style(fill=INK)
        drawing.text(text, x, y + 5, 14, bold=True, middle=True)
