"""Runs a study: clusters the network and gathers the evidence, step by step."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import Any

import numpy as np
from numpy.typing import NDArray

from analysis.agreement import ami_to, pairwise_ami
from analysis.compute import Compute, InProcess, run_all
from analysis.errors import SettingError
from analysis.methods import METHODS, Optimiser
from analysis.methods.clique_percolation import CliquePercolation
from analysis.methods.leiden import Leiden
from analysis.methods.louvain import Louvain
from analysis.modules import Modules, standard_modularity
from analysis.network import IntArray, Network
from analysis.progress import Progress, portion, silent
from analysis.study import Study, StudySettings
from analysis.study_tables import ModuleEvidence, evidence_table, membership_table
from analysis.trust.ensemble import Recurrence, noise_tasks, score_recurrence, seed_tasks
from analysis.verdicts import partition_sentences

NOISY_COPIES = 20
DISSOLVED = 0.5  # Hennig 2007: a cluster whose best match is below one half counts as dissolved
NAN = float("nan")


def run_study(
    network: Network,
    settings: StudySettings,
    *,
    compute: Compute | None = None,
    progress: Progress = silent,
) -> Study:
    """Cluster a network and gather the evidence that the settings ask for.

    The modules shown are those of the run with the best quality of the seed ensemble; ties go to the earliest run. A
    gene's confidence comes from the noisy copies where there are any, else from the ensemble.

    Raises
    ------
    SettingError
        Where a setting is out of range or does not fit the method.
    Cancelled
        From `progress`.
    """
    compute = compute or InProcess()
    method = method_of(settings)
    ensemble = _run_ensemble(network, method, settings, compute, portion(progress, 0.0, 0.4))
    noisy = _run_noise(network, method, settings, compute, portion(progress, 0.4, 0.6))
    modules = ensemble.best
    recurrence = _recurrence(modules, ensemble, noisy)
    evidence = ModuleEvidence.none(len(modules))
    if recurrence is not None:
        evidence = ModuleEvidence(recurrence.stability, *(np.full(len(modules), np.nan) for _ in range(4)))
    progress(1.0, "writing the tables")
    study = Study(
        network=network,
        settings=settings,
        modules=modules,
        membership=membership_table(network, modules, recurrence),
        module_table=evidence_table(network, modules, evidence, settings.names),
        modularity=standard_modularity(network, modules),
        shown=ensemble.shown,
        seed_ami=ensemble.seed_ami,
        noise_ami=_noise_ami(modules, noisy),
        copies=len(noisy),
        returned=_returned(recurrence) if noisy and recurrence is not None else None,
    )
    return replace(study, sentences=tuple(partition_sentences(study)))


def method_of(settings: StudySettings) -> Leiden | Louvain | CliquePercolation:
    """Return the method that the settings name."""
    if settings.method not in METHODS:
        raise SettingError(f"there is no method {settings.method!r}; choose one of {', '.join(METHODS)}")
    if settings.method == CliquePercolation.key:
        return CliquePercolation(k=settings.k)
    if isinstance(settings.resolution, str):
        raise SettingError(f"resolution is {settings.resolution!r}; give a number")
    if settings.method == Louvain.key:
        if settings.quality != "modularity":
            raise SettingError("Louvain optimises modularity only; use --method leiden with --quality cpm")
        return Louvain(resolution=settings.resolution)
    return Leiden(quality=settings.quality, resolution=settings.resolution)


@dataclass(frozen=True, eq=False)
class Ensemble:
    """Runs over seeds and the best of them."""

    best: Modules
    runs: tuple[IntArray, ...]
    shown: str
    seed_ami: float


def _run_ensemble(
    network: Network,
    method: Optimiser | CliquePercolation,
    settings: StudySettings,
    compute: Compute,
    progress: Progress,
) -> Ensemble:
    if isinstance(method, CliquePercolation):
        progress(0.0, "finding the cliques")
        return Ensemble(method.find(network), (), "the exact communities, the same in every run", NAN)
    tasks = seed_tasks(method, settings.runs, settings.seed)
    runs = run_all(compute, network, tasks, progress=progress, phrase=f"{settings.runs} runs with different seeds")
    qualities = [method.score(network, labels) for labels in runs]
    chosen = int(np.argmax(qualities))
    best = Modules.from_labels(
        runs[chosen],
        method=method.key,
        settings=settings_of_method(method),
        quality=qualities[chosen],
        seed=tasks[chosen].seed,
    )
    shown = f"the best of {settings.runs} runs" if settings.runs > 1 else "a single run"
    seed_ami = float(pairwise_ami(runs).mean()) if len(runs) > 1 else NAN
    return Ensemble(best, tuple(runs), shown, seed_ami)


def settings_of_method(method: Any) -> dict[str, float | int | str | None]:
    """Return the method's settings as plain values."""
    from analysis.methods.settings import settings_of

    return settings_of(method)


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
    phrase = f"{NOISY_COPIES} copies with {settings.noise:.0%} of the edges left out"
    return run_all(compute, network, tasks, progress=progress, phrase=phrase)


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
