"""Which gene sets are more frequent in a module than chance gives: all modules with all sets at once."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from typing import Any

import numpy as np
from numpy.typing import NDArray

from analysis.errors import InputError
from analysis.gene_sets import GeneSets
from analysis.meaning.hypergeometric import upper_tail
from analysis.meaning.modules import ModuleGenes
from analysis.meaning.settings import LEVEL, MeaningSettings
from analysis.network import FloatArray, IntArray, locked
from analysis.progress import Progress, silent
from analysis.statistics import benjamini_hochberg


@dataclass(frozen=True, eq=False)
class Enrichment:
    """The outcome of all tests. Pairs without a common gene are tests too (p = 1), counted and not listed.

    Attributes
    ----------
    modules : ModuleGenes
        The modules, restricted to the background; also those too small to be tested.
    sets : GeneSets
        The sets tested, restricted to the background.
    settings : MeaningSettings
    background : int
        Genes of the background.
    tests : int
        Pairs of a module and a set that were tested, with or without a common gene.
    module, gene_set : int32 arrays, shape (pairs,)
        The pairs with a common gene, by module, then p-value, then set.
    overlap : int32 array, shape (pairs,)
        Their common genes.
    p_value, q_value : float64 arrays, shape (pairs,)
        Of the one-sided hypergeometric test; Benjamini–Hochberg over all `tests`.
    sets_given, too_small, too_large : int
        Sets of the collection; those outside the size bounds.
    modules_too_small : int
        Modules with fewer than `min_module` genes in the background.
    """

    modules: ModuleGenes
    sets: GeneSets
    settings: MeaningSettings
    background: int
    tests: int
    module: IntArray
    gene_set: IntArray
    overlap: IntArray
    p_value: FloatArray
    q_value: FloatArray
    sets_given: int
    too_small: int
    too_large: int
    modules_too_small: int

    @cached_property
    def expected(self) -> FloatArray:
        """Common genes that chance gives on average, ``n K / N``, shape (pairs,)."""
        product = self.modules.sizes[self.module].astype(np.float64) * self.sets.sizes[self.gene_set]
        return locked(product / self.background)

    @cached_property
    def fold(self) -> FloatArray:
        """How many times as many common genes as expected, shape (pairs,)."""
        return locked(self.overlap / self.expected)

    @cached_property
    def starts(self) -> NDArray[np.int64]:
        """Where the pairs of each module begin, shape (modules + 1,)."""
        return np.searchsorted(self.module, np.arange(len(self.modules) + 1))

    @property
    def modules_tested(self) -> int:
        """Number of modules that were tested."""
        return len(self.modules) - self.modules_too_small

    def enriched(self, module: int, level: float = LEVEL) -> NDArray[np.int64]:
        """Return the pairs of a module with a q-value up to `level` and more than one common gene, strongest first."""
        pairs = np.arange(self.starts[module], self.starts[module + 1])
        return pairs[(self.q_value[pairs] <= level) & (self.overlap[pairs] > 1)]

    def common(self, pair: int) -> list[str]:
        """Return the common genes of a pair, by name."""
        shared = np.intersect1d(
            self.modules.members[self.module[pair]], self.sets.members[self.gene_set[pair]], assume_unique=True
        )
        return [self.modules.genes[gene] for gene in shared.tolist()]


def enrich(
    modules: ModuleGenes,
    sets: GeneSets,
    settings: MeaningSettings = MeaningSettings(),  # noqa: B008 - frozen
    *,
    background: NDArray[np.bool_] | None = None,
    progress: Progress = silent,
) -> Enrichment:
    """Test every module with every set.

    Modules and sets are first restricted to the background, then to their size bounds. The test is `upper_tail`; the
    correction is Benjamini & Hochberg's over all tests, those without a common gene among them.

    Parameters
    ----------
    modules : ModuleGenes
    sets : GeneSets
        Over the same genes, in the same order (`analysis.gene_sets.match`).
    settings : MeaningSettings
    background : bool array, shape (genes,), optional
        The genes that could have been found; by default those of the network that the sets know.

    Raises
    ------
    InputError
        Where no module or no set is left to test.
    """
    if modules.genes != sets.genes:
        raise ValueError("modules and sets are over different genes")
    given = modules.core() if settings.core_only else modules
    allowed = sets.known if background is None else background
    total = int(allowed.sum())
    given = _within(given, allowed)
    inside = sets.within(allowed)
    small, large = inside.sizes < settings.min_size, inside.sizes > settings.max_size
    tested = inside.taken(np.flatnonzero(~small & ~large))
    fit = given.sizes >= settings.min_module
    if not len(tested) or not fit.any():
        raise _nothing_to_test(given, inside, settings, total)
    progress(0.1, "counting common genes")
    counts = (given.matrix @ tested.matrix.T).tocoo()
    keep = fit[counts.row]
    module, gene_set, overlap = (np.asarray(each)[keep] for each in (counts.row, counts.col, counts.data))
    progress(0.4, "testing modules with gene sets")
    p_value = upper_tail(overlap, given.sizes[module], tested.sizes[gene_set], total)
    tests = int(fit.sum()) * len(tested)
    progress(0.8, "correcting for all tests")
    q_value = benjamini_hochberg(p_value, tests=tests)
    ranks = np.argsort(np.argsort(np.array(tested.names, object), kind="stable"), kind="stable")
    order = np.lexsort((ranks[gene_set], p_value, module))
    progress(1.0, "tested")
    return Enrichment(
        given,
        tested,
        settings,
        total,
        tests,
        locked(module[order].astype(np.int32)),
        locked(gene_set[order].astype(np.int32)),
        locked(overlap[order].astype(np.int32)),
        locked(p_value[order]),
        locked(q_value[order]),
        len(sets),
        int(small.sum()),
        int(large.sum()),
        int((~fit).sum()),
    )


def _within(modules: ModuleGenes, allowed: NDArray[np.bool_]) -> ModuleGenes:
    """Return the modules without their genes outside the background."""
    kept = [allowed[group] for group in modules.members]

    def cut(parts: tuple[NDArray[Any], ...]) -> tuple[NDArray[Any], ...]:
        return tuple(locked(part[keep]) for part, keep in zip(parts, kept, strict=True))

    confidence = None if modules.confidence is None else cut(modules.confidence)
    return ModuleGenes(modules.genes, modules.labels, cut(modules.members), confidence, modules.names, modules.trimmed)


def _nothing_to_test(modules: ModuleGenes, sets: GeneSets, settings: MeaningSettings, total: int) -> InputError:
    largest_set, largest_module = int(sets.sizes.max(initial=0)), int(modules.sizes.max(initial=0))
    if largest_module < settings.min_module:
        found = f"no module has {settings.min_module} genes in the background of {total:,}"
        return InputError(sets.label, found, "give sets or a background that know more of the network's genes")
    found = (
        f"no set has between {settings.min_size} and {settings.max_size} genes in the background of {total:,}; the "
        f"largest has {largest_set:,}"
    )
    return InputError(sets.label, found, "change --min-size or --max-size, or give an alias table")
