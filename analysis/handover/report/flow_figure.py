"""Flows between the modules of two clusterings, as SVG."""

from __future__ import annotations

from collections import defaultdict
from dataclasses import dataclass

from analysis.colours import SMALL, module_colour
from analysis.compare import Comparison
from analysis.handover.report.markup import Markup, join, short, tag

WIDTH, TOP, BOTTOM = 500.0, 34.0, 12.0
BAR, SIDE, GAP = 14.0, 136.0, 5.0
HEIGHT_OF_GENES = 420.0
MOST = 18
OTHERS, NOWHERE = "smaller ones", "no module"
Flow = dict[tuple[str, str], int]


@dataclass(frozen=True)
class Block:
    """One module in its column: from `top`, `height` high; a unit of height is a gene times the scale."""

    name: str
    genes: int
    top: float
    height: float


def draw_flows(comparison: Comparison, *, most: int = MOST) -> Markup:
    """Draw the modules of two clusterings as two columns, and bands between them as wide as the genes they share.

    Parameters
    ----------
    most : int
        Modules of either clustering that are drawn one by one, the largest; the others go together.
    """
    flows = _gathered(comparison, most)
    left_order = _in_order({first for first, _ in flows})
    right_order = _by_middle(flows, left_order)
    scale = HEIGHT_OF_GENES / max(sum(flows.values()), 1)
    left = _column(left_order, _totals(flows, 0), scale)
    right = _column(right_order, _totals(flows, 1), scale)
    height = max(block.top + block.height for column in (left, right) for block in column.values()) + BOTTOM
    parts = [
        tag("title", f"Flows of genes from {comparison.first} to {comparison.second}"),
        _bands(flows, left, right, scale),
        _blocks(left, SIDE - BAR, SIDE - BAR - 6, "end"),
        _blocks(right, WIDTH - SIDE, WIDTH - SIDE + BAR + 6, "start"),
        _head(comparison.first, 4, "start"),
        _head(comparison.second, WIDTH - 4, "end"),
    ]
    return tag("svg", parts, viewBox=f"0 0 {WIDTH:.0f} {height:.0f}", role="img")


def flows_svg(comparison: Comparison) -> bytes:
    """Return the drawing as a file of its own."""
    drawn = draw_flows(comparison)
    alone = 'xmlns="http://www.w3.org/2000/svg" font-family="Helvetica, Arial, sans-serif" font-size="12" '
    return f'<?xml version="1.0" encoding="UTF-8"?>\n{drawn.replace("<svg ", f"<svg {alone}", 1)}\n'.encode()


def _gathered(comparison: Comparison, most: int) -> Flow:
    """Return the genes of each pair, small modules put together."""
    table = comparison.flows
    kept = [_largest(table[side].tolist(), table["genes"].tolist(), most) for side in ("first", "second")]
    flows: Flow = defaultdict(int)
    rows = zip(table["first"].tolist(), table["second"].tolist(), table["genes"].tolist(), strict=True)
    for first, second, genes in rows:
        flows[_shown(first, kept[0]), _shown(second, kept[1])] += int(genes)
    return dict(flows)


def _largest(modules: list[str], genes: list[int], most: int) -> set[str]:
    sizes: dict[str, int] = defaultdict(int)
    for module, count in zip(modules, genes, strict=True):
        if module:
            sizes[module] += count
    return set(sorted(sizes, key=lambda module: (-sizes[module], int(module[1:])))[:most])


def _shown(module: str, kept: set[str]) -> str:
    if not module:
        return NOWHERE
    return module if module in kept else OTHERS


def _in_order(names: set[str]) -> list[str]:
    modules = sorted((name for name in names if name not in (OTHERS, NOWHERE)), key=lambda name: int(name[1:]))
    return [*modules, *(name for name in (OTHERS, NOWHERE) if name in names)]


def _by_middle(flows: Flow, left: list[str]) -> list[str]:
    """Order the right column by the mean place of what flows in, so that few bands cross."""
    place = {name: position for position, name in enumerate(left)}
    totals = _totals(flows, 1)
    middle: dict[str, float] = defaultdict(float)
    for (first, second), genes in flows.items():
        middle[second] += place[first] * genes / totals[second]
    last = [name for name in (OTHERS, NOWHERE) if name in middle]
    modules = [name for name in middle if name not in last]
    return [*sorted(modules, key=lambda name: (middle[name], int(name[1:]))), *last]


def _totals(flows: Flow, side: int) -> dict[str, int]:
    totals: dict[str, int] = defaultdict(int)
    for pair, genes in flows.items():
        totals[pair[side]] += genes
    return totals


def _column(order: list[str], totals: dict[str, int], scale: float) -> dict[str, Block]:
    column, top = {}, TOP
    for name in order:
        column[name] = Block(name, totals[name], top, totals[name] * scale)
        top += totals[name] * scale + GAP + 6 * (totals[name] * scale < 9)
    return column


def _bands(flows: Flow, left: dict[str, Block], right: dict[str, Block], scale: float) -> Markup:
    """Draw a band for each pair; at either end the bands lie in the order of the other column."""
    starts, ends = _offsets(flows, left, right, 0, scale), _offsets(flows, right, left, 1, scale)
    start, end = SIDE, WIDTH - SIDE
    middle = (start + end) / 2
    bands = []
    for (first, second), genes in sorted(flows.items(), key=lambda item: -item[1]):
        one, other, wide = starts[first, second], ends[first, second], genes * scale
        path = (
            f"M{start:.1f} {one:.2f}C{middle:.1f} {one:.2f} {middle:.1f} {other:.2f} {end:.1f} {other:.2f}"
            f"v{wide:.2f}C{middle:.1f} {other + wide:.2f} {middle:.1f} {one + wide:.2f} {start:.1f} {one + wide:.2f}z"
        )
        words = f"{first} → {second}: {genes:,} {'gene' if genes == 1 else 'genes'}"
        bands.append(tag("path", tag("title", words), d=path, fill=_colour(first)))
    return tag("g", bands, fill_opacity=0.38)


def _offsets(
    flows: Flow, here: dict[str, Block], there: dict[str, Block], side: int, scale: float
) -> dict[tuple[str, str], float]:
    reached = {name: block.top for name, block in here.items()}
    offsets = {}
    for pair in sorted(flows, key=lambda pair: there[pair[1 - side]].top):
        offsets[pair] = reached[pair[side]]
        reached[pair[side]] += flows[pair] * scale
    return offsets


def _blocks(column: dict[str, Block], x: float, text_x: float, anchor: str) -> Markup:
    parts = []
    for block in column.values():
        parts.append(tag("rect", x=x, y=block.top, width=BAR, height=max(block.height, 1), fill=_colour(block.name)))
        words = f"{block.name} · {block.genes:,}"
        middle = block.top + block.height / 2 + 4
        parts.append(tag("text", words, x=text_x, y=middle, text_anchor=anchor, fill="#1d2a2f"))
    return join(parts)


def _head(label: str, x: float, anchor: str) -> Markup:
    return tag("text", short(label, 36), x=x, y=18, text_anchor=anchor, font_weight="700", fill="#1d2a2f")


def _colour(name: str) -> str:
    return SMALL if name in (OTHERS, NOWHERE) else module_colour(int(name[1:]) - 1, MOST)
