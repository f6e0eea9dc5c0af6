"""What the Trust station asks for: null networks and the noise curve, by themselves where that is quick."""

from __future__ import annotations

from typing import Any

import numpy as np
from dash import ALL, Dash, Input, Output, State, ctx, no_update

from analysis.evidence import HARVEST
from app.desk import Desk
from app.stations import trust
from app.wiring.triggers import pressed

NULLS = 100
DRAWS_AT_A_TIME = 10


def wire(app: Dash, desk: Desk) -> None:
    """Add the callbacks."""

    @app.callback(
        Output("wanted", "data", allow_duplicate=True),
        Input({"type": "compare-with-chance", "index": ALL}, "n_clicks"),
        Input("station", "data"),
        Input("shown", "data"),
        State("wanted", "data"),
        prevent_initial_call=True,
    )
    def compare_with_chance(_clicks: Any, station: str, shown: Any, wanted: Any) -> Any:
        if not wanted or wanted["nulls"] or wanted["method"] == HARVEST:
            return no_update
        by_itself = (
            ctx.triggered_id in ("station", "shown")
            and station == trust.KEY
            and _answered(shown, wanted)
            and desk.is_small(wanted.get("network"))
        )
        return {**wanted, "nulls": NULLS} if by_itself or pressed("compare-with-chance") else no_update

    @app.callback(
        Output("tick", "disabled", allow_duplicate=True),
        Input({"type": "noise-curve", "index": ALL}, "n_clicks"),
        Input("shown", "data"),
        Input("station", "data"),
        prevent_initial_call=True,
    )
    def draw_curve(_clicks: Any, shown: Any, station: str) -> Any:
        if not shown or station != trust.KEY:
            return no_update
        study = desk.workspace.study(shown["study"])
        waits = study is None or (study.nulls is None and desk.is_small(shown["network"]))
        by_itself = ctx.triggered_id in ("shown", "station") and desk.is_small(shown["network"]) and not waits
        if by_itself or pressed("noise-curve"):
            return no_update if desk.start_curve(shown["study"]) is None else False
        return no_update

    @app.callback(
        Output("trust-seen", "data"),
        Input("tick", "n_intervals"),
        Input("wanted", "data"),
        State("station", "data"),
        State("shown", "data"),
        State("trust-seen", "data"),
        State("pending", "data"),
        prevent_initial_call=True,
    )
    def watch(_ticks: Any, wanted: Any, station: str, shown: Any, seen: Any, pending: Any) -> Any:
        if not shown or station != trust.KEY:
            return no_update
        curve, draws = desk.curve(shown["study"]), desk.draws(pending["study"] if pending else None)
        points = 0 if curve is None else int(np.isfinite(curve.vi).sum() + np.isfinite(curve.null_vi).sum())
        drawn = 0 if draws is None else len(draws.draws) // DRAWS_AT_A_TIME
        now = [shown["study"], points, drawn, bool(wanted and wanted["nulls"])]
        return no_update if now == seen else now


def _answered(shown: Any, wanted: Any) -> bool:
    """Whether the clustering shown is the one that is asked for."""
    keys = ("network", "method", "quality", "resolution")
    return bool(shown) and all(shown.get(key) == wanted.get(key) for key in keys)
