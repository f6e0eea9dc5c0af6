"""Gene sets on the desk: which collection belongs to which network, and what its modules are enriched in.

Files and choices are kept in the workspace; enrichment is worked out anew where it is wanted, which takes little.
"""

from __future__ import annotations

import hashlib
import json
import threading
from collections import OrderedDict
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import PurePosixPath
from typing import Any

import numpy as np

from analysis.errors import Cancelled, CorymbError, InputError
from analysis.gene_sets import Aliases, SetReading, parse_aliases, parse_gene_sets, parse_ontology
from analysis.gene_sets.annotation_file import KEY as ANNOTATIONS
from analysis.gene_sets.formats import recognise
from analysis.handover import MeaningRequest, Source
from analysis.intake.decoding import decode
from analysis.intake.unpacking import unpack
from analysis.meaning import Meaning, MeaningSettings, ModuleGenes, find_meaning
from analysis.network import Network
from analysis.progress import Progress, portion, silent
from analysis.study import Study
from app.jobs import Jobs
from app.places import sample_folder
from app.workspace import Workspace

GENE_SETS, ALIASES, ONTOLOGY = "gene_sets", "aliases", "ontology"
KINDS = (GENE_SETS, ALIASES, ONTOLOGY)
SAMPLE_NETWORK = "saltmarsh_moss_interactions.tsv"
SAMPLE_FILES = {GENE_SETS: "saltmarsh_moss_gene_sets.tsv", ALIASES: "saltmarsh_moss_aliases.tsv"}
CHOSEN: dict[str, Any] = {
    GENE_SETS: None,
    ALIASES: None,
    ONTOLOGY: None,
    "min_size": 5,
    "max_size": 500,
    "core_only": False,
    "aspect": None,
    "evidence_out": "ND",
    "same_source": "unknown",
}
"""What is chosen where nobody has chosen yet; a file is its name, its SHA-256 and, for gene sets, its format."""

NO_TEST = ("same_source",)
"""Choices that do not change the tests."""

AT_HAND = 4


@dataclass(frozen=True, eq=False)
class Handed:
    """What of an enrichment is handed over.

    Attributes
    ----------
    meaning : Meaning
    request : MeaningRequest
    files : dict of bytes
        The files that it was made from, by path.
    same_source : str
        Whether the sets were made from the network's own interactions: `yes`, `no` or `unknown`.
    """

    meaning: Meaning
    request: MeaningRequest
    files: dict[str, bytes]
    same_source: str


class MeaningDesk:
    """Answers about gene sets; any thread may ask.

    Parameters
    ----------
    workspace : Workspace
    jobs : Jobs
    """

    def __init__(self, workspace: Workspace, jobs: Jobs) -> None:
        self._workspace = workspace
        self._jobs = jobs
        self._lock = threading.RLock()
        self._found: OrderedDict[str, Meaning | str] = OrderedDict()

    # files and choices

    def keep(self, kind: str, content: bytes, file_name: str) -> dict[str, str]:
        """Look into a file, keep it, and return its description: name, SHA-256 and, for gene sets, format.

        Raises
        ------
        InputError
            Where the bytes are not of this kind.
        """
        file_name = PurePosixPath(file_name.replace("\\", "/")).name
        described = {"name": file_name, "sha256": hashlib.sha256(content).hexdigest()}
        if kind == GENE_SETS:
            if not content.strip():
                raise InputError(file_name, "the file is empty", "give a file of gene sets")
            text, _ = decode(unpack(content, file_name), file_name)
            described["format"] = recognise(text.split("\n"), file_name).key
        elif kind == ALIASES:
            parse_aliases(content, file_name)
        elif kind == ONTOLOGY:
            parse_ontology(content, file_name)
        else:
            raise InputError(file_name, f"{kind!r} is no kind of file", f"choose one of {', '.join(KINDS)}")
        self._workspace.save_arrays(FILE, described["sha256"], {"bytes": np.frombuffer(content, np.uint8)})
        return described

    def content(self, described: Mapping[str, str]) -> bytes:
        """Return the bytes of a file that was kept.

        Raises
        ------
        InputError
            Where the workspace has it no more.
        """
        arrays = self._workspace.arrays(FILE, described["sha256"])
        if arrays is None:
            raise InputError(described["name"], "the workspace no longer has this file", "give it again")
        return arrays["bytes"].tobytes()

    def chosen(self, fingerprint: str | None) -> dict[str, Any]:
        """Return the gene sets and settings chosen for a network."""
        kept = self._workspace.recall(f"gene sets of {fingerprint}") if fingerprint else None
        return {**CHOSEN, **(kept or {})}

    def choose(self, fingerprint: str, **changes: Any) -> None:
        """Change what is chosen for a network."""
        self._workspace.remember(f"gene sets of {fingerprint}", {**self.chosen(fingerprint), **changes})

    def has_sample(self, network: Network | None) -> bool:
        """Whether the sample gene sets belong to a network."""
        return network is not None and network.provenance.get("file") == SAMPLE_NETWORK

    def choose_sample(self, fingerprint: str) -> None:
        """Take the sample gene sets with their aliases."""
        files = {kind: (sample_folder() / name).read_bytes() for kind, name in SAMPLE_FILES.items()}
        kept = {kind: self.keep(kind, content, SAMPLE_FILES[kind]) for kind, content in files.items()}
        self.choose(fingerprint, **kept, same_source="no")

    # enrichment

    def start(self, study_id: str, study: Study) -> str | None:
        """Begin to test the modules of a study, unless that is done; return the job's id, None for none."""
        chosen = self.chosen(study.network.fingerprint)
        key = _key(study_id, chosen)
        if chosen[GENE_SETS] is None or self._outcome(key) is not None:
            return None

        def work(progress: Progress) -> Meaning | str:
            try:
                outcome: Meaning | str = self._test(study, chosen, progress)
            except Cancelled:
                raise
            except CorymbError as error:  # told at the station, beside what caused it
                outcome = str(error)
            self._keep(key, outcome)
            return outcome

        job = self._jobs.start("meaning", key, work)
        state = self._jobs.state(job)
        if state is not None and state.status == "done":  # done earlier, and let go of since
            self._keep(key, self._jobs.result(job))
        return job

    def _keep(self, key: str, outcome: Meaning | str) -> None:
        with self._lock:
            self._found[key] = outcome
            self._found.move_to_end(key)
            while len(self._found) > AT_HAND:
                self._found.popitem(last=False)

    def found(self, study_id: str | None, study: Study | None) -> Meaning | None:
        """Return the enrichment of a study with the gene sets chosen, None where it is not ready."""
        outcome = self._outcome_of(study_id, study)
        return outcome if isinstance(outcome, Meaning) else None

    def fault(self, study_id: str | None, study: Study | None) -> str:
        """Return why there is no enrichment of a study; empty where there is one or it is on its way."""
        outcome = self._outcome_of(study_id, study)
        return outcome if isinstance(outcome, str) else ""

    def version(self, study_id: str | None, study: Study | None) -> str:
        """Return a word that changes when what the station shows has changed."""
        if study is None or study_id is None:
            return ""
        chosen = self.chosen(study.network.fingerprint)
        if chosen[GENE_SETS] is None:
            return ""
        key = _key(study_id, chosen)
        return f"{key}:{chosen['same_source']}:{self._outcome(key) is not None}"

    def for_handover(self, study_id: str, study: Study, folder: str) -> Handed | None:
        """Return the enrichment of a study with what a recipe says of it; the files by path within `folder`.

        None where no gene sets are chosen, or the modules cannot be tested with them (the station says why).
        """
        chosen = self.chosen(study.network.fingerprint)
        if chosen[GENE_SETS] is None:
            return None
        key = _key(study_id, chosen)
        outcome = self._outcome(key)
        if outcome is None:
            try:
                outcome = self._test(study, chosen, silent)
            except CorymbError as error:
                outcome = str(error)
            self._keep(key, outcome)
        if isinstance(outcome, str):
            return None
        request, files = self._request(chosen, folder)
        return Handed(outcome, request, files, chosen["same_source"])

    def _request(self, chosen: Mapping[str, Any], folder: str) -> tuple[MeaningRequest, dict[str, bytes]]:
        files: dict[str, bytes] = {}
        sources: dict[str, Source] = {}
        for kind in KINDS:
            if chosen[kind] is not None and (kind != ONTOLOGY or _is_annotations(chosen)):
                path = f"{folder}/{chosen[kind]['name']}"
                files[path] = self.content(chosen[kind])
                sources[kind] = Source(chosen[kind]["name"], chosen[kind]["sha256"], path)
        options = _options(chosen)
        request = MeaningRequest(
            **sources, evidence_out=options["evidence_out"], aspect=options["aspect"], settings=_settings(chosen)
        )
        return request, files

    def _test(self, study: Study, chosen: Mapping[str, Any], progress: Progress) -> Meaning:
        reading = self._read(study, chosen, portion(progress, 0.0, 0.5))
        aliases = Aliases()
        if chosen[ALIASES] is not None:
            aliases = parse_aliases(self.content(chosen[ALIASES]), chosen[ALIASES]["name"])
        modules = ModuleGenes.of_study(study)
        return find_meaning(modules, reading, _settings(chosen), aliases=aliases, progress=portion(progress, 0.5, 1.0))

    def _read(self, study: Study, chosen: Mapping[str, Any], progress: Progress) -> SetReading:
        gene_sets = chosen[GENE_SETS]
        ontology = None
        if chosen[ONTOLOGY] is not None and _is_annotations(chosen):
            ontology = parse_ontology(self.content(chosen[ONTOLOGY]), chosen[ONTOLOGY]["name"])
        return parse_gene_sets(
            self.content(gene_sets),
            gene_sets["name"],
            **_options(chosen),
            ontology=ontology,
            known=study.network.index,
            progress=progress,
        )

    def _outcome_of(self, study_id: str | None, study: Study | None) -> Meaning | str | None:
        if study is None or study_id is None:
            return None
        return self._outcome(_key(study_id, self.chosen(study.network.fingerprint)))

    def _outcome(self, key: str) -> Meaning | str | None:
        with self._lock:
            return self._found.get(key)


FILE = "gene-set file"


def _key(study_id: str, chosen: Mapping[str, Any]) -> str:
    """Return what the tests of a study depend on, as one short word."""
    deciding = {name: value for name, value in chosen.items() if name not in NO_TEST}
    text = json.dumps([study_id, deciding], sort_keys=True)
    return hashlib.sha256(text.encode()).hexdigest()[:24]


def _settings(chosen: Mapping[str, Any]) -> MeaningSettings:
    return MeaningSettings(chosen["min_size"], chosen["max_size"], core_only=chosen["core_only"])


def _is_annotations(chosen: Mapping[str, Any]) -> bool:
    return chosen[GENE_SETS] is not None and chosen[GENE_SETS]["format"] == ANNOTATIONS


def _options(chosen: Mapping[str, Any]) -> dict[str, Any]:
    """Return the settings that belong to annotation files, None for other files."""
    if not _is_annotations(chosen):
        return {"evidence_out": None, "aspect": None}
    codes = tuple(code for code in str(chosen["evidence_out"]).replace(",", " ").split() if code)
    return {"evidence_out": codes, "aspect": chosen["aspect"]}
