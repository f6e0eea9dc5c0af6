"""Modules against modules found the same way in null networks.

A p-value computed for a fixed set of genes is wrong for one that was searched for: the search finds dense spots in pure
chance too. So the same method is let loose on networks of the same degrees, and what it finds there is the measure.

Fair play: the observed modularity is that of one run of the method, with a seed of its own, and so is each draw; the
best of fifty runs would look better than single runs on nulls for no reason but the choice.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from analysis.compute import Compute, Task
from analysis.errors import SettingError
from analysis.methods import Method
from analysis.methods.randomness import child_seeds
from analysis.modules import Modules, score_modules, standard_modularity
from analysis.network import FloatArray, Network, locked
from analysis.progress import Progress, silent
from analysis.statistics import benjamini_hochberg
from analysis.study import NullDraws
from analysis.trust.nulls import rewire

SMALLEST = 3
LIKE_SIZE = 1.5
FEWEST = 200
SHARE_OF_ALL = 0.1
LEVEL = 0.05
PURPOSE = 5

IntegerArray = NDArray[np.int64]


@dataclass(frozen=True, eq=False)
class RunFigures:
    """What is kept of one run: figures of the partition and of each module; arrays of shape (modules,).

    Attributes
    ----------
    modularity : float
        Standard modularity; the extended one for a cover.
    size : int64 array
    evidence, internal_density, conductance : float64 arrays
        As in `analysis.modules.ModuleFigures`.
    """

    modularity: float
    size: IntegerArray
    evidence: FloatArray
    internal_density: FloatArray
    conductance: FloatArray


@dataclass(frozen=True, slots=True)
class ObservedTask:
    """Task: one run on the network itself."""

    method: Method
    seed: int

    def run(self, network: Network) -> RunFigures:
        """Run the method and keep the figures."""
        return figures_of_run(network, self.method, self.seed)


@dataclass(frozen=True, slots=True)
class NullTask:
    """Task: one run on a null network (`analysis.trust.nulls.rewire`)."""

    method: Method
    seed: int

    def run(self, network: Network) -> RunFigures:
        """Rewire, run the method and keep the figures."""
        rewiring, running = child_seeds(self.seed, 2)
        return figures_of_run(rewire(network, rewiring), self.method, running)


@dataclass(frozen=True, eq=False)
class ChanceModules:
    """The modules of three genes or more that were found in null networks, all arrays of shape (modules,).

    Attributes
    ----------
    nulls : int
        Number of null networks, those without such modules included.
    null : int64 array
        The null network that each comes from, ascending.
    size : int64 array
    evidence, internal_density, conductance : float64 arrays
    """

    nulls: int
    null: IntegerArray
    size: IntegerArray
    evidence: FloatArray
    internal_density: FloatArray
    conductance: FloatArray


@dataclass(frozen=True, eq=False)
class Significance:
    """A clustering against null networks.

    Attributes
    ----------
    draws : NullDraws
        Standard modularity: of one run on the network, and of one run on each null network.
    p_value, q_value : float64 arrays, shape (modules,)
        Of each module, see `compare_with_chance`; corrected over modules after Benjamini & Hochberg 1995. NaN for
        modules of fewer than three genes.
    reached, compared : int64 arrays, shape (modules,)
        Chance modules of like size that have as much evidence per member, out of so many compared; 0 for modules of
        fewer than three genes.
    chance : ChanceModules
        The modules found in the null networks.
    """

    draws: NullDraws
    p_value: FloatArray
    q_value: FloatArray
    reached: IntegerArray
    compared: IntegerArray
    chance: ChanceModules


def ignore(_draws: NullDraws) -> None:
    """Take no notice of the draws so far."""


def against_nulls(
    network: Network,
    method: Method,
    modules: Modules,
    *,
    nulls: int,
    seed: int,
    compute: Compute,
    progress: Progress = silent,
    on_draws: Callable[[NullDraws], None] = ignore,
) -> Significance:
    """Compare a clustering and each of its modules with what the same method finds in null networks.

    Parameters
    ----------
    network : Network
        With weights, the nulls have them shuffled over their rewired edges.
    method : Method
        The method that found the modules, with the same settings; any that has `find(network, seed=…)`.
    modules : Modules
        The modules to judge, a partition or a cover.
    nulls : int
        Number of null networks, 1 or more; a hundred give an honest p-value down to 0.01.
    seed : int
        Seed; the first nulls do not depend on how many there are.
    on_draws : callable
        Is given the draws so far whenever one has come, in order of coming.

    Raises
    ------
    SettingError
        Where `nulls` is below 1.
    """
    if nulls < 1:
        raise SettingError(f"the number of null networks is {nulls}; give 1 or more")
    own, *children = child_seeds(seed, nulls + 1, purpose=PURPOSE)
    tasks: list[Task] = [ObservedTask(method, own), *(NullTask(method, child) for child in children)]
    runs: dict[int, RunFigures] = {}
    phrase = f"{nulls} random networks with the same degrees"
    for position, figures in compute.stream(network, tasks, progress=progress, phrase=phrase):
        runs[position] = figures
        if 0 in runs and len(runs) > 1:
            on_draws(_draws(runs))
    chance = gather_chance([runs[position + 1] for position in range(nulls)])
    found = score_modules(network, modules)
    reached, compared = compare_with_chance(found.size, found.evidence, chance)
    p_value = np.where(found.size >= SMALLEST, (reached + 1) / (compared + 1), np.nan)
    return Significance(
        _draws(dict(sorted(runs.items()))),
        locked(p_value),
        locked(benjamini_hochberg(p_value)),
        locked(reached),
        locked(compared),
        chance,
    )


def figures_of_run(network: Network, method: Method, seed: int) -> RunFigures:
    """Run a method and keep the figures."""
    modules = method.find(network, seed=seed)
    figures = score_modules(network, modules)
    return RunFigures(
        standard_modularity(network, modules),
        figures.size,
        figures.evidence,
        figures.internal_density,
        figures.conductance,
    )


def gather_chance(runs: list[RunFigures]) -> ChanceModules:
    """Pool the modules of three genes or more from runs on null networks."""
    kept = [run.size >= SMALLEST for run in runs]
    chosen = list(zip(runs, kept, strict=True))
    return ChanceModules(
        len(runs),
        locked(np.repeat(np.arange(len(runs)), [int(keep.sum()) for keep in kept])),
        locked(np.concatenate([run.size[keep] for run, keep in chosen])),
        locked(np.concatenate([run.evidence[keep] for run, keep in chosen])),
        locked(np.concatenate([run.internal_density[keep] for run, keep in chosen])),
        locked(np.concatenate([run.conductance[keep] for run, keep in chosen])),
    )


def compare_with_chance(
    size: IntegerArray, evidence: FloatArray, chance: ChanceModules
) -> tuple[IntegerArray, IntegerArray]:
    """Count, for each module, the chance modules of like size that have as much evidence per member.

    Like size is nearest in size, in the ratio: at least 200 chance modules and a tenth of all where so many lie within
    a factor of 1.5, and all of equal size together. Every null network is heard: one without a module in that
    neighbourhood is stood for by its module nearest in size. If that one is unlike in size by more than a factor of
    1.5, it has to reach the evidence per member, and the evidence in all as well; and a null network in which no module
    was found counts as one that did not reach. Hence ``p = (reached + 1) / (compared + 1)`` (Davison & Hinkley 1997,
    eq. 4.11) never falls below one in the number of nulls and one, except where many chance modules of like size
    support it.

    Parameters
    ----------
    size, evidence : arrays, shape (modules,)
        Of the modules to judge; those of fewer than three genes get 0 and 0.

    Returns
    -------
    reached, compared : int64 arrays, shape (modules,)
    """
    reached, compared = np.zeros(len(size), np.int64), np.zeros(len(size), np.int64)
    by_size = np.argsort(chance.size, kind="stable")
    found_any = np.bincount(chance.null, minlength=chance.nulls) > 0
    for each in np.unique(size[size >= SMALLEST]):
        which = np.flatnonzero(size == each)
        wanted = evidence[which] * (1 - 1e-12)  # equal modules may differ in the last digit of a sum
        near = by_size[_neighbourhood(int(each), chance.size[by_size])]
        ranked = np.sort(chance.evidence[near])
        reached[which] = len(ranked) - np.searchsorted(ranked, wanted, side="left")
        heard = np.bincount(chance.null[near], minlength=chance.nulls) > 0
        reached[which] += _stand_ins(int(each), wanted, np.flatnonzero(found_any & ~heard), chance)
        compared[which] = len(near) + int((~heard).sum())
    return reached, compared


def _neighbourhood(size: int, ascending: IntegerArray) -> slice:
    """Return the part of the ascending sizes that counts as like size."""
    if not len(ascending):
        return slice(0, 0)
    present, counts = np.unique(ascending, return_counts=True)
    distance = np.abs(np.log(present / size))
    order = np.argsort(distance, kind="stable")
    enough = max(FEWEST, round(SHARE_OF_ALL * len(ascending)))
    needed = int(np.searchsorted(np.cumsum(counts[order]), enough))
    reach = min(float(distance[order][min(needed, len(order) - 1)]), np.log(LIKE_SIZE)) + 1e-9
    low, high = np.searchsorted(ascending, [size * np.exp(-reach), size * np.exp(reach)])
    return slice(int(low), int(high))


def _stand_ins(size: int, wanted: FloatArray, absent: IntegerArray, chance: ChanceModules) -> IntegerArray:
    """Count the null networks without a module of like size whose nearest one reaches what is wanted."""
    reached = np.zeros(len(wanted), np.int64)
    for null in absent:
        own = slice(*np.searchsorted(chance.null, [null, null + 1]))
        ratio = chance.size[own] / size
        nearest = np.lexsort((-chance.evidence[own], np.abs(np.log(ratio))))[0]
        unlike = ratio[nearest] < 1 / LIKE_SIZE
        reached += chance.evidence[own][nearest] >= wanted * (1 / ratio[nearest] if unlike else 1.0)
    return reached


def verdict(significance: Significance) -> str:
    """Say in one sentence whether the network and its modules are more than chance gives; the worst comes first."""
    tested = ~np.isnan(significance.q_value)
    firm, total = int((significance.q_value[tested] < LEVEL).sum()), int(tested.sum())
    whole, beyond = _whole(significance.draws)
    chance = "more cohesive than modules of like size found by chance"
    if firm:
        part = (
            f"{'and' if beyond else 'though'} {firm} of its {_modules(total)} {'is' if firm == 1 else 'are'} {chance}"
        )
    elif total:
        part = f"{'but' if beyond else 'and'} none of its {_modules(total)} is {chance}"
    else:
        part = f"{'but' if beyond else 'and'} it has no module of three genes or more to judge"
    return f"{whole}, {part}."


def _whole(draws: NullDraws) -> tuple[str, bool]:
    """Return what the draws say of the network as a whole, and whether it is more than chance."""
    count = len(draws.draws)
    figures = f"modularity {draws.observed:.3f}, by chance {draws.draws.mean():.3f}, p = {draws.p_value:.2g}"
    if draws.p_value <= LEVEL:
        return f"This network is more modular than random networks with the same degrees ({figures})", True
    if np.all(draws.draws < draws.observed):
        few = f"all {count} random networks" if count > 1 else "the one random network"
        return (
            f"This network is more modular than {few} with its degrees, too few to tell it from chance ({figures})",
            False,
        )
    return f"This network is no more modular than random networks with the same degrees ({figures})", False


def _modules(count: int) -> str:
    return f"{count} module{'' if count == 1 else 's'} of three genes or more"


def _draws(runs: dict[int, RunFigures]) -> NullDraws:
    others = [figures.modularity for position, figures in runs.items() if position > 0]
    return NullDraws(runs[0].modularity, locked(np.array(others, np.float64)))
