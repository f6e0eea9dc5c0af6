"""Which k to take: the published hint, with its reason in words."""

from __future__ import annotations

from dataclasses import dataclass

from analysis.network import Network
from analysis.overlap.percolation import Percolation, critical_density

RATIO = 2.0


@dataclass(frozen=True)
class KHint:
    """A suggestion, never a decision.

    Attributes
    ----------
    k : int or None
        None where no k fits the rule.
    reason : str
        One sentence.
    """

    k: int | None
    reason: str


def suggest_k(found: Percolation) -> KHint:
    """Return the least k of 3 or more at which the largest community is at most about twice the second.

    Palla, Derényi, Farkas & Vicsek 2005 (Nature 435:814) work just below the point at which a giant community appears,
    where the largest is about twice as large as the second. At least two communities are needed.
    """
    for level in found.levels[1:]:
        sizes = level.sizes
        if len(sizes) > 1 and sizes[0] <= RATIO * sizes[1]:
            return KHint(
                level.k,
                f"At k = {level.k} no community is more than twice the next ({sizes[0]} and {sizes[1]} genes): "
                "the least k without a giant community.",
            )
    return KHint(None, "At every k one community is more than twice the next, or alone; the rule suggests no k.")


def chance_sentence(network: Network, k: int) -> str:
    """Say whether a random network as dense would have a giant community at this k (Derényi, Palla & Vicsek 2005)."""
    pairs = network.node_count * (network.node_count - 1) / 2
    if k < 3 or pairs == 0:
        return ""
    density, critical = network.edge_count / pairs, critical_density(k, network.node_count)
    if density >= critical:
        return (
            f"A random network as dense as this one would have a giant community at k = {k} by chance alone "
            f"(density {density:.2g}, percolation point {critical:.2g})."
        )
    return (
        f"A random network as dense as this one would have no giant community at k = {k} "
        f"(density {density:.2g}, percolation point {critical:.2g})."
    )
