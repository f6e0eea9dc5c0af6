"""Support of a module: how well it holds on noisy copies over a sweep, times how dense it is for its degrees."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np

from analysis.errors import SettingError
from analysis.methods.randomness import child_seeds
from analysis.modules import Modules, score_modules
from analysis.network import FloatArray, IntArray, Network
from analysis.trust.chains import ChainTask, LabelTable
from analysis.trust.matching import DISSOLVED, matcher, unbroken_range
from analysis.trust.noise import LEFT_OUT, REWIRED, Noise

LEFT_OUT_SHARE = 0.6  # of the copies; the others are rewired
_RUNS, _COPIES, _NULL_RUNS, _NULL_COPIES = 21, 22, 23, 24  # purposes of child seeds


@dataclass(frozen=True)
class CopySettings:
    """The noisy copies over which stability is measured, and the resolutions of their chains.

    Attributes
    ----------
    steps : int
        Resolutions of the constant Potts model, from `low` to `high`, even on a log scale.
    copies : int
        Noisy copies, one chain each: of five, three with edges left out and two with edges rewired.
    noise : float
        Share of edges left out or rewired in each.
    seed : int
        Seed of everything random.
    """

    steps: int = 12
    copies: int = 5
    noise: float = 0.2
    low: float = 0.01
    high: float = 0.9
    seed: int = 1

    def __post_init__(self) -> None:
        if self.steps < 2 or self.copies < 1 or not 0 < self.low < self.high:
            raise SettingError(
                "support needs two resolutions or more, from above 0 upwards, and one noisy copy or more"
            )

    @property
    def resolutions(self) -> FloatArray:
        """Ascending resolutions, shape (steps,)."""
        grid: FloatArray = np.geomspace(self.low, self.high, self.steps)
        return grid


def run_tasks(settings: CopySettings, runs: int, null_seed: int | None = None) -> list[ChainTask]:
    """Return chains on the network itself (or on a null network), one a seed."""
    purpose, seed = (_RUNS, settings.seed) if null_seed is None else (_NULL_RUNS, null_seed)
    grid = tuple(settings.resolutions.tolist())
    return [ChainTask("cpm", grid, child, null_seed=null_seed) for child in child_seeds(seed, runs, purpose=purpose)]


def copy_tasks(settings: CopySettings, null_seed: int | None = None) -> list[ChainTask]:
    """Return the chains on noisy copies of the network (or of a null network); the same copies for the same seed."""
    purpose, seed = (_COPIES, settings.seed) if null_seed is None else (_NULL_COPIES, null_seed)
    grid = tuple(settings.resolutions.tolist())
    children = child_seeds(seed, 2 * settings.copies, purpose=purpose)
    left_out = round(LEFT_OUT_SHARE * settings.copies)
    tasks = []
    for copy in range(settings.copies):
        noise = Noise(settings.noise, children[2 * copy], LEFT_OUT if copy < left_out else REWIRED)
        tasks.append(ChainTask("cpm", grid, children[2 * copy + 1], noise, null_seed))
    return tasks


@dataclass(frozen=True, eq=False)
class ModuleSupport:
    """Support and its parts, all arrays of shape (modules,).

    Attributes
    ----------
    stability : float64 array
        Mean best-match Jaccard over noisy copies and over all resolutions (Hennig 2007).
    evidence : float64 array
        Nats per member against the configuration model; see `analysis.modules.evidence_per_member`.
    support : float64 array
        ``stability · evidence``. It orders modules by how likely they are real; it is no probability, and its level
        does not carry over from one network to another as well as its order. Groups of a network that is clustered
        but has no modules (points in space, linked when near) get support too: no figure of a single module tells
        them apart.
    resolution_from, resolution_to : float64 arrays
        Range of resolution (constant Potts model) around its best match over which the module holds on noisy copies:
        mean best-match Jaccard above 0.5. NaN where nowhere.
    """

    stability: FloatArray
    evidence: FloatArray
    support: FloatArray
    resolution_from: FloatArray
    resolution_to: FloatArray


def holding(
    members: Sequence[IntArray], tables: Sequence[LabelTable], step_done: Callable[[float], None] | None = None
) -> FloatArray:
    """Return each group's mean best-match Jaccard over copies at each resolution, shape (groups, resolutions).

    Parameters
    ----------
    members : sequence of int32 arrays
        Node indices of each group.
    tables : sequence of int32 arrays, each of shape (resolutions, nodes)
        Labels of the chains on noisy copies.
    step_done : callable, optional
        Receives the fraction done.
    """
    steps = len(tables[0])
    match = matcher(members, steps * len(tables))
    profile = np.zeros((len(members), steps))
    for step in range(steps):
        for table in tables:
            profile[:, step] += match(table[step])
        if step_done is not None:
            step_done((step + 1) / steps)
    return profile / len(tables)


def support_from(evidence: FloatArray, profile: FloatArray, resolutions: FloatArray) -> ModuleSupport:
    """Put support together from evidence and `holding`."""
    stability = profile.mean(axis=1)
    low, high = unbroken_range(profile, resolutions, DISSOLVED)
    return ModuleSupport(stability, evidence, stability * evidence, low, high)


def score_support(network: Network, modules: Modules, tables: Sequence[LabelTable], grid: FloatArray) -> ModuleSupport:
    """Return the support of the modules of any method, partition or cover.

    Parameters
    ----------
    tables : sequence of int32 arrays, each of shape (resolutions, nodes)
        Results of `copy_tasks` on this network.
    grid : float64 array, shape (resolutions,)
        `CopySettings.resolutions`.
    """
    return support_from(score_modules(network, modules).evidence, holding(modules.members, tables), grid)
