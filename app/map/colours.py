"""Colours that follow modules, so that a slide of the ruler does not reshuffle them.

Each network has one anchor: the partition that its layout was drawn from. A module takes the hue of the anchor module
with which it overlaps most, unless a larger overlap claims that hue; the others take the hue of their best-connected
gene. Both depend on the module alone, so a module that stays keeps its hue wherever the marker comes from.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from analysis.agreement import membership_matrix
from analysis.colours import MODULE_COLOURS, SMALL
from analysis.modules import Modules
from analysis.network import Network

PALETTE, GREY = MODULE_COLOURS, SMALL


@dataclass(frozen=True, eq=False)
class Anchor:
    """The partition of the layout, its hues, and a spare hue for each node.

    Attributes
    ----------
    modules : Modules
    hues : uint16 array, shape (modules,)
        Position in `PALETTE`.
    spare : uint16 array, shape (nodes,)
        Hue of a module that this node leads and that no anchor module gives its own.
    degree : int32 array, shape (nodes,)
    """

    modules: Modules
    hues: NDArray[np.uint16]
    spare: NDArray[np.uint16]
    degree: NDArray[np.int32]


def make_anchor(network: Network, labels: NDArray[Any]) -> Anchor:
    """Give the anchor's modules hues by size, and every node a spare hue other than that of its own module."""
    modules = Modules.from_labels(labels)
    hues = (np.arange(len(modules)) % len(PALETTE)).astype(np.uint16)
    own = hues[modules.full_labels % max(len(modules), 1)] if len(modules) else np.zeros(0, np.uint16)
    turn = 1 + (np.arange(network.node_count) * 7919) % (len(PALETTE) - 1)
    spare = ((own + turn) % len(PALETTE)).astype(np.uint16)
    return Anchor(modules, hues, spare, network.degree)


def follow(anchor: Anchor, modules: Modules) -> NDArray[np.uint16]:
    """Return the hue of each module, as positions in `PALETTE`, shape (modules,)."""
    hues = np.array([anchor.spare[_leader(group, anchor.degree)] for group in modules.members], np.uint16)
    if not len(modules):
        return hues
    overlap = (membership_matrix(modules).T @ membership_matrix(anchor.modules)).tocoo()
    order = np.lexsort((overlap.row, -overlap.data))
    rows, columns = overlap.row[order], overlap.col[order]
    _, first = np.unique(columns, return_index=True)  # each anchor module gives its hue once, to its largest overlap
    for position in np.sort(first)[::-1]:
        hues[rows[position]] = anchor.hues[columns[position]]
    return hues


def _leader(group: NDArray[Any], degree: NDArray[Any]) -> int:
    return int(group[np.argmax(degree[group])])


def pack_colours(anchor: Anchor, modules: Modules) -> bytes:
    """Return what the map needs to show a clustering, little endian.

    uint32 number of modules, uint32 number of nodes, uint16 hue per module, uint16 module per node (65535 for none).
    """
    labels = modules.labels.astype(np.int64)
    labels[(labels < 0) | (labels > 65534)] = 65535
    head = np.array([len(modules), modules.node_count], "<u4")
    return head.tobytes() + follow(anchor, modules).astype("<u2").tobytes() + labels.astype("<u2").tobytes()
