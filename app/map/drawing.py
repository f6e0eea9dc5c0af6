"""Positions and anchor of a network, computed once by a worker and kept."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from analysis.layout import layout
from analysis.methods.leiden import Leiden
from analysis.network import Network

DRAWING_SEED = 1


@dataclass(frozen=True, slots=True)
class DrawTask:
    """Task: lay the network out; returns `positions` (nodes, 2) and the `anchor` partition's labels (nodes,)."""

    def run(self, network: Network) -> dict[str, NDArray[Any]]:
        """Draw."""
        anchor = Leiden(iterations=2).labels(network, seed=DRAWING_SEED)
        return {"positions": layout(network, DRAWING_SEED).astype(np.float64), "anchor": anchor}
