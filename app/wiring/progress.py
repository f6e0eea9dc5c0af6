"""What is being worked on: bars with a stop, and results as they come in."""

from __future__ import annotations

import time
from typing import Any

from dash import ALL, Dash, Input, Output, State, ctx, html, no_update

from app.desk import Desk
from app.job_states import JobState
from app.parts import button
from app.wiring.modules import as_wanted
from app.wiring.triggers import pressed

SHOW_AFTER_SECONDS = 0.5
WORDS = {
    "drawing": "drawing the map",
    "preview": "a first look at resolutions",
    "sweep": "sweep over resolutions",
    "study": "modules and their evidence",
    "packing": "writing the files",
    "meaning": "testing modules with gene sets",
}


def wire(app: Dash, desk: Desk) -> None:
    """Add the callbacks."""

    @app.callback(
        Output("progress-area", "children"),
        Output("shown", "data"),
        Output("ruler-data", "data"),
        Output("fault", "data", allow_duplicate=True),
        Output("save-order", "data"),
        Output("tick", "disabled"),
        Input("tick", "n_intervals"),
        Input("pending", "data"),
        State("shown", "data"),
        State("ruler-data", "data"),
        State("save-asked", "data"),
        State("save-order", "data"),
        prevent_initial_call="initial_duplicate",
    )
    def look(_ticks: Any, pending: Any, shown: Any, ruler: Any, asked: Any, saved: Any) -> Any:
        running = desk.jobs.running()
        bars = [_bar(job) for job in running if job.elapsed >= SHOW_AFTER_SECONDS and job.kind != "preview"]
        message = _failure(desk, pending) or _failure(desk, asked)
        order = _save_order(desk, asked, saved)
        return (
            bars,
            _newly_shown(desk, pending, shown),
            _newer_ruler(desk, pending, ruler),
            message or no_update,
            order or no_update,
            not running and _settled(desk, pending, shown),
        )

    @app.callback(
        Output("wanted", "data", allow_duplicate=True),
        Input({"type": "stop-job", "job": ALL}, "n_clicks"),
        State("pending", "data"),
        State("shown", "data"),
        State("wanted", "data"),
        prevent_initial_call=True,
    )
    def stop(_clicks: Any, pending: Any, shown: Any, wanted: Any) -> Any:
        """Stop a job; where it was to give another clustering, ask for the one that is shown again."""
        if not pressed("stop-job"):
            return no_update
        job = ctx.triggered_id["job"]
        desk.jobs.stop(job)
        if not pending or pending.get("job") != job or not shown or shown["network"] != pending["network"]:
            return no_update
        entry = desk.workspace.clustering(shown["study"])
        return no_update if entry is None else as_wanted(entry, wanted)

    @app.callback(
        Output("save-asked", "data"),
        Output("tick", "disabled", allow_duplicate=True),
        Input({"type": "hand-over", "index": ALL}, "n_clicks"),
        State("shown", "data"),
        State({"type": "handover-parts", "index": ALL}, "value"),
        prevent_initial_call=True,
    )
    def hand_over(_clicks: Any, shown: Any, chosen: Any) -> Any:
        if not pressed("hand-over") or not shown:
            return no_update, no_update
        job = desk.start_packing(shown["study"], tuple(part for parts in chosen for part in parts or ()))
        return {"study": shown["study"], "job": job, "moment": time.time()}, False

    @app.callback(Output("tick", "disabled", allow_duplicate=True), Input("wanted", "data"), prevent_initial_call=True)
    def watch(_wanted: Any) -> bool:
        return False


def _bar(job: JobState) -> html.Div:
    width = f"{100 * job.fraction:.0f}%"
    return html.Div(
        [
            html.Div(html.Div(className="progress-fill", style={"width": width}), className="progress-track"),
            html.Span(job.phrase or WORDS.get(job.kind, job.kind), className="progress-text"),
            button("Stop", {"type": "stop-job", "job": job.id}, kind="button quiet"),
        ],
        className="progress",
        role="status",
    )


def _newly_shown(desk: Desk, pending: Any, shown: Any) -> Any:
    if not pending or (shown and shown["study"] == pending["study"]):
        return no_update
    if desk.study(pending["study"]) is None:
        return no_update
    return {key: pending[key] for key in ("study", "network", "method", "quality", "resolution")}


def _newer_ruler(desk: Desk, pending: Any, seen: Any) -> Any:
    if not pending:
        return no_update
    ruler = desk.ruler(pending["network"], pending["quality"])
    if ruler is None:
        return no_update
    same = seen and (seen["network"], seen["quality"]) == (pending["network"], pending["quality"])
    if same and seen["version"] == ruler.version:
        return no_update
    return {**ruler.for_browser(), "network": pending["network"], "quality": pending["quality"]}


def _save_order(desk: Desk, asked: Any, saved: Any) -> Any:
    """Return what the window should save, once its zip is written and not saved yet."""
    if not asked or (saved and saved["moment"] == asked["moment"]):
        return None
    state = desk.jobs.state(asked["job"])
    if state is None or state.status != "done":
        return None
    return {"url": f"/handover/{asked['study']}.zip", "moment": asked["moment"]}


def _failure(desk: Desk, pending: Any) -> str:
    if not pending or not pending.get("job"):
        return ""
    state = desk.jobs.state(pending["job"])
    return state.error if state is not None and state.status == "failed" else ""


def _settled(desk: Desk, pending: Any, shown: Any) -> bool:
    """Whether nothing more can come in: the study asked for is shown, or its job has ended without one."""
    if not pending:
        return False
    if shown and shown["study"] == pending["study"]:
        return True
    state = desk.jobs.state(pending["job"]) if pending.get("job") else None
    return state is not None and state.ended and state.status != "done"
