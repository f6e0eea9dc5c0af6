"""Handover: what will be written, and one button."""

from __future__ import annotations

from typing import Any

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
    ("recipe.toml", "repeats all of it: corymb rerun recipe.toml -o FOLDER"),
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


def render(view: View) -> Pane:
    """Return the list of files, the cautions and the button."""
    if view.study is None:
        return Pane(TITLE, [sentence("There is no clustering to hand over yet.", first=True)], [])
    three = int((view.study.modules.sizes >= 3).sum())
    body: list[Any] = [
        sentence(f"{len(view.study.modules)} modules, {three} of three genes or more, as one zip file.", first=True),
        sentence(f"Shown and written: {view.study.shown}. The input file goes in too, so that the recipe works."),
        heading("What will be written"),
        table(["file", "content"], [list(each) for each in FILES], name="Files"),
        notice(f"{STRUCTURE_CAUTION} {DEGREE_CAUTION} {USE_CAUTION}"),
    ]
    return Pane(
        TITLE, body, [button("Write and save the zip", {"type": "hand-over", "index": 0}, kind="button primary")]
    )
