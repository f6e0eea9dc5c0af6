"""Which clustering is wanted, and its study."""

from __future__ import annotations

from typing import Any

from dash import ALL, Dash, Input, Output, State, ctx, no_update

from analysis.errors import CorymbError
from analysis.evidence import HARVEST
from analysis.study import StudySettings
from app.desk import Desk
from app.wiring.triggers import pressed
from app.workspace import TrailEntry

HARVEST_NULLS = 3


def wire(app: Dash, desk: Desk) -> None:
    """Add the callbacks."""

    @app.callback(
        Output("pending", "data"),
        Output("fault", "data", allow_duplicate=True),
        Input("wanted", "data"),
        State("at-hand", "data"),
        prevent_initial_call="initial_duplicate",
    )
    def begin(wanted: Any, fingerprint: str | None) -> Any:
        fingerprint = (wanted or {}).get("network") or fingerprint
        if not fingerprint or not wanted:
            return no_update, no_update
        try:
            if wanted["method"] in {"leiden", "louvain"}:
                desk.start_ruler(fingerprint, wanted["quality"])
            study_id, job = desk.start_study(fingerprint, settings_of(wanted))
        except CorymbError as error:
            return no_update, str(error)
        desk.keep_wanted(fingerprint, wanted)
        asked = {key: wanted[key] for key in ("method", "quality", "resolution")}
        return {"study": study_id, "job": job, "network": fingerprint, **asked}, ""

    @app.callback(
        Output("wanted", "data", allow_duplicate=True),
        Input("method", "value"),
        Input("seed", "value"),
        State("wanted", "data"),
        prevent_initial_call=True,
    )
    def change_method(method: str | None, seed: Any, wanted: dict[str, Any]) -> Any:
        changed = {
            **wanted,
            "method": method or wanted["method"],
            "seed": wanted["seed"] if seed is None else int(seed),
        }
        changed["effort"] = "quick"
        if changed["method"] == "louvain" and changed["quality"] != "modularity":
            changed |= {"quality": "modularity", "resolution": 1.0}
        return no_update if changed == wanted else changed

    @app.callback(
        Output("wanted", "data", allow_duplicate=True),
        Input("show", "value"),
        State("wanted", "data"),
        prevent_initial_call=True,
    )
    def change_show(show: str | None, wanted: dict[str, Any]) -> Any:
        return no_update if show is None or show == wanted.get("show") else {**wanted, "show": show}

    @app.callback(
        Output("wanted", "data", allow_duplicate=True),
        Input("keep", "value"),
        State("wanted", "data"),
        prevent_initial_call=True,
    )
    def change_keep(keep: str | None, wanted: dict[str, Any]) -> Any:
        return no_update if keep is None or keep == wanted.get("keep") else {**wanted, "keep": keep, "effort": "quick"}

    @app.callback(
        Output("wanted", "data", allow_duplicate=True),
        Input("shown", "data"),
        State("wanted", "data"),
        prevent_initial_call=True,
    )
    def harvest_in_full(shown: Any, wanted: Any) -> Any:
        """Once the quick harvest is on the screen, do the full one in the background."""
        quick = wanted and wanted["method"] == HARVEST and wanted.get("effort") == "quick"
        return {**wanted, "effort": "full"} if quick and shown and shown["method"] == HARVEST else no_update

    @app.callback(
        Output("wanted", "data", allow_duplicate=True),
        Input("k", "value"),
        State("wanted", "data"),
        prevent_initial_call=True,
    )
    def change_k(k: Any, wanted: dict[str, Any]) -> Any:
        return no_update if k is None or int(k) == wanted["k"] else {**wanted, "k": int(k)}

    @app.callback(
        Output("wanted", "data", allow_duplicate=True),
        Input({"type": "return-to", "study": ALL}, "n_clicks"),
        State("wanted", "data"),
        prevent_initial_call=True,
    )
    def return_to(_clicks: Any, wanted: dict[str, Any]) -> Any:
        if not pressed("return-to"):
            return no_update
        entry = desk.workspace.clustering(ctx.triggered_id["study"])
        if entry is None:
            return no_update
        return as_wanted(entry, wanted)

    @app.callback(
        Output("names-version", "data"),
        Input({"type": "name-module", "index": ALL}, "n_clicks"),
        Input("module-name", "n_submit"),
        State("module-name", "value"),
        State("pick", "data"),
        State("shown", "data"),
        State("names-version", "data"),
        prevent_initial_call=True,
    )
    def name_module(_clicks: Any, submitted: Any, name: str | None, pick: Any, shown: Any, version: int) -> Any:
        asked = pressed("name-module") or (ctx.triggered_id == "module-name" and submitted)
        if not asked or not shown or not pick or pick.get("kind") != "module":
            return no_update
        study = desk.study(shown["study"])
        if study is None:
            return no_update
        module = f"M{int(pick['index']) + 1}"
        desk.workspace.set_name(study.network.fingerprint, shown["study"], module, (name or "").strip())
        return version + 1


def as_wanted(entry: TrailEntry, wanted: dict[str, Any]) -> dict[str, Any]:
    """Return what a window asks for once it asks for a clustering of the trail."""
    return {**wanted, **{key: entry.settings[key] for key in wanted if key in entry.settings}}


def settings_of(wanted: dict[str, Any]) -> StudySettings:
    """Return the settings of the study that a window asks for."""
    return StudySettings(
        method=wanted["method"],
        quality=wanted["quality"],
        resolution=wanted["resolution"],
        k=wanted["k"],
        seed=wanted["seed"],
        nulls=HARVEST_NULLS if wanted["method"] == HARVEST else wanted["nulls"],
        show=wanted.get("show", "best"),
        keep=wanted.get("keep", "supported"),
        effort=wanted.get("effort", "quick"),
    )
