"""Which network is at hand: on arrival, after an upload, from the workspace."""

from __future__ import annotations

from typing import Any

from dash import ALL, Dash, Input, Output, State, ctx, html, no_update

from app.desk import Desk
from app.frame import WANTED
from app.parts import link
from app.ruler import QUESTIONS
from app.wiring.triggers import pressed

AT_HAND = "network at hand"


def wire(app: Dash, desk: Desk) -> None:
    """Add the callbacks."""

    @app.callback(
        Output("at-hand", "data"),
        Output("fault", "data"),
        Input("from-upload", "data"),
        Input({"type": "open-network", "fingerprint": ALL}, "n_clicks"),
        State("at-hand", "data"),
    )
    def take_network(upload: Any, _clicks: Any, at_hand: str | None) -> Any:
        if ctx.triggered_id == "from-upload" and upload:
            if upload.get("fault"):
                return no_update, upload["fault"]
            return _at_hand(desk, upload["fingerprint"]), ""
        if pressed("open-network"):
            return _at_hand(desk, ctx.triggered_id["fingerprint"]), ""
        known = at_hand and any(entry.fingerprint == at_hand for entry in desk.workspace.networks())
        return (no_update if known else desk.first_network()), no_update

    @app.callback(
        Output("map-order", "data"),
        Output("map-name", "children"),
        Output("map-counts", "children"),
        Output("wanted", "data", allow_duplicate=True),
        Output("pick", "data", allow_duplicate=True),
        Input("at-hand", "data"),
        State("wanted", "data"),
        prevent_initial_call="initial_duplicate",
    )
    def show_network(fingerprint: str | None, wanted: Any) -> Any:
        if not fingerprint:
            return no_update, no_update, no_update, no_update, no_update
        network = desk.network(fingerprint)
        desk.start_drawing(fingerprint)
        order = {"url": f"/data/{fingerprint}", "label": network.label, "fingerprint": fingerprint}
        counts = f"{network.node_count:,} genes, {network.edge_count:,} interactions"
        same = wanted and wanted.get("network") == fingerprint
        fresh = {**WANTED, **(desk.last_wanted(fingerprint) or {}), "network": fingerprint}
        return order, network.label, counts, (no_update if same else fresh), (no_update if same else None)

    @app.callback(Output("state-suggestion", "children"), Input("ruler-data", "data"), prevent_initial_call=True)
    def suggest(ruler: Any) -> Any:
        if not ruler or ruler["suggestion"] is None:
            return ""
        value = f"{ruler['suggestion']:.2g}"
        return [
            "suggested: ",
            html.Span(link(value, {"type": "resolution", "value": ruler["suggestion"]}), title=ruler["reason"]),
        ]

    @app.callback(
        Output("wanted", "data", allow_duplicate=True),
        Input({"type": "question", "quality": ALL}, "n_clicks"),
        Input("from-ruler", "data"),
        Input({"type": "resolution", "value": ALL}, "n_clicks"),
        State("wanted", "data"),
        prevent_initial_call=True,
    )
    def ask(_clicks: Any, rest: Any, _suggested: Any, wanted: dict[str, Any]) -> Any:
        if pressed("question"):
            quality = ctx.triggered_id["quality"]
            return {
                **wanted,
                "method": "leiden",
                "quality": quality,
                "resolution": QUESTIONS[quality].start,
                "nulls": 0,
            }
        if pressed("resolution"):
            return {**wanted, **_at_resolution(wanted), "resolution": float(ctx.triggered_id["value"]), "nulls": 0}
        if ctx.triggered_id == "from-ruler" and rest:
            return {**wanted, **_at_resolution(wanted), "resolution": float(rest["value"]), "nulls": 0}
        return no_update


def _at_resolution(wanted: dict[str, Any]) -> dict[str, Any]:
    """Leave methods that have no resolution when the ruler is moved."""
    return {} if wanted["method"] in {"leiden", "louvain"} else {"method": "leiden"}


def _at_hand(desk: Desk, fingerprint: str) -> str:
    desk.workspace.mark_opened(fingerprint)
    desk.workspace.remember(AT_HAND, fingerprint)
    return fingerprint
