"""Null networks: the same degrees, the ends of the edges at random."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import NDArray

from analysis.errors import SettingError
from analysis.network import Network, locked

TRIALS_PER_EDGE = 5.0
SHARE_TRIALS_PER_EDGE = 10.0


def rewire(network: Network, seed: int, trials_per_edge: float = TRIALS_PER_EDGE) -> Network:
    """Return a random network in which every node has the degree that it has here.

    Ends of edges are swapped in pairs (Maslov & Sneppen 2002), five trials an edge, which leaves about one edge in two
    hundred in place on a network of 290,000 edges; a small dense network has fewer swaps to make and keeps more. The
    result is simple: no self-loops, no edge twice.

    Weights are shuffled over the rewired edges: the null keeps their distribution, but neither the strength of a node
    nor any bond between weight and place.

    Parameters
    ----------
    network : Network
        Any network; one with fewer than two edges comes back as it is.
    seed : int
        Seed, at least 0; the same one gives the same network in every process.
    trials_per_edge : float
        Number of trials, as a multiple of the number of edges.

    Raises
    ------
    SettingError
        Where `trials_per_edge` is below 0.
    """
    if not trials_per_edge >= 0:
        raise SettingError(f"trials per edge are {trials_per_edge}; give 0 or more")
    generator = np.random.default_rng(seed)
    chosen = np.arange(network.edge_count)
    keys = _swapped_keys(network, chosen, round(trials_per_edge * network.edge_count), generator)
    weights = None if network.weights is None else generator.permutation(network.weights)
    return _from_keys(network, np.sort(keys), weights)


def rewire_share(network: Network, share: float, seed: int) -> Network:
    """Return the network with about that share of its edges rewired, every degree kept.

    A random choice of `share` of the edges swap ends among themselves as in `rewire`, ten trials an edge; the others
    stay, with their weights. The weights of the chosen edges are shuffled among them. A perturbation in the manner of
    Karrer, Levina & Newman (2008), who keep degrees in expectation; here they are kept exactly. Where few swaps are
    possible (very few edges chosen, a small dense network) a smaller share moves.

    Parameters
    ----------
    share : float
        From 0 (nothing changes) to 1.
    seed : int
        Seed, at least 0; the same one gives the same network in every process.

    Raises
    ------
    SettingError
        Where the share lies outside 0 to 1.
    """
    if not 0 <= share <= 1:
        raise SettingError(f"the share of edges to rewire is {share}; give a number from 0 to 1")
    generator = np.random.default_rng(seed)
    count = round(share * network.edge_count)
    chosen = np.sort(generator.choice(network.edge_count, count, replace=False)) if count else np.zeros(0, np.int64)
    keys = _swapped_keys(network, chosen, round(SHARE_TRIALS_PER_EDGE * count), generator)
    order = np.argsort(keys)
    if network.weights is None:
        return _from_keys(network, keys[order], None)
    weights = np.array(network.weights)
    weights[chosen] = generator.permutation(weights[chosen])
    return _from_keys(network, keys[order], weights[order])


def edges_in_place(network: Network, other: Network) -> float:
    """Return the share of the network's edges that another one over the same nodes has too; 1 without edges."""
    if network.edge_count == 0:
        return 1.0
    kept = np.isin(_keys(network.sources, network.targets), _keys(other.sources, other.targets), assume_unique=True)
    return float(kept.mean())


def _swapped_keys(
    network: Network, chosen: NDArray[np.int64], trials: int, generator: np.random.Generator
) -> NDArray[np.int64]:
    """Return the keys of the edges, by their position before, after swaps among the chosen ones."""
    start = generator.integers(0, 2**64, dtype=np.uint64)
    sources, targets = np.array(network.sources), np.array(network.targets)
    if len(chosen) > 1 and trials:
        from analysis.trust.swaps import swap_edges

        swap_edges(sources, targets, chosen, trials, start)
    return _keys(np.minimum(sources, targets), np.maximum(sources, targets))


def _keys(low: NDArray[np.int32], high: NDArray[np.int32]) -> NDArray[np.int64]:
    """One number an edge, in canonical order of the edges."""
    return (low.astype(np.int64) << 32) | high


def _from_keys(network: Network, keys: NDArray[np.int64], weights: NDArray[Any] | None) -> Network:
    """Build the network of sorted keys; they are distinct and without self-loops."""
    return Network(
        network.names,
        locked((keys >> 32).astype(np.int32)),
        locked((keys & 0xFFFFFFFF).astype(np.int32)),
        None if weights is None else locked(weights),
        network.label,
        network.provenance,
    )
