"""Plots of points, lines and bands on linear or log axes, as SVG that stands alone."""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from analysis.handover.report.markup import Markup, number, tag

WIDTH, HEIGHT = 440.0, 250.0
LEFT, RIGHT, BOTTOM = 52.0, 22.0, 40.0
LEGEND_LINE, LETTER = 17.0, 6.3
LEAF, GREY, OCHRE, BLUE, INK, LINE = "#2d6a4f", "#7d8a88", "#b9852b", "#0072b2", "#1d2a2f", "#dcdcd2"
DOTS, CURVE, BARS = "dots", "curve", "bars"
RAISED = str.maketrans("-0123456789", "⁻⁰¹²³⁴⁵⁶⁷⁸⁹")
HEAD = '<?xml version="1.0" encoding="UTF-8"?>\n'
TYPE = 'xmlns="http://www.w3.org/2000/svg" font-family="sans-serif" font-size="12"'


@dataclass(frozen=True)
class Axis:
    """One axis: its words, whether it is logarithmic, its ends, and whether its values are shares."""

    words: str
    low: float
    high: float
    log: bool = False
    share: bool = False

    def place(self, value: float) -> float:
        """Return where a value lies between the ends, from 0 to 1."""
        if self.log:
            return (math.log(value) - math.log(self.low)) / (math.log(self.high) - math.log(self.low))
        return (value - self.low) / (self.high - self.low)

    def marks(self) -> list[float]:
        """Return the values to be marked."""
        if not self.log:
            step = next((each for each in _steps() if (self.high - self.low) / each <= 5), self.high - self.low)
            first = math.ceil(self.low / step - 1e-9)
            return [round(step * place, 10) for place in range(first, int(self.high / step + 1e-9) + 1)]
        first, last = math.ceil(math.log10(self.low) - 1e-9), math.floor(math.log10(self.high) + 1e-9)
        skip = max(1, math.ceil((last - first + 1) / 6))
        tens = [10.0**power for power in range(first, last + 1, skip)]
        if len(tens) >= 2:
            return tens
        fine = [times * 10.0**power for power in range(first - 1, last + 1) for times in (1, 2, 5)]
        return [value for value in fine if self.low <= value * (1 + 1e-9) and value <= self.high * (1 + 1e-9)]

    def text(self, value: float) -> str:
        """Return a mark's text."""
        if self.share:
            return f"{100 * value:.6g} %"
        if self.log and value < 0.01:
            return f"10{str(round(math.log10(value))).translate(RAISED)}"
        return f"{value:,.0f}" if value >= 1 else f"{value:.6g}"


@dataclass(frozen=True, eq=False)
class Series:
    """Points to be drawn.

    Attributes
    ----------
    words : str
        For the legend; empty to leave it out.
    x, y : float arrays, shape (points,)
        Those that an axis cannot hold are left out.
    kind : str
        `dots`, `curve` or `bars`.
    low, high : float arrays or None
        A band around the points.
    """

    words: str
    x: NDArray[Any]
    y: NDArray[Any]
    colour: str = LEAF
    kind: str = DOTS
    dashed: bool = False
    low: NDArray[Any] | None = None
    high: NDArray[Any] | None = None


def log_axis(words: str, values: NDArray[Any], *, share: bool = False) -> Axis:
    """Return a log axis with some room around the values above 0."""
    known = values[np.isfinite(values) & (values > 0)]
    low, high = (float(known.min()), float(known.max())) if len(known) else (1.0, 10.0)
    return Axis(words, low / 1.25, high * 1.25, log=True, share=share)


def plot(title: str, across: Axis, up: Axis, series: Sequence[Series]) -> Markup:
    """Draw the series within the axes, with a legend above."""
    legend, top = _legend(series)

    def x(value: float) -> float:
        return LEFT + (WIDTH - LEFT - RIGHT) * across.place(value)

    def y(value: float) -> float:
        return HEIGHT - BOTTOM - (HEIGHT - top - BOTTOM) * up.place(value)

    parts = [tag("title", title), *legend, *_frame(across, up, x, y, top)]
    for each in series:
        parts += _draw(each, across, up, x, y)
    return tag("svg", parts, viewBox=f"0 0 {WIDTH:.0f} {HEIGHT:.0f}", role="img")


def standalone(svg: str) -> bytes:
    """Return a figure as a file of its own."""
    return (HEAD + svg.replace("<svg ", f"<svg {TYPE} ", 1) + "\n").encode()


def _steps() -> list[float]:
    return [times * 10.0**power for power in range(-4, 7) for times in (1, 2, 2.5, 5)]


def _legend(series: Sequence[Series]) -> tuple[list[Markup], float]:
    """Return the legend, and where the plot may begin below it."""
    parts: list[Markup] = []
    across, down = LEFT, 12.0
    for each in series:
        if not each.words:
            continue
        wide = 22 + LETTER * len(each.words) + 14
        if across > LEFT and across + wide > WIDTH:
            across, down = LEFT, down + LEGEND_LINE
        dash = "4 3" if each.dashed else None
        if each.kind == CURVE:
            ends = {"x1": across, "y1": down, "x2": across + 16, "y2": down}
            parts.append(tag("line", **ends, stroke=each.colour, stroke_width=2.2, stroke_dasharray=dash))
        else:
            parts.append(tag("circle", cx=across + 8, cy=down, r=3.4, fill=each.colour))
        parts.append(_text(each.words, across + 21, down + 4, "start"))
        across += wide
    return parts, (down + 16 if parts else 12.0)


def _frame(
    across: Axis, up: Axis, x: Callable[[float], float], y: Callable[[float], float], top: float
) -> list[Markup]:
    base = HEIGHT - BOTTOM
    parts = []
    for value in up.marks():
        level = y(value)
        parts.append(tag("line", x1=LEFT, y1=level, x2=WIDTH - RIGHT, y2=level, stroke=LINE))
        parts.append(_text(up.text(value), LEFT - 5, level + 4, "end"))
    for value in across.marks():
        parts.append(tag("line", x1=x(value), y1=base, x2=x(value), y2=base + 4, stroke=GREY))
        parts.append(_text(across.text(value), x(value), base + 16))
    parts.append(tag("line", x1=LEFT, y1=base, x2=WIDTH - RIGHT, y2=base, stroke=GREY))
    parts.append(_text(across.words, (LEFT + WIDTH - RIGHT) / 2, HEIGHT - 6))
    middle = (top + base) / 2
    turn = f"rotate(-90 10 {number(middle)})"
    parts.append(tag("text", up.words, x=10, y=middle, text_anchor="middle", fill=INK, transform=turn))
    return parts


def _draw(
    series: Series, across: Axis, up: Axis, x: Callable[[float], float], y: Callable[[float], float]
) -> list[Markup]:
    kept = _holds(across, series.x) & _holds(up, series.y)
    xs, ys = [x(v) for v in series.x[kept].tolist()], [y(v) for v in series.y[kept].tolist()]
    if not xs:
        return []
    parts = []
    if series.low is not None and series.high is not None:
        low, high = ([y(v) for v in edge[kept].tolist()] for edge in (series.low, series.high))
        outline = [*zip(xs, high, strict=True), *reversed(list(zip(xs, low, strict=True)))]
        parts.append(tag("polygon", points=_points(outline), fill=series.colour, fill_opacity=0.18))
    if series.kind == CURVE:
        dash = "5 4" if series.dashed else None
        line = _points(list(zip(xs, ys, strict=True)))
        parts.append(
            tag("polyline", points=line, fill="none", stroke=series.colour, stroke_width=2.2, stroke_dasharray=dash)
        )
    elif series.kind == BARS:
        wide = 0.7 * (xs[1] - xs[0]) if len(xs) > 1 else 24.0
        base = HEIGHT - BOTTOM
        bars = zip(xs, ys, strict=True)
        parts += [tag("rect", x=a - wide / 2, y=b, width=wide, height=base - b, fill=series.colour) for a, b in bars]
    else:
        dots = zip(xs, ys, strict=True)
        parts += [tag("circle", cx=a, cy=b, r=2.6, fill=series.colour, fill_opacity=0.8) for a, b in dots]
    return parts


def _holds(axis: Axis, values: NDArray[Any]) -> NDArray[np.bool_]:
    with np.errstate(invalid="ignore"):
        within = (values >= axis.low * (1 - 1e-9) - (0 if axis.log else 1e-9)) & (values <= axis.high * (1 + 1e-9))
    return np.asarray(np.isfinite(values) & within, np.bool_)


def _points(pairs: Sequence[tuple[float, float]]) -> str:
    return " ".join(f"{across:.1f},{down:.1f}" for across, down in pairs)


def _text(text: str, x: float, y: float, anchor: str = "middle") -> Markup:
    return tag("text", text, x=x, y=y, text_anchor=anchor, fill=INK)
