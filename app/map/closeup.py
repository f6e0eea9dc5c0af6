"""The close-up: one module or one gene with its surroundings, nodes movable and edges readable."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import NDArray

from analysis.modules import Modules
from analysis.network import FloatArray, Network
from app.map.colours import GREY, PALETTE

NODES_SHOWN = 400
NEIGHBOURS_SHOWN = 120
EDGES_SHOWN = 2500
SPREAD = 30.0
SMALLEST_REACH = 290.0
"""So wide is even the close-up of a few genes: names are written at their natural size."""
RING = 52.0
NAMED = 16
ALL_NAMED = 80
"""In a module with more genes around it only so many of the best connected keep a name that can be read."""
THIN_FROM = 200
"""Where there are more edges than this they are drawn thinner, so that the whole stays as light."""

# The light theme's colours; `assets/glue.js` puts those of the theme at hand over them.
STYLESHEET: list[dict[str, Any]] = [
    {
        "selector": "node",
        "style": {
            "background-color": "data(colour)",
            "label": "data(label)",
            "width": "data(size)",
            "height": "data(size)",
            "font-size": 10,
            "font-family": "Atkinson Hyperlegible, sans-serif",
            "color": "#1d2a2f",
            "text-background-color": "#fbfaf6",
            "text-background-opacity": 0.75,
            "text-background-padding": "1px",
            "text-valign": "bottom",
            "text-margin-y": 2,
            "border-width": 1.5,
            "border-color": "#fbfaf6",
            "min-zoomed-font-size": 9,
        },
    },
    {"selector": "node.named", "style": {"font-size": 19}},
    {"selector": "node.outside", "style": {"background-blacken": -0.5, "color": "#5a6a70"}},
    {"selector": "node.centre", "style": {"border-width": 3, "border-color": "#1d2a2f", "font-weight": "bold"}},
    {"selector": "edge", "style": {"width": "data(width)", "line-color": "#9aa5a3", "opacity": 0.55}},
    {"selector": "edge.inside", "style": {"line-color": "#5a6a70", "opacity": 0.75}},
    {"selector": "node:selected", "style": {"border-width": 3, "border-color": "#1d2a2f"}},
]


def module_closeup(
    network: Network, modules: Modules, hues: NDArray[Any], positions: FloatArray, module: int
) -> tuple[list[dict[str, Any]], str]:
    """Return the elements of a module with its neighbours, and one sentence on what is shown."""
    members = modules.members[module]
    chosen, sentence = _with_neighbours(network, members, f"M{module + 1} with its neighbours")
    return _elements(
        network, modules, hues, positions, chosen=chosen, inside=set(members.tolist()), centre=None
    ), sentence


def gene_closeup(
    network: Network, modules: Modules, hues: NDArray[Any], positions: FloatArray, node: int
) -> tuple[list[dict[str, Any]], str]:
    """Return the elements of a gene with its partners, and one sentence on what is shown."""
    core = np.array([node])
    chosen, sentence = _with_neighbours(network, core, f"{network.names[node]} with its partners")
    return _elements(network, modules, hues, positions, chosen=chosen, inside={node}, centre=node), sentence


def _with_neighbours(network: Network, core: NDArray[Any], what: str) -> tuple[NDArray[Any], str]:
    inside = np.zeros(network.node_count, bool)
    inside[core] = True
    links = np.bincount(network.targets[inside[network.sources]], minlength=network.node_count)
    links = links + np.bincount(network.sources[inside[network.targets]], minlength=network.node_count)
    around = np.flatnonzero((links > 0) & ~inside)
    around = around[np.argsort(-links[around], kind="stable")]
    room = max(min(NODES_SHOWN - len(core), max(len(core), NEIGHBOURS_SHOWN)), 0)
    shown = around[:room]
    kept = core if len(core) <= NODES_SHOWN else core[np.argsort(-network.degree[core], kind="stable")[:NODES_SHOWN]]
    dropped = len(around) - len(shown) + len(core) - len(kept)
    tail = f"; {dropped:,} less connected genes are not drawn" if dropped else ""
    return np.concatenate([kept, shown]), f"{what}: {len(kept) + len(shown):,} genes{tail}."


def _elements(
    network: Network,
    modules: Modules,
    hues: NDArray[Any],
    positions: FloatArray,
    *,
    chosen: NDArray[Any],
    inside: set[int],
    centre: int | None,
) -> list[dict[str, Any]]:
    labels = modules.labels
    if centre is None:
        place = _drawn_in(positions[chosen], np.array([node in inside for node in chosen.tolist()]))
    else:
        place = _around(positions[chosen], labels[chosen], int(np.flatnonzero(chosen == centre)[0]))
    nodes = []
    # around a single gene there is room for the names of its partners
    named = _best_connected(network, inside) if centre is None and len(chosen) > ALL_NAMED else set()
    for node, (x, y) in zip(chosen.tolist(), place.tolist(), strict=True):
        label = int(labels[node])
        colour = PALETTE[int(hues[label])] if label >= 0 and modules.sizes[label] >= 3 else GREY
        classes = "centre" if node == centre else "" if node in inside else "outside"
        classes += " named" if node in named else ""
        size = 10 + 2.2 * float(np.sqrt(network.degree[node]))
        data = {"id": str(node), "label": network.names[node], "colour": colour, "size": size}
        nodes.append({"data": data, "position": {"x": x, "y": y}, "classes": classes})
    return nodes + _edges(network, chosen, inside)


def _best_connected(network: Network, inside: set[int]) -> set[int]:
    genes = np.array(sorted(inside))
    return set(genes[np.argsort(-network.degree[genes], kind="stable")[:NAMED]].tolist())


def _drawn_in(points: FloatArray, inside: NDArray[np.bool_]) -> FloatArray:
    """Draw what lies outside nearer to the middle, so that the inside stays large; directions are kept."""
    core = points[inside] if inside.any() else points
    middle = np.median(core, axis=0)
    reach = float(np.quantile(np.hypot(*(core - middle).T), 0.9)) + 1.0
    offset = points - middle
    distance = np.hypot(*offset.T)
    wanted = np.where(distance > reach, reach * (1.1 + 0.35 * np.log(np.maximum(distance, reach) / reach)), distance)
    drawn = offset * (wanted / np.maximum(distance, 1e-9))[:, None]
    wide = max(SPREAD * np.sqrt(len(points)), SMALLEST_REACH) / max(float(wanted.max()), 1e-9)
    scaled: FloatArray = drawn * wide
    return scaled


def _around(points: FloatArray, labels: NDArray[Any], centre: int) -> FloatArray:
    """Place a gene's partners evenly around it, three deep, those of one module side by side."""
    others = np.flatnonzero(np.arange(len(points)) != centre)
    offset = points - points[centre]
    middles = {
        label: offset[others][labels[others] == label].mean(axis=0) for label in np.unique(labels[others]).tolist()
    }
    of_module = [float(np.arctan2(*middles[label][::-1])) for label in labels[others].tolist()]
    own = np.arctan2(offset[others, 1], offset[others, 0])
    order = others[np.lexsort((own, labels[others], np.array(of_module)))]
    turn = 2 * np.pi * np.arange(len(order)) / max(len(order), 1)
    reach = max(90.0, 3.4 * len(order)) + RING * (np.arange(len(order)) % 3 if len(order) > 12 else 0)
    placed: FloatArray = np.zeros((len(points), 2))
    placed[order] = np.column_stack([reach * np.cos(turn), reach * np.sin(turn)])
    return placed


def _edges(network: Network, chosen: NDArray[Any], inside: set[int]) -> list[dict[str, Any]]:
    shown = np.zeros(network.node_count, bool)
    shown[chosen] = True
    kept = np.flatnonzero(shown[network.sources] & shown[network.targets])
    weights = network.edge_weights
    kept = np.sort(kept[np.argsort(-weights[kept], kind="stable")[:EDGES_SHOWN]])
    top = float(weights[kept].max(initial=1.0)) or 1.0
    thin = min(1.0, float(np.sqrt(THIN_FROM / max(len(kept), 1))))
    edges = []
    for edge in kept.tolist():
        source, target = int(network.sources[edge]), int(network.targets[edge])
        width = thin * (0.6 + 2.0 * float(weights[edge]) / top if network.weights is not None else 1.2)
        data = {"id": f"e{edge}", "source": str(source), "target": str(target), "width": width}
        data["weight"] = float(weights[edge])
        edges.append({"data": data, "classes": "inside" if source in inside and target in inside else ""})
    return edges
