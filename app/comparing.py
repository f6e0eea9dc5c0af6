"""From two outputs of `corymb modules` to a folder that compares them."""

from __future__ import annotations

import hashlib
from dataclasses import dataclass, replace
from pathlib import Path

from analysis.compare import Clustering, Comparison, ComparisonSettings, compare
from analysis.errors import InputError
from analysis.handover import check_folder, write_folder
from analysis.handover.comparison_files import ComparedFolder, comparison_files
from analysis.handover.reading_back import NEEDED, READ, clustering_from
from analysis.intake.opener import read_bytes
from analysis.progress import Progress, silent
from app.pipeline import relative_path


@dataclass(frozen=True, eq=False)
class Output:
    """An output of `corymb modules`, read back."""

    folder: Path
    clustering: Clustering
    sha256: str

    def seen_from(self, out: Path) -> ComparedFolder:
        """Return the folder as a recipe in the folder `out` names it."""
        return ComparedFolder(relative_path(self.folder, out), self.clustering.label, self.sha256)


def read_folder(folder: Path, label: str = "") -> Output:
    """Read a clustering back.

    Parameters
    ----------
    label : str
        What to call it; the folder's name where it is empty.

    Raises
    ------
    InputError
        Where the folder is none that `corymb modules` wrote.
    """
    for name in NEEDED:
        if not (folder / name).is_file():
            raise InputError(str(folder), f"there is no {name} in it", "name a folder that corymb modules wrote")
    files = {name: read_bytes(folder / name) for name in READ if (folder / name).is_file()}
    digest = hashlib.sha256(b"".join(hashlib.sha256(files[name]).digest() for name in NEEDED))
    return Output(folder, clustering_from(files, label or folder.resolve().name), digest.hexdigest())


def compare_into(
    first: Output, second: Output, settings: ComparisonSettings, out: Path, progress: Progress = silent
) -> Comparison:
    """Compare two outputs and write everything into the folder `out`, whole or not at all."""
    check_folder(out)
    if first.clustering.label == second.clustering.label:
        first, second = _told_apart(first, "first"), _told_apart(second, "second")
    comparison = compare(first.clustering, second.clustering, settings, progress)
    write_folder(comparison_files(comparison, settings, first.seen_from(out), second.seen_from(out)), out)
    return comparison


def _told_apart(output: Output, side: str) -> Output:
    label = f"{output.clustering.label} ({side})"
    return replace(output, clustering=replace(output.clustering, label=label))
