"""Enrichment from files: what `corymb enrich`, `corymb modules --gene-sets` and `corymb rerun` have in common."""

from __future__ import annotations

import hashlib
from collections.abc import Callable, Sequence
from dataclasses import dataclass, field
from pathlib import Path

from analysis.gene_sets import Aliases, SetReading, match, read_aliases, read_gene_sets, read_ontology
from analysis.handover import MeaningRequest, Source, parse_membership
from analysis.handover.csv_table import unguarded
from analysis.intake.decoding import decode
from analysis.intake.opener import read_bytes
from analysis.intake.unpacking import unpack
from analysis.meaning import Meaning, MeaningSettings, ModuleGenes, find_meaning
from analysis.progress import Progress, silent

BACKGROUND_BESIDE = Path("gene_lists") / "background.txt"
"""Where `corymb modules` writes all genes of the network, as seen from its membership.csv."""


@dataclass(frozen=True)
class MeaningFiles:
    """Files and settings of an enrichment.

    Attributes
    ----------
    gene_sets : Path
    aliases, ontology, background : Path or None
    evidence_out : tuple of str or None
    aspect : str or None
    settings : MeaningSettings
    """

    gene_sets: Path
    aliases: Path | None = None
    ontology: Path | None = None
    background: Path | None = None
    evidence_out: tuple[str, ...] | None = None
    aspect: str | None = None
    settings: MeaningSettings = field(default_factory=MeaningSettings)

    @classmethod
    def of_request(cls, request: MeaningRequest, find: Callable[[Source], Path]) -> MeaningFiles:
        """Return the files that a recipe names; `find` gives the place of each."""

        def place(source: Source | None) -> Path | None:
            return None if source is None else find(source)

        return cls(
            find(request.gene_sets),
            place(request.aliases),
            place(request.ontology),
            place(request.background),
            request.evidence_out,
            request.aspect,
            request.settings,
        )

    def request(self, source_of: Callable[[Path], Source]) -> MeaningRequest:
        """Return what a recipe says of it; `source_of` names a file as seen from the recipe."""

        def named(path: Path | None) -> Source | None:
            return None if path is None else source_of(path)

        return MeaningRequest(
            source_of(self.gene_sets),
            named(self.aliases),
            named(self.ontology),
            named(self.background),
            self.evidence_out,
            self.aspect,
            self.settings,
        )


@dataclass(frozen=True, eq=False)
class Opened:
    """What the files of an enrichment hold.

    Attributes
    ----------
    reading : SetReading
    aliases : Aliases
    background : list of str, or None
    settings : MeaningSettings
    """

    reading: SetReading
    aliases: Aliases
    background: list[str] | None
    settings: MeaningSettings

    def meaning(self, modules: ModuleGenes, progress: Progress = silent) -> Meaning:
        """Test all modules; see `find_meaning`."""
        return find_meaning(
            modules,
            self.reading,
            self.settings,
            aliases=self.aliases,
            background=self.background,
            progress=progress,
        )


def open_files(genes: Sequence[str], files: MeaningFiles, progress: Progress = silent) -> Opened:
    """Read the files, and make sure that the network's genes are among theirs.

    Raises
    ------
    InputError
        Where a file cannot be used or nothing matches.
    SettingError
        Where a setting does not fit the file.
    """
    reading = read_gene_sets(
        files.gene_sets,
        evidence_out=files.evidence_out,
        aspect=files.aspect,
        ontology=None if files.ontology is None else read_ontology(files.ontology),
        known=frozenset(genes),
        progress=progress,
    )
    aliases = Aliases() if files.aliases is None else read_aliases(files.aliases)
    match(reading.sets, genes, aliases.joined(reading.synonyms))
    background = None if files.background is None else read_gene_list(files.background)
    return Opened(reading, aliases, background, files.settings)


def read_membership(path: Path) -> tuple[ModuleGenes, str]:
    """Return the modules of a membership table, and a sentence on the genes that are in no module.

    Where `gene_lists/background.txt` lies beside the table, as `corymb modules` writes it, its genes are of the
    network too.
    """
    beside = path.parent / BACKGROUND_BESIDE
    others = read_gene_list(beside) if beside.is_file() else []
    modules = parse_membership(read_bytes(path), str(path), others)
    if not others:
        return modules, (
            f"The genes in {path.name} are taken for all genes of the network: there is no "
            f"{BACKGROUND_BESIDE.as_posix()} beside it that names those in no module."
        )
    left_out = len(modules.genes) - len({gene for group in modules.members for gene in group.tolist()})
    return modules, f"The network's genes come from {BACKGROUND_BESIDE.as_posix()}; {left_out:,} are in no module."


def read_gene_list(path: Path) -> list[str]:
    """Return the genes of a list, one a line; blank lines and lines that begin with `#` are left out."""
    text, _ = decode(unpack(read_bytes(path), str(path)), str(path))
    names = (unguarded(line.split("\t")[0]).strip() for line in text.split("\n") if not line.startswith("#"))
    return list(dict.fromkeys(name for name in names if name))


def sha256_of(path: Path) -> str:
    """Return the SHA-256 of a file's bytes."""
    return hashlib.sha256(read_bytes(path)).hexdigest()
