"""How far what starts at a gene gets: a random walk with restart, and a spread along edges by chance."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np
from numpy.typing import NDArray

from analysis.errors import SettingError
from analysis.modules import Modules
from analysis.network import FloatArray, Network

RESTART = 0.3
PRECISION = 1e-12
RUNS = 200


def walk_from(network: Network, starts: Sequence[int] | NDArray[Any], restart: float = RESTART) -> FloatArray:
    """Return where a random walk with restart is found, from each start; shape (nodes, starts), columns sum to 1.

    ``p = c e + (1 − c) W p`` with `c` the chance to begin anew and `W` the weights divided by the strength of the node
    left (Tong, Faloutsos & Pan 2006). The error of each column, summed over nodes, is below 1e-12. A walk at a gene
    without edges stays there.
    """
    if not 0 < restart < 1:
        raise SettingError(f"the chance to begin anew is {restart}; give a share above 0 and below 1")
    starts = np.asarray(starts, np.int64)
    origin = np.zeros((network.node_count, len(starts)))
    origin[starts, np.arange(len(starts))] = 1.0
    leave = np.divide(1.0, network.strength, out=np.zeros(network.node_count), where=network.strength > 0)
    still = (network.strength == 0).astype(np.float64)[:, None]
    found = origin
    for _ in range(int(np.ceil(np.log(PRECISION / 2) / np.log(1 - restart)))):
        found = restart * origin + (1 - restart) * (network.adjacency @ (leave[:, None] * found) + still * found)
    return np.asarray(found, np.float64)


def spread_from(network: Network, start: int, *, chance: float = 0.1, runs: int = RUNS, seed: int = 1) -> FloatArray:
    """Return in what share of the runs each gene is reached, when each edge passes it on once by chance.

    An edge passes with ``1 − (1 − chance)^(w / w̄)``, `w̄` the mean weight: the chance itself where weights are equal
    (the independent cascade of Kempe, Kleinberg & Tardos 2003). Each run keeps or drops every edge beforehand; what is
    reached is the start's connected component among those kept, which has the same distribution.
    """
    from scipy.sparse import csr_array
    from scipy.sparse.csgraph import connected_components

    if not 0 <= chance <= 1:
        raise SettingError(f"the chance to pass on is {chance}; give a share from 0 to 1")
    random = np.random.default_rng(seed)
    weights = network.edge_weights
    passing = 1 - (1 - chance) ** (weights / weights.mean()) if len(weights) else weights
    reached = np.zeros(network.node_count)
    shape = (network.node_count, network.node_count)
    for _ in range(runs):
        kept = random.random(network.edge_count) < passing
        ends = (network.sources[kept], network.targets[kept])
        _, labels = connected_components(csr_array((np.ones(int(kept.sum())), ends), shape=shape), directed=False)
        reached += labels == labels[start]
    return np.asarray(reached / max(runs, 1), np.float64)


def share_inside(modules: Modules, start: int, found: NDArray[Any]) -> float:
    """Return what share of a spread, beyond its start, stays in the modules of the start; NaN where nothing leaves it.

    `found` is a column of `walk_from`, or what `spread_from` returns.
    """
    inside = np.zeros(modules.node_count, bool)
    for group in modules.members:
        if start in group:
            inside[group] = True
    inside[start] = False
    total = float(found.sum() - found[start])
    return float(found[inside].sum()) / total if total > 1e-12 else float("nan")
