"""Two clusterings of the trail are pinned, and compared."""

from __future__ import annotations

from typing import Any

from dash import ALL, Dash, Input, Output, State, ctx, no_update

from app.desk import Desk
from app.stations.modules import clustering_line
from app.wiring.triggers import pressed


def wire(app: Dash, desk: Desk) -> None:
    """Add the callbacks."""

    @app.callback(
        Output("pinned", "data"),
        Output("pick", "data", allow_duplicate=True),
        Input({"type": "pin-clustering", "study": ALL}, "n_clicks"),
        State("pinned", "data"),
        prevent_initial_call=True,
    )
    def pin(_clicks: Any, pinned: str | None) -> Any:
        if not pressed("pin-clustering"):
            return no_update, no_update
        chosen = ctx.triggered_id["study"]
        if not pinned or pinned == chosen:
            return None if pinned else chosen, no_update
        labels = labels_of(desk, pinned, chosen)
        return None, {"kind": "compare", "first": pinned, "second": chosen, "labels": labels}

    @app.callback(
        Output({"type": "pin-clustering", "study": ALL}, "aria-pressed"),
        Output({"type": "pin-clustering", "study": ALL}, "children"),
        Input("pinned", "data"),
    )
    def show_pin(pinned: str | None) -> Any:
        """Say at each clustering what a click does; called anew whenever the trail is drawn."""
        studies = [each["id"]["study"] for each in ctx.outputs_list[0]]
        words = {True: "pinned", False: "compare" if pinned else "pin"}
        return (
            ["true" if study == pinned else "false" for study in studies],
            [words[study == pinned] for study in studies],
        )


def labels_of(desk: Desk, *study_ids: str) -> list[str]:
    """Return what clusterings are called: name or settings, and the network where they are of several."""
    entries = [desk.workspace.clustering(each) for each in study_ids]
    several = len({entry.fingerprint for entry in entries if entry is not None}) > 1
    labels = []
    for entry in entries:
        words = "a clustering" if entry is None else entry.name or clustering_line(entry.settings)
        labels.append(f"{desk.network(entry.fingerprint).label}: {words}" if entry is not None and several else words)
    return labels
