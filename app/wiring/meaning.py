"""Gene sets: their files, what is tested, and names taken from them."""

from __future__ import annotations

from typing import Any

from dash import ALL, Dash, Input, Output, State, ctx, no_update

from app.desk import Desk
from app.wiring.picking import module_pick
from app.wiring.triggers import pressed

WAIT_SECONDS = 0.4
"""So long a test is waited for, so that quick ones need no second look."""


def wire(app: Dash, desk: Desk) -> None:
    """Add the callbacks."""

    @app.callback(
        Output("meaning-seen", "data"),
        Output("tick", "disabled", allow_duplicate=True),
        Input("shown", "data"),
        Input("meaning-chosen", "data"),
        State("meaning-seen", "data"),
        prevent_initial_call="initial_duplicate",
    )
    def begin(shown: Any, _chosen: Any, seen: str) -> Any:
        """Begin the tests of the clustering shown where there are gene sets, and say what is there now."""
        study = desk.study(shown["study"]) if shown else None
        if study is None:
            return no_update, no_update
        job = desk.meaning.start(shown["study"], study)
        if job is not None:
            desk.jobs.wait(job, WAIT_SECONDS)
        now = desk.meaning.version(shown["study"], study)
        return no_update if now == seen else now, no_update if job is None else False

    @app.callback(
        Output("meaning-seen", "data", allow_duplicate=True),
        Input("tick", "n_intervals"),
        State("shown", "data"),
        State("meaning-seen", "data"),
        prevent_initial_call=True,
    )
    def watch(_ticks: Any, shown: Any, seen: Any) -> Any:
        study = desk.study(shown["study"]) if shown else None
        if study is None:
            return no_update
        now = desk.meaning.version(shown["study"], study)
        return no_update if now == seen else now

    @app.callback(
        Output("meaning-chosen", "data"),
        Output("fault", "data", allow_duplicate=True),
        Input("from-gene-sets", "data"),
        Input({"type": "sample-sets", "index": ALL}, "n_clicks"),
        State("at-hand", "data"),
        State("meaning-chosen", "data"),
        prevent_initial_call=True,
    )
    def take_file(sent: Any, _clicks: Any, fingerprint: str | None, version: int) -> Any:
        if not fingerprint:
            return no_update, no_update
        if pressed("sample-sets"):
            desk.meaning.choose_sample(fingerprint)
            return version + 1, ""
        if ctx.triggered_id != "from-gene-sets" or not sent:
            return no_update, no_update
        if sent.get("fault"):
            return no_update, sent["fault"]
        changes: dict[str, Any] = {sent["kind"]: sent["file"]}
        if sent["kind"] == "gene_sets":
            changes["same_source"] = "unknown"
        desk.meaning.choose(fingerprint, **changes)
        return version + 1, ""

    @app.callback(
        Output("meaning-chosen", "data", allow_duplicate=True),
        Input({"type": "same-source", "answer": ALL}, "n_clicks"),
        State("at-hand", "data"),
        State("meaning-chosen", "data"),
        prevent_initial_call=True,
    )
    def answer(_clicks: Any, fingerprint: str | None, version: int) -> Any:
        if not pressed("same-source"):
            return no_update
        return _change(desk, fingerprint, version, {"same_source": ctx.triggered_id["answer"]})

    @app.callback(
        Output("meaning-chosen", "data", allow_duplicate=True),
        Input("meaning-min", "value"),
        Input("meaning-max", "value"),
        Input("meaning-core", "value"),
        Input("meaning-aspect", "value"),
        Input("meaning-evidence", "value"),
        State("at-hand", "data"),
        State("meaning-chosen", "data"),
        prevent_initial_call=True,
    )
    def change_tests(low: Any, high: Any, core: Any, aspect: Any, codes: Any, fingerprint: Any, version: int) -> Any:
        if low is None or high is None or core is None or int(high) < int(low):
            return no_update
        changes = {
            "min_size": int(low),
            "max_size": int(high),
            "core_only": core == "core",
            "aspect": None if aspect in {None, "all"} else aspect,
            "evidence_out": codes or "",
        }
        return _change(desk, fingerprint, version, changes)

    @app.callback(
        Output("names-version", "data", allow_duplicate=True),
        Input({"type": "take-name", "index": ALL}, "n_clicks"),
        Input({"type": "take-names", "index": ALL}, "n_clicks"),
        State({"type": "proposed-name", "index": ALL}, "value"),
        State({"type": "proposed-name", "index": ALL}, "id"),
        State("shown", "data"),
        State("names-version", "data"),
        prevent_initial_call=True,
    )
    def take_names(_one: Any, _all: Any, values: list[Any], ids: list[Any], shown: Any, version: int) -> Any:
        study = desk.study(shown["study"]) if shown else None
        if study is None or not (pressed("take-name") or pressed("take-names")):
            return no_update
        typed = {each["index"]: (value or "").strip() for each, value in zip(ids, values, strict=True)}
        if pressed("take-name"):
            typed = {ctx.triggered_id["index"]: typed.get(ctx.triggered_id["index"], "")}
        given = desk.workspace.names(shown["study"])
        for module, name in typed.items():
            if pressed("take-name") or f"M{module + 1}" not in given:
                desk.workspace.set_name(study.network.fingerprint, shown["study"], f"M{module + 1}", name)
        return version + 1

    @app.callback(
        Output("pick", "data", allow_duplicate=True),
        Input({"type": "light-set", "index": ALL}, "n_clicks"),
        Input({"type": "pick-module", "index": ALL}, "n_clicks"),
        State("shown", "data"),
        prevent_initial_call=True,
    )
    def pick_in_components(_sets: Any, _modules: Any, shown: Any) -> Any:
        """Light a gene set, or open a module, from a table that is made of components."""
        if shown and pressed("pick-module"):
            return module_pick(desk, shown, int(ctx.triggered_id["index"]))
        study = desk.study(shown["study"]) if shown else None
        meaning = desk.meaning.found(shown["study"], study) if shown else None
        if meaning is None or not pressed("light-set"):
            return no_update
        genes = meaning.enrichment.sets.members[ctx.triggered_id["index"]].tolist()
        return {"kind": "list", "genes": genes, "missing": [], "similar": [], "focus": False}


def _change(desk: Desk, fingerprint: str | None, version: int, changes: dict[str, Any]) -> Any:
    """Keep changed choices, where there are any; a page that was only drawn anew changes nothing."""
    if not fingerprint:
        return no_update
    chosen = desk.meaning.chosen(fingerprint)
    if all(chosen[key] == value for key, value in changes.items()):
        return no_update
    desk.meaning.choose(fingerprint, **changes)
    return version + 1
