"""What is picked: by a click on the map, in a table, by typing."""

from __future__ import annotations

from typing import Any

from dash import ALL, Dash, Input, Output, State, ctx, no_update

from app.desk import Desk
from app.find import find
from app.wiring.triggers import pressed


def wire(app: Dash, desk: Desk) -> None:
    """Add the callbacks."""

    @app.callback(
        Output("pick", "data", allow_duplicate=True),
        Input("from-map", "data"),
        Input({"type": "pick-module", "index": ALL}, "n_clicks"),
        Input({"type": "pick-gene", "gene": ALL}, "n_clicks"),
        State("at-hand", "data"),
        State("shown", "data"),
        prevent_initial_call=True,
    )
    def pick(picked: Any, _modules: Any, _genes: Any, fingerprint: str | None, shown: Any) -> Any:
        if ctx.triggered_id == "from-map" and picked:
            known = ("kind", "index", "leader")
            return None if picked["kind"] == "nothing" else {key: picked[key] for key in known if key in picked}
        if pressed("pick-module"):
            return module_pick(desk, shown, int(ctx.triggered_id["index"]))
        if pressed("pick-gene") and fingerprint:
            return {"kind": "gene", "index": desk.network(fingerprint).index[ctx.triggered_id["gene"]]}
        return no_update

    @app.callback(
        Output("pick", "data", allow_duplicate=True),
        Input("module-grid", "cellClicked"),
        State("shown", "data"),
        prevent_initial_call=True,
    )
    def pick_row(cell: Any, shown: Any) -> Any:
        return module_pick(desk, shown, int(cell["rowId"])) if cell else no_update

    @app.callback(
        Output("pick", "data", allow_duplicate=True),
        Input("gene-grid", "cellClicked"),
        State("at-hand", "data"),
        State("shown", "data"),
        prevent_initial_call=True,
    )
    def pick_gene_row(cell: Any, fingerprint: str | None, shown: Any) -> Any:
        if not cell or not fingerprint:
            return no_update
        gene = cell["rowId"].rsplit("\t", 1)[0]
        if cell["colId"] in {"module", "second_module"} and isinstance(cell["value"], str):
            return module_pick(desk, shown, int(cell["value"][1:]) - 1)
        return {"kind": "gene", "index": desk.network(fingerprint).index[gene]}

    @app.callback(
        Output("pick", "data", allow_duplicate=True),
        Input("find", "value"),
        State("at-hand", "data"),
        State("shown", "data"),
        prevent_initial_call=True,
    )
    def type_in(text: str | None, fingerprint: str | None, shown: Any) -> Any:
        if not text or not text.strip() or not fingerprint:
            return no_update
        study = desk.study(shown["study"]) if shown else None
        found = find(text, desk.network(fingerprint), study)
        if found.module is not None:
            return {**module_pick(desk, shown, found.module), "focus": True}
        if len(found.genes) == 1 and not found.missing:
            return {"kind": "gene", "index": found.genes[0], "focus": True}
        return {
            "kind": "list",
            "genes": list(found.genes),
            "missing": list(found.missing),
            "similar": list(found.similar),
            "focus": True,
        }


def module_pick(desk: Desk, shown: Any, module: int) -> dict[str, Any]:
    """Return a pick of a module of the clustering shown, with the gene that it is known by after a re-clustering."""
    study = desk.study(shown["study"]) if shown else None
    pick: dict[str, Any] = {"kind": "module", "index": module}
    if study is not None and 0 <= module < len(study.modules):
        group = study.modules.members[module]
        pick["leader"] = int(group[study.network.degree[group].argmax()])
    return pick
