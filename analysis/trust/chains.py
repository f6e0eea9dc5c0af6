"""Chains of runs over a grid of resolutions, from fine to coarse, each step starting from the one before."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from analysis.errors import SettingError
from analysis.methods import Leiden
from analysis.methods.leiden import weight_unit
from analysis.methods.randomness import child_seeds
from analysis.network import FloatArray, IntArray, Network, locked
from analysis.trust.noise import Noise

LabelTable = NDArray[np.int32]

_COARSE_END_MODULARITY = 0.05
_COARSE_END_CPM = (0.001, 0.1)
_FINE_END_CPM = 0.9
_FINE_END_MODULARITY = (4.0, 60.0)
_ITERATIONS = 2


def resolution_grid(
    network: Network, quality: str, steps: int = 30, low: float | None = None, high: float | None = None
) -> FloatArray:
    """Return an ascending grid of resolutions, even on a log scale, from nearly one module to near singletons.

    The ends, where they are not given:

    - constant Potts model: from half the density of the whole network (held between 0.001 and 0.1) to 0.9; below, one
      module grows so large that the genes at its rim fall off it one by one; the resolution is an inside density, so
      nothing lies beyond 1;
    - modularity: from 0.05 to the resolution beyond which nine edges in ten no longer hold their two ends together.
      Two nodes of strengths `k_i`, `k_j` with an edge `w` gain by joining while ``γ < 2Ww / (k_i k_j)`` (from the
      formula of modularity). The fine end is held between 4 and 60: beyond that, ask for tight groups instead.

    For modularity the grid point nearest to 1 is moved to exactly 1, the usual resolution, unless it is an end.
    """
    if steps < 2:
        raise SettingError(f"a sweep of {steps} steps; it needs at least 2")
    low = _coarse_end(network, quality) if low is None else low
    high = _fine_end(network, quality) if high is None else high
    if not 0 < low < high:
        raise SettingError(
            f"a sweep from resolution {low:g} to {high:g}; the first must be above 0 and below the second"
        )
    grid = np.geomspace(low, high, steps)
    nearest = int(np.argmin(np.abs(np.log(grid))))
    if quality == "modularity" and 0 < nearest < steps - 1:
        grid[nearest] = 1.0
    return grid


def _coarse_end(network: Network, quality: str) -> float:
    if quality == "modularity":
        return _COARSE_END_MODULARITY
    pairs = network.node_count * (network.node_count - 1) / 2
    weight = float(network.edge_weights.sum()) / weight_unit(network) if network.edge_count else 0.0
    return float(np.clip(0.5 * weight / max(pairs, 1.0), *_COARSE_END_CPM))


def _fine_end(network: Network, quality: str) -> float:
    if quality == "cpm":
        return _FINE_END_CPM
    least, most = _FINE_END_MODULARITY
    if network.edge_count == 0:
        return most
    total = float(network.edge_weights.sum())
    product = network.strength[network.sources] * network.strength[network.targets]
    return float(np.clip(np.quantile(2 * total * network.edge_weights / product, 0.9), least, most))


@dataclass(frozen=True)
class ChainTask:
    """Task: one warm chain of Leiden runs from the finest resolution to the coarsest.

    Each step starts from the partition before and makes two passes. The objective comes out better than that of cold
    runs, at half their cost; from coarse to fine it would get stuck. Partitions along one chain depend on each other;
    chains with different seeds do not.

    Attributes
    ----------
    quality : str
        `modularity` or `cpm`.
    resolutions : tuple of float
        Ascending.
    seed : int
        Seed of the chain's runs.
    noise : Noise or None
        Run on this noisy copy.
    null_seed : int or None
        Run on the degree-preserving null network of this seed (before the noise).
    """

    quality: str
    resolutions: tuple[float, ...]
    seed: int
    noise: Noise | None = None
    null_seed: int | None = None

    def run(self, network: Network) -> LabelTable:
        """Return the labels at each resolution, int32, shape (resolutions, nodes), in the order of `resolutions`."""
        network = self._copy(network)
        table = np.empty((len(self.resolutions), network.node_count), np.int32)
        seeds = child_seeds(self.seed, len(self.resolutions))
        labels: IntArray | None = None
        for step in range(len(self.resolutions))[::-1]:
            method = Leiden(self.quality, self.resolutions[step], _ITERATIONS)
            labels = method.labels(network, seed=seeds[step], initial=labels)
            table[step] = labels
        return table

    def _copy(self, network: Network) -> Network:
        if self.null_seed is not None:
            from analysis.trust.nulls import rewire

            network = rewire(network, self.null_seed)
        return network if self.noise is None else self.noise.apply(network)


def canonical(labels: NDArray[np.int32]) -> IntArray:
    """Renumber a partition from its largest module; of equal ones, first the one that holds the first node."""
    _, first, numbered, sizes = np.unique(labels, return_index=True, return_inverse=True, return_counts=True)
    order = np.lexsort((first, -sizes))
    rank = np.empty(len(order), np.int32)
    rank[order] = np.arange(len(order), dtype=np.int32)
    return locked(rank[numbered])
