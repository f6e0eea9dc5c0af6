"""From a file to a folder of results: the way that `corymb modules`, `sweep` and `rerun` have in common."""

from __future__ import annotations

import os
from collections.abc import Iterator, Sequence
from contextlib import contextmanager
from dataclasses import dataclass, replace
from pathlib import Path

from analysis.compute import Compute, open_compute
from analysis.errors import InputError, SettingError
from analysis.evidence import NOISY_COPIES, SUPPORT_COPIES, SUPPORT_STEPS, run_study
from analysis.handover import (
    Bundle,
    MeaningBundle,
    Source,
    SweepBundle,
    bundle_files,
    check_folder,
    check_parts,
    has_confidence,
    meaning_bundle_files,
    meaning_section,
    sweep_bundle_files,
    write_folder,
)
from analysis.intake import IntakeReport, read_network
from analysis.meaning import Meaning, ModuleGenes
from analysis.network import Network
from analysis.progress import Progress, portion, silent
from analysis.study import Study, StudySettings
from analysis.trust.sweep import Sweep, SweepSettings, run_sweep
from analysis.weight_cut import cut_by_weight
from app.gene_set_files import MeaningFiles, open_files, read_membership, sha256_of


@dataclass(frozen=True, eq=False)
class Input:
    """A network from a file, ready to be worked on.

    Attributes
    ----------
    path : Path
        The file.
    network : Network
        After the cut by weight.
    report : IntakeReport
        Of the file, before the cut.
    weight, min_weight
        What was asked for.
    """

    path: Path
    network: Network
    report: IntakeReport
    weight: str | None = None
    min_weight: float | None = None

    @property
    def edges_left_out(self) -> int:
        """Number of edges below the least weight."""
        return self.report.edges - self.network.edge_count

    def source(self, out: Path) -> Source:
        """Return the file as a recipe in the folder `out` names it."""
        sha256 = self.network.provenance["sha256"]
        return Source(self.path.name, sha256, relative_path(self.path, out))


def read_input(
    path: Path,
    weight: str | None = None,
    min_weight: float | None = None,
    progress: Progress = silent,
    *,
    strict: bool = True,
    label: str = "",
) -> Input:
    """Read a network and leave out its weak edges.

    Parameters
    ----------
    strict : bool
        Stop where a weight is text, rather than reject its row.
    label : str
        What to call the network; the name of its file where it is empty.

    Raises
    ------
    InputError
        Where the file cannot be used, a weight is no number, or no edge joins two genes.
    SettingError
        Where `min_weight` does not fit the network.
    """
    reading = read_network(path, weight=weight, strict=strict, progress=progress)
    network = require_edges(reading.network, path)
    if label:
        network = replace(network, label=label)
    if min_weight is not None:
        network = cut_by_weight(network, min_weight)
    return Input(path, network, reading.report, weight, min_weight)


def require_edges(network: Network, path: Path) -> Network:
    """Raise `InputError` for a network without an edge, in which there is nothing to find."""
    if network.edge_count == 0:
        raise InputError(str(path), "no interaction between two different genes", "give a file with at least one")
    return network


def study_into(
    given: Input,
    settings: StudySettings,
    out: Path,
    address: str | None = None,
    progress: Progress = silent,
    *,
    parts: Sequence[str] = (),
    gene_sets: MeaningFiles | None = None,
) -> Study:
    """Run a study and write everything into the folder `out`, whole or not at all.

    `parts` are keys of `EXTRAS`; with `gene_sets` the modules are tested for enrichment too.
    """
    check_folder(out)
    check_parts(parts, settings)
    # read before the long work, so that a fault in the file is told at once
    opened = None if gene_sets is None else open_files(given.network.names, gene_sets)
    if gene_sets is not None and gene_sets.settings.core_only and not has_confidence(settings):
        raise SettingError("--core-only needs to know how surely genes stay; give --noise above 0 or several --runs")
    runs = settings.runs + settings.nulls + NOISY_COPIES + SUPPORT_STEPS * SUPPORT_COPIES
    with _computing(address, given.network, runs) as compute:
        study = run_study(given.network, settings, compute=compute, progress=portion(progress, 0.0, 0.9))
    bundle = Bundle(study, given.report, given.source(out), tuple(parts))
    if opened is not None and gene_sets is not None:
        meaning = opened.meaning(ModuleGenes.of_study(study))
        request = gene_sets.request(lambda path: _source(path, out))
        sections = (*bundle.sections, meaning_section(meaning))
        bundle = replace(bundle, meaning=meaning, meaning_request=request, sections=sections)
    write_folder(bundle_files(bundle, portion(progress, 0.9, 1.0)), out)
    return study


def sweep_into(
    given: Input, settings: SweepSettings, out: Path, address: str | None = None, progress: Progress = silent
) -> Sweep:
    """Run a sweep and write its table, summary and recipe into the folder `out`, whole or not at all."""
    check_folder(out)
    runs = settings.steps * (settings.runs + settings.noisy_runs)
    with _computing(address, given.network, runs) as compute:
        sweep = run_sweep(given.network, settings, compute, progress)
    bundle = SweepBundle(given.network, sweep, given.report, given.source(out), given.weight, given.min_weight)
    write_folder(sweep_bundle_files(bundle), out)
    return sweep


def enrich_into(membership: Path, files: MeaningFiles, out: Path, progress: Progress = silent) -> tuple[Meaning, str]:
    """Test the modules of a table and write the outcome into the folder `out`, whole or not at all.

    Returns
    -------
    tuple of Meaning and str
        The outcome, and a sentence on which genes are taken for the network's.
    """
    check_folder(out)
    modules, note = read_membership(membership)
    opened = open_files(modules.genes, files, portion(progress, 0.0, 0.4))
    meaning = opened.meaning(modules, portion(progress, 0.4, 0.9))
    bundle = MeaningBundle(meaning, files.request(lambda path: _source(path, out)), _source(membership, out))
    write_folder(meaning_bundle_files(bundle), out)
    return meaning, note


def _source(path: Path, out: Path) -> Source:
    return Source(path.name, sha256_of(path), relative_path(path, out))


def relative_path(path: Path, folder: Path) -> str:
    """Return the way from a folder to a file or folder, with `/`; its name where there is none, or none that stays."""
    if not (path.is_file() or path.is_dir()):
        return path.name
    try:
        return Path(os.path.relpath(path.resolve(), folder.resolve())).as_posix()
    except ValueError:  # another drive
        return path.name


@contextmanager
def _computing(address: str | None, network: Network, runs: int) -> Iterator[Compute]:
    compute = open_compute(address, network, runs)
    try:
        yield compute
    finally:
        compute.close()
