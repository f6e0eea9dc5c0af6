"""Small figures as SVG: histograms, columns, bars in tables."""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np

from analysis.handover.report.markup import Markup, tag
from analysis.network import FloatArray
from analysis.study import NullDraws

WIDTH, HEIGHT = 400.0, 190.0
LEFT, RIGHT, TOP, BOTTOM = 12.0, 12.0, 24.0, 26.0
LEAF, OCHRE, GREY, INK, LINE = "#2d6a4f", "#b9852b", "#b7c0be", "#1d2a2f", "#dcdcd2"
DOUBT, STEADY = 0.6, 0.75
"""Usual marks of the mean best-match Jaccard (Hennig 2007)."""


def columns(values: Sequence[float], labels: Sequence[str], colours: Sequence[str], title: str) -> Markup:
    """Draw columns with their values above and labels below."""
    inner = WIDTH - LEFT - RIGHT
    step = inner / max(len(values), 1)
    top = max(max(values, default=0.0), 1.0)
    parts = []
    for position, (value, label, colour) in enumerate(zip(values, labels, colours, strict=True)):
        x, height = LEFT + position * step, (HEIGHT - TOP - BOTTOM) * value / top
        middle = x + step / 2
        parts.append(tag("rect", x=x + 2, y=HEIGHT - BOTTOM - height, width=step - 4, height=height, fill=colour))
        if value:
            parts.append(_text(f"{value:,.0f}", middle, HEIGHT - BOTTOM - height - 5))
        parts.append(_text(label, middle, HEIGHT - 8))
    return _frame(title, parts)


def confidence_chart(confidence: FloatArray) -> Markup:
    """Draw how many memberships lie in each tenth of confidence; doubtful ones in ochre."""
    counts, _ = np.histogram(confidence, bins=np.linspace(0, 1, 11))
    colours = [OCHRE if tenth < 10 * DOUBT else LEAF for tenth in range(10)]
    labels = [f"{tenth / 10:.1f}" for tenth in range(10)]
    return columns(counts.tolist(), labels, colours, "Number of genes by confidence, in steps of a tenth")


def size_chart(sizes: Sequence[int]) -> Markup:
    """Draw how many modules there are of each size, in classes that double."""
    top = max(int(math.log2(max(max(sizes, default=1), 1))), 0)
    classes = range(top + 1)
    counts = np.bincount([int(math.log2(size)) for size in sizes], minlength=top + 1)
    labels = [_class(2**each, 2 ** (each + 1) - 1, len(classes)) for each in classes]
    return columns(counts.tolist(), labels, [LEAF] * len(labels), "Number of modules by number of genes")


def null_chart(nulls: NullDraws) -> Markup:
    """Draw the modularity of the null networks, and that of the network as a line."""
    low = min(float(nulls.draws.min()), nulls.observed)
    high = max(float(nulls.draws.max()), nulls.observed)
    pad = 0.06 * (high - low) or 0.01
    low, high = low - pad, high + pad
    bins = 36
    counts, edges = np.histogram(nulls.draws, bins=bins, range=(low, high))
    step = (WIDTH - LEFT - RIGHT) / bins
    tallest = max(int(counts.max()), 1)
    parts = [
        tag("rect", x=LEFT + place * step + 0.5, y=HEIGHT - BOTTOM - height, width=step - 1, height=height, fill=GREY)
        for place, height in enumerate(((HEIGHT - TOP - BOTTOM - 8) * counts / tallest).tolist())
        if height
    ]
    x = LEFT + (nulls.observed - low) / (high - low) * (WIDTH - LEFT - RIGHT)
    right = x > WIDTH / 2
    parts += [
        tag("line", x1=x, y1=TOP - 8, x2=x, y2=HEIGHT - BOTTOM, stroke=LEAF, stroke_width=2.5),
        _text(f"here {nulls.observed:.3f}", x - 7 if right else x + 7, TOP + 4, "end" if right else "start", LEAF),
        _text(f"{edges[0]:.2f}", LEFT, HEIGHT - 8, "start"),
        _text(f"{edges[-1]:.2f}", WIDTH - RIGHT, HEIGHT - 8, "end"),
        _text("modularity", WIDTH / 2, HEIGHT - 8),
    ]
    return _frame("Modularity of the null networks, and of this one", parts)


def bar(share: float) -> Markup:
    """Draw a share as a length; doubtful ones in ochre."""
    full = tag("rect", width=56, height=8, rx=4, fill="#e4e9e6")
    length = tag("rect", width=56 * min(max(share, 0.0), 1.0), height=8, rx=4, fill=OCHRE if share < DOUBT else LEAF)
    return tag("svg", full, length, viewBox="0 0 56 8", aria_hidden="true")


def _frame(title: str, parts: Sequence[Markup]) -> Markup:
    base = HEIGHT - BOTTOM
    axis = tag("line", x1=LEFT, y1=base, x2=WIDTH - RIGHT, y2=base, stroke=LINE)
    return tag("svg", tag("title", title), parts, axis, viewBox=f"0 0 {WIDTH:.0f} {HEIGHT:.0f}", role="img")


def _text(text: str, x: float, y: float, anchor: str = "middle", colour: str | None = None) -> Markup:
    style = None if colour is None else f"fill:{colour};font-weight:700"
    return tag("text", text, x=x, y=y, text_anchor=anchor, style=style)


def _class(low: int, high: int, number: int) -> str:
    """Return `4–7`, or `4+` where many classes leave little room."""
    if low == high:
        return str(low)
    return f"{low}–{high}" if number <= 6 else f"{low}+"
