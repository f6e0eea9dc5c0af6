"""What is handed over: tables, lists, a graph file, a report and a recipe.

An export is one function that takes a `Bundle` and returns bytes by file name, and one line in `EXPORTS`.
"""

from __future__ import annotations

from collections.abc import Sequence

from analysis.errors import SettingError
from analysis.handover.bundle import Bundle, Exporter, Section, Source, SweepBundle, report_from_plain
from analysis.handover.figure_data import figure_data_files
from analysis.handover.gene_lists import core_list_files, gene_list_files, set_line_file
from analysis.handover.graph_file import graphml_file
from analysis.handover.meaning_files import (
    MeaningBundle,
    meaning_bundle_files,
    meaning_files,
    meaning_section,
)
from analysis.handover.meaning_recipe import EnrichRecipe, MeaningRequest, read_enrich_recipe
from analysis.handover.membership_reader import parse_membership
from analysis.handover.recipe import Recipe, read_recipe, recipe_file
from analysis.handover.report import map_pdf_file, map_svg_file, references_file, report_file
from analysis.handover.summary import summary_file
from analysis.handover.sweep_files import sweep_bundle_files, sweep_sentences
from analysis.handover.tables import check_parquet, membership_file, modules_file, parquet_file, tsv_file
from analysis.handover.workbook import workbook_file
from analysis.handover.writer import as_zip, check_folder, write_folder
from analysis.progress import Progress, silent
from analysis.study import StudySettings

__all__ = [
    "EXPORTS",
    "EXTRAS",
    "Bundle",
    "EnrichRecipe",
    "Exporter",
    "MeaningBundle",
    "MeaningRequest",
    "Recipe",
    "Section",
    "Source",
    "SweepBundle",
    "as_zip",
    "bundle_files",
    "check_folder",
    "check_parts",
    "has_confidence",
    "meaning_bundle_files",
    "meaning_section",
    "parse_membership",
    "read_enrich_recipe",
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
    "references": references_file,
    "network": graphml_file,
    "enrichment": meaning_files,
}
"""What is always written."""

EXTRAS: dict[str, Exporter] = {
    "tsv": tsv_file,
    "xlsx": workbook_file,
    "parquet": parquet_file,
    "core-lists": core_list_files,
    "set-lines": set_line_file,
    "map-svg": map_svg_file,
    "map-pdf": map_pdf_file,
    "figure-data": figure_data_files,
}
"""What is written beside it where it is asked for; the keys stand in recipes and on the command line."""


def check_parts(parts: Sequence[str], settings: StudySettings) -> None:
    """Raise `SettingError` where something cannot be written; worth asking before long work."""
    unknown = [part for part in parts if part not in EXTRAS]
    if unknown:
        raise SettingError(f"{unknown[0]!r} is nothing that can be written; choose from {', '.join(EXTRAS)}")
    if "parquet" in parts:
        check_parquet()
    if "core-lists" in parts and not has_confidence(settings):
        raise SettingError(
            "core lists need to know how surely genes stay; give --noise above 0, or leiden and louvain --runs above 1"
        )


def has_confidence(settings: StudySettings) -> bool:
    """Tell whether a study with these settings knows how surely each gene stays in its module."""
    ensemble = settings.method in {"leiden", "louvain"} and settings.runs > 1
    return settings.method == "harvest" or settings.noise > 0 or ensemble


def bundle_files(bundle: Bundle, progress: Progress = silent) -> dict[str, bytes]:
    """Return the content of every file of a bundle by its relative path."""
    check_parts(bundle.parts, bundle.study.settings)
    exports = EXPORTS | {part: EXTRAS[part] for part in bundle.parts}
    files: dict[str, bytes] = {}
    for position, (name, export) in enumerate(exports.items()):
        progress(position / len(exports), f"writing the {name}")
        files |= export(bundle)
    progress(1.0, "writing")
    return files
