"""Noisy copies of a network: the same nodes, a share of the edges left out or rewired."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from analysis.errors import SettingError
from analysis.methods import Optimiser
from analysis.network import IntArray, Network

LEFT_OUT = "left out"
REWIRED = "rewired"


def leave_out(network: Network, share: float, seed: int) -> Network:
    """Return the network with the same nodes and a random share of its edges left out.

    Exactly ``round(share · edges)`` edges go, every set of that many equally likely; weights stay with their edges.
    """
    _check(share)
    dropped = round(share * network.edge_count)
    kept = np.ones(network.edge_count, bool)
    kept[np.random.default_rng(seed).choice(network.edge_count, dropped, replace=False)] = False
    return network.with_edges(kept)


@dataclass(frozen=True)
class Noise:
    """How a noisy copy is made; applied where the copy is needed, so that no copy travels between processes.

    Attributes
    ----------
    share : float
        Share of the edges that is left out or rewired, 0 to below 1.
    seed : int
        Seed of the copy.
    kind : str
        `LEFT_OUT`, or `REWIRED`: edges swapped with one another, every degree kept (Karrer, Levina & Newman 2008
        perturb a network in the same spirit, keeping expected degrees).
    """

    share: float
    seed: int
    kind: str = LEFT_OUT

    def __post_init__(self) -> None:
        _check(self.share)
        if self.kind not in {LEFT_OUT, REWIRED}:
            raise SettingError(f"noise of kind {self.kind!r}; choose {LEFT_OUT!r} or {REWIRED!r}")

    def apply(self, network: Network) -> Network:
        """Return the noisy copy; the network itself where the share is 0."""
        if self.share == 0 or network.edge_count == 0:
            return network
        if self.kind == LEFT_OUT:
            return leave_out(network, self.share, self.seed)
        from analysis.trust.nulls import rewire_share

        return rewire_share(network, self.share, self.seed)


@dataclass(frozen=True)
class NoisyRun:
    """Task: one run of a method on one noisy copy; the result is its labels, int32, shape (nodes,)."""

    method: Optimiser
    noise: Noise
    seed: int

    def run(self, network: Network) -> IntArray:
        """Make the copy and cluster it."""
        return self.method.labels(self.noise.apply(network), seed=self.seed)


def _check(share: float) -> None:
    if not 0 <= share < 1:
        raise SettingError(f"the share of edges to perturb is {share}; it must be at least 0 and below 1")
