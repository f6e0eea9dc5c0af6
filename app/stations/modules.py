"""Modules: the clustering at hand, its modules and genes, and the trail of clusterings."""

from __future__ import annotations

import math
from typing import Any

from dash import dcc, html

from analysis.evidence import HARVEST
from analysis.study import Study
from analysis.verdicts import STRUCTURE_CAUTION
from app.grids import gene_grid, height, module_grid
from app.parts import button, field, heading, link, notice, number, sentence, sentences, table
from app.ruler import QUESTIONS
from app.view import Pane, View

KEY = "modules"
TITLE = "Modules"
METHOD_LABELS = {
    "leiden": "Leiden",
    "louvain": "Louvain",
    "clique-percolation": "clique percolation",
    HARVEST: "harvest",
}
METHOD_SENTENCES = {
    "leiden": "Every gene in one module, at the resolution of the ruler.",
    "louvain": "The older method, for comparison with earlier work; Leiden's modules are never torn inside.",
    "clique-percolation": "Modules may share genes; genes in no group of k are left out. It has no resolution but k.",
    HARVEST: "Modules each at its own resolution from a whole sweep, best supported first; genes in none are left out.",
}
TRAIL_SHOWN = 30
PIN_SENTENCE = "Pin two clusterings to compare them; a pin stays when another network is opened."
MODULE_TABLE, GENE_TABLE = TABLES = ("modules", "genes")


def state(view: View) -> str:
    """Return how far the station is."""
    if view.study is None:
        return "empty"
    return "done"


def render(view: View) -> Pane:
    """Return the verdict, the tables of modules and genes, the method's settings and the trail."""
    if view.study is None:
        return Pane(TITLE, [sentence("The modules are being worked out.", first=True), *_settings(view)], [])
    study = view.study
    body: list[Any] = [
        *sentences(_brief(study)),
        notice(STRUCTURE_CAUTION),
        dcc.RadioItems(
            list(TABLES),
            MODULE_TABLE,
            id="table-kind",
            className="segments",
            persistence=True,
            persistence_type="session",
        ),
        # filled by a callback, so that only the table that is seen is made; its room is kept, so that nothing jumps
        html.Div(id="table-area", style={"minHeight": f"{height(len(study.modules))}px"}),
        *_settings(view),
        *_trail(view),
    ]
    hand_over = button("Hand over genes", {"type": "go-on", "station": "handover"}, kind="button primary")
    return Pane(TITLE, body, [hand_over])


def table_of(view: View, kind: str | None) -> Any:
    """Return the table of modules or of genes, nothing before there is a clustering."""
    if view.study is None:
        return []
    return gene_grid(view.study) if kind == GENE_TABLE else module_grid(view.study, view.hues())


def _brief(study: Study) -> list[str]:
    return list(study.sentences)


def _settings(view: View) -> list[Any]:
    wanted = view.wanted
    options = [{"label": label, "value": key} for key, label in METHOD_LABELS.items()]
    controls = [
        field(
            "method",
            dcc.Dropdown(options, wanted["method"], id="method", clearable=False, searchable=False),
        ),
        field("seed", dcc.Input(value=wanted["seed"], type="number", min=0, step=1, id="seed", debounce=True)),
    ]
    if wanted["method"] == "clique-percolation":
        hint = "a community is a chain of groups of k genes, all joined, each sharing all but one with the next"
        control = dcc.Input(value=wanted["k"], type="number", min=2, max=100, step=1, id="k", debounce=True)
        controls.insert(1, field("k", control, hint))
    if wanted["method"] == HARVEST:
        options = [
            {"label": "only the well supported", "value": "supported"},
            {"label": "all that hold", "value": "all"},
        ]
        keep = dcc.Dropdown(options, wanted.get("keep", "supported"), id="keep", clearable=False, searchable=False)
        controls.insert(1, field("keep", keep))
    if wanted["method"] in {"leiden", "louvain"}:
        options = [
            {"label": "the best run", "value": "best"},
            {"label": "the consensus of all runs", "value": "consensus"},
        ]
        show = dcc.Dropdown(options, wanted.get("show", "best"), id="show", clearable=False, searchable=False)
        controls.insert(1, field("shown", show))
    return [
        heading("How they are found"),
        html.Div(controls, className="fields"),
        html.P(METHOD_SENTENCES[wanted["method"]], className="hint"),
        *([html.P(QUESTIONS[wanted["quality"]].sentence, className="hint")] if wanted["method"] == "leiden" else []),
    ]


def _trail(view: View) -> list[Any]:
    if not view.fingerprint:
        return []
    entries = _distinct(view.desk.workspace.trail(view.fingerprint))
    if len(entries) < 2:
        return []
    rows = [
        [
            html.Span(
                link(entry.name or clustering_line(entry.settings), {"type": "return-to", "study": entry.id}),
                **({"aria-current": "true"} if entry.id == view.study_id else {}),
            ),
            f"{entry.figures['modules']:,}",
            number(entry.figures["modularity"], 3),
            number(entry.figures["noise_ami"]),
            button("pin", {"type": "pin-clustering", "study": entry.id}, kind="link", **{"aria-pressed": "false"}),
        ]
        for entry in reversed(entries[-TRAIL_SHOWN:])
    ]
    head = ["clustering", "modules", "modularity", "noise AMI", "compare"]
    return [heading("Trail"), sentence(PIN_SENTENCE), table(head, rows, numeric=[1, 2, 3], name="Trail of clusterings")]


def _distinct(entries: list[Any]) -> list[Any]:
    """Keep one line per clustering: the same settings with and without null networks give the same modules."""
    kept: dict[Any, Any] = {}
    for entry in entries:
        settings = {key: value for key, value in entry.settings.items() if key != "nulls"}
        kept[repr(sorted(settings.items(), key=str))] = entry
    return list(kept.values())


def clustering_line(settings: Any) -> str:
    """Return the settings of a clustering in one line."""
    label = METHOD_LABELS.get(settings["method"], settings["method"])
    if settings["method"] == "clique-percolation":
        return f"{label}, k = {settings['k']}"
    if settings["method"] == "harvest":
        return f"{label}, seed {settings['seed']}"
    resolution = settings["resolution"]
    shown = f"{resolution:.3g}" if isinstance(resolution, float | int) and math.isfinite(resolution) else resolution
    asked = QUESTIONS[settings["quality"]].label if settings["method"] == "leiden" else "wide neighbourhoods"
    return f"{label}, {asked}, {shown}, seed {settings['seed']}"
