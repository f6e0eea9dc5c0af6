"""Figures of the stations, as SVG text; pure functions of results."""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence

import numpy as np

from analysis.handover.report.markup import Markup, tag
from analysis.network import FloatArray
from analysis.trust.noise_curve import NoiseCurve

Scale = Callable[[float], float]
WIDTH, HEIGHT = 440.0, 210.0
LEFT, RIGHT, TOP, BOTTOM = 44.0, 100.0, 14.0, 34.0
LINE_HEIGHT = 14.0
LEAF, GREY, INK, LINE = "#2d6a4f", "#7d8a88", "#1d2a2f", "#dcdcd2"


def noise_figure(curve: NoiseCurve) -> str:
    """Draw how far partitions drift as edges are perturbed, here and in null networks; bands hold all copies."""
    top = float(np.nanmax([np.nanmax(curve.vi, initial=0.0), np.nanmax(curve.null_vi, initial=0.0), 0.1])) * 1.08
    widest = float(curve.shares[-1])

    def x(share: float) -> float:
        return LEFT + (WIDTH - LEFT - RIGHT) * share / widest

    def y(value: float) -> float:
        return HEIGHT - BOTTOM - (HEIGHT - TOP - BOTTOM) * value / top

    parts: list[Markup] = [_axes(x, y, top, curve.shares)]
    ends: list[tuple[float, float, str, str]] = []
    for table, colour, words in ((curve.null_vi, GREY, "random networks"), (curve.vi, LEAF, "this network")):
        known = ~np.isnan(table).all(axis=1)
        if not known.any():
            continue
        shares, values = [0.0, *curve.shares[known].tolist()], table[known]
        low, middle, high = (
            [0.0, *found.tolist()]
            for found in (np.nanmin(values, axis=1), np.nanmean(values, axis=1), np.nanmax(values, axis=1))
        )
        outline = [(x(s), y(v)) for s, v in zip(shares, high, strict=True)]
        outline += [(x(s), y(v)) for s, v in reversed(list(zip(shares, low, strict=True)))]
        line = [(x(s), y(v)) for s, v in zip(shares, middle, strict=True)]
        parts.append(tag("polygon", points=_points(outline), fill=colour, fill_opacity=0.15))
        parts.append(tag("polyline", points=_points(line), fill="none", stroke=colour, stroke_width=2.2))
        ends.append((line[-1][1], line[-1][0], words, colour))
    parts += _names_of_lines(ends)
    return tag("svg", parts, viewBox=f"0 0 {WIDTH:.0f} {HEIGHT:.0f}", role="img")


def _names_of_lines(ends: list[tuple[float, float, str, str]]) -> list[Markup]:
    """Name each line at its end (down, across, words, colour); ends that are near push their names apart."""
    taken = -math.inf
    names = []
    for down, across, words, colour in sorted(ends):
        taken = max(down, taken + LINE_HEIGHT)
        names.append(_text(words, across + 6, taken + 4, "start", colour))
    return names


def _axes(x: Scale, y: Scale, top: float, shares: FloatArray) -> Markup:
    parts: list[Markup] = []
    for value in _ticks(top):
        level = y(value)
        parts.append(tag("line", x1=LEFT, y1=level, x2=WIDTH - RIGHT, y2=level, stroke=LINE))
        parts.append(_text(f"{value:g}", LEFT - 6, level + 4, "end"))
    marked = [share for share in shares.tolist() if share >= 0.1 or share == shares[0]]
    parts += [_text(f"{100 * share:.0f} %", x(share), HEIGHT - BOTTOM + 15) for share in marked]
    parts.append(_text("edges perturbed", LEFT + (WIDTH - LEFT - RIGHT) / 2, HEIGHT - 4))
    return Markup("".join(parts))


def _ticks(top: float) -> list[float]:
    step = next(each for each in (0.02, 0.05, 0.1, 0.2, 0.25, 0.5) if top / each <= 5)
    return [round(step * place, 3) for place in range(int(top / step) + 1)]


def _points(pairs: Sequence[tuple[float, float]]) -> str:
    return " ".join(f"{across:.1f},{down:.1f}" for across, down in pairs)


def _text(text: str, x: float, y: float, anchor: str = "middle", colour: str = INK) -> Markup:
    return tag("text", text, x=x, y=y, text_anchor=anchor, fill=colour)
