"""What the same method finds in null networks, and how modules compare with it."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from analysis.methods import Leiden, Method
from analysis.methods.leiden import UNTIL_STABLE
from analysis.methods.randomness import child_seeds
from analysis.modules import score_modules, standard_modularity
from analysis.network import FloatArray, Network, locked
from analysis.trust.chance_scale import ChanceModules, ChanceScale, IntegerArray
from analysis.trust.nulls import rewire

SMALLEST = 3
WORTH_EDGES = 10_000
PASSES = 10


@dataclass(frozen=True, eq=False)
class RunFigures:
    """What is kept of one run: figures of the partition and of each module; arrays of shape (modules,).

    Attributes
    ----------
    modularity : float
        Standard modularity; the extended one for a cover.
    size : int64 array
    strength, evidence, internal_density, conductance : float64 arrays
        As in `analysis.modules.ModuleFigures`.
    """

    modularity: float
    size: IntegerArray
    strength: FloatArray
    evidence: FloatArray
    internal_density: FloatArray
    conductance: FloatArray


@dataclass(frozen=True, slots=True)
class ObservedTask:
    """Task: the best of some runs on the network itself."""

    method: Method
    seed: int
    runs: int = 1

    def run(self, network: Network) -> RunFigures:
        """Run the method and keep the figures."""
        return figures_of_best(network, self.method, child_seeds(self.seed, self.runs))


@dataclass(frozen=True, slots=True)
class NullTask:
    """Task: the best of some runs on a null network (`analysis.trust.nulls.rewire`)."""

    method: Method
    seed: int
    runs: int = 1

    def run(self, network: Network) -> RunFigures:
        """Rewire, run the method and keep the figures."""
        rewiring, *running = child_seeds(self.seed, 1 + self.runs)
        return figures_of_best(rewire(network, rewiring), self.method, running)


def fair_runs(network: Network, runs: int) -> int:
    """Return from how many runs the best is taken on each null network, where the modules are the best of `runs`.

    As many, where the network is small: there the best of many runs looks better than a single one by chance alone. The
    difference fades as networks grow (it cannot be seen at 6,000 edges), so that the runs are held to 10,000 edges'
    worth, and one run will do beyond.
    """
    return max(1, min(runs, WORTH_EDGES // max(network.edge_count, 1)))


def bounded(method: Method, network: Network, passes: int = PASSES) -> Method:
    """Return the form of a method that can be run on null networks in reasonable time.

    Leiden *until stable* takes many more passes where there are no modules: 10 s, against 0.5 s for two passes, on a
    null network of 290,000 edges. Ten passes come within two per cent of its modularity; two are further off, enough to
    make the modules of a random network look better than chance. Networks of 10,000 edges or fewer, and all other
    methods, are left as they are.
    """
    if isinstance(method, Leiden) and method.iterations == UNTIL_STABLE and network.edge_count > WORTH_EDGES:
        return replace(method, iterations=passes)
    return method


def figures_of_best(network: Network, method: Method, seeds: Sequence[int]) -> RunFigures:
    """Run a method once for each seed and keep the figures of the run with the best quality, of equals the first."""
    found = [method.find(network, seed=seed) for seed in seeds]
    modules = max(found, key=lambda each: each.quality)
    figures = score_modules(network, modules)
    return RunFigures(
        standard_modularity(network, modules),
        figures.size,
        figures.strength,
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
        locked(np.concatenate([run.strength[keep] for run, keep in chosen])),
        locked(np.concatenate([run.evidence[keep] for run, keep in chosen])),
        locked(np.concatenate([run.internal_density[keep] for run, keep in chosen])),
        locked(np.concatenate([run.conductance[keep] for run, keep in chosen])),
    )


def compare_with_chance(
    size: IntegerArray, strength: FloatArray, evidence: FloatArray, chance: ChanceModules
) -> tuple[FloatArray, IntegerArray, int]:
    """Compare modules with those found by chance, allowing for size and for the strength of their members.

    Like size are the 50 chance modules nearest in size, in the ratio, and all of equal size together. Among them
    evidence per member falls in a straight line with the logarithm of the mean strength of a member, by its formula;
    the line is fitted by least squares, and not drawn out beyond them. The distance of a module is its evidence less
    what the line gives, in standard deviations from the line. Chance modules are put on the same scale, each without
    itself. A module then counts as reached by every chance module, of whatever size, that stands as far out. So its
    p-value is ``(reached + 1) / (compared + 1)`` (Davison & Hinkley 1997, eq. 4.11), and a module of a size that chance
    never yields is measured by the largest, or smallest, that it does yield.

    A null network in which no module was found is heard as well: it counts as one that did not reach.

    The p-value is honest for the modules of a random network taken together. Nulls keep degrees and nothing else:
    pieces of a region that is denser than its surroundings, yet without modules, may pass.

    Parameters
    ----------
    size, strength, evidence : arrays, shape (modules,)
        Of the modules to judge, as in `analysis.modules.ModuleFigures`; those of fewer than three genes are not judged:
        NaN and 0.

    Returns
    -------
    distance : float64 array, shape (modules,)
        In standard deviations of like chance modules; infinite where chance yields nothing that varies.
    reached : int64 array, shape (modules,)
    compared : int
        The same for all modules: the chance modules and the null networks without any.
    """
    scale = ChanceScale.of(chance)
    distance, reached = np.full(len(size), np.nan), np.zeros(len(size), np.int64)
    judged = np.flatnonzero(size >= SMALLEST)
    distance[judged] = scale.distance(size[judged], strength[judged], evidence[judged])
    ranked = np.sort(scale.distance(chance.size, chance.strength, chance.evidence, own=True))
    slack = np.nan_to_num(1e-9 * np.abs(distance[judged]), posinf=0.0)  # equal modules may differ in the last digits
    reached[judged] = len(ranked) - np.searchsorted(ranked, distance[judged] - slack, side="left")
    empty = chance.nulls - len(np.unique(chance.null))
    return distance, reached, len(ranked) + empty
