"""What is picked: by a click on the map, in a table, by typing."""

from __future__ import annotations

from typing import Any

from dash import Dash, Input, Output, State, no_update

from app.desk import Desk
from app.find import find


def wire(app: Dash, desk: Desk) -> None:
    """Add the callbacks."""

    @app.callback(
        Output("pick", "data", allow_duplicate=True),
        Input("from-map", "data"),
        State("pick", "data"),
        prevent_initial_call=True,
    )
    def pick(picked: Any, before: Any) -> Any:
        if not picked:
            return no_update
        if picked["kind"] == "nothing":  # the pane is left alone where nothing was picked before either
            return no_update if before is None else None
        return {key: picked[key] for key in ("kind", "index", "leader") if key in picked}

    @app.callback(
        Output("pick", "data", allow_duplicate=True),
        Input("from-pane", "data"),
        State("at-hand", "data"),
        State("shown", "data"),
        prevent_initial_call=True,
    )
    def pick_in_table(picked: Any, fingerprint: str | None, shown: Any) -> Any:
        if not picked or not fingerprint:
            return no_update
        if picked["type"] == "pick-module":
            return module_pick(desk, shown, int(picked["index"]))
        return {"kind": "gene", "index": desk.network(fingerprint).index[picked["gene"]]}

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
        Input("find", "n_submit"),
        State("find", "value"),
        State("at-hand", "data"),
        State("shown", "data"),
        prevent_initial_call=True,
    )
    def type_in(_submits: Any, text: str | None, fingerprint: str | None, shown: Any) -> Any:
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
