"""From rows to a network: self-loops set apart, repeated pairs merged, names put in order."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from analysis.intake.interactions import Interactions
from analysis.network import FloatArray, Network


@dataclass(frozen=True)
class Merged:
    """A network and what merging did.

    Attributes
    ----------
    network : Network
        The edges, and the nodes that have none.
    self_loops : int
        Rows that join a node to itself.
    duplicates_merged : int
        Rows whose pair stands in another row too, in either direction, beyond the one that is kept.
    differing : int
        Edges whose rows gave different weights; the largest is kept.
    """

    network: Network
    self_loops: int
    duplicates_merged: int
    differing: int


def merge(interactions: Interactions, label: str, provenance: Mapping[str, str]) -> Merged:
    """Merge rows into a network.

    Parameters
    ----------
    interactions : Interactions
        Usable rows.
    label : str
        What to call the network.
    provenance : mapping of str to str
        Where it came from.
    """
    extra = np.zeros(0, np.int32) if interactions.nodes is None else interactions.nodes
    names, rank = _ordered(interactions, extra)
    ends = np.column_stack([rank[interactions.sources], rank[interactions.targets]]).reshape(-1, 2)
    loops = ends[:, 0] == ends[:, 1]
    pairs = np.sort(ends[~loops], axis=1)
    weights = None if interactions.weights is None else interactions.weights[~loops]
    kept, groups = _first_of_each(pairs, weights)
    return Merged(
        network=Network.from_indices(
            names,
            pairs[kept],
            None if weights is None else weights[kept],
            label=label,
            provenance=provenance,
        ),
        self_loops=int(loops.sum()),
        duplicates_merged=len(pairs) - len(kept),
        differing=_differing(weights, groups, len(kept)),
    )


def _ordered(interactions: Interactions, extra: NDArray[np.int32]) -> tuple[tuple[str, ...], NDArray[np.int64]]:
    """Return the names in use, sorted, and the place of each code among them."""
    used = np.unique(np.concatenate([interactions.sources, interactions.targets, extra])).tolist()
    order = sorted(used, key=interactions.names.__getitem__)
    rank = np.full(len(interactions.names), -1, np.int64)
    rank[order] = np.arange(len(order))
    return tuple(interactions.names[code] for code in order), rank


def _first_of_each(pairs: NDArray[np.int64], weights: FloatArray | None) -> tuple[NDArray[np.int64], NDArray[np.int64]]:
    """Return the row to keep of each pair, that with the largest weight, and the group of every row.

    Groups are numbered as the kept rows are.
    """
    if not len(pairs):
        return np.zeros(0, np.int64), np.zeros(0, np.int64)
    keys = pairs[:, 0] * (int(pairs.max()) + 1) + pairs[:, 1]
    order = np.argsort(keys, kind="stable") if weights is None else np.lexsort((-weights, keys))
    starts = np.flatnonzero(np.diff(keys[order], prepend=-1))
    groups = np.empty(len(pairs), np.int64)
    groups[order] = np.repeat(np.arange(len(starts)), np.diff(starts, append=len(pairs)))
    return order[starts], groups


def _differing(weights: FloatArray | None, groups: NDArray[np.int64], count: int) -> int:
    """Return the number of groups whose weights are not all equal."""
    if weights is None or count == len(weights):
        return 0
    low, high = np.full(count, np.inf), np.zeros(count)
    np.minimum.at(low, groups, weights)
    np.maximum.at(high, groups, weights)
    return int(np.sum(low < high))
