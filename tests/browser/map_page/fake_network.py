"""Invented networks for trying the map: clusters as discs on the plane, with edges mostly inside."""

from __future__ import annotations

import json
from dataclasses import dataclass
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

NOBODY = 0xFFFF
SIZE_CUT = 8
HUES = 14
SYLLABLES = (
    "tor",
    "cor",
    "ulm",
    "lum",
    "mer",
    "sal",
    "ven",
    "pil",
    "dra",
    "osk",
    "fen",
    "rhi",
    "tal",
    "gim",
    "nor",
    "bex",
)
GRID = np.geomspace(0.05, 60.0, 34)


@dataclass(frozen=True)
class FakeNetwork:
    """Positions (nodes, 2) float32, edges (edges, 2) uint32, module of each node at two resolutions, names."""

    positions: NDArray[np.float32]
    edges: NDArray[np.uint32]
    labels: NDArray[np.uint16]
    finer: NDArray[np.uint16]
    names: list[str]

    @property
    def degrees(self) -> NDArray[np.uint32]:
        """Number of edges of each node."""
        return np.bincount(self.edges.ravel(), minlength=len(self.names)).astype(np.uint32)


def make(nodes: int, edges: int, modules: int, seed: int) -> FakeNetwork:
    """Return a network of about so many edges; modules are numbered from the largest."""
    random = np.random.default_rng(seed)
    sizes = _sizes(nodes, modules, random)
    labels = np.repeat(np.arange(modules), sizes).astype(np.uint16)
    centres, radii = _pack(sizes)
    angle = random.uniform(0, 2 * np.pi, nodes)
    away = radii[labels] * 0.93 * np.sqrt(random.uniform(0, 1, nodes)) * random.normal(1, 0.1, nodes)
    offsets = np.column_stack((np.cos(angle), np.sin(angle))) * away[:, None]
    positions = (centres[labels] + offsets) * (1.5, 1.0)
    finer = _split(labels, angle, sizes)
    links = _edges(labels, sizes, edges, random)
    names = [f"{SYLLABLES[node % len(SYLLABLES)]}{node // len(SYLLABLES) + 1}" for node in range(nodes)]
    return FakeNetwork(positions.astype(np.float32), links, labels, finer, names)


def _sizes(nodes: int, modules: int, random: np.random.Generator) -> NDArray[np.int64]:
    weights = random.pareto(1.6, modules) + 0.35
    sizes = np.maximum(3, np.floor(weights / weights.sum() * nodes * 0.9)).astype(np.int64)
    sizes = np.minimum(sizes, nodes // 7 + 3)
    while sizes.sum() > nodes:
        sizes[np.argmax(sizes)] -= 1
    while sizes.sum() < nodes:
        sizes[random.integers(modules)] += 1
    return np.sort(sizes)[::-1]


def _pack(sizes: NDArray[np.int64]) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Lay discs, largest first, at the first free place of an outward spiral."""
    radii = np.sqrt(sizes) + 0.9
    step = np.arange(16_000)
    turn = 2.4 * step  # about the golden angle: an even filling of the plane
    away = 0.016 * np.sqrt(np.sum(radii**2)) * np.sqrt(step)
    places = np.column_stack((np.cos(turn), np.sin(turn))) * away[:, None]
    free = np.ones((len(step), len(radii)), bool)
    centres = np.zeros((len(sizes), 2))
    for disc, radius in enumerate(radii):
        centres[disc] = places[np.argmax(free[:, disc])]
        apart = np.hypot(*(places - centres[disc]).T)
        free &= apart[:, None] >= radius + radii[None, :]
    return centres, radii


def _split(labels: NDArray[np.uint16], angle: NDArray[np.float64], sizes: NDArray[np.int64]) -> NDArray[np.uint16]:
    """Halve the modules of twenty or more genes; the halves are numbered after all others."""
    finer = labels.copy()
    for module in np.flatnonzero(sizes >= 20):
        finer[(labels == module) & (angle > np.pi)] = len(sizes) + module
    return np.unique(finer, return_inverse=True)[1].astype(np.uint16)


def _edges(
    labels: NDArray[np.uint16], sizes: NDArray[np.int64], edges: int, random: np.random.Generator
) -> NDArray[np.uint32]:
    """Draw four edges in five inside modules; low-numbered members of a module are its hubs."""
    starts = np.concatenate(([0], np.cumsum(sizes)[:-1]))
    ends = random.integers(len(labels), size=int(edges * 1.25))
    inside = random.uniform(size=len(ends)) < 0.8
    module = labels[ends]
    member = starts[module] + np.floor(sizes[module] * random.uniform(size=len(ends)) ** 1.9).astype(np.int64)
    anywhere = np.floor(len(labels) * random.uniform(size=len(ends)) ** 1.1).astype(np.int64)
    pairs = np.sort(np.column_stack((ends, np.where(inside, member, anywhere))), axis=1)
    pairs = np.unique(pairs[pairs[:, 0] != pairs[:, 1]], axis=0)
    return random.permutation(pairs)[:edges].astype(np.uint32)


def _colouring(labels: NDArray[np.uint16]) -> dict[str, list[object]]:
    sizes = np.bincount(labels)
    return {
        "hues": [f"var(--module-{module % HUES + 1})" for module in range(len(sizes))],
        "numbers": ["M2 bilayer repair" if module == 1 else f"M{module + 1}" for module in range(len(sizes))],
        "grey": [int(size < SIZE_CUT) for size in sizes],
    }


def _ruler(modules: int) -> dict[str, object]:
    steps = np.floor(3 * np.log(GRID / GRID[0])) / 3
    counts = np.maximum(1, np.round(modules * 0.3 * np.exp(0.5 * steps))).astype(int)
    doubt = 1 + 0.9 * np.exp(-(np.log(GRID / 0.2) ** 2) / 0.3) + 0.1
    return {
        "grid": GRID.round(4).tolist(),
        "modules": counts.tolist(),
        "low": (counts / doubt).tolist(),
        "high": (counts * doubt).tolist(),
        "plateaus": [
            {"from": 0.12, "to": 0.5, "strength": 0.3},
            {"from": 1.4, "to": 5.2, "strength": 0.9},
            {"from": 11, "to": 19, "strength": 0.25},
        ],
        "suggestion": 2.6,
        "value": 2.2,
        "label": "number of modules (the band widens where copies of the network disagree)",
        "busy": False,
    }


def write(network: FakeNetwork, folder: Path) -> None:
    """Write what the server gives the map, and what the rest of the page would ask of it."""
    folder.mkdir(parents=True, exist_ok=True)
    (folder / "positions").write_bytes(network.positions.astype("<f4").tobytes())
    (folder / "edges").write_bytes(network.edges.astype("<u4").tobytes())
    (folder / "degrees").write_bytes(network.degrees.astype("<u4").tobytes())
    (folder / "names").write_text(json.dumps(network.names), encoding="utf-8")
    (folder / "labels").write_bytes(network.labels.astype("<u2").tobytes())
    (folder / "finer").write_bytes(network.finer.astype("<u2").tobytes())
    study = {
        "labels": _colouring(network.labels),
        "finer": _colouring(network.finer),
        "ruler": _ruler(int(network.labels.max()) + 1),
    }
    (folder / "study").write_text(json.dumps(study), encoding="utf-8")
