"""The harvest as a study: how surely each gene belongs to each harvested module."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from analysis.compute import Compute, run_all
from analysis.network import FloatArray, IntArray, Network, locked
from analysis.progress import Progress, portion, silent
from analysis.study import StudySettings
from analysis.trust.chains import LabelTable
from analysis.trust.ensemble import Recurrence
from analysis.trust.harvest import FULL, QUICK, Harvest, HarvestSettings, run_harvest
from analysis.trust.support import CopySettings, copy_tasks


@dataclass(frozen=True, eq=False)
class HarvestEvidence:
    """A harvest and how often its genes stay."""

    harvest: Harvest
    recurrence: Recurrence


def harvest_settings(settings: StudySettings) -> HarvestSettings:
    """Return the form of the harvest that the study asks for; without null networks there is no cut."""
    form = FULL if settings.effort == "full" else QUICK
    nulls = form.nulls if settings.nulls else 0
    return replace(form, nulls=nulls, cut=settings.keep == "supported" and nulls > 0, seed=settings.seed)


def harvest_evidence(
    network: Network, settings: StudySettings, compute: Compute, progress: Progress = silent
) -> HarvestEvidence:
    """Harvest, and compare each module with the noisy copies at the resolution that is its own."""
    chosen = harvest_settings(settings)
    harvest = run_harvest(network, chosen, compute, portion(progress, 0.0, 0.85))
    copies = CopySettings(chosen.steps, chosen.copies, seed=chosen.seed)
    report = portion(progress, 0.85, 1.0)
    tables = run_all(compute, network, copy_tasks(copies), progress=report, phrase="noisy copies")
    steps = np.abs(np.log(harvest.resolution[:, None] / copies.resolutions[None, :])).argmin(axis=1)
    return HarvestEvidence(harvest, _recurrence(harvest, tables, steps.tolist()))


def _recurrence(harvest: Harvest, tables: Sequence[LabelTable], steps: Sequence[int]) -> Recurrence:
    members = harvest.modules.members
    jaccard = np.zeros((len(tables), len(members)))
    stays = [np.zeros(len(group)) for group in members]
    for copy, table in enumerate(tables):
        for module, (group, step) in enumerate(zip(members, steps, strict=True)):
            jaccard[copy, module], inside = _best_match(group, table[step])
            stays[module] += inside
    nodes, owners = harvest.modules.memberships
    confidence = np.zeros(len(nodes))
    for module, counts in enumerate(stays):
        confidence[owners == module] = counts / max(len(tables), 1)  # both run in the order of the members
    nowhere = locked(np.full(len(nodes), -1, np.int64))
    return Recurrence(len(tables), locked(jaccard), locked(confidence), nowhere, locked(np.zeros(len(nodes))))


def _best_match(group: IntArray, labels: IntArray) -> tuple[float, FloatArray]:
    """Return the Jaccard index of a group with its best match, and which of its members are in that."""
    own = labels[group]
    shared = np.bincount(own)
    quotient = shared / (len(group) + np.bincount(labels)[: len(shared)] - shared)
    best = int(quotient.argmax())
    return float(quotient[best]), (own == best).astype(np.float64)
