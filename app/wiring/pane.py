"""The path and the reading pane."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

from dash import ALL, Dash, Input, Output, State, ctx, html, no_update

from app.compare_pane import compare_pane
from app.desk import Desk
from app.frame import WANTED
from app.keys import keys_pane
from app.listing import listing
from app.parts import fault, link
from app.passports import gene_passport, module_passport
from app.stations import START, STATIONS, intake
from app.stations.modules import table_of
from app.view import Pane, View
from app.wiring.triggers import pressed


def wire(app: Dash, desk: Desk) -> None:
    """Add the callbacks."""

    @app.callback(
        Output("station", "data"),
        Output("pick", "data", allow_duplicate=True),
        Output("fault", "data", allow_duplicate=True),
        Input({"type": "go", "station": ALL}, "n_clicks"),
        Input({"type": "go-on", "station": ALL}, "n_clicks"),
        Input({"type": "back", "index": ALL}, "n_clicks"),
        Input({"type": "keys", "index": ALL}, "n_clicks"),
        prevent_initial_call=True,
    )
    def go(_clicks: Any, _on: Any, _back: Any, _keys: Any) -> Any:
        if pressed("go") or pressed("go-on"):
            return ctx.triggered_id["station"], None, ""
        if pressed("back"):
            return no_update, None, no_update
        if pressed("keys"):
            return no_update, {"kind": "keys"}, no_update
        return no_update, no_update, no_update

    @app.callback(
        Output("pane-head", "children"),
        Output("pane-body", "children"),
        Output("pane-actions", "children"),
        Output({"type": "go", "station": ALL}, "data-state"),
        Output({"type": "go", "station": ALL}, "aria-current"),
        Input("station", "data"),
        Input("pick", "data"),
        Input("shown", "data"),
        Input("at-hand", "data"),
        Input("names-version", "data"),
        Input("fault", "data"),
        Input("map-order", "data"),
        Input("trust-seen", "data"),
        Input("meaning-seen", "data"),
        Input("save-order", "data"),
        State("wanted", "data"),
        State("pending", "data"),
    )
    def fill(
        station: str,
        pick: Any,
        shown: Any,
        fingerprint: str | None,
        _names: Any,
        message: str,
        _map: Any,
        _trust: Any,
        _meaning: Any,
        _saved: Any,
        wanted: Any,
        pending: Any,
    ) -> Any:
        view = replace(
            _view(desk, fingerprint, shown, wanted, message), draws=desk.draws(pending["study"] if pending else None)
        )
        place = station if station in STATIONS else START
        pane = _picked(view, pick) or STATIONS[place].render(view)
        targets = [each["id"]["station"] for each in ctx.outputs_list[3]]
        states = [STATIONS[key].state(view) if key in STATIONS else "empty" for key in targets]
        current = ["page" if key == place else None for key in targets]
        # Intake shows a fault beside the place where files are dropped, which is at its own head.
        told = [fault(message)] if message and pane.title != intake.TITLE else []
        return _crumbs(place, pane, pick), [*told, *pane.body], pane.actions, states, current

    @app.callback(
        Output("table-area", "children"),
        Input("table-kind", "value"),
        State("at-hand", "data"),
        State("shown", "data"),
    )
    def fill_table(kind: str | None, fingerprint: str | None, shown: Any) -> Any:
        return table_of(_view(desk, fingerprint, shown, None, ""), kind)


def _view(desk: Desk, fingerprint: str | None, shown: Any, wanted: Any, message: str) -> View:
    study_id = shown["study"] if shown and shown.get("network") == fingerprint else None
    return View(desk, fingerprint, wanted or WANTED, desk.study(study_id), study_id, message or "")


def _picked(view: View, pick: Any) -> Pane | None:
    kind = (pick or {}).get("kind")
    if kind == "module":
        return module_passport(view, view.module_of(pick))
    if kind == "gene":
        return gene_passport(view, int(pick["index"]))
    if kind == "compare":
        return compare_pane(view, pick)
    if kind == "list":
        return listing(view, pick)
    return keys_pane() if kind == "keys" else None


def _crumbs(station: str, pane: Pane, pick: Any) -> list[Any]:
    title = STATIONS[station].TITLE
    if not pick or pick.get("kind") == "nothing":
        return [html.Strong(title)]
    return [link(f"← {title}", {"type": "back", "index": 0}), html.Span(" / "), html.Span(pane.title)]
