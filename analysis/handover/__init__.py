"""What is handed over: tables, lists, a graph file, a report and a recipe.

An export is one function that takes a `Bundle` and returns bytes by file name, and one line in `EXPORTS`.
"""

from __future__ import annotations

from analysis.handover.bundle import Bundle, Exporter, Source, SweepBundle, report_from_plain
from analysis.handover.gene_lists import gene_list_files
from analysis.handover.graph_file import graphml_file
from analysis.handover.recipe import Recipe, read_recipe, recipe_file
from analysis.handover.report import report_file
from analysis.handover.summary import summary_file
from analysis.handover.sweep_files import sweep_bundle_files, sweep_sentences
from analysis.handover.tables import membership_file, modules_file
from analysis.handover.writer import as_zip, check_folder, write_folder
from analysis.progress import Progress, silent

__all__ = [
    "EXPORTS",
    "Bundle",
    "Exporter",
    "Recipe",
    "Source",
    "SweepBundle",
    "as_zip",
    "bundle_files",
    "check_folder",
    "read_recipe",
    "report_from_plain",
    "sweep_bundle_files",
    "sweep_sentences",
    "write_folder",
]

EXPORTS: dict[str, Exporter] = {
    "membership": membership_file,
    "modules": modules_file,
    "gene lists": gene_list_files,
    "summary": summary_file,
    "recipe": recipe_file,
    "report": report_file,
    "network": graphml_file,
}


def bundle_files(bundle: Bundle, progress: Progress = silent) -> dict[str, bytes]:
    """Return the content of every file of a bundle by its relative path."""
    files: dict[str, bytes] = {}
    for position, (name, export) in enumerate(EXPORTS.items()):
        progress(position / len(EXPORTS), f"writing the {name}")
        files |= export(bundle)
    progress(1.0, "writing")
    return files
