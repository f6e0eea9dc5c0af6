"""Times enrichment at full size: 500 modules with 10,000 gene sets on 20,000 genes.

Run from the top of the repository: `python -m tests.benchmarks.bench_meaning`. The tests are compared with
`scipy.stats.hypergeom.sf` in the same process, on a sample, so that a slow machine does not matter.
"""

from __future__ import annotations

import time

import numpy as np
from scipy.stats import hypergeom

from analysis.gene_sets import GeneSets
from analysis.meaning import MeaningSettings, ModuleGenes, enrich, enrichment_table, spread_of
from analysis.meaning.hypergeometric import upper_tail
from analysis.network import locked

GENES, MODULES, SETS = 20_000, 500, 10_000
SAMPLED = 20_000
FASTER = 50


def random_modules(generator: np.random.Generator, genes: tuple[str, ...], count: int = MODULES) -> ModuleGenes:
    """Return a partition of the genes into modules of even size."""
    parts = np.array_split(generator.permutation(len(genes)), count)
    return ModuleGenes(
        genes,
        tuple(f"M{position + 1}" for position in range(count)),
        tuple(locked(np.sort(part).astype(np.int32)) for part in parts),
    )


def random_sets(generator: np.random.Generator, genes: tuple[str, ...], count: int = SETS) -> GeneSets:
    """Return sets of 5 to 500 genes, most of them small."""
    sizes = np.exp(generator.uniform(np.log(5), np.log(500), count)).astype(int)
    return GeneSets(
        genes,
        tuple(f"set {position}" for position in range(count)),
        ("",) * count,
        tuple(locked(np.sort(generator.choice(len(genes), size, replace=False)).astype(np.int32)) for size in sizes),
    )


def main() -> None:
    """Print the times."""
    generator = np.random.default_rng(1)
    genes = tuple(f"g{position:05d}" for position in range(GENES))
    modules, sets = random_modules(generator, genes), random_sets(generator, genes)
    started = time.perf_counter()
    enrichment = enrich(modules, sets, MeaningSettings())
    seconds = time.perf_counter() - started
    print(f"{enrichment.tests:,} tests, {len(enrichment.module):,} with a common gene: {seconds:.2f} s")
    started = time.perf_counter()
    spread_of(enrichment)
    print(f"spread over modules: {time.perf_counter() - started:.2f} s")
    started = time.perf_counter()
    enrichment_table(enrichment)
    print(f"table with gene lists: {time.perf_counter() - started:.2f} s")
    sizes = modules.sizes[enrichment.module], enrichment.sets.sizes[enrichment.gene_set]
    background = enrichment.background
    started = time.perf_counter()
    upper_tail(enrichment.overlap, *sizes, background)
    ours = (time.perf_counter() - started) / len(enrichment.module)
    some = generator.choice(len(enrichment.module), SAMPLED, replace=False)
    started = time.perf_counter()
    theirs_values = hypergeom.sf(enrichment.overlap[some] - 1, background, sizes[1][some], sizes[0][some])
    theirs = (time.perf_counter() - started) / SAMPLED
    largest = float(np.max(np.abs(enrichment.p_value[some] / theirs_values - 1)))
    print(f"test alone: {theirs / ours:.0f} times as fast as scipy, largest relative difference {largest:.1e}")
    assert seconds < 10
    assert theirs / ours >= FASTER
    assert largest < 1e-9


if __name__ == "__main__":
    main()
