"""The same method run many times, over seeds or over noisy copies, and what of a result comes back."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from analysis.agreement import match_modules, membership_matrix
from analysis.methods import Optimiser
from analysis.methods.clique_percolation import CliquePercolation
from analysis.methods.leiden import UNTIL_STABLE, Leiden
from analysis.methods.randomness import child_seeds
from analysis.modules import Modules
from analysis.network import FloatArray, Network, locked

CORE_SHARE = 0.9
RIM_SHARE = 0.5


@dataclass(frozen=True, slots=True)
class FindLabels:
    """Task: one run of an optimiser; returns labels, int32, shape (nodes,)."""

    method: Optimiser
    seed: int

    def run(self, network: Network) -> NDArray[np.int32]:
        """Run the method."""
        return self.method.labels(network, seed=self.seed)


@dataclass(frozen=True, slots=True)
class FindCover:
    """Task: clique percolation for one k, in a worker process so that it can be stopped."""

    method: CliquePercolation
    seed: int

    def run(self, network: Network) -> Modules:
        """Run the method."""
        return self.method.find(network, seed=self.seed)


@dataclass(frozen=True, slots=True)
class FindOnNoisyCopy:
    """Task: one run on a copy with a share of the edges left out; returns the groups' members."""

    method: Optimiser | CliquePercolation
    share: float
    seed: int

    def run(self, network: Network) -> Modules:
        """Make the copy and run the method on it."""
        from analysis.trust.noise import leave_out

        copy_seed, run_seed = child_seeds(self.seed, 2)
        return self.method.find(leave_out(network, self.share, copy_seed), seed=run_seed)


def seed_tasks(method: Optimiser, runs: int, seed: int) -> list[FindLabels]:
    """Return the tasks of a seed ensemble; the first ones do not depend on how many there are."""
    return [FindLabels(method, child) for child in child_seeds(seed, runs, purpose=1)]


def noise_tasks(method: Optimiser | CliquePercolation, share: float, copies: int, seed: int) -> list[FindOnNoisyCopy]:
    """Return the tasks of an ensemble over noisy copies."""
    return [FindOnNoisyCopy(method, share, child) for child in child_seeds(seed, copies, purpose=2)]


@dataclass(frozen=True, eq=False)
class Recurrence:
    """What of a reference result comes back in an ensemble.

    Attributes
    ----------
    runs : int
    jaccard : float64 array, shape (runs, modules)
        Best-match Jaccard of each reference module in each run (Hennig 2007).
    confidence : float64 array, shape (pairs,)
        For each (node, module) pair of `Modules.memberships`: the share of runs in which the node is in the module that
        matches its own best.
    second : int64 array, shape (pairs,)
        Reference module where the node is found most often otherwise; −1 where never.
    second_confidence : float64 array, shape (pairs,)
        Share of runs in which it is found there; 0 where never.
    """

    runs: int
    jaccard: FloatArray
    confidence: FloatArray
    second: NDArray[np.int64]
    second_confidence: FloatArray

    @property
    def stability(self) -> FloatArray:
        """Mean best-match Jaccard of each module (Hennig 2007), shape (modules,)."""
        mean: FloatArray = self.jaccard.mean(axis=0)
        return mean


def score_recurrence(reference: Modules, runs: Sequence[Modules]) -> Recurrence:
    """Compare a reference with the results of an ensemble; time linear in nodes × runs, no node × node array."""
    nodes, owners = reference.memberships
    count = len(reference)
    stays = np.zeros(len(nodes))
    jaccard = np.zeros((len(runs), count))
    strayed: list[NDArray[np.int64]] = []
    for position, other in enumerate(runs):
        match = match_modules(reference, other)
        jaccard[position] = match.jaccard
        inside = _is_member(other, nodes, match.best[owners])
        stays += inside
        strayed.append(_strays(reference, other, inside, match.home))
    second, share = _most_common(np.concatenate(strayed) if strayed else np.zeros(0, np.int64), len(nodes), count)
    total = max(len(runs), 1)
    return Recurrence(len(runs), locked(jaccard), locked(stays / total), locked(second), locked(share / total))


def _is_member(modules: Modules, nodes: NDArray[Any], which: NDArray[Any]) -> NDArray[np.bool_]:
    """Whether each node is in the module named beside it; −1 stands for none."""
    if not modules.is_cover:
        found: NDArray[np.bool_] = (modules.labels[nodes] == which) & (which >= 0)
        return found
    known = np.flatnonzero(which >= 0)
    inside = np.zeros(len(nodes), bool)
    matrix = membership_matrix(modules)
    inside[known] = np.asarray(matrix[nodes[known], which[known]]).ravel() > 0
    return inside


def _strays(
    reference: Modules, other: Modules, inside: NDArray[np.bool_], home: NDArray[np.int64]
) -> NDArray[np.int64]:
    """For pairs not found at home: where they are, as keys `pair × modules + reference module`."""
    nodes, owners = reference.memberships
    away = np.flatnonzero(~inside)
    label = other.labels[nodes[away]]
    placed = label >= 0
    away, label = away[placed], label[placed]
    found = home[label]
    elsewhere = (found >= 0) & (found != owners[away])
    keys: NDArray[np.int64] = away[elsewhere].astype(np.int64) * len(reference) + found[elsewhere]
    return keys


def _most_common(keys: NDArray[np.int64], pairs: int, modules: int) -> tuple[NDArray[np.int64], FloatArray]:
    second = np.full(pairs, -1, np.int64)
    share = np.zeros(pairs)
    cells, counts = np.unique(keys, return_counts=True)
    pair, module = cells // max(modules, 1), cells % max(modules, 1)
    order = np.lexsort((-module, counts, pair))
    second[pair[order]] = module[order]
    share[pair[order]] = counts[order]
    return second, share


def standing(confidence: NDArray[Any], homes: NDArray[Any]) -> list[str]:
    """Return `core` (in nearly all runs), `rim` (in most) or `shared` (at home in several modules) for each pair.

    A gene that is in its module in less than half of the runs counts as shared; where no runs say anything, the word
    is empty.
    """
    words = np.where(confidence >= CORE_SHARE, "core", np.where(confidence >= RIM_SHARE, "rim", "shared"))
    words = np.where(homes > 1, "shared", words)
    return [str(word) for word in np.where(np.isnan(confidence), "", words)]


def consensus(network: Network, runs: Sequence[NDArray[Any]], method: Optimiser, seed: int) -> Modules:
    """Return the consensus partition: one run on the edges weighted by the share of runs that join their ends.

    Lancichinetti & Fortunato 2012, on the network's own edges as in Tandon et al. 2019, so that no node × node array is
    needed. The shares multiply the weights, and the quality keeps its resolution and the network's own strengths: runs
    that agree have the partition on which they agree for their consensus. Edges never joined are left out.
    """
    joined = np.zeros(network.edge_count)
    for labels in runs:
        joined += labels[network.sources] == labels[network.targets]
    optimiser = Leiden(
        quality=method.quality if isinstance(method, Leiden) else "modularity",
        resolution=method.resolution,
        iterations=UNTIL_STABLE,
    )
    found = optimiser.labels_by_shares(network, joined / max(len(runs), 1), seed=seed)
    return Modules.from_labels(
        found,
        method=method.key,
        settings={"consensus_of": len(runs)},
        quality=method.score(network, found),
        seed=seed,
    )
