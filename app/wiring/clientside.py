"""Callbacks that run in the browser: they hand data to the scripts in `assets/`."""

from __future__ import annotations

from dash import ClientsideFunction, Dash, Input, Output, State


def wire(app: Dash) -> None:
    """Add the callbacks; their functions stand in `assets/glue.js`."""

    def run(name: str, *arguments: Input | State) -> None:
        output = Output("done-here", "data", allow_duplicate=True)
        app.clientside_callback(ClientsideFunction("corymb", name), output, *arguments, prevent_initial_call=True)

    run("load", Input("map-order", "data"))
    run(
        "colour",
        Input("shown", "data"),
        Input("names-version", "data"),
        Input("map-order", "data"),
        Input("size-cut", "value"),
        Input("station", "data"),
    )
    run("ruler", Input("ruler-data", "data"), Input("wanted", "data"), Input("shown", "data"))
    run("select", Input("pick", "data"), Input("shown", "data"))
    run("fit", Input("closeup", "elements"), Input("drawing-kind", "data"))
    run("top", Input("station", "data"), Input("pick", "data"))
    run("save", Input("save-order", "data"))
    run("theme", Input("theme", "n_clicks"))
    run("projector", Input("projector", "n_clicks"))
