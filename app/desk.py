"""The desk: asks `analysis/` for answers, keeps them, and hands them to the screen.

One desk serves all windows. It holds no state of a window: what a window shows is named by its requests.
"""

from __future__ import annotations

import hashlib
import re
import threading
from collections import OrderedDict
from collections.abc import Callable, Mapping
from dataclasses import replace
from functools import partial
from pathlib import Path
from typing import Any

import numpy as np

from analysis.compare import Clustering, Comparison, ComparisonSettings, compare
from analysis.compute import run_all
from analysis.errors import CorymbError, InputError
from analysis.evidence import HARVEST, method_of, run_study
from analysis.handover import Bundle, Source, as_zip, bundle_files, meaning_section, report_from_plain
from analysis.intake import Reading, parse_network, read_network
from analysis.modules import Modules
from analysis.network import FloatArray, Network
from analysis.progress import Progress
from analysis.study import NullDraws, Study, StudySettings
from analysis.trust.noise import REWIRED
from analysis.trust.noise_curve import NoiseCurve, noise_curve
from analysis.trust.sweep import SweepSettings, preview_points, resolution_grid, run_sweep
from app.jobs import Jobs
from app.map.colours import Anchor, make_anchor, pack_colours
from app.map.drawing import DrawTask
from app.meaning_desk import MeaningDesk
from app.places import sample_folder
from app.ruler import Ruler
from app.workspace import TrailEntry, Workspace, clustering_id

ANCHORS_AT_HAND = 4
SAMPLE = "saltmarsh_moss_interactions.tsv"
SAMPLE_LABEL = "saltmarsh moss, stress interactome"


class Desk:
    """Answers about networks, drawings, rulers and studies; any thread may ask.

    Parameters
    ----------
    workspace : Workspace
    jobs : Jobs
    """

    def __init__(self, workspace: Workspace, jobs: Jobs) -> None:
        self.workspace = workspace
        self.jobs = jobs
        self.meaning = MeaningDesk(workspace, jobs)
        self._lock = threading.RLock()
        self._anchors: OrderedDict[str, Anchor] = OrderedDict()
        self._rulers: dict[tuple[str, str], Ruler] = {}
        self._draws: dict[str, NullDraws] = {}
        self._curves: dict[str, NoiseCurve] = {}
        self._packed: OrderedDict[str, tuple[str, bytes]] = OrderedDict()
        self._comparisons: OrderedDict[tuple[str, str], Comparison] = OrderedDict()

    # networks

    def open_path(self, path: Path) -> str:
        """Read a file from the disk into the workspace; return the network's fingerprint."""
        reading = read_network(path)
        report = replace(reading.report, source=path.name)
        return self._take(Reading(reading.network, report), path.read_bytes(), path.name)

    def open_bytes(self, content: bytes, file_name: str, weight: str | None = None) -> str:
        """Read an upload into the workspace; return the network's fingerprint."""
        return self._take(parse_network(content, file_name, weight=weight), content, file_name)

    def open_sample(self) -> str:
        """Read the sample network, under its full name."""
        path = sample_folder() / SAMPLE
        reading = read_network(path)
        network = reading.network
        named = Network(
            network.names, network.sources, network.targets, network.weights, SAMPLE_LABEL, network.provenance
        )
        return self._take(Reading(named, replace(reading.report, source=SAMPLE)), path.read_bytes(), SAMPLE)

    def first_network(self) -> str:
        """Return the network that was at hand last, else the sample network."""
        last = self.workspace.recall(AT_HAND)
        known = {entry.fingerprint for entry in self.workspace.networks()}
        return str(last) if last in known else self.open_sample()

    def keep_wanted(self, fingerprint: str, wanted: Mapping[str, Any]) -> None:
        """Remember which clustering of a network was asked for last."""
        self.workspace.remember(f"wanted {fingerprint}", dict(wanted))

    def last_wanted(self, fingerprint: str) -> dict[str, Any] | None:
        """Return which clustering of a network was asked for last."""
        found = self.workspace.recall(f"wanted {fingerprint}")
        return dict(found) if found else None

    def _take(self, reading: Reading, content: bytes, file_name: str) -> str:
        if reading.network.edge_count == 0:
            raise InputError(file_name, "no interaction between two different genes", "give a file with at least one")
        report = {**reading.report.as_json(), "sentences": reading.report.sentences()}
        self.workspace.add_network(reading.network, report, content, file_name)
        return reading.network.fingerprint

    def network(self, fingerprint: str) -> Network:
        """Return a network of the workspace."""
        return self.workspace.network(fingerprint)

    def is_small(self, fingerprint: str | None) -> bool:
        """Whether null networks are so quick that they need not be asked for."""
        return fingerprint is not None and self.network(fingerprint).edge_count <= SMALL_EDGES

    # drawing

    def start_drawing(self, fingerprint: str) -> str:
        """Begin to lay the network out, unless it is done; return the job's id."""
        network = self.network(fingerprint)

        def work(progress: Progress) -> bool:
            if self.workspace.arrays("drawing", fingerprint) is None:
                progress(0.0, "drawing the map")
                tasks = [DrawTask()]
                drawn = run_all(self.jobs.quick, network, tasks, progress=progress, phrase="drawing the map")[0]
                self.workspace.save_arrays("drawing", fingerprint, drawn)
            return True

        return self.jobs.start("drawing", fingerprint, work)

    def drawing(self, fingerprint: str) -> tuple[FloatArray, Anchor] | None:
        """Return positions and anchor, or None where they are not ready."""
        arrays = self.workspace.arrays("drawing", fingerprint)
        if arrays is None:
            return None
        with self._lock:
            anchor = self._anchors.get(fingerprint)
            if anchor is None:
                anchor = make_anchor(self.network(fingerprint), arrays["anchor"])
                self._anchors[fingerprint] = anchor
                while len(self._anchors) > ANCHORS_AT_HAND:
                    self._anchors.popitem(last=False)
        return arrays["positions"], anchor

    # the ruler

    def start_ruler(self, fingerprint: str, quality: str) -> str | None:
        """Begin the sweep behind the ruler, unless it is done; return the job's id, None where nothing is to do."""
        ruler = self.ruler(fingerprint, quality)
        if ruler is not None and ruler.done:
            return None
        network = self.network(fingerprint)
        settings = SweepSettings(quality=quality)
        key = f"{fingerprint}:{quality}"

        def work(progress: Progress) -> bool:
            grid = resolution_grid(network, quality, settings.steps)
            self._keep_ruler(fingerprint, quality, lambda _: Ruler.empty(tuple(grid.tolist())))
            self._start_preview(fingerprint, quality, grid)
            sweep = run_sweep(network, settings, self.jobs.long, progress, self._point_keeper(fingerprint, quality))
            finished = self._keep_ruler(fingerprint, quality, lambda ruler: ruler.finished(sweep))
            self.workspace.save_arrays("ruler", key, finished.to_arrays())
            return True

        return self.jobs.start("sweep", key, work)

    def _start_preview(self, fingerprint: str, quality: str, grid: FloatArray) -> None:
        """Fill the ruler from its coarse end with single runs, so that it can be used before the sweep is done."""
        network = self.network(fingerprint)

        def work(progress: Progress) -> bool:
            for point in preview_points(network, quality, grid, compute=self.jobs.quick, progress=progress):
                self._keep_ruler(fingerprint, quality, partial(Ruler.filled, point=point, over=False))
            return True

        self.jobs.start("preview", f"{fingerprint}:{quality}", work)

    def ruler(self, fingerprint: str, quality: str) -> Ruler | None:
        """Return the ruler as far as it is filled, None where nothing is known."""
        with self._lock:
            found = self._rulers.get((fingerprint, quality))
            if found is not None:
                return found
            arrays = self.workspace.arrays("ruler", f"{fingerprint}:{quality}")
            if arrays is None:
                return None
            self._rulers[fingerprint, quality] = Ruler.from_arrays(arrays)
            return self._rulers[fingerprint, quality]

    def _keep_ruler(self, fingerprint: str, quality: str, change: Callable[[Ruler], Ruler]) -> Ruler:
        with self._lock:
            before = self._rulers.get((fingerprint, quality)) or Ruler((), ())
            self._rulers[fingerprint, quality] = change(before)
            return self._rulers[fingerprint, quality]

    def _point_keeper(self, fingerprint: str, quality: str) -> Callable[[Any], None]:
        def keep(point: Any) -> None:
            self._keep_ruler(fingerprint, quality, lambda ruler: ruler.filled(point))

        return keep

    def ruler_colours(self, fingerprint: str, quality: str, position: int) -> bytes | None:
        """Return the colours of one ready point of the ruler, packed for the map."""
        ruler, drawing = self.ruler(fingerprint, quality), self.drawing(fingerprint)
        if ruler is None or drawing is None or not 0 <= position < len(ruler.points):
            return None
        point = ruler.points[position]
        return None if point is None else pack_colours(drawing[1], Modules.from_labels(point.labels))

    # studies

    def start_study(self, fingerprint: str, settings: StudySettings) -> tuple[str, str | None]:
        """Begin a study, unless it is done; return its id and the job's (None where nothing is to do)."""
        key = clustering_id(fingerprint, settings.as_dict())
        if self.study(key) is not None:
            return key, None
        network = self.network(fingerprint)

        def work(progress: Progress) -> bool:
            compute = self.jobs.quick if _is_quick(network, settings) else self.jobs.long
            draws = partial(self._keep_draws, key)
            study = run_study(network, settings, compute=compute, progress=progress, on_draws=draws)
            # the trail first: a study without its line in the trail would never get one
            self.workspace.save_clustering(TrailEntry.of(fingerprint, settings.as_dict(), _figures(study)))
            self.workspace.save_study(key, study)
            return True

        request = {"fingerprint": fingerprint, "settings": settings.as_dict()}
        return key, self.jobs.start("study", key, work, request)

    def _keep_draws(self, study_id: str, draws: NullDraws) -> None:
        with self._lock:
            self._draws[study_id] = draws

    def draws(self, study_id: str | None) -> NullDraws | None:
        """Return the null networks' modularities as they come in, for a study that is on its way."""
        with self._lock:
            return None if study_id is None else self._draws.get(study_id)

    def study(self, study_id: str | None) -> Study | None:
        """Return a finished study with the names given to its modules, None where it is not ready."""
        if not study_id:
            return None
        study = self.workspace.study(study_id)
        return None if study is None else study.named(self.workspace.names(study_id))

    def anchor_colours(self, fingerprint: str) -> bytes | None:
        """Return the colours of the partition that the map was drawn from, to be shown until anything else is ready."""
        drawing = self.drawing(fingerprint)
        return None if drawing is None else pack_colours(drawing[1], drawing[1].modules)

    def study_colours(self, study_id: str) -> bytes | None:
        """Return the colours of a finished study, packed for the map."""
        study = self.workspace.study(study_id)
        drawing = self.drawing(study.network.fingerprint) if study is not None else None
        return None if study is None or drawing is None else pack_colours(drawing[1], study.modules)

    # the noise curve

    def start_curve(self, study_id: str) -> str | None:
        """Begin the noise curve of a finished study, unless it is done; return the job's id, None for none."""
        study = self.workspace.study(study_id)
        if study is None or study.settings.method == HARVEST:
            return None
        known = self.curve(study_id)
        if known is not None and known.complete:
            return None

        def keep(curve: NoiseCurve) -> None:
            with self._lock:
                self._curves[study_id] = curve

        def work(progress: Progress) -> bool:
            method, seed = method_of(study.settings), study.settings.seed
            compute = self.jobs.long
            curve = noise_curve(study.network, method, seed=seed, compute=compute, progress=progress, on_point=keep)
            keep(curve)
            arrays = {name: getattr(curve, name) for name in CURVE_ARRAYS}
            self.workspace.save_arrays("noise curve", study_id, arrays)
            return True

        return self.jobs.start("curve", study_id, work)

    def curve(self, study_id: str | None) -> NoiseCurve | None:
        """Return the noise curve of a study as far as it has come, None where nothing is known."""
        if study_id is None:
            return None
        with self._lock:
            found = self._curves.get(study_id)
        if found is not None:
            return found
        arrays = self.workspace.arrays("noise curve", study_id)
        return None if arrays is None else NoiseCurve(REWIRED, **arrays)

    # comparing

    def comparison(self, first: str, second: str, labels: tuple[str, str]) -> Comparison | None:
        """Compare two finished studies, of one network or of two; None where one of them is not kept.

        Preservation is looked into where it takes no time; else `corymb compare` does.
        """
        studies = [self.study(each) for each in (first, second)]
        if studies[0] is None or studies[1] is None:
            return None
        with self._lock:
            found = self._comparisons.get((first, second))
        if found is None:
            one, other = (
                Clustering(study.network, study.modules, label)
                for study, label in zip((studies[0], studies[1]), labels, strict=True)
            )
            quick = max(one.network.edge_count, other.network.edge_count) <= SMALL_EDGES
            found = compare(one, other, ComparisonSettings(permutations=100 if quick else 0))
        with self._lock:
            self._comparisons[first, second] = found
            while len(self._comparisons) > COMPARISONS_AT_HAND:
                self._comparisons.popitem(last=False)
        return replace(found, first=labels[0], second=labels[1])

    # handing over

    def start_packing(self, study_id: str, parts: tuple[str, ...] = ()) -> str:
        """Begin to write the files of a study into a zip; return the job's id.

        `parts` are what is wanted beside the files that always are, keys of `analysis.handover.EXTRAS`.
        """

        def work(progress: Progress) -> bytes:
            progress(0.1, "writing the files")
            study = self.study(study_id)
            if study is None:
                raise CorymbError("this clustering is not ready yet; wait for it, then hand it over")
            bundle, sets = self._with_meaning(study_id, self._bundle(study, parts))
            files = bundle_files(bundle) | sets
            raw = self.workspace.raw(study.network.fingerprint)
            if raw is not None:
                files[f"{INPUT_FOLDER}/{raw[0]}"] = raw[1]
            content = as_zip(files)
            progress(0.9, "writing the files")
            name = _zip_name(study)
            with self._lock:
                self._packed[study_id] = (name, content)
                self._packed.move_to_end(study_id)
                while len(self._packed) > ZIPS_AT_HAND:
                    self._packed.popitem(last=False)
            self.workspace.remember(f"handed over {study_id}", True)
            return content

        names = sorted(self.workspace.names(study_id).items())
        return self.jobs.start(
            "packing", f"{study_id}:{names}:{parts}:{self.meaning.version(study_id, self.study(study_id))}", work
        )

    def _bundle(self, study: Study, parts: tuple[str, ...] = ()) -> Bundle:
        """Return everything to be handed over; the input file travels in the zip, beside the recipe."""
        fingerprint = study.network.fingerprint
        raw = self.workspace.raw(fingerprint)
        source = None
        if raw is not None:
            name, content = raw
            source = Source(name, hashlib.sha256(content).hexdigest(), f"{INPUT_FOLDER}/{name}")
        report = report_from_plain(self.workspace.report(fingerprint)) if source is not None else None
        return Bundle(study, report, source, parts)

    def _with_meaning(self, study_id: str, bundle: Bundle) -> tuple[Bundle, dict[str, bytes]]:
        """Return the bundle with the enrichment in the gene sets chosen, and their files, where there are any."""
        found = self.meaning.for_handover(study_id, bundle.study, f"{INPUT_FOLDER}/gene_sets")
        if found is None:
            return bundle, {}
        sections = (*bundle.sections, meaning_section(found.meaning, found.same_source))
        return replace(bundle, meaning=found.meaning, meaning_request=found.request, sections=sections), found.files

    def packed(self, study_id: str) -> tuple[str, bytes] | None:
        """Return file name and content of a zip that was written, None where there is none."""
        with self._lock:
            return self._packed.get(study_id)


AT_HAND = "network at hand"
INPUT_FOLDER = "input"
CURVE_ARRAYS = ("shares", "vi", "ami", "null_vi", "null_ami")
ZIPS_AT_HAND = 4
COMPARISONS_AT_HAND = 4
QUICK_WORK = 100_000
SMALL_EDGES = 20_000


def _is_quick(network: Network, settings: StudySettings) -> bool:
    """Whether a study is so short that it should not wait behind long work."""
    return network.edge_count * (settings.runs + settings.nulls) < QUICK_WORK


def _zip_name(study: Study) -> str:
    """Return a harmless file name for a study's zip."""
    words = re.sub(r"[^A-Za-z0-9]+", "-", study.network.label).strip("-").lower() or "network"
    return f"{words}-{len(study.modules)}-modules.zip"


def _figures(study: Study) -> dict[str, Any]:
    return {
        "modules": len(study.modules),
        "of_three": int((study.modules.sizes >= 3).sum()),
        "modularity": study.modularity,
        "seed_ami": None if np.isnan(study.seed_ami) else study.seed_ami,
        "noise_ami": None if np.isnan(study.noise_ami) else study.noise_ami,
        "p_value": None if study.nulls is None else study.nulls.p_value,
    }
