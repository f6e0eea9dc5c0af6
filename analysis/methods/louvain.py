"""Louvain."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Any, ClassVar

import numpy as np
from numpy.typing import NDArray

from analysis.methods.randomness import igraph_seed
from analysis.methods.settings import check_settings, setting, settings_of
from analysis.modules import Modules, modularity
from analysis.network import IntArray, Network


@dataclass(frozen=True, slots=True)
class Louvain:
    """Louvain optimisation of modularity (Blondel, Guillaume, Lambiotte & Lefebvre 2008), computed by igraph.

    Its modules may be disconnected inside (Traag, Waltman & van Eck 2019): prefer `Leiden` unless a result must
    compare with an earlier one.
    """

    key: ClassVar[str] = "louvain"

    resolution: float = setting(1.0, label="Resolution", low=1e-6, high=1e4)

    def __post_init__(self) -> None:
        check_settings(self)

    def find(self, network: Network, *, seed: int) -> Modules:
        """Return the partition of one run."""
        labels = self.labels(network, seed=seed)
        return Modules.from_labels(
            labels,
            method=self.key,
            settings=settings_of(self),
            quality=self.score(network, labels),
            seed=seed,
        )

    def labels(self, network: Network, *, seed: int) -> IntArray:
        """Return the bare labels of one run, int32, shape (nodes,), in no particular numbering."""
        if network.edge_count == 0:
            return np.arange(network.node_count, dtype=np.int32)
        with igraph_seed(seed):
            found = network.igraph.community_multilevel(
                weights=None if network.weights is None else "weight", resolution=self.resolution
            )
        return np.array(found.membership, np.int32)

    def score(self, network: Network, labels: NDArray[Any]) -> float:
        """Return the modularity of a partition at this resolution, whoever found it."""
        return modularity(network, labels, self.resolution)

    def at(self, resolution: float) -> Louvain:
        """Return the same method at another resolution."""
        return replace(self, resolution=resolution)

    def quick(self) -> Louvain:
        """Return the method itself: Louvain has no shorter form."""
        return self
