"""The page: head with the path of stations, map, reading pane, ruler. Only the frame; stations fill the pane."""

from __future__ import annotations

from typing import Any

import dash_cytoscape as cyto
from dash import dcc, html

from app.map.closeup import STYLESHEET
from app.parts import button
from app.ruler import QUESTIONS
from app.stations import START, STATIONS

TICK_MILLISECONDS = 250
WANTED = {
    "method": "leiden",
    "quality": "modularity",
    "resolution": 1.0,
    "k": 4,
    "seed": 1,
    "nulls": 0,
    "show": "best",
    "keep": "supported",
    "effort": "quick",
}


def layout(brand_mark: str) -> html.Div:
    """Return the whole page, empty; callbacks fill it. `brand_mark` is the address of the mark's picture."""
    return html.Div(
        [
            *_stores(),
            html.Div(
                [_head(brand_mark), _map_area(), _pane(), _foot()],
                className="page",
                id="page",
            ),
        ],
        id="root",
    )


def _stores() -> list[Any]:
    return [
        dcc.Store(id="at-hand", storage_type="session"),
        dcc.Store(id="wanted", storage_type="session", data=dict(WANTED)),
        dcc.Store(id="pending", storage_type="memory"),
        dcc.Store(id="shown", storage_type="session"),
        dcc.Store(id="station", storage_type="session", data=START),
        dcc.Store(id="pick", storage_type="memory"),
        dcc.Store(id="pinned", storage_type="session"),
        dcc.Store(id="drawing-kind", storage_type="memory", data="whole"),
        dcc.Store(id="fault", storage_type="memory", data=""),
        dcc.Store(id="trust-seen", storage_type="memory"),
        dcc.Store(id="meaning-seen", storage_type="memory", data=""),
        dcc.Store(id="meaning-chosen", storage_type="memory", data=0),
        dcc.Store(id="names-version", storage_type="memory", data=0),
        dcc.Store(id="ruler-data", storage_type="memory"),
        dcc.Store(id="map-order", storage_type="memory"),
        dcc.Store(id="map-mask", storage_type="memory"),
        dcc.Store(id="taken-out", storage_type="memory"),
        dcc.Store(id="colour-order", storage_type="memory"),
        dcc.Store(id="save-asked", storage_type="memory"),
        dcc.Store(id="save-order", storage_type="memory"),
        # written by the page's own scripts
        dcc.Store(id="from-upload", storage_type="memory"),
        dcc.Store(id="from-gene-sets", storage_type="memory"),
        dcc.Store(id="from-map", storage_type="memory"),
        dcc.Store(id="from-pane", storage_type="memory"),
        dcc.Store(id="from-ruler", storage_type="memory"),
        dcc.Store(id="done-here", storage_type="memory"),
        dcc.Interval(id="tick", interval=TICK_MILLISECONDS, disabled=False),
    ]


def _head(brand_mark: str) -> html.Header:
    stations = html.Nav(
        [
            html.Button(
                station.TITLE,
                id={"type": "go", "station": key},
                className="station",
                type="button",
                n_clicks=0,
                **{"data-state": "empty"},
            )
            for key, station in STATIONS.items()
        ],
        id="path",
        className="path",
        **{"aria-label": "Stations"},
    )
    find = html.Div(
        dcc.Input(
            id="find",
            type="text",
            placeholder="gene, module or a pasted list",
            debounce=True,
            autoComplete="off",
            spellCheck="false",
        ),
        className="find",
        role="search",
    )
    return html.Header(
        [
            html.Div([html.Img(src=brand_mark, alt=""), html.Span("corymb")], className="brand"),
            stations,
            find,
            button("☾", "theme", kind="icon-button", title="light or dark", **{"aria-label": "Light or dark"}),
            button("▭", "projector", kind="icon-button", title="projector mode", **{"aria-label": "Projector mode"}),
            button("?", {"type": "keys", "index": 0}, kind="icon-button", title="keys", **{"aria-label": "Keys"}),
        ],
        className="head",
    )


def _map_area() -> html.Main:
    closeup = cyto.Cytoscape(
        id="closeup",
        elements=[],
        layout={"name": "preset", "fit": True, "padding": 36},
        stylesheet=STYLESHEET,
        style={"width": "100%", "height": "100%"},
        minZoom=0.05,
        maxZoom=6,
        wheelSensitivity=None,
    )
    legend = html.Label(
        [
            html.Span("colour: module · size: degree · grey: modules under ", id="legend-text"),
            dcc.Input(
                id="size-cut",
                type="text",
                inputMode="numeric",
                maxLength=4,
                value="5",
                persistence=True,
                className="tiny",
                debounce=True,
            ),
            html.Span(" genes"),
        ],
        className="map-legend",
    )
    switch = html.Div(
        [
            button("whole network", {"type": "drawing", "kind": "whole"}, kind="", **{"aria-pressed": "true"}),
            button("close-up", {"type": "drawing", "kind": "close-up"}, kind="", **{"aria-pressed": "false"}),
        ],
        className="map-switch segments",
        id="map-switch",
    )
    title = html.Div(
        [html.Div("", className="map-name", id="map-name"), html.Div("", className="map-counts", id="map-counts")],
        className="map-title",
    )
    return html.Main(
        [
            html.Div(id="map"),
            html.Div(closeup, id="closeup-area", style={"display": "none"}),
            title,
            switch,
            legend,
        ],
        className="map-area",
        id="map-area",
    )


def _pane() -> html.Aside:
    return html.Aside(
        [
            html.Div(id="pane-head", className="pane-head"),
            html.Div(id="progress-area"),
            html.Div(id="pane-body", className="pane-body", tabIndex=-1),
            html.Div(id="pane-actions", className="pane-actions"),
        ],
        className="pane",
        **{"aria-label": "Reading pane"},
    )


def _foot() -> html.Footer:
    questions = html.Div(
        [
            html.Div("What do you look for?", className="hint", id="question-label"),
            html.Div(
                [
                    button(
                        question.label,
                        {"type": "question", "quality": key},
                        kind="",
                        title=question.sentence,
                        **{"aria-pressed": "false"},
                    )
                    for key, question in QUESTIONS.items()
                ],
                className="segments upright",
                id="question-switch",
                role="group",
                **{"aria-labelledby": "question-label"},
            ),
        ],
        className="questions",
    )
    state = html.Div(
        [
            html.Div("resolution", className="hint", id="state-unit"),
            html.Strong("", id="state-resolution", className="state-value"),
            html.Div("", id="state-count", className="hint"),
            html.Div(id="state-suggestion", className="hint"),
        ],
        className="state",
    )
    return html.Footer([questions, html.Div(id="ruler"), state], className="foot", id="foot")
