"""What the Portrait station asks for: the portrait, by itself where the network is small."""

from __future__ import annotations

from typing import Any

from dash import ALL, Dash, Input, Output, State, ctx, no_update

from app.desk import Desk
from app.portraits import KIND, is_drawn, start_portrait
from app.stations import portrait
from app.wiring.triggers import pressed


def wire(app: Dash, desk: Desk) -> None:
    """Add the callbacks."""

    @app.callback(
        Output("tick", "disabled", allow_duplicate=True),
        Input({"type": "draw-portrait", "index": ALL}, "n_clicks"),
        Input("station", "data"),
        Input("at-hand", "data"),
        prevent_initial_call=True,
    )
    def draw(_clicks: Any, station: str, fingerprint: str | None) -> Any:
        if station != portrait.KEY or not fingerprint:
            return no_update
        by_itself = ctx.triggered_id in ("station", "at-hand") and desk.is_small(fingerprint)
        if by_itself or pressed("draw-portrait"):
            return no_update if start_portrait(desk, fingerprint) is None else False
        return no_update

    # A section that has come fills the pane anew, as a point of Trust's curve does; the last one comes with the end of
    # the ticks.
    @app.callback(
        Output("trust-seen", "data", allow_duplicate=True),
        Input("tick", "n_intervals"),
        Input("tick", "disabled"),
        State("station", "data"),
        State("at-hand", "data"),
        State("trust-seen", "data"),
        prevent_initial_call=True,
    )
    def watch(_ticks: Any, _ended: Any, station: str, fingerprint: str | None, seen: Any) -> Any:
        if station != portrait.KEY or not fingerprint:
            return no_update
        running = [job for job in desk.jobs.running() if (job.kind, job.key) == (KIND, fingerprint)]
        now = [KIND, fingerprint, running[0].items if running else -1 if is_drawn(desk, fingerprint) else -2]
        return no_update if now == seen else now
