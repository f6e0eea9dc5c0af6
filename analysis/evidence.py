"""Runs a study: clusters the network and gathers the evidence, step by step."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from analysis.agreement import ami_to, pairwise_ami
from analysis.compute import Compute, InProcess, run_all
from analysis.errors import SettingError
from analysis.harvest_study import harvest_evidence
from analysis.methods import METHODS, Optimiser
from analysis.methods.clique_percolation import CliquePercolation
from analysis.methods.leiden import Leiden
from analysis.methods.louvain import Louvain
from analysis.methods.settings import settings_of
from analysis.modules import Modules, standard_modularity
from analysis.network import FloatArray, IntArray, Network
from analysis.overlap.cliques import CLIQUE_SECONDS, too_long
from analysis.progress import Progress, portion, silent, within
from analysis.study import SUGGEST, NullDraws, Study, StudySettings
from analysis.study_tables import ModuleEvidence, evidence_table, membership_table
from analysis.trust.chains import ChainTask, resolution_grid
from analysis.trust.ensemble import FindCover, Recurrence, consensus, noise_tasks, score_recurrence, seed_tasks
from analysis.trust.significance import against_nulls, ignore, verdict
from analysis.trust.support import CopySettings, ModuleSupport, copy_tasks, score_support
from analysis.trust.sweep import SweepSettings, run_sweep
from analysis.verdicts import partition_sentences

HARVEST = "harvest"
NOISY_COPIES = 20
SUPPORT_STEPS, SUPPORT_COPIES = 12, 5
DISSOLVED = 0.5  # Hennig 2007: a cluster whose best match is below one half counts as dissolved
NAN = float("nan")


def run_study(
    network: Network,
    settings: StudySettings,
    *,
    compute: Compute | None = None,
    progress: Progress = silent,
    on_draws: Callable[[NullDraws], None] = ignore,
) -> Study:
    """Cluster a network and gather the evidence that the settings ask for.

    - The modules shown are those of the run with the best quality of the seed ensemble (ties go to the earliest), or
      the consensus of the runs, as the settings ask.
    - A gene's confidence comes from copies of the network with a share of the edges left out, where there are any, else
      from the ensemble.
    - A module's stability is its mean best-match Jaccard over noisy copies and over a sweep (Hennig 2007), on the
      question that was asked: modularity for wide neighbourhoods, the constant Potts model for tight groups; without
      noise it is that over the ensemble. Its range of resolution is where it holds on those copies.
    - p-values compare with modules found the same way in null networks.

    `on_draws` is given the modularities of the null networks as they come in.

    Raises
    ------
    SettingError
        Where a setting is out of range or does not fit the method.
    Cancelled
        From `progress`.
    """
    compute = compute or InProcess()
    if settings.method == HARVEST:
        return _study_harvest(network, settings, compute, progress)
    settings, suggestion = _with_resolution(network, settings, compute, portion(progress, 0.0, 0.1))
    method = method_of(settings)
    ensemble = _run_ensemble(network, method, settings, compute, portion(progress, 0.1, 0.35))
    modules = ensemble.shown
    noisy = _run_noise(network, method, settings, compute, portion(progress, 0.35, 0.45))
    support = _run_support(network, modules, settings, compute, portion(progress, 0.45, 0.6))
    chance = _run_nulls(
        network, method, modules, settings, compute=compute, progress=portion(progress, 0.6, 0.98), on_draws=on_draws
    )
    recurrence = _recurrence(modules, ensemble, noisy)
    progress(0.98, "writing the tables")
    evidence = _evidence(len(modules), recurrence, support, chance)
    study = Study(
        network=network,
        settings=settings,
        modules=modules,
        membership=membership_table(network, modules, recurrence),
        module_table=evidence_table(network, modules, evidence, settings.names),
        modularity=standard_modularity(network, modules),
        shown=ensemble.words,
        seed_ami=ensemble.seed_ami,
        noise_ami=_noise_ami(modules, noisy),
        nulls=chance.draws if chance else None,
        suggestion=suggestion,
        chance=chance.sentence if chance else "",
        copies=len(noisy),
        returned=_returned(recurrence) if noisy and recurrence is not None else None,
    )
    progress(1.0, "writing the tables")
    return replace(study, sentences=tuple(partition_sentences(study)))


def method_of(settings: StudySettings) -> Leiden | Louvain | CliquePercolation:
    """Return the method that the settings name; the harvest has a way of its own."""
    if settings.method not in METHODS:
        raise SettingError(f"there is no method {settings.method!r}; choose one of {', '.join([*METHODS, HARVEST])}")
    if settings.method == CliquePercolation.key:
        return CliquePercolation(k=settings.k)
    if isinstance(settings.resolution, str):
        raise SettingError(f"resolution is {settings.resolution!r}; give a number, or {SUGGEST}")
    if settings.method == Louvain.key:
        if settings.quality != "modularity":
            raise SettingError("Louvain optimises modularity only; use --method leiden with --quality cpm")
        return Louvain(resolution=settings.resolution)
    return Leiden(quality=settings.quality, resolution=settings.resolution)


def _study_harvest(network: Network, settings: StudySettings, compute: Compute, progress: Progress) -> Study:
    found = harvest_evidence(network, settings, compute, progress)
    harvest, recurrence = found.harvest, found.recurrence
    modules, figures = harvest.modules, harvest.figures
    evidence = ModuleEvidence(
        figures.stability,
        figures.resolution_from,
        figures.resolution_to,
        np.full(len(modules), NAN),
        harvest.chance_share,
    )
    table = evidence_table(network, modules, evidence, settings.names)
    kind = "the well supported modules" if harvest.settings.cut else "all modules that hold"
    study = Study(
        network=network,
        settings=settings,
        modules=modules,
        membership=membership_table(network, modules, recurrence),
        module_table=table,
        modularity=standard_modularity(network, modules),
        shown=f"{kind} of a whole sweep, each at its own resolution",
        seed_ami=NAN,
        noise_ami=NAN,
        chance=harvest.level_sentence,
        copies=recurrence.runs,
        returned=_returned(recurrence),
    )
    return replace(study, sentences=tuple(partition_sentences(study)))


def _with_resolution(
    network: Network, settings: StudySettings, compute: Compute, progress: Progress
) -> tuple[StudySettings, str]:
    """Put a number where the resolution was to be suggested; return it with the reason."""
    if settings.resolution != SUGGEST or settings.method == CliquePercolation.key:
        return settings, ""
    method_of(settings.at(resolution=1.0))  # what is wrong with the method is said before the sweep, not after it
    asked = SweepSettings(quality=settings.quality, seed=settings.seed, noise=settings.noise or SweepSettings().noise)
    suggestion = run_sweep(network, asked, compute, progress).suggestion
    return settings.at(resolution=float(suggestion.resolution)), suggestion.reason


@dataclass(frozen=True, eq=False)
class Ensemble:
    """Runs over seeds, and what of them is shown."""

    shown: Modules
    runs: tuple[IntArray, ...]
    words: str
    seed_ami: float


def _run_ensemble(
    network: Network,
    method: Optimiser | CliquePercolation,
    settings: StudySettings,
    compute: Compute,
    progress: Progress,
) -> Ensemble:
    if isinstance(method, CliquePercolation):
        limit = within(progress, CLIQUE_SECONDS, too_long(method.k))
        cover = [FindCover(method, settings.seed)]
        found = run_all(compute, network, cover, progress=limit, phrase="finding the cliques")[0]
        return Ensemble(found, (), "the exact communities, the same in every run", NAN)
    tasks = seed_tasks(method, settings.runs, settings.seed)
    runs = run_all(compute, network, tasks, progress=progress, phrase=f"{settings.runs} runs with different seeds")
    seed_ami = float(pairwise_ami(runs).mean()) if len(runs) > 1 else NAN
    if settings.show == "consensus" and len(runs) > 1:
        shown = consensus(network, runs, method, settings.seed)
        return Ensemble(shown, tuple(runs), f"the consensus of {settings.runs} runs", seed_ami)
    qualities = [method.score(network, labels) for labels in runs]
    chosen = int(np.argmax(qualities))
    best = Modules.from_labels(
        runs[chosen],
        method=method.key,
        settings=settings_of(method),
        quality=qualities[chosen],
        seed=tasks[chosen].seed,
    )
    words = f"the best of {settings.runs} runs" if settings.runs > 1 else "a single run"
    return Ensemble(best, tuple(runs), words, seed_ami)


def _run_noise(
    network: Network,
    method: Optimiser | CliquePercolation,
    settings: StudySettings,
    compute: Compute,
    progress: Progress,
) -> list[Modules]:
    if settings.noise == 0 or network.edge_count == 0:
        return []
    tasks = noise_tasks(method, settings.noise, NOISY_COPIES, settings.seed)
    share = f"{settings.noise:.0%}".replace("%", " %")
    phrase = f"{NOISY_COPIES} copies with {share} of the edges left out"
    return run_all(compute, network, tasks, progress=progress, phrase=phrase)


def _run_support(
    network: Network, modules: Modules, settings: StudySettings, compute: Compute, progress: Progress
) -> ModuleSupport | None:
    """Return the support of the modules over a sweep on noisy copies, on the question that was asked."""
    if settings.noise == 0 or network.edge_count == 0 or not len(modules):
        return None
    wide = settings.method != CliquePercolation.key and settings.quality == "modularity"
    copies = CopySettings(SUPPORT_STEPS, SUPPORT_COPIES, seed=settings.seed)
    grid = resolution_grid(network, "modularity", SUPPORT_STEPS) if wide else copies.resolutions
    quality = "modularity" if wide else "cpm"
    tasks: list[ChainTask] = [
        replace(task, quality=quality, resolutions=tuple(grid.tolist())) for task in copy_tasks(copies)
    ]
    tables = run_all(compute, network, tasks, progress=progress, phrase="noisy copies over all resolutions")
    return score_support(network, modules, tables, grid)


@dataclass(frozen=True, eq=False)
class Chance:
    """The clustering against null networks."""

    draws: NullDraws
    p_value: FloatArray
    q_value: FloatArray
    sentence: str


def _run_nulls(
    network: Network,
    method: Leiden | Louvain | CliquePercolation,
    modules: Modules,
    settings: StudySettings,
    *,
    compute: Compute,
    progress: Progress,
    on_draws: Callable[[NullDraws], None],
) -> Chance | None:
    if settings.nulls == 0 or network.edge_count == 0:
        return None
    found = against_nulls(
        network,
        method,
        modules,
        nulls=settings.nulls,
        seed=settings.seed,
        chosen_from=1 if isinstance(method, CliquePercolation) else settings.runs,
        compute=compute,
        progress=progress,
        on_draws=on_draws,
    )
    return Chance(found.draws, found.p_value, found.q_value, verdict(found))


def _evidence(
    count: int, recurrence: Recurrence | None, support: ModuleSupport | None, chance: Chance | None
) -> ModuleEvidence:
    nothing = np.full(count, NAN)
    stability = recurrence.stability if recurrence is not None else nothing
    return ModuleEvidence(
        stability=support.stability if support is not None else stability,
        resolution_from=support.resolution_from if support is not None else nothing,
        resolution_to=support.resolution_to if support is not None else nothing,
        p_value=chance.p_value if chance is not None else nothing,
        q_value=chance.q_value if chance is not None else nothing,
    )


def _recurrence(modules: Modules, ensemble: Ensemble, noisy: Sequence[Modules]) -> Recurrence | None:
    if noisy:
        return score_recurrence(modules, noisy)
    if len(ensemble.runs) > 1:
        return score_recurrence(modules, [Modules.from_labels(labels) for labels in ensemble.runs])
    return None


def _returned(recurrence: Recurrence) -> NDArray[np.int32]:
    counts: NDArray[np.int32] = (recurrence.jaccard >= DISSOLVED).sum(axis=0).astype(np.int32)
    return counts


def _noise_ami(modules: Modules, noisy: Sequence[Modules]) -> float:
    if not noisy:
        return NAN
    return float(ami_to(modules.full_labels, [copy.full_labels for copy in noisy]).mean())
