"""Gene sets over modules as a heat map, as SVG."""

from __future__ import annotations

import numpy as np

from analysis.handover.report.markup import Markup, short, tag
from analysis.meaning import Meaning, title_of

MOST_SETS, MOST_MODULES = 24, 18
LABELS, CELL, TOP, KEY = 196.0, 19.0, 24.0, 40.0
LEAF, INK, LINE, PAPER = "#2d6a4f", "#1d2a2f", "#dcdcd2", "#fbfaf6"
LONGEST = 32
NARROW = 9
"""Size of type over the columns, so that `M10` fits."""


def spread_rows(meaning: Meaning) -> tuple[list[int], list[int]]:
    """Return the sets that are enriched in several modules, most modules first, and these modules in their order."""
    spread = meaning.spread
    several = [position for position, modules in enumerate(spread.enriched) if len(modules) > 1]
    several.sort(key=lambda position: (-len(spread.enriched[position]), -float(spread.effective[position]), position))
    sets = several[:MOST_SETS]
    modules = sorted({module for position in sets for module in spread.enriched[position]})
    return sets, modules[:MOST_MODULES]


def draw_spread(meaning: Meaning) -> Markup | None:
    """Draw which share of each set lies in which module; None where no set is enriched in several modules.

    A square is the darker, the larger the share of the set's genes that lie in the module; a dot marks enrichment.
    """
    sets, modules = spread_rows(meaning)
    if not sets:
        return None
    enrichment = meaning.enrichment
    counts = np.asarray(meaning.spread.overlaps[sets][:, modules].todense(), np.float64)
    shares = counts / enrichment.sets.sizes[sets][:, None]
    top = float(shares.max())
    width, height = LABELS + CELL * max(len(modules), 7) + 8, TOP + CELL * len(sets) + KEY
    parts = [
        _text(enrichment.modules.labels[module], LABELS + CELL * (place + 0.5), TOP - 8, "middle", NARROW)
        for place, module in enumerate(modules)
    ]
    for row, gene_set in enumerate(sets):
        y = TOP + CELL * row
        words = short(title_of(enrichment.sets, gene_set), LONGEST)
        parts.append(_text(words, LABELS - 7, y + CELL / 2 + 4, "end"))
        for column, module in enumerate(modules):
            called = module in meaning.spread.enriched[gene_set]
            parts += _cell(LABELS + CELL * column, y, float(shares[row, column]) / top, called=called)
    parts.append(_key(height - KEY + 12, top))
    return tag("svg", parts, viewBox=f"0 0 {width:.0f} {height:.0f}", role="img")


def _cell(x: float, y: float, shade: float, *, called: bool) -> list[Markup]:
    square = tag(
        "rect",
        x=x + 1,
        y=y + 1,
        width=CELL - 2,
        height=CELL - 2,
        fill=LEAF if shade > 0 else PAPER,
        fill_opacity=0.12 + 0.88 * shade if shade > 0 else None,
        stroke=LINE,
        stroke_width=0.6,
    )
    if not called:
        return [square]
    colour = PAPER if shade > 0.4 else INK
    return [square, tag("circle", cx=x + CELL / 2, cy=y + CELL / 2, r=2.6, fill=colour)]


def _key(y: float, top: float) -> Markup:
    steps = [
        tag("rect", x=LABELS + 12 * place, y=y, width=12, height=10, fill=LEAF, fill_opacity=0.12 + 0.88 * place / 4)
        for place in range(5)
    ]
    words = f"to {100 * top:.0f} % of the set"
    return Markup(
        "".join(
            [
                _text("share of its genes: few", LABELS - 7, y + 9, "end"),
                *steps,
                _text(words, LABELS + 66, y + 9, "start"),
            ]
        )
    )


def _text(text: str, x: float, y: float, anchor: str, size: float = 11) -> Markup:
    return tag("text", text, x=x, y=y, text_anchor=anchor, fill=INK, font_size=size)
