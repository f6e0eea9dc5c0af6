"""What the Bridges station asks for: removals, roles, second homes, and the communities of every k."""

from __future__ import annotations

import re
from typing import Any

from dash import ALL, ClientsideFunction, Dash, Input, Output, State, ctx, no_update

from app.bridge_panes import link_pane, removal_pane, second_home_pane
from app.bridging import every_k, ranking, refusal, start_every_k, start_ranking
from app.desk import Desk
from app.stations import bridges
from app.view import View
from app.wiring.triggers import pressed


def wire(app: Dash, desk: Desk) -> None:
    """Add the callbacks."""

    @app.callback(
        Output("taken-out", "data"),
        Output("fault", "data", allow_duplicate=True),
        Input({"type": "take-out", "node": ALL}, "n_clicks"),
        Input({"type": "put-back", "index": ALL}, "n_clicks"),
        Input("take-out-text", "n_submit"),
        State("take-out-text", "value"),
        State("at-hand", "data"),
        State("taken-out", "data"),
        prevent_initial_call=True,
    )
    def take_out(_clicks: Any, _back: Any, submitted: Any, text: str | None, fingerprint: str | None, now: Any) -> Any:
        if pressed("put-back"):
            return None, ""
        if pressed("take-out"):
            return {"network": fingerprint, "nodes": [int(ctx.triggered_id["node"])]}, ""
        if ctx.triggered_id != "take-out-text" or not submitted or not text or not fingerprint:
            return now, no_update  # the pane was drawn anew: what is taken out is told again
        nodes, missing = _named(desk, fingerprint, text)
        if missing:
            return no_update, f"not in this network: {', '.join(missing[:10])}; give names as they stand in the map"
        return {"network": fingerprint, "nodes": nodes}, ""

    @app.callback(
        Output("taken-out-area", "children"),
        Input("taken-out", "data"),
        State("shown", "data"),
    )
    def tell_removal(taken: Any, shown: Any) -> Any:
        study = desk.study(shown["study"]) if shown else None
        return [] if study is None else removal_pane(study, _taken(taken, shown))

    @app.callback(
        Output("module-map-area", "children"),
        Input("link-kind", "value"),
        State("at-hand", "data"),
        State("shown", "data"),
    )
    def draw_links(kind: str | None, fingerprint: str | None, shown: Any) -> Any:
        study_id = shown["study"] if shown else None
        return link_pane(View(desk, fingerprint, {}, desk.study(study_id), study_id), kind)

    @app.callback(
        Output("second-home-area", "children"),
        Input("second-home-cut", "value"),
        State("shown", "data"),
    )
    def tell_second_homes(threshold: Any, shown: Any) -> Any:
        study = desk.study(shown["study"]) if shown else None
        return [] if study is None else second_home_pane(study, threshold)

    @app.callback(
        Output("map-mask", "data"),
        Input("station", "data"),
        Input("taken-out", "data"),
        Input("shown", "data"),
        State("map-mask", "data"),
        prevent_initial_call=True,
    )
    def mask(station: str, taken: Any, shown: Any, before: Any) -> Any:
        study = desk.study(shown["study"]) if shown and station == bridges.KEY else None
        if study is None:
            return None if before else no_update
        gone = _taken(taken, shown)
        lit = [] if gone else bridges.bridge_nodes(study)
        return {"genes": study.network.node_count, "gone": gone, "lit": lit}

    app.clientside_callback(
        ClientsideFunction("corymb_bridges", "mask"),
        Output("done-here", "data", allow_duplicate=True),
        Input("map-mask", "data"),
        prevent_initial_call=True,
    )

    @app.callback(
        Output("pick", "data", allow_duplicate=True),
        Input({"type": "list-role", "index": ALL}, "n_clicks"),
        State("shown", "data"),
        prevent_initial_call=True,
    )
    def list_role(_clicks: Any, shown: Any) -> Any:
        study = desk.study(shown["study"]) if pressed("list-role") and shown else None
        if study is None:
            return no_update
        return {"kind": "list", "genes": bridges.role_nodes(study, int(ctx.triggered_id["index"]))}

    @app.callback(
        Output("wanted", "data", allow_duplicate=True),
        Input({"type": "choose-k", "k": ALL}, "n_clicks"),
        State("wanted", "data"),
        prevent_initial_call=True,
    )
    def choose_k(_clicks: Any, wanted: dict[str, Any]) -> Any:
        if not pressed("choose-k"):
            return no_update
        return {**wanted, "method": bridges.PERCOLATION, "k": int(ctx.triggered_id["k"]), "nulls": 0}

    @app.callback(
        Output("tick", "disabled", allow_duplicate=True),
        Input({"type": "rank-removals", "index": ALL}, "n_clicks"),
        Input({"type": "every-k", "index": ALL}, "n_clicks"),
        Input("station", "data"),
        Input("shown", "data"),
        prevent_initial_call=True,
    )
    def begin(_rank: Any, _every: Any, station: str, shown: Any) -> Any:
        if station != bridges.KEY or not shown:
            return no_update
        by_itself = ctx.triggered_id in ("station", "shown") and desk.is_small(shown["network"])
        jobs = []
        if by_itself or pressed("rank-removals"):
            jobs.append(start_ranking(desk, shown["study"]))
        if by_itself or pressed("every-k"):
            jobs.append(start_every_k(desk, shown["network"]))
        return False if any(jobs) else no_update

    # What has come fills the pane anew, as a point of Trust's curve does.
    @app.callback(
        Output("trust-seen", "data", allow_duplicate=True),
        Input("progress-area", "children"),
        State("station", "data"),
        State("shown", "data"),
        State("trust-seen", "data"),
        prevent_initial_call=True,
    )
    def watch(_bars: Any, station: str, shown: Any, seen: Any) -> Any:
        if station != bridges.KEY or not shown:
            return no_update
        known = every_k(desk, shown["network"]) is not None or bool(refusal(desk, shown["network"]))
        now = [bridges.KEY, shown["study"], known, ranking(desk, shown["study"]) is not None]
        return no_update if now == seen else now


def _taken(taken: Any, shown: Any) -> list[int]:
    """Return the genes taken out of the network shown."""
    return [int(node) for node in taken["nodes"]] if taken and taken["network"] == shown["network"] else []


def _named(desk: Desk, fingerprint: str, text: str) -> tuple[list[int], list[str]]:
    """Return the genes that a text names, in any case of letters, and the words that name none."""
    index = desk.network(fingerprint).index
    folded = {name.casefold(): node for name, node in index.items()}
    words = [word for word in re.split(r"[,;\s]+", text) if word]
    found = {word: index.get(word, folded.get(word.casefold())) for word in words}
    return [node for node in found.values() if node is not None], [word for word in words if found[word] is None]
