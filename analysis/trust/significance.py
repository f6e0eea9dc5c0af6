"""Modules against modules found the same way in null networks.

A p-value computed for a fixed set of genes is wrong for one that was searched for: the search finds dense spots in pure
chance too. So the same method is let loose on networks of the same degrees, and what it finds there is the measure.

Fair play: the best of fifty runs looks better than a single run for no reason but the choice. So the observed
modularity is not that of the modules shown but comes from runs of its own, exactly as many as each null network gets.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from analysis.compute import Compute, Task
from analysis.errors import SettingError
from analysis.methods import Method
from analysis.methods.randomness import child_seeds
from analysis.modules import Modules, score_modules
from analysis.network import FloatArray, Network, locked
from analysis.progress import Progress, silent
from analysis.statistics import benjamini_hochberg
from analysis.study import NullDraws
from analysis.trust.chance import (
    SMALLEST,
    NullTask,
    ObservedTask,
    RunFigures,
    bounded,
    compare_with_chance,
    fair_runs,
    gather_chance,
)
from analysis.trust.chance_scale import ChanceModules, IntegerArray

LEVEL = 0.05
PURPOSE = 5


@dataclass(frozen=True, eq=False)
class Significance:
    """A clustering against null networks.

    Attributes
    ----------
    draws : NullDraws
        Standard modularity on the network and on each null network, from runs alike in number.
    p_value, q_value : float64 arrays, shape (modules,)
        Of each module, see `compare_with_chance`; corrected over modules after Benjamini & Hochberg 1995. NaN for
        modules of fewer than three genes.
    distance : float64 array, shape (modules,)
        How far its evidence lies above that of like-sized chance modules, in their standard deviations; NaN for modules
        of fewer than three genes.
    reached : int64 array, shape (modules,)
        Chance modules that stand as far out among those of like size.
    compared : int
        Out of so many.
    chance : ChanceModules
        The modules found in the null networks.
    """

    draws: NullDraws
    p_value: FloatArray
    q_value: FloatArray
    distance: FloatArray
    reached: IntegerArray
    compared: int
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
    chosen_from: int = 1,
    progress: Progress = silent,
    on_draws: Callable[[NullDraws], None] = ignore,
) -> Significance:
    """Compare a clustering and each of its modules with what the same method finds in null networks.

    Parameters
    ----------
    network : Network
        With weights, the nulls have them shuffled over their rewired edges.
    method : Method
        The method that found the modules, with the same settings; any that has `find(network, seed=…)`. Leiden until
        stable is held to ten passes on large networks, on the nulls and on the network alike
        (`analysis.trust.chance.bounded`).
    modules : Modules
        The modules to judge, a partition or a cover.
    nulls : int
        Number of null networks, 1 or more; a hundred give an honest p-value down to 0.01.
    seed : int
        Seed; the first nulls do not depend on how many there are.
    chosen_from : int
        Number of runs of which the modules are the best; see `analysis.trust.chance.fair_runs`.
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
    form, each = bounded(method, network), fair_runs(network, chosen_from)
    tasks: list[Task] = [ObservedTask(form, own, each), *(NullTask(form, child, each) for child in children)]
    runs: dict[int, RunFigures] = {}
    phrase = f"{nulls} random networks with the same degrees"
    for position, figures in compute.stream(network, tasks, progress=progress, phrase=phrase):
        runs[position] = figures
        if 0 in runs and len(runs) > 1:
            on_draws(_draws(runs))
    chance = gather_chance([runs[position + 1] for position in range(nulls)])
    found = score_modules(network, modules)
    distance, reached, compared = compare_with_chance(found.size, found.strength, found.evidence, chance)
    p_value = np.where(found.size >= SMALLEST, (reached + 1) / (compared + 1), np.nan)
    return Significance(
        _draws(dict(sorted(runs.items()))),
        locked(p_value),
        locked(benjamini_hochberg(p_value)),
        locked(distance),
        locked(reached),
        compared,
        chance,
    )


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
