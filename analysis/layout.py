"""Positions of the nodes on the map, computed once per network.

Modules of a middle resolution are placed first, then each module's nodes inside its own disc, so that finer and coarser
cuts both stay readable. The drawing is therefore circular: it shows the modules that it was given, and its distances
prove nothing. The screen says so.
"""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import NDArray

from analysis.methods.leiden import Leiden
from analysis.methods.randomness import igraph_seed
from analysis.modules import Modules
from analysis.network import FloatArray, Network
from analysis.progress import Progress, portion, silent

LARGEST_DISC = 150
SMALLEST_MODULE = 3
SPACING = 1.0
GAP = 0.9
PACKING_STEPS, INNER_STEPS = 260, 90
PASSES = 60


def layout(network: Network, seed: int = 1, progress: Progress = silent) -> FloatArray:
    """Return positions of all nodes, shape (nodes, 2), about one unit apart.

    The giant component is drawn around the origin; smaller components stand around it, single nodes outermost.
    """
    if network.node_count == 0:
        return np.zeros((0, 2))
    positions = np.zeros((network.node_count, 2))
    components = network.components
    giant = np.flatnonzero(components == 0)
    rest = [np.flatnonzero(components == label) for label in range(1, int(components.max()) + 1)]
    positions[giant] = _place(network.subnetwork(giant), seed, portion(progress, 0.0, 0.9), depth=0)
    groups = [group for group in rest if len(group) >= SMALLEST_MODULE]
    crumbs = [group for group in rest if len(group) < SMALLEST_MODULE]
    radius = _radius(positions[giant]) + 2 * GAP
    for group in groups:
        positions[group] = _place(network.subnetwork(group), seed, silent, depth=1)
    radius = _ring(positions, groups, radius)
    _ring(positions, crumbs, radius)
    progress(1.0, "drawing the map")
    centred: FloatArray = positions - positions[giant].mean(axis=0)
    return centred


def _place(network: Network, seed: int, progress: Progress, depth: int) -> FloatArray:
    """Place one connected network around the origin: its modules first, then the nodes of each."""
    if network.node_count <= 40 or depth > 3:
        return _place_nodes(network, seed)
    resolution = 1.0 if depth == 0 else 0.8
    labels = Leiden(resolution=resolution, iterations=2).labels(network, seed=seed)
    modules = Modules.from_labels(labels)
    if len(modules) < 2:
        return _place_nodes(network, seed)
    inner: list[FloatArray] = []
    for position, (group, part) in enumerate(zip(modules.members, _parts(network, modules), strict=True)):
        progress(position / len(modules), "drawing the map")
        inner.append(_place(part, seed, silent, depth + 1) if len(group) > LARGEST_DISC else _place_nodes(part, seed))
    radii = np.array([_bulk(points) + (0.2 if depth else GAP) for points in inner])
    steps = INNER_STEPS if depth else PACKING_STEPS
    centres = _place_discs(network, modules, radii, seed, steps)
    positions = np.zeros((network.node_count, 2))
    for group, points, centre in zip(modules.members, inner, centres, strict=True):
        positions[group] = points + centre
    return positions if depth == 0 else _part_nodes(_fill_disc(positions), SPACING * 0.7)


def _parts(network: Network, modules: Modules) -> list[Network]:
    """Return the network inside each module, reading the edges once for all of them."""
    labels = modules.labels
    place = np.empty(network.node_count, np.int32)
    for group in modules.members:
        place[group] = np.arange(len(group))
    own = labels[network.sources]
    inside = np.flatnonzero(own == labels[network.targets])
    inside = inside[np.argsort(own[inside], kind="stable")]
    ends = np.searchsorted(own[inside], np.arange(1, len(modules)))
    return [
        Network(
            tuple(network.names[node] for node in group.tolist()),
            place[network.sources[edges]],
            place[network.targets[edges]],
            None if network.weights is None else network.weights[edges],
        )
        for group, edges in zip(modules.members, np.split(inside, ends), strict=True)
    ]


def _place_nodes(network: Network, seed: int) -> FloatArray:
    """Place a few nodes in a disc by Fruchterman & Reingold 1991, evened out so that the disc is filled."""
    count = network.node_count
    if count == 1:
        return np.zeros((1, 2))
    with igraph_seed(seed):
        drawn = network.igraph.layout_fruchterman_reingold(niter=PASSES, seed=_spiral(count).tolist(), grid=False)
    points = np.array(drawn.coords)
    points -= points.mean(axis=0)
    return _part_nodes(_fill_disc(points), SPACING * 0.7)


def _fill_disc(points: FloatArray) -> FloatArray:
    """Stretch points along their radius until they fill a disc evenly, about one unit apart; angles are kept."""
    count = len(points)
    points = points - points.mean(axis=0)
    distance = np.hypot(points[:, 0], points[:, 1])
    rank = np.empty(count)
    rank[np.argsort(distance, kind="stable")] = np.arange(count) + 0.5
    reach = SPACING * math.sqrt(count) * 0.62
    wanted = reach * (0.3 * distance / max(float(distance.max()), 1e-9) + 0.7 * np.sqrt(rank / count))
    filled: FloatArray = points * (wanted / np.maximum(distance, 1e-9))[:, None]
    return filled


def _place_discs(network: Network, modules: Modules, radii: FloatArray, seed: int, steps: int) -> FloatArray:
    """Place module discs by Fruchterman & Reingold on the edges between them, then push overlapping discs apart."""
    import igraph

    count = len(modules)
    labels = modules.labels
    ends = np.sort(np.column_stack([labels[network.sources], labels[network.targets]]), axis=1)
    between = ends[:, 0] != ends[:, 1]
    pairs, position = np.unique(ends[between], axis=0, return_inverse=True)
    weight = np.bincount(position.ravel(), network.edge_weights[between])
    scale = np.sqrt(np.outer(radii**2, radii**2)[pairs[:, 0], pairs[:, 1]])
    graph = igraph.Graph(count, pairs.tolist())
    strength = np.maximum((weight / scale) / max(float((weight / scale).max(initial=0)), 1e-12), 0.02)
    with igraph_seed(seed):
        drawn = graph.layout_fruchterman_reingold(
            niter=400, seed=_spiral(count).tolist(), weights=strength.tolist(), grid=False
        )
    centres = np.array(drawn.coords)
    centres -= centres.mean(axis=0)
    spread = max(float(np.hypot(centres[:, 0], centres[:, 1]).max()), 1e-9)
    centres *= 1.15 * math.sqrt(float((radii**2).sum())) / spread
    return _pack(centres, radii, steps)


def _pack(centres: FloatArray, radii: FloatArray, steps: int) -> FloatArray:
    """Draw discs gently together, pushing overlapping ones apart, until they lie side by side; wider than high."""
    x, y = centres[:, 0] * 1.5, centres[:, 1] * 1.1
    touch = radii[:, None] + radii[None, :]
    share = 0.5 * radii[None, :] / touch
    shrink = (0.45 ** (1 / steps), 0.5 ** (1 / steps))
    for step in range(steps):
        if step < 0.7 * steps:
            x, y = x * shrink[0], y * shrink[1]
        across, down = x[:, None] - x[None, :], y[:, None] - y[None, :]
        distance = np.sqrt(across**2 + down**2)
        np.fill_diagonal(distance, np.inf)
        push = np.maximum(touch - distance, 0.0) * share / np.maximum(distance, 1e-6)
        x, y = x + (push * across).sum(axis=1), y + (push * down).sum(axis=1)
    return np.column_stack([x, y])


def _part_nodes(points: FloatArray, least: float) -> FloatArray:
    """Move nodes that nearly coincide a little apart."""
    from scipy.spatial import KDTree

    points = points + 1e-3 * _spiral(len(points))
    for _ in range(8):
        close = KDTree(points).query_pairs(least, output_type="ndarray")
        if not len(close):
            break
        first, second = close[:, 0], close[:, 1]
        offset = points[first] - points[second]
        distance = np.maximum(np.hypot(offset[:, 0], offset[:, 1]), 1e-6)
        push = (0.5 * (least - distance) / distance)[:, None] * offset
        np.add.at(points, first, push)
        np.subtract.at(points, second, push)
    return points


def _ring(positions: FloatArray, groups: list[NDArray[np.intp]], radius: float) -> float:
    """Stand groups, largest first, side by side on circles around the middle; return the outer radius."""
    angle, widest = 0.0, 0.0
    for group in groups:
        reach = _radius(positions[group]) + GAP / 2
        if len(group) < SMALLEST_MODULE:
            apart = 0.5 * SPACING * (len(group) - 1)  # a pair lies side by side, a single node in the middle
            positions[group] = apart * np.array([[1.0, 0.0], [-1.0, 0.0]])[: len(group)]
            reach = apart + GAP / 2
        step = 2 * math.asin(min(1.0, reach / (radius + reach)))
        if angle + step > 2 * math.pi:
            radius, angle, widest = radius + 2 * widest, 0.0, 0.0
        widest = max(widest, reach)
        turn = angle + step / 2
        positions[group] += (radius + reach) * np.array([math.cos(turn), math.sin(turn)])
        angle += step
    return radius + 2 * widest


def _radius(points: FloatArray) -> float:
    return 0.5 + (float(np.hypot(points[:, 0], points[:, 1]).max()) if len(points) else 0.0)


def _bulk(points: FloatArray) -> float:
    """Return the radius that holds all but a few outliers."""
    return 0.5 + float(np.quantile(np.hypot(points[:, 0], points[:, 1]), 0.9))


def _spiral(count: int) -> FloatArray:
    """Return points of a sunflower spiral, shape (count, 2): an even start that needs no random numbers."""
    turn = np.arange(count) * math.pi * (3 - math.sqrt(5))
    reach = np.sqrt(np.arange(count) + 0.5)
    return np.column_stack([reach * np.cos(turn), reach * np.sin(turn)])
