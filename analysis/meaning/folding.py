"""Redundant sets: those that say much the same as a stronger one are folded under it."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from analysis.meaning.enrichment import Enrichment
from analysis.meaning.settings import LEVEL

JACCARD, CONTAINMENT = 0.5, 0.8
"""Common members over members of either, and over those of the smaller set: conventions, no source."""


@dataclass(frozen=True)
class Fold:
    """One enriched set of a module with the sets folded under it.

    Attributes
    ----------
    pair : int
        Of the enrichment.
    under : tuple of int
        Pairs of the sets folded under it, strongest first.
    """

    pair: int
    under: tuple[int, ...] = ()


def fold(enrichment: Enrichment, module: int, level: float = LEVEL) -> list[Fold]:
    """Return the enriched sets of a module, strongest first, redundant ones folded under the strongest they resemble.

    The sets are gone through from the smallest p-value. One is folded under the first kept set that it resembles: with
    ``|A ∩ B| / |A ∪ B| ≥ 0.5`` (Jaccard 1901) or ``|A ∩ B| / min(|A|, |B|) ≥ 0.8`` (containment), counted over their
    members in the background. Nothing is dropped: all stay in the table and in the tests.
    """
    pairs = enrichment.enriched(module, level)
    resembling = _resembling(enrichment, enrichment.gene_set[pairs])
    kept: dict[int, list[int]] = {}
    for place in range(len(pairs)):
        stronger = next((one for one in kept if resembling[one, place]), None)
        if stronger is None:
            kept[place] = []
        else:
            kept[stronger].append(place)
    return [Fold(int(pairs[one]), tuple(int(pairs[other]) for other in under)) for one, under in kept.items()]


def _resembling(enrichment: Enrichment, chosen: NDArray[np.int32]) -> NDArray[np.bool_]:
    """Return which of the chosen sets resemble one another, shape (chosen, chosen)."""
    matrix = enrichment.sets.matrix[chosen]
    common = np.asarray((matrix @ matrix.T).todense(), np.float64)
    sizes = enrichment.sets.sizes[chosen].astype(np.float64)
    either = sizes[:, None] + sizes[None, :] - common
    smaller = np.minimum(sizes[:, None], sizes[None, :])
    found: NDArray[np.bool_] = (common >= JACCARD * either) | (common >= CONTAINMENT * smaller)
    return found
