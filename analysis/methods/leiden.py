"""Leiden, for modularity at any resolution or for the constant Potts model."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace
from typing import Any, ClassVar

import numpy as np
from numpy.typing import NDArray

from analysis.methods.randomness import igraph_seed
from analysis.methods.settings import check_settings, setting, settings_of
from analysis.modules import Modules, modularity
from analysis.network import IntArray, Network

UNTIL_STABLE = -1
MOST_PASSES = 60


@dataclass(frozen=True, slots=True)
class Leiden:
    """Leiden optimisation (Traag, Waltman & van Eck 2019), computed by igraph.

    `quality="modularity"`: ``Σ_c [ W_c/W − γ (K_c/2W)² ]`` (Newman & Girvan 2004; Reichardt & Bornholdt 2006).
    `quality="cpm"`: the constant Potts model ``Σ_c [ W_c − γ n_c (n_c−1)/2 ]`` (Traag, Van Dooren & Nesterov 2011);
    weights are divided by their 95 % quantile first, so that `γ` reads as the density that a module must have
    inside, whatever the unit of the score.

    `iterations` is the number of passes; −1 repeats until the quality rises no more, 60 passes at most.
    """

    key: ClassVar[str] = "leiden"

    quality: str = setting("modularity", label="Quality", choices=("modularity", "cpm"))
    resolution: float = setting(1.0, label="Resolution", low=1e-6, high=1e4)
    iterations: int = setting(UNTIL_STABLE, label="Iterations", low=-1, high=1000)

    def __post_init__(self) -> None:
        check_settings(self)

    def find(self, network: Network, *, seed: int, initial: NDArray[Any] | None = None) -> Modules:
        """Return the partition of one run; `initial` (labels, shape (nodes,)) starts from another one."""
        labels = self.labels(network, seed=seed, initial=initial)
        return Modules.from_labels(
            labels,
            method=self.key,
            settings=settings_of(self),
            quality=self.score(network, labels),
            seed=seed,
        )

    def labels(self, network: Network, *, seed: int, initial: NDArray[Any] | None = None) -> IntArray:
        """Return the bare labels of one run, int32, shape (nodes,), in no particular numbering."""
        if network.edge_count == 0:
            return np.arange(network.node_count, dtype=np.int32)

        def run(passes: int, start: NDArray[Any] | None) -> IntArray:
            found = network.igraph.community_leiden(
                objective_function="CPM" if self.quality == "cpm" else "modularity",
                weights=_weights(network, self.quality),
                resolution=self.resolution,
                n_iterations=passes,
                initial_membership=None if start is None else start.tolist(),
            )
            return np.array(found.membership, np.int32)

        with igraph_seed(seed):
            return self._repeat(run, lambda labels: self.score(network, labels), initial)

    def labels_by_shares(self, network: Network, shares: NDArray[Any], *, seed: int) -> IntArray:
        """Return the labels of one run in which each edge counts by a share of its weight; int32, shape (nodes,).

        What is expected stays that of the whole network: modularity keeps the strengths, ``γ K_i K_j / 2W`` for a pair,
        the constant Potts model its ``γ``. So no partition gains by shares below one, and the best one loses nothing
        where all its inner edges have a share of one.

        Parameters
        ----------
        shares : float array, shape (edges,)
            From 0 to 1.
        """
        if not np.any(shares > 0):
            return np.arange(network.node_count, dtype=np.int32)
        kept = network.with_edges(shares > 0)
        wide = self.quality == "modularity"
        unit = 1.0 if wide else weight_unit(network)
        burden = network.strength if wide else np.ones(network.node_count)
        doubled = 2 * float(network.edge_weights.sum()) if wide else 1.0
        weights = (network.edge_weights * shares / unit)[shares > 0]
        resolution = self.resolution / doubled

        def run(passes: int, start: NDArray[Any] | None) -> IntArray:
            found = kept.igraph.community_leiden(
                objective_function="CPM",
                weights=weights.tolist(),
                node_weights=burden.tolist(),
                resolution=resolution,
                n_iterations=passes,
                initial_membership=None if start is None else start.tolist(),
            )
            return np.array(found.membership, np.int32)

        def gain(labels: IntArray) -> float:
            inside = labels[kept.sources] == labels[kept.targets]
            return float(weights[inside].sum() - resolution / 2 * (np.bincount(labels, burden) ** 2).sum())

        with igraph_seed(seed):
            return self._repeat(run, gain, None)

    def _repeat(
        self,
        run: Callable[[int, NDArray[Any] | None], IntArray],
        score: Callable[[IntArray], float],
        initial: NDArray[Any] | None,
    ) -> IntArray:
        """Make the passes that were asked for; *until stable*, pairs of passes until the score rises no more.

        igraph's own repetition ends when nothing moves. Where moves gain nothing, equal up to rounding, that may never
        come, so the score decides here, and there is a bound.
        """
        if self.iterations != UNTIL_STABLE:
            return run(self.iterations, initial)
        labels = run(2, initial)
        reached = score(labels)
        for _ in range(MOST_PASSES // 2 - 1):
            again = run(2, labels)
            better = score(again)
            if better <= reached + 1e-12 * max(1.0, abs(reached)):
                break
            labels, reached = again, better
        return labels

    def score(self, network: Network, labels: NDArray[Any]) -> float:
        """Return the quality of a partition under these settings, whoever found it."""
        if self.quality == "modularity":
            return modularity(network, labels, self.resolution)
        inside = labels[network.sources] == labels[network.targets]
        sizes = np.bincount(labels).astype(np.float64)
        weight = float((network.edge_weights[inside] / weight_unit(network)).sum())
        return weight - self.resolution * float((sizes * (sizes - 1) / 2).sum())

    def at(self, resolution: float) -> Leiden:
        """Return the same method at another resolution."""
        return replace(self, resolution=resolution)

    def quick(self) -> Leiden:
        """Return the same method with two passes, as ensembles use it."""
        return replace(self, iterations=2)


def weight_unit(network: Network) -> float:
    """Return the 95 % quantile of the weights, the unit of the constant Potts model; 1 if unweighted."""
    return network.upper_weight


def _weights(network: Network, quality: str) -> list[float] | str | None:
    """Return the weights for igraph; for the constant Potts model in units of their 95 % quantile."""
    if network.weights is None:
        return None
    if quality == "modularity":
        return "weight"
    scaled: list[float] = (network.weights / weight_unit(network)).tolist()
    return scaled
