"""The portrait of a network: what kind of network it is, and whether that explains the picture."""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable, Mapping
from dataclasses import dataclass, field, replace
from typing import Any

import numpy as np

from analysis.compute import Compute, InProcess, Task
from analysis.errors import SettingError
from analysis.methods.randomness import child_seeds
from analysis.network import Network
from analysis.portrait.degree_distribution import DegreeDistribution, DegreeTask, FitSamplesTask
from analysis.portrait.distances import Distances, Searches, SearchTask, gather_distances, sources_to_draw
from analysis.portrait.hierarchy import Hierarchy, hierarchy
from analysis.portrait.hubs import Hubs, HubTask, gather_hubs
from analysis.portrait.summary import (
    DEGREES,
    UNIFORM,
    FiguresTask,
    Measured,
    OwnFiguresTask,
    OwnMeasured,
    Summary,
    gather_nulls,
)
from analysis.portrait.tolerance import (
    BETWEENNESS,
    DEGREE,
    RANDOM,
    RECOMPUTED,
    Removals,
    RemovalTask,
    Tolerance,
    gather_curves,
    is_betweenness_affordable,
)
from analysis.progress import Progress, portion, silent

PURPOSE = 11
SEARCH_PARTS = 4
SAMPLES_A_TASK = 10
PHRASE = "portrait of the network"
QUICK = (OwnFiguresTask, DegreeTask, HubTask, SearchTask, RemovalTask)


@dataclass(frozen=True)
class PortraitSettings:
    """What decides a portrait, beside the network.

    Attributes
    ----------
    nulls : int
        Null networks of each kind; 0 for none.
    draws : int
        Random orders of removal.
    samples : int
        Samples that test the fit of the power law, in tens; 0 for none.
    seed : int
    """

    nulls: int = 20
    draws: int = 20
    samples: int = 100
    seed: int = 1

    def __post_init__(self) -> None:
        if self.nulls < 0 or self.samples < 0 or self.seed < 0 or self.draws < 1:
            raise SettingError("--nulls, --samples and --seed must be at least 0, --draws at least 1")


@dataclass(frozen=True, eq=False)
class Portrait:
    """A portrait, as far as it has come; a section that has not is None.

    Attributes
    ----------
    summary : Summary or None
    degrees : DegreeDistribution or None
    hierarchy : Hierarchy or None
    distances : Distances or None
    tolerance : Tolerance or None
    hubs : Hubs or None
    complete : bool
        Whether everything asked for has come.
    """

    settings: PortraitSettings
    summary: Summary | None = None
    degrees: DegreeDistribution | None = None
    hierarchy: Hierarchy | None = None
    distances: Distances | None = None
    tolerance: Tolerance | None = None
    hubs: Hubs | None = None
    complete: bool = False

    def sentences(self) -> list[str]:
        """Return one sentence a section, those of the whole first."""
        told = self.summary.sentences() if self.summary else []
        for section in (self.degrees, self.hierarchy, self.distances, self.tolerance, self.hubs):
            told += [section.sentence()] if section is not None else []
        return [*told, self.hubs.study_sentence()] if self.hubs and self.hubs.studied is not None else told


def ignore(_portrait: Portrait) -> None:
    """Take no notice of the sections so far."""


@dataclass(eq=False)
class _Sitting:
    """Collects results of tasks and keeps the portrait that they make so far."""

    network: Network
    portrait: Portrait
    publications: Mapping[str, float] | None
    seed: int
    own: OwnMeasured | None = None
    hubs: Any = None
    nulls: dict[int, Measured] = field(default_factory=dict)
    searches: dict[int, Searches] = field(default_factory=dict)
    removals: dict[int, Removals] = field(default_factory=dict)
    samples: dict[int, Any] = field(default_factory=dict)

    def take(self, position: int, task: Task, result: Any, left: Mapping[type, int]) -> bool:
        """Take a result; return whether the portrait shows more than before."""
        return _TAKERS[type(task)](self, position, result, left[type(task)])

    def put(self, **sections: Any) -> bool:
        self.portrait = replace(self.portrait, **sections)
        return True

    def take_own(self, _position: int, result: OwnMeasured, _left: int) -> bool:
        self.own = result
        weighted = self.network.weights is not None
        self.put(
            summary=self._with_path(Summary(result.figures, weighted, {}, {})),
            hierarchy=hierarchy(self.network, result.local, self.seed),
        )
        return self._list_hubs()

    def take_nulls(self, position: int, result: Measured, left: int) -> bool:
        self.nulls[position] = result
        if left:
            return False
        found = [self.nulls[key] for key in sorted(self.nulls)]
        by_degree = [each.by_degree for each in found if each.by_degree is not None]
        if self.portrait.hierarchy is not None and by_degree:
            self.put(hierarchy=self.portrait.hierarchy.with_nulls(np.mean(by_degree, axis=0)))
        nulls = {kind: gather_nulls(found, kind) for kind in (DEGREES, UNIFORM)}
        summary = self.portrait.summary
        if summary is None:
            return False
        return self.put(summary=replace(summary, degrees=nulls[DEGREES], uniform=nulls[UNIFORM]))

    def take_degrees(self, _position: int, result: DegreeDistribution, _left: int) -> bool:
        return self.put(degrees=result)

    def take_hubs(self, _position: int, result: Any, _left: int) -> bool:
        self.hubs = result
        return self._list_hubs()

    def take_searches(self, position: int, result: Searches, left: int) -> bool:
        self.searches[position] = result
        if left:
            return False
        found = [self.searches[key] for key in sorted(self.searches)]
        self.put(distances=gather_distances(self.network, found))
        if self.portrait.summary is not None:
            self.put(summary=self._with_path(self.portrait.summary))
        return True

    def take_removals(self, position: int, result: Removals, left: int) -> bool:
        self.removals[position] = result
        if left:
            return False
        return self.put(tolerance=gather_curves(self.network, [self.removals[key] for key in sorted(self.removals)]))

    def take_samples(self, position: int, result: Any, left: int) -> bool:
        self.samples[position] = result
        if left or self.portrait.degrees is None:
            return False
        distances = np.concatenate([self.samples[key] for key in sorted(self.samples)])
        return self.put(degrees=self.portrait.degrees.judged(distances)) if len(distances) else False

    def _list_hubs(self) -> bool:
        if self.hubs is not None and self.own is not None:
            self.put(hubs=gather_hubs(self.network, self.hubs, self.own.local, self.own.core, self.publications))
        return True

    def _with_path(self, summary: Summary) -> Summary:
        if self.portrait.distances is None:
            return summary
        return replace(summary, figures=replace(summary.figures, mean_path=self.portrait.distances.mean))


_TAKERS: dict[type, Callable[[_Sitting, int, Any, int], bool]] = {
    OwnFiguresTask: _Sitting.take_own,
    FiguresTask: _Sitting.take_nulls,
    DegreeTask: _Sitting.take_degrees,
    HubTask: _Sitting.take_hubs,
    SearchTask: _Sitting.take_searches,
    RemovalTask: _Sitting.take_removals,
    FitSamplesTask: _Sitting.take_samples,
}


def run_portrait(
    network: Network,
    settings: PortraitSettings | None = None,
    *,
    compute: Compute | None = None,
    first: Compute | None = None,
    publications: Mapping[str, float] | None = None,
    progress: Progress = silent,
    on_section: Callable[[Portrait], None] = ignore,
) -> Portrait:
    """Draw the portrait of a network; weights count for strengths alone.

    Parameters
    ----------
    network : Network
    settings : PortraitSettings, optional
    compute : Compute, optional
        Where the tasks run; in this process by default.
    first : Compute, optional
        Where the quick tasks run, of which the first sections are made; as `compute` by default.
    publications : mapping of gene to count, optional
        How often each gene was studied, to be compared with its degree.
    on_section : callable
        Is given the portrait so far whenever a section has come or has become more exact, the quickest first.

    Raises
    ------
    SettingError
        Where the network has no edge.
    """
    settings = settings or PortraitSettings()
    if not network.edge_count:
        raise SettingError("a network without an edge has no portrait; give one with at least one interaction")
    compute = compute or InProcess()
    tasks = portrait_tasks(network, settings)
    begin = sum(isinstance(task, QUICK) for task in tasks)
    left = Counter(type(task) for task in tasks)
    sitting = _Sitting(network, Portrait(settings), publications, settings.seed)
    for part, where, share in ((tasks[:begin], first or compute, (0.0, 0.1)), (tasks[begin:], compute, (0.1, 1.0))):
        for position, result in where.stream(network, part, progress=portion(progress, *share), phrase=PHRASE):
            task = part[position]
            left[type(task)] -= 1
            if sitting.take(position, task, result, left):
                on_section(sitting.portrait)
    sitting.put(complete=True)
    on_section(sitting.portrait)
    return sitting.portrait


def portrait_tasks(network: Network, settings: PortraitSettings) -> list[Task]:
    """Return the tasks of a portrait, those first that are quick and that others wait for."""
    order, searches, *seeds = child_seeds(settings.seed, 2 + 2 * settings.nulls, purpose=PURPOSE)
    draws = child_seeds(settings.seed, settings.draws, purpose=PURPOSE + 1)
    samples = child_seeds(settings.seed, -(-settings.samples // SAMPLES_A_TASK), purpose=PURPOSE + 2)
    sources = sources_to_draw(network)
    targeted = [DEGREE, RECOMPUTED, *([BETWEENNESS] if is_betweenness_affordable(network) else [])]
    return [
        OwnFiguresTask(),
        DegreeTask(),
        HubTask(order),
        *(SearchTask(sources, searches, part, SEARCH_PARTS) for part in range(SEARCH_PARTS)),
        *(RemovalTask(RANDOM, seed) for seed in draws),
        *(RemovalTask(each, order) for each in targeted),
        *(FitSamplesTask(SAMPLES_A_TASK, seed) for seed in samples),
        *(FiguresTask(kind, seed) for seed, kind in zip(seeds, [DEGREES, UNIFORM] * settings.nulls, strict=True)),
    ]
