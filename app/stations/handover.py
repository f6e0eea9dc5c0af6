"""Handover: what will be written, and one button."""

from __future__ import annotations

from typing import Any

from dash import dcc

from analysis.handover import EXTRAS, has_confidence
from analysis.handover.tables import can_write_parquet
from analysis.study import Study
from analysis.verdicts import DEGREE_CAUTION, STRUCTURE_CAUTION, USE_CAUTION
from app.parts import button, heading, notice, sentence, table
from app.view import Pane, View

KEY = "handover"
TITLE = "Handover"
FILES = (
    ("membership.csv", "one row per gene and module, with confidence, second home and role"),
    ("modules.csv", "one row per module, with all its evidence"),
    ("gene_lists/", "one file per module, one gene a line, and background.txt for enrichment"),
    ("summary.json", "figures, settings and versions"),
    ("report.html", "figures, tables, cautions and a methods paragraph, in one file"),
    ("network.graphml", "the network with module, confidence and role at each node"),
    ("references.bib", "what the methods paragraph cites, as BibTeX"),
    ("recipe.toml", "repeats all of it: corymb rerun recipe.toml -o FOLDER"),
)
MEANING_FILES = (
    ("enrichment.csv", "one row per module and gene set with a common gene, with q-values and the genes"),
    ("spread.csv", "one row per gene set: over how many modules it is spread"),
)
CHOICES = {
    "tsv": "membership.tsv: the membership table with tabs",
    "xlsx": "membership.xlsx: both tables as a workbook; gene symbols are text, so that none becomes a date",
    "parquet": "membership.parquet: the membership table, for programs",
    "core-lists": "gene_lists_core/: core only, the genes that stay in nine of ten copies; background beside them",
    "set-lines": "module_sets.tsv: all modules in one file, one line each, for enrichment programs",
    "map-svg": "map.svg: the map with its legend, to be edited",
    "map-pdf": "map.pdf: the same for print",
    "figure-data": "figure_data/: the numbers behind the figures",
}
"""What may be written too; keys of `analysis.handover.EXTRAS`."""
PICTURE_SENTENCE = (
    "The map as it stands on the screen can be saved as a picture with its legend. map.svg and map.pdf draw the whole "
    "network with the modules' own colours in the order of their numbers."
)


def state(view: View) -> str:
    """Return how far the station is: done once this clustering was handed over, stale where another was."""
    if not view.study_id or not view.fingerprint:
        return "empty"
    recall = view.desk.workspace.recall
    if recall(f"handed over {view.study_id}"):
        return "done"
    others = view.desk.workspace.trail(view.fingerprint)
    return "stale" if any(recall(f"handed over {entry.id}") for entry in others) else "empty"


def _files(view: View) -> tuple[tuple[str, str], ...]:
    """Return what is always written, with the tables of gene sets where such were given."""
    return FILES + (MEANING_FILES if view.desk.meaning.chosen(view.fingerprint)["gene_sets"] else ())


def render(view: View) -> Pane:
    """Return the list of files, the cautions and the button."""
    if view.study is None:
        return Pane(TITLE, [sentence("There is no clustering to hand over yet.", first=True)], [])
    three = int((view.study.modules.sizes >= 3).sum())
    body: list[Any] = [
        sentence(f"{len(view.study.modules)} modules, {three} of three genes or more, as one zip file.", first=True),
        sentence(f"Shown and written: {view.study.shown}. The input file goes in too, so that the recipe works."),
        heading("What will be written"),
        table(["file", "content"], [list(each) for each in _files(view)], name="Files"),
        heading("What may be written too"),
        dcc.Checklist(
            _choices(view.study),
            [],
            id={"type": "handover-parts", "index": 0},
            className="choices",
            persistence=True,
            persistence_type="session",
        ),
        *([] if can_write_parquet() else [sentence("Parquet needs pyarrow, which is not installed here.")]),
        heading("The map as a picture"),
        sentence(PICTURE_SENTENCE),
        button("Save the map as PNG (300 dpi)", "save-map"),
        notice(f"{STRUCTURE_CAUTION} {DEGREE_CAUTION} {USE_CAUTION}"),
    ]
    return Pane(
        TITLE, body, [button("Write and save the zip", {"type": "hand-over", "index": 0}, kind="button primary")]
    )


def _choices(study: Study) -> list[dict[str, Any]]:
    """Return what may be written too; what cannot be is there and cannot be chosen."""
    impossible = {"core-lists": not has_confidence(study.settings), "parquet": not can_write_parquet()}
    return [{"label": CHOICES[part], "value": part, "disabled": impossible.get(part, False)} for part in EXTRAS]
