"""Where functional and structural modules part: over how many modules a gene set is spread, and which share it."""

from __future__ import annotations

from collections import defaultdict
from dataclasses import dataclass
from itertools import combinations
from typing import Any

import numpy as np
from numpy.typing import NDArray

from analysis.meaning.enrichment import Enrichment
from analysis.meaning.settings import LEVEL
from analysis.network import FloatArray, IntArray, locked


@dataclass(frozen=True, eq=False)
class Spread:
    """How each set lies over the modules.

    Attributes
    ----------
    overlaps : int array, CSR sparse, shape (sets, modules)
        Common genes; of modules of any size.
    touched : int32 array, shape (sets,)
        Modules of two genes of the background or more that hold at least one gene of the set.
    effective : float64 array, shape (sets,)
        Over how many modules the set is spread in effect: ``1 / Σ s²``, `s` the shares of its memberships in modules
        (inverse Simpson index; Hill 1973). 1 where all of it lies in one module; NaN where none of it is in a module.
    largest_share : float64 array, shape (sets,)
        Share of the set's genes in the module that holds most of them.
    enriched : tuple of tuples of int
        Modules enriched in each set, that with the most of its genes first.
    """

    overlaps: Any
    touched: IntArray
    effective: FloatArray
    largest_share: FloatArray
    enriched: tuple[tuple[int, ...], ...]

    def pairs(self) -> list[tuple[int, int, tuple[int, ...]]]:
        """Return the pairs of modules that share sets, with these, the pair with most first."""
        shared: defaultdict[tuple[int, int], list[int]] = defaultdict(list)
        for gene_set, modules in enumerate(self.enriched):
            for pair in combinations(sorted(modules), 2):
                shared[pair].append(gene_set)
        return sorted(
            ((one, other, tuple(sets)) for (one, other), sets in shared.items()),
            key=lambda each: (-len(each[2]), each[0], each[1]),
        )


def spread_of(enrichment: Enrichment, level: float = LEVEL) -> Spread:
    """Return how each tested set lies over the modules."""
    overlaps = (enrichment.sets.matrix @ enrichment.modules.matrix.T).tocsr()
    counts = overlaps.copy()
    counts.data = counts.data.astype(np.float64)
    sums = np.asarray(counts.sum(axis=1)).ravel()
    squares = np.asarray(counts.multiply(counts).sum(axis=1)).ravel()
    effective = np.full(len(sums), np.nan)
    np.divide(sums**2, squares, out=effective, where=squares > 0)
    most = np.asarray(overlaps.max(axis=1).todense()).ravel() if overlaps.nnz else np.zeros(len(sums))
    several = (enrichment.modules.sizes > 1).astype(np.int32)
    touched = np.asarray((overlaps > 0).astype(np.int32) @ several).ravel()
    return Spread(
        overlaps,
        locked(touched.astype(np.int32)),
        locked(effective),
        locked(most / enrichment.sets.sizes),
        _enriched_in(enrichment, level),
    )


def _enriched_in(enrichment: Enrichment, level: float) -> tuple[tuple[int, ...], ...]:
    called: NDArray[np.int64] = np.flatnonzero((enrichment.q_value <= level) & (enrichment.overlap > 1))
    order = called[np.lexsort((enrichment.module[called], -enrichment.overlap[called]))]
    found: list[list[int]] = [[] for _ in range(len(enrichment.sets))]
    for pair in order.tolist():
        found[enrichment.gene_set[pair]].append(int(enrichment.module[pair]))
    return tuple(tuple(modules) for modules in found)
