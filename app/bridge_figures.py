"""Figures of the Bridges station, as SVG text; pure functions of results."""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np

from analysis.bridges import HUB_Z, RoleTable
from analysis.bridges.module_links import ModuleLinks
from analysis.colours import MODULE_COLOURS
from analysis.handover.report.markup import Markup, tag
from analysis.overlap.percolation import Percolation

WIDTH, HEIGHT = 440.0, 250.0
LEFT, RIGHT, TOP, BOTTOM = 40.0, 12.0, 12.0, 34.0
LEAF, GREY, INK, SOFT, LINE, OCHRE = "#2d6a4f", "#9aa5a3", "#1d2a2f", "#5a6a70", "#dcdcd2", "#9a5b00"
DRAWN = 3_000
AREAS, AREAS_HEIGHT = 24, 340.0


def role_plane(roles: RoleTable) -> str:
    """Draw every gene by participation and within-module degree z, with the limits of the seven roles."""
    z, participation = roles.within_module_z, roles.participation
    low = min(-1.5, math.floor(float(z.min(initial=0))))
    high = max(4.0, math.ceil(float(z.max(initial=0))))

    def x(value: float) -> float:
        return LEFT + (WIDTH - LEFT - RIGHT) * value

    def y(value: float) -> float:
        return HEIGHT - BOTTOM - (HEIGHT - TOP - BOTTOM) * (value - low) / (high - low)

    parts: list[Markup] = [tag("line", x1=x(0), y1=y(HUB_Z), x2=x(1), y2=y(HUB_Z), stroke=LINE, stroke_width=1.4)]
    limits = [(limit, low, HUB_Z) for limit in (0.05, 0.62, 0.80)] + [(limit, HUB_Z, high) for limit in (0.30, 0.75)]
    parts += [tag("line", x1=x(at), y1=y(start), x2=x(at), y2=y(end), stroke=LINE) for at, start, end in limits]
    # the few far out are drawn last and always; of a dense middle a part is enough
    order = np.argsort(np.maximum(z / HUB_Z, participation / 0.62), kind="stable")[-DRAWN:]
    for place in order:
        joins = roles.role[place] in {2, 3, 5, 6}
        parts.append(
            tag("circle", cx=x(float(participation[place])), cy=y(float(z[place])), r=2.4, fill=LEAF if joins else GREY,
                fill_opacity=0.75)
        )  # fmt: skip
    parts += [_text(f"{value:g}", x(value), HEIGHT - BOTTOM + 15) for value in (0, 0.3, 0.62, 0.8, 1)]
    parts += [_text(f"{value:g}", LEFT - 6, y(value) + 4, "end") for value in {low, 0, HUB_Z, high}]
    parts.append(_text("participation", x(0.5), HEIGHT - 4))
    parts.append(_text("degree z", LEFT + 4, TOP + 8, "start", SOFT))
    return tag("svg", parts, viewBox=f"0 0 {WIDTH:.0f} {HEIGHT:.0f}", role="img")


def module_map(sizes: Sequence[int], links: ModuleLinks, hues: Sequence[int], *, all_links: bool = False) -> str:
    """Draw the largest modules as areas on a ring, and the links that have more edges than chance gives."""
    count = min(len(sizes), AREAS)
    middle_x, middle_y, reach = WIDTH / 2, AREAS_HEIGHT / 2, AREAS_HEIGHT / 2 - 38
    angle = [2 * math.pi * place / max(count, 1) - math.pi / 2 for place in range(count)]
    place = [(middle_x + 1.25 * reach * math.cos(each), middle_y + reach * math.sin(each)) for each in angle]
    parts: list[Markup] = []
    strong = links.beyond_chance()
    widest = max(float(links.edges.max(initial=1.0)), 1.0)
    for row in range(len(links.first)):
        first, second = int(links.first[row]), int(links.second[row])
        if second >= count or not (strong[row] or all_links):
            continue
        width = 0.8 + 7 * math.sqrt(float(links.edges[row]) / widest)
        (x1, y1), (x2, y2) = place[first], place[second]
        colour = LEAF if strong[row] else GREY
        parts.append(tag("line", x1=x1, y1=y1, x2=x2, y2=y2, stroke=colour, stroke_width=width, stroke_opacity=0.45))
    largest = max(sizes[0] if sizes else 1, 1)
    for module in range(count):
        radius = 5 + 17 * math.sqrt(sizes[module] / largest)
        hue = MODULE_COLOURS[hues[module] % len(MODULE_COLOURS)] if module < len(hues) else GREY
        x, y = place[module]
        parts.append(tag("circle", cx=x, cy=y, r=radius, fill=hue, fill_opacity=0.55, stroke=hue))
        parts.append(_text(f"M{module + 1}", x, y + 4))
    return tag("svg", parts, viewBox=f"0 0 {WIDTH:.0f} {AREAS_HEIGHT:.0f}", role="img")


def k_figure(found: Percolation, chosen: int | None) -> str:
    """Draw the sizes of the largest and the second community over k, on a logarithmic scale."""
    levels = found.levels
    top = max(max(levels[0].sizes[:1], default=2), 10)
    bottom, height = BOTTOM, 190.0

    def x(k: int) -> float:
        return LEFT + 10 + (WIDTH - LEFT - RIGHT - 90) * (k - 2) / max(found.largest_k - 2, 1)

    def y(size: int) -> float:
        return height - bottom - (height - TOP - bottom) * math.log(max(size, 1)) / math.log(top)

    parts: list[Markup] = []
    if chosen is not None and 2 <= chosen <= found.largest_k:
        parts.append(tag("line", x1=x(chosen), y1=TOP, x2=x(chosen), y2=height - bottom, stroke=INK, stroke_width=1.6))
    value = 1
    while value <= top:
        parts.append(tag("line", x1=LEFT, y1=y(value), x2=WIDTH - 80, y2=y(value), stroke=LINE))
        parts.append(_text(f"{value:,}", LEFT - 4, y(value) + 4, "end"))
        value *= 10
    for rank, colour, words in ((1, OCHRE, "second"), (0, LEAF, "largest")):
        points = [(x(level.k), y(level.sizes[rank])) for level in levels if len(level.sizes) > rank]
        if points:
            line = " ".join(f"{across:.1f},{down:.1f}" for across, down in points)
            parts.append(tag("polyline", points=line, fill="none", stroke=colour, stroke_width=2))
            parts += [tag("circle", cx=across, cy=down, r=3, fill=colour) for across, down in points]
            parts.append(_text(words, points[-1][0] + 8, points[-1][1] + 4 + 12 * rank, "start", colour))
    step = max(1, math.ceil(found.largest_k / 14))
    parts += [_text(f"{k}", x(k), height - bottom + 15) for k in range(2, found.largest_k + 1, step)]
    parts.append(_text("k", WIDTH / 2 - 20, height - 4))
    return tag("svg", parts, viewBox=f"0 0 {WIDTH:.0f} {height:.0f}", role="img")


def _text(text: str, x: float, y: float, anchor: str = "middle", colour: str = INK) -> Markup:
    return tag("text", text, x=x, y=y, text_anchor=anchor, fill=colour)
