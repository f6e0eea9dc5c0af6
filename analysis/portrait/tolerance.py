"""How the network falls apart as genes are removed: at random, hubs first, and by betweenness."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from analysis.network import FloatArray, Network, locked
from analysis.portrait.neighbours import neighbour_rows, renumbered_rows

RANDOM, DEGREE, RECOMPUTED, BETWEENNESS = "random", "degree", "recomputed degree", "betweenness"
BETWEENNESS_WORK = 60_000_000
"""Genes × edges up to which betweenness is computed; beyond, it would take minutes."""
STEPS = 200
SOURCE = (
    "Albert, Jeong & Barabási 2000; κ of Molloy & Reed 1995; critical share of Cohen et al. 2000; "
    "R of Schneider et al. 2011"
)


@dataclass(frozen=True, eq=False)
class RemovalCurve:
    """The giant component as genes are removed in one order.

    Attributes
    ----------
    strategy : str
        `random`, `degree`, `recomputed degree` or `betweenness`.
    removed : float64 array, shape (points,)
        Share of genes removed, from 0 to 1.
    giant : float64 array, shape (points,)
        Genes of the largest component as a share of all there were; the mean over draws for `random`.
    low, high : float64 arrays, shape (points,)
        The least and the largest over draws; equal to `giant` where there is only one order.
    critical : float
        Share removed at which the other components are largest (the peak of ``Σ s² / n``), where it falls apart.
    robustness : float
        ``R = (1/N) Σ S(q)`` over q = 1 … N genes removed (Schneider et al. 2011, eq. 1): between 0 and ½.
    draws : int
    """

    strategy: str
    removed: FloatArray
    giant: FloatArray
    low: FloatArray
    high: FloatArray
    critical: float
    robustness: float
    draws: int

    def at(self, share: float) -> float:
        """Return the giant component's share when this share of genes is removed."""
        return float(np.interp(share, self.removed, self.giant))


@dataclass(frozen=True, eq=False)
class Tolerance:
    """All removal curves of a network.

    Attributes
    ----------
    curves : tuple of RemovalCurve
        As far as they have come.
    kappa : float
        ``κ = ⟨k²⟩ / ⟨k⟩``; above 2 a network with these degrees and nothing else has a giant component (Molloy & Reed
        1995).
    random_critical : float
        ``1 − 1 / (κ − 1)``: the share of random failures that such a network bears (Cohen et al. 2000); NaN for κ ≤ 2.
    left_out : str
        Why there is no curve by betweenness; empty where there is one.
    """

    curves: tuple[RemovalCurve, ...]
    kappa: float
    random_critical: float
    left_out: str = ""

    def curve(self, strategy: str) -> RemovalCurve | None:
        """Return one curve, None where it is not there."""
        return next((each for each in self.curves if each.strategy == strategy), None)

    def sentence(self) -> str:
        """Say what ten of a hundred genes do to it, at random and by degree."""
        random, hubs = self.curve(RANDOM), self.curve(DEGREE)
        if random is None or hubs is None:
            return "The removals are being worked out."
        told = (
            f"Without a tenth of its genes the largest component holds {_percent(random.at(0.1))} of all genes where "
            f"they go at random, {_percent(hubs.at(0.1))} where the best connected go first (R = "
            f"{random.robustness:.2f} and {hubs.robustness:.2f})."
        )
        return f"{told} {self.left_out}" if self.left_out else told

    def critical_sentence(self) -> str:
        """Say where random failure would part a network with these degrees and nothing else."""
        if np.isnan(self.random_critical):
            return "A random network with these degrees has no giant component that could be lost."
        return (
            f"A random network with these degrees falls apart once {_percent(self.random_critical)} of its genes are "
            f"gone at random (κ = {self.kappa:.1f}); the table has where this one does, by the peak of its other "
            "components."
        )


@dataclass(frozen=True, eq=False)
class Removals:
    """Raw results of one order.

    Attributes
    ----------
    strategy : str
    sizes : int64 array, shape (nodes + 1,)
        Genes of the largest component, by number removed.
    others : float64 array, shape (nodes + 1,)
        Sum of the squared sizes of the other components, per gene that is left.
    """

    strategy: str
    sizes: NDArray[np.int64]
    others: FloatArray


@dataclass(frozen=True)
class RemovalTask:
    """Removes all genes in one order; `seed` decides among equals, and the order at random."""

    strategy: str
    seed: int

    def run(self, network: Network) -> Removals:
        """Return the largest component after each removal."""
        from analysis.portrait.compiled import largest_components

        order = removal_order(network, self.strategy, self.seed)
        sizes, others = largest_components(*neighbour_rows(network), order)
        return Removals(self.strategy, sizes, others)


def removal_order(network: Network, strategy: str, seed: int) -> NDArray[np.int64]:
    """Return all genes in the order in which they are removed; among equals chance decides."""
    mixed = np.random.default_rng(seed).permutation(network.node_count)
    if strategy == RANDOM:
        return mixed
    if strategy == RECOMPUTED:
        from analysis.portrait.compiled import order_by_degree_left

        place = np.empty_like(mixed)
        place[mixed] = np.arange(len(mixed))
        found: NDArray[np.int64] = mixed[order_by_degree_left(*renumbered_rows(network, place))]
        return found
    score = np.asarray(network.degree if strategy == DEGREE else network.igraph.betweenness(), np.float64)
    return mixed[np.argsort(-score[mixed], kind="stable")]


def is_betweenness_affordable(network: Network) -> bool:
    """Whether the betweenness of all genes takes seconds rather than minutes."""
    return network.node_count * network.edge_count <= BETWEENNESS_WORK


def gather_curves(network: Network, found: Sequence[Removals]) -> Tolerance:
    """Make curves of what has come so far."""
    strategies = [
        each for each in (RANDOM, DEGREE, RECOMPUTED, BETWEENNESS) if any(one.strategy == each for one in found)
    ]
    curves = tuple(_curve(network.node_count, [one for one in found if one.strategy == each]) for each in strategies)
    degree = network.degree.astype(np.float64)
    kappa = float((degree**2).sum() / degree.sum()) if network.edge_count else float("nan")
    critical = 1 - 1 / (kappa - 1) if kappa > 2 else float("nan")
    left_out = ""
    if not is_betweenness_affordable(network):
        left_out = "Removal by betweenness was left out: on a network of this size it would take minutes."
    return Tolerance(curves, kappa, critical, left_out)


def _curve(nodes: int, found: Sequence[Removals]) -> RemovalCurve:
    sizes = np.array([each.sizes for each in found]) / max(nodes, 1)
    others = np.array([each.others for each in found]).mean(axis=0)
    points = np.unique(np.round(np.linspace(0, nodes, min(nodes, STEPS) + 1)).astype(np.int64))
    robustness = float(sizes[:, 1:].sum(axis=1).mean() / max(nodes, 1))
    return RemovalCurve(
        found[0].strategy,
        locked(points / max(nodes, 1)),
        locked(sizes.mean(axis=0)[points]),
        locked(sizes.min(axis=0)[points]),
        locked(sizes.max(axis=0)[points]),
        float(others.argmax() / max(nodes, 1)),
        robustness,
        len(found),
    )


def _percent(share: Any) -> str:
    return f"{100 * share:.0f} %"
