"""The harvest: modules taken each at its own resolution from a whole sweep, best supported first."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import asdict, dataclass, replace

import numpy as np
from numpy.typing import NDArray

from analysis.compute import Compute
from analysis.methods.randomness import child_seeds
from analysis.modules import Modules
from analysis.network import FloatArray, IntArray, Network, locked
from analysis.progress import Progress, portion, silent
from analysis.trust.chains import ChainTask, LabelTable
from analysis.trust.gathering import add_genes, chance_shares, order_score, take
from analysis.trust.harvest_result import FULL, NULL_COPIES, QUICK, Harvest, HarvestSettings
from analysis.trust.module_pool import ModulePool, pool_modules
from analysis.trust.support import CopySettings, ModuleSupport, copy_tasks, holding, run_tasks, support_from

__all__ = ["FULL", "QUICK", "Harvest", "HarvestSettings", "harvest_tasks", "run_harvest"]

_NULLS = 31  # purpose of child seeds


def harvest_tasks(settings: HarvestSettings) -> list[ChainTask]:
    """Return all chains: for the network, then for each null network, the seeds and then the noisy copies."""
    copies = CopySettings(settings.steps, settings.copies, seed=settings.seed)
    tasks = run_tasks(copies, settings.seeds) + copy_tasks(copies)
    of_null = replace(copies, copies=NULL_COPIES)
    for null_seed in child_seeds(settings.seed, settings.nulls, purpose=_NULLS):
        tasks += run_tasks(of_null, 1, null_seed) + copy_tasks(of_null, null_seed)
    return tasks


def run_harvest(network: Network, settings: HarvestSettings, compute: Compute, progress: Progress = silent) -> Harvest:
    """Harvest a network: take modules each at its own resolution, by support, down to where chance begins.

    The rule, with the sources of its parts; the whole was chosen on networks with known modules, and tried on others:

    1. *Sweep.* Chains of Leiden runs (Traag, Waltman & van Eck 2019) on the constant Potts model (Traag, Van Dooren &
       Nesterov 2011), from fine to coarse, resolutions from 0.01 to 0.9; 24 with three seeds (`FULL`) or 12 with one
       (`QUICK`).
    2. *Pool.* All distinct modules of three genes or more.
    3. *Support* of each: `stability`, the mean best-match Jaccard (Hennig 2007) over noisy copies and over all
       resolutions, copies with 20 % of the edges left out (three in five) or rewired with degrees kept (two in five);
       times `evidence` per member (after Traag, Krings & Van Dooren 2013).
    4. *Take.* Down the order of ``support · size^0.1``, take a module if at most a quarter of its genes are in
       modules taken before.
    5. *Cut.* Steps 1 to 4 on degree-preserving null networks (Maslov & Sneppen 2002) with one seed and five copies.
       Keep modules down to the lowest ``support · size^0.1`` at which the mean number from a null is at most `level`
       times the network's own: a false discovery rate by permutation (Storey & Tibshirani 2003, the share of true
       nulls set to 1). Optimistic: at 0.1 about 0.17 were wrong.
    6. *Add* a gene `u` to a module `C` of the kept ones where its edges into `C` exceed chance,
       ``n · P[Bin(k_u, K_C/2m) ≥ k_uC] < 0.05`` (`n` genes, `m` edges, `k_u` its degree, `K_C` summed degree of `C`),
       and reach 0.4 of the density of `C`: ``k_uC ≥ 0.4 · density · |C|`` (edges counted, weights not used).

    Genes in no harvested module are left out, and counted. Of two modules that become equal in step 6 the first taken
    stays.
    """
    tasks = harvest_tasks(settings)
    tables: list[LabelTable] = [np.zeros((0, 0), np.int32)] * len(tasks)
    chains = compute.stream(network, tasks, progress=portion(progress, 0.0, 0.85), phrase="harvest over resolutions")
    for position, table in chains:
        tables[position] = table
    own = settings.seeds + settings.copies
    report = portion(progress, 0.85, 1.0)
    crop = _gather(network, settings, tables[:own], settings.seeds, portion(report, 0.0, 0.5))
    null_seeds = [task.null_seed for task in tasks[own :: 1 + NULL_COPIES] if task.null_seed is not None]
    null_scores = _harvest_nulls(network, settings, null_seeds, tables[own:], portion(report, 0.5, 1.0))
    shares = chance_shares(crop.scores, null_scores) if null_seeds else np.full(len(crop.taken), np.nan)
    kept = shares <= settings.level if settings.cut else np.ones(len(crop.taken), bool)
    report(1.0, "scoring the modules")
    return _assemble(network, settings, crop, kept, shares)


@dataclass(frozen=True, eq=False)
class _Crop:
    """Pooled modules, their figures, and which were taken, best first."""

    pool: ModulePool
    figures: ModuleSupport
    taken: NDArray[np.int64]

    @property
    def scores(self) -> FloatArray:
        """Score of those taken, by which they were; falling."""
        return order_score(self.figures.support, self.pool.sizes)[self.taken]


def _gather(
    network: Network, settings: HarvestSettings, tables: Sequence[LabelTable], seeds: int, progress: Progress
) -> _Crop:
    """Pool, score and take: steps 2 to 4."""
    resolutions = CopySettings(settings.steps).resolutions
    pool = pool_modules(network, tables[:seeds], resolutions)
    profile = holding(pool.members, tables[seeds:], lambda fraction: progress(fraction, "scoring the modules"))
    figures = support_from(pool.evidence(network), profile, resolutions)
    return _Crop(pool, figures, take(pool.members, figures.support, network.node_count))


def _harvest_nulls(
    network: Network,
    settings: HarvestSettings,
    null_seeds: Sequence[int],
    tables: Sequence[LabelTable],
    progress: Progress,
) -> list[FloatArray]:
    """Return the scores of the modules taken from each null network."""
    from analysis.trust.nulls import rewire

    chains = 1 + NULL_COPIES
    found = []
    for place, null_seed in enumerate(null_seeds):
        report = portion(progress, place / len(null_seeds), (place + 1) / len(null_seeds))
        own = tables[place * chains : (place + 1) * chains]
        found.append(_gather(rewire(network, null_seed), settings, own, 1, report).scores)
    return found


def _assemble(
    network: Network, settings: HarvestSettings, crop: _Crop, kept: NDArray[np.bool_], shares: FloatArray
) -> Harvest:
    chosen = crop.taken[kept]
    cores = [crop.pool.members[module] for module in chosen.tolist()]
    grown = add_genes(network, cores)
    order = _distinct_largest_first(grown)
    chosen, share = chosen[order], shares[kept][order]
    figures = crop.figures
    rank = np.empty(len(order), np.int64)
    rank[np.argsort(order, kind="stable")] = np.arange(1, len(order) + 1)  # `chosen` was in the order of taking
    modules = Modules.from_members(
        network.node_count,
        [grown[place] for place in order],
        method="harvest",
        settings=asdict(settings),
        seed=settings.seed,
    )
    return Harvest(
        settings,
        modules,
        tuple(locked(cores[place]) for place in order),
        ModuleSupport(
            locked(figures.stability[chosen]),
            locked(figures.evidence[chosen]),
            locked(figures.support[chosen]),
            locked(figures.resolution_from[chosen]),
            locked(figures.resolution_to[chosen]),
        ),
        locked(crop.pool.resolution[chosen]),
        locked(rank),
        locked(share),
        len(crop.pool.members),
        len(crop.taken),
    )


def _distinct_largest_first(groups: Sequence[IntArray]) -> list[int]:
    """Return positions in the order that `Modules` gives them; of equal groups the first alone."""
    first: dict[bytes, int] = {}
    for place, group in enumerate(groups):
        first.setdefault(group.tobytes(), place)
    return sorted(first.values(), key=lambda place: (-len(groups[place]), groups[place].tolist()))
