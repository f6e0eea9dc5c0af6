"""The map as SVG: every gene up to some thousands, above that one disc a module."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from analysis.colours import SMALL, SMALLEST_COLOURED, module_colour
from analysis.handover.report.map_labels import labels_of
from analysis.handover.report.markup import Markup, join, short, tag
from analysis.handover.report.wording import count
from analysis.modules import NO_MODULE
from analysis.network import FloatArray, Network
from analysis.study import Study

WIDTH, TALLEST, MARGIN = 1000.0, 720.0, 68.0
LARGEST_UNIT = 56.0
MOST_GENES = 3000
MOST_EDGES = 20_000
MOST_LINKS = 300
EDGE_SEED = 1


@dataclass(frozen=True, eq=False)
class MapFigure:
    """A drawing and the sentence under it."""

    picture: Markup
    caption: str


@dataclass(frozen=True, eq=False)
class Sheet:
    """Positions on the sheet and the length, there, of the distance between two neighbouring genes.

    Attributes
    ----------
    points : float64 array, shape (nodes, 2)
    unit : float
    height : float
    """

    points: FloatArray
    unit: float
    height: float


def draw_map(study: Study, positions: FloatArray) -> MapFigure:
    """Draw the network with its modules.

    Parameters
    ----------
    positions : float64 array, shape (nodes, 2)
        From `analysis.layout.layout`.
    """
    sheet = fit(positions)
    return draw_genes(study, sheet) if study.network.node_count <= MOST_GENES else draw_modules(study, sheet)


def fit(positions: FloatArray) -> Sheet:
    """Fit positions into the sheet, turned so that the longer side lies flat, equal scales on both axes."""
    low, high = positions.min(axis=0), positions.max(axis=0)
    if high[1] - low[1] > high[0] - low[0]:
        positions = positions[:, ::-1]
        low, high = low[::-1], high[::-1]
    span = np.maximum(high - low, 1e-9)
    scale = min((WIDTH - 2 * MARGIN) / span[0], (TALLEST - 2 * MARGIN) / span[1], LARGEST_UNIT)
    height = float(span[1] * scale) + 2 * MARGIN
    points = (positions - (low + high) / 2) * scale + np.array([WIDTH / 2, height / 2])
    return Sheet(points, float(scale), height)


def draw_genes(study: Study, sheet: Sheet) -> MapFigure:
    """Draw every gene, the edges (a random part where there are very many), and shading behind the modules."""
    network = study.network
    shown = shown_edges(network)
    picture = _sheet(
        sheet.height,
        _shading(study, sheet),
        _edges(study, sheet, shown),
        _discs(study, sheet),
        labels_of(study, module_middles(study, sheet.points)),
    )
    part = (
        ""
        if len(shown) == network.edge_count
        else f" Of {count(network.edge_count, 'edge')}, {len(shown):,} are drawn."
    )
    shared = " A dark rim marks a gene of several modules." if study.modules.is_cover else ""
    return MapFigure(
        picture,
        f"Each disc is a gene, coloured by its module and sized by its degree; genes of modules under "
        f"{SMALLEST_COLOURED} and of none are grey.{shared}{part} The drawing places modules first and then their "
        "genes, so that nearness in it proves nothing.",
    )


def shown_edges(network: Network) -> NDArray[np.int64]:
    """Return which edges are drawn: all, or a random part where there are very many."""
    if network.edge_count <= MOST_EDGES:
        return np.arange(network.edge_count)
    chosen = np.random.default_rng(EDGE_SEED).choice(network.edge_count, MOST_EDGES, replace=False)
    return np.sort(chosen).astype(np.int64)


def draw_modules(study: Study, sheet: Sheet) -> MapFigure:
    """Draw one disc a module, its area by its genes, linked by the edges between modules."""
    labels, sizes = study.modules.labels, study.modules.sizes
    centres = module_middles(study, sheet.points)
    shown = np.flatnonzero(sizes >= SMALLEST_COLOURED)
    radii = 0.55 * sheet.unit * np.sqrt(sizes)
    own, other = labels[study.network.sources], labels[study.network.targets]
    between = (own != other) & (own >= 0) & (other >= 0)
    ends = np.sort(np.column_stack([own[between], other[between]]), axis=1)
    ends = ends[np.isin(ends, shown).all(axis=1)]
    pairs, edges = np.unique(ends, axis=0, return_counts=True)
    strongest = np.argsort(-edges, kind="stable")[:MOST_LINKS]
    widest = float(edges.max(initial=1))
    links = [
        _line(centres[low], centres[high], 0.3 + 4.0 * float(edges[link] / widest))
        for link in strongest.tolist()
        for low, high in [pairs[link]]
    ]
    discs = [
        tag(
            "circle",
            tag("title", f"M{module + 1}: {count(sizes[module], 'gene')}"),
            cx=centres[module, 0],
            cy=centres[module, 1],
            r=max(radii[module], 2.0),
            fill=module_colour(module, int(sizes[module])),
        )
        for module in shown.tolist()
    ]
    left = len(sizes) - len(shown)
    small = (
        f" {count(left, 'module')} under {SMALLEST_COLOURED} genes {'is' if left == 1 else 'are'} left out."
        if left
        else ""
    )
    picture = _sheet(
        sheet.height,
        tag("g", links, stroke="#56636a", stroke_opacity=0.22),
        tag("g", discs, fill_opacity=0.82, stroke="#fbfaf6"),
        labels_of(study, centres),
    )
    return MapFigure(
        picture,
        f"Each disc is a module, its area by its number of genes; lines join modules with edges between them, the "
        f"{len(strongest):,} widest links of {len(pairs):,}.{small} Nearness in the drawing proves nothing.",
    )


def module_middles(study: Study, points: FloatArray) -> FloatArray:
    """Return the median place of each module's genes, shape (modules, 2)."""
    middles = [np.median(points[members], axis=0) for members in study.modules.members]
    return np.array(middles).reshape(-1, 2)


def _sheet(height: float, *layers: Markup) -> Markup:
    title = tag("title", "Map of the network with its modules")
    return tag("svg", title, layers, viewBox=f"0 0 {WIDTH:.0f} {height:.0f}", role="img")


def _shading(study: Study, sheet: Sheet) -> Markup:
    """Draw one soft area a module: fat round dots at its genes, melted together by a blur and a threshold."""
    reach = 2.1 * sheet.unit
    melt = [
        tag("feGaussianBlur", stdDeviation=0.34 * sheet.unit),
        tag("feComponentTransfer", tag("feFuncA", type="linear", slope=5.0, intercept=-1.9)),
    ]
    groups = [
        _shade(sheet.points[members], reach, module_colour(module, len(members)))
        for module, members in enumerate(study.modules.members)
        if len(members) >= SMALLEST_COLOURED
    ]
    shades = tag("g", groups, fill="none", stroke_width=reach, stroke_linecap="round")
    return join([tag("defs", tag("filter", melt, id="melt", x=0, y=0, width=1, height=1)), shades])


def _shade(points: FloatArray, reach: float, colour: str) -> Markup:
    """Draw the area of one module; an invisible frame tells the filter how far it has to look."""
    low, high = points.min(axis=0) - reach, points.max(axis=0) + reach
    frame = tag("rect", x=low[0], y=low[1], width=high[0] - low[0], height=high[1] - low[1], stroke="none")
    return tag("g", frame, tag("path", d=_dots(points)), stroke=colour, filter="url(#melt)", opacity=0.2)


def _edges(study: Study, sheet: Sheet, shown: NDArray[np.int64]) -> Markup:
    """Draw edges as two paths: those inside modules a little darker."""
    network = study.network
    sources, targets = network.sources[shown], network.targets[shown]
    labels = study.modules.labels
    inside = (labels[sources] == labels[targets]) & (labels[sources] != NO_MODULE)
    faint = float(np.clip(9.0 / np.sqrt(max(len(shown), 1)), 0.05, 0.45))
    paths = [
        tag("path", d=_segments(sheet.points, sources[chosen], targets[chosen]), stroke_opacity=opacity)
        for chosen, opacity in ((~inside, faint), (inside, min(1.9 * faint, 0.6)))
    ]
    return tag("g", paths, fill="none", stroke="#56636a", stroke_width=max(min(0.045 * sheet.unit, 1.0), 0.5))


def _discs(study: Study, sheet: Sheet) -> Markup:
    network, modules = study.network, study.modules
    labels = modules.labels
    top = max(float(network.degree.max(initial=1)), 1.0)
    radii = np.clip(sheet.unit * (0.13 + 0.25 * np.sqrt(network.degree / top)), 1.4, 9.0)
    order = np.lexsort((network.degree, labels != NO_MODULE))
    numbers = np.array([*modules.numbers, "no module"], object)
    sizes = np.append(modules.sizes, 0)
    discs = []
    for node in order.tolist():
        label = int(labels[node])
        colour = SMALL if label == NO_MODULE else module_colour(label, int(sizes[label]))
        shared = bool(modules.homes[node] > 1)
        discs.append(
            tag(
                "circle",
                tag("title", f"{short(network.names[node])}, {numbers[label]}"),
                cx=sheet.points[node, 0],
                cy=sheet.points[node, 1],
                r=radii[node],
                fill=colour,
                stroke="#1d2a2f" if shared else None,
            )
        )
    return tag("g", discs, stroke="#fbfaf6", stroke_width=max(min(0.05 * sheet.unit, 1.2), 0.4))


def _line(start: FloatArray, end: FloatArray, width: float) -> Markup:
    return tag("line", x1=start[0], y1=start[1], x2=end[0], y2=end[1], stroke_width=width)


def _dots(points: FloatArray) -> str:
    return "".join(f"M{x:.1f} {y:.1f}h0" for x, y in points.tolist())


def _segments(points: FloatArray, sources: NDArray[np.int32], targets: NDArray[np.int32]) -> str:
    ends = np.column_stack([points[sources], points[targets]]).tolist()
    return "".join(f"M{x:.1f} {y:.1f}L{u:.1f} {v:.1f}" for x, y, u, v in ends)
