"""The close-up, and the switch between the two drawings."""

from __future__ import annotations

from typing import Any

from dash import ALL, Dash, Input, Output, State, ctx, no_update

from app.desk import Desk
from app.map.closeup import gene_closeup, module_closeup
from app.map.colours import follow
from app.view import View
from app.wiring.triggers import pressed

PICK_FIRST = "Pick a gene or a module first; the close-up shows it with its surroundings."


def wire(app: Dash, desk: Desk) -> None:
    """Add the callbacks."""

    @app.callback(
        Output("drawing-kind", "data"),
        Input({"type": "drawing", "kind": ALL}, "n_clicks"),
        Input({"type": "close-up", "kind": ALL, "index": ALL}, "n_clicks"),
        prevent_initial_call=True,
    )
    def switch(_clicks: Any, _close: Any) -> Any:
        if pressed("drawing"):
            return ctx.triggered_id["kind"]
        return "close-up" if pressed("close-up") else no_update

    @app.callback(
        Output("map", "style"),
        Output("closeup-area", "style"),
        Output({"type": "drawing", "kind": ALL}, "aria-pressed"),
        Output("closeup", "elements"),
        Output("map-counts", "children", allow_duplicate=True),
        Input("drawing-kind", "data"),
        Input("pick", "data"),
        Input("shown", "data"),
        State("at-hand", "data"),
        State("closeup", "elements"),
        prevent_initial_call=True,
    )
    def draw(kind: str, pick: Any, shown: Any, fingerprint: str | None, before: Any) -> Any:
        close = kind == "close-up"
        marks = ["true" if each["id"]["kind"] == kind else "false" for each in ctx.outputs_list[2]]
        styles = ({"visibility": "hidden"}, {"display": "block"}) if close else ({}, {"display": "none"})
        if not fingerprint:
            return *styles, marks, no_update, no_update
        network = desk.network(fingerprint)
        whole = f"{network.node_count:,} genes, {network.edge_count:,} interactions"
        if not close:
            return *styles, marks, no_update, whole
        elements, sentence = _elements(desk, fingerprint, pick, shown, drawn=bool(before))
        return *styles, marks, elements, sentence

    @app.callback(
        Output("pick", "data", allow_duplicate=True),
        Input("closeup", "tapNodeData"),
        prevent_initial_call=True,
    )
    def tap(node: Any) -> Any:
        return {"kind": "gene", "index": int(node["id"]), "within": True} if node else no_update


def _elements(desk: Desk, fingerprint: str, pick: Any, shown: Any, *, drawn: bool) -> Any:
    study = desk.study(shown["study"]) if shown and shown.get("network") == fingerprint else None
    drawing = desk.drawing(fingerprint)
    kind = (pick or {}).get("kind")
    if kind is None and drawn:
        return no_update, no_update  # what was drawn stays until something else is picked
    if (pick or {}).get("within"):
        return no_update, no_update  # a gene tapped inside the close-up opens its passport; the drawing stays
    if study is None or drawing is None or kind not in {"gene", "module"}:
        return [], PICK_FIRST
    hues = follow(drawing[1], study.modules)
    if kind == "gene":
        return gene_closeup(study.network, study.modules, hues, drawing[0], int(pick["index"]))
    module = View(desk, fingerprint, {}, study, None).module_of(pick)
    if module < 0:
        return [], PICK_FIRST
    return module_closeup(study.network, study.modules, hues, drawing[0], module)
