"""Portrait: the network as a whole, before modules come into it."""

from __future__ import annotations

from typing import Any
from urllib.parse import quote

from dash import html

from analysis.handover.portrait import PortraitFigure, portrait_figures
from analysis.handover.portrait.figures import CURVES
from analysis.handover.portrait.tables import REMOVAL_HEAD, WORDS, figure_rows, removal_rows
from analysis.network import Network
from analysis.portrait.hubs import CAUTION, SOURCE, Hubs
from analysis.portrait.summary import SOURCE as SUMMARY_SOURCE
from analysis.portrait.summary import Summary
from analysis.portrait.tolerance import SOURCE as TOLERANCE_SOURCE
from analysis.portrait.tolerance import Tolerance
from app.parts import button, heading, link, notice, number, sentence, sentences, table
from app.portraits import is_drawn, is_on_its_way, portrait_of
from app.view import Pane, View

KEY = "portrait"
TITLE = "Portrait"
HUBS_SHOWN = 30
MINUS = "\u2212"
SAVED_AS = {"svg": "the drawing", "png": "the drawing as pixels", "csv": "the data drawn"}


def state(view: View) -> str:
    """Return how far the station is: done once the portrait of this network is complete."""
    return "done" if is_drawn(view.desk, view.fingerprint) else "empty"


def render(view: View) -> Pane:
    """Return the sections that have come, the plainest first."""
    network = view.network
    if network is None or view.fingerprint is None:
        return Pane(TITLE, [sentence("There is no network at hand.", first=True)], [])
    portrait, on_its_way = portrait_of(view.desk, view.fingerprint), is_on_its_way(view.desk, view.fingerprint)
    actions = [] if portrait is not None or on_its_way else [_start()]
    if portrait is None:
        told = "The portrait is being drawn." if on_its_way else "The portrait of this network is not drawn yet."
        return Pane(TITLE, [sentence(told, first=True), _removal(view.fingerprint)], actions)
    body: list[Any] = [*_summary(portrait.summary)]
    for figure in portrait_figures(network, portrait):
        body += [heading(figure.title), *_figure(figure)]
        if figure.key == "removals" and portrait.tolerance is not None:
            body += _removals(portrait.tolerance)
            body.append(_removal(view.fingerprint))
    if portrait.tolerance is None:
        body.append(_removal(view.fingerprint))
    body += _hubs(network, portrait.hubs)
    if not portrait.complete:
        body.append(sentence("More is being worked out."))
    return Pane(TITLE, body, actions)


def _start() -> html.Button:
    return button("Draw the portrait", {"type": "draw-portrait", "index": 0}, kind="button primary")


def _summary(summary: Summary | None) -> list[Any]:
    if summary is None:
        return []
    rows = [
        [WORDS[row["figure"]], _shown(row["value"]), *_null(row, "same_degrees"), *_null(row, "random")]
        for row in figure_rows(summary)
        if row["figure"] in WORDS
    ]
    head = ["", "here", "same degrees", "z", "random", "z"]
    shown = table(head, rows, numeric=[1, 2, 3, 4, 5], name="The network beside random networks")
    return [*sentences(summary.sentences()), html.Div(shown, title=f"After {SUMMARY_SOURCE}")]


def _null(row: dict[str, Any], kind: str) -> list[str]:
    return [_shown(row[f"{kind}_mean"]), _shown(row[f"{kind}_z"], 1)]


def _shown(value: float, digits: int = 3) -> str:
    if value == value and float(value).is_integer():  # noqa: PLR0124 - not for NaN
        return f"{int(value):,}".replace("-", MINUS)
    return number(float(value), digits).replace("-", MINUS)


def _figure(figure: PortraitFigure) -> list[Any]:
    """Return the figure under its reading; the page's own script saves it."""
    picture = html.Img(src=f"data:image/svg+xml,{quote(figure.picture().decode())}", alt=figure.title)
    saving = html.Div(
        [
            html.Button(
                kind.upper(),
                className="link",
                type="button",
                title=f"save {words}",
                **{"data-save": kind, "aria-label": f"Save {words} of “{figure.title}” as {kind.upper()}"},
            )
            for kind, words in SAVED_AS.items()
        ],
        className="figure-saving",
    )
    drawn = html.Figure(
        [picture, saving],
        className="figure",
        title=f"After {figure.source}",
        **{"data-name": figure.key, "data-csv": figure.data().decode()},
    )
    return [sentence(figure.reading), drawn]


def _removals(tolerance: Tolerance) -> list[Any]:
    rows = [
        [CURVES[row["removal"]][0], *(number(float(row[key])) for key in REMOVAL_HEAD)]
        for row in removal_rows(tolerance)
    ]
    head = ["genes removed", "falls apart at", "R", "without 5 %", "without 20 %"]
    shown = table(head, rows, numeric=[1, 2, 3, 4], name="Removals")
    return [sentence(tolerance.critical_sentence()), html.Div(shown, title=f"After {TOLERANCE_SOURCE}")]


def _removal(fingerprint: str) -> html.Div:
    """Return the place of the slider, which the page's own script puts there; the map follows it."""
    return html.Div(id="removal-area", className="removal", **{"data-url": f"/data/{fingerprint}"})


def _hubs(network: Network, hubs: Hubs | None) -> list[Any]:
    if hubs is None:
        return []
    rows = []
    for place, node in enumerate(hubs.nodes[:HUBS_SHOWN].tolist()):
        gene = network.names[node]
        rows.append(
            [
                link(gene, {"type": "pick-gene", "gene": gene}),
                f"{hubs.degree[place]:,}",
                f"{hubs.core[place]:,}",
                number(float(hubs.clustering[place])),
                f"{hubs.lost[place]:,}",
                f"{100 * hubs.giant_without[place]:.0f} %",
            ]
        )
    head = ["gene", "degree", "core", "clustering", "lost with it", "largest left"]
    more = len(hubs.nodes) - HUBS_SHOWN
    return [
        heading("Hubs"),
        sentence(hubs.sentence()),
        notice(CAUTION),
        html.Div(table(head, rows, numeric=[1, 2, 3, 4, 5], name="Hubs"), title=f"After {SOURCE}"),
        *([sentence(f"{more} more stand in the file that `corymb portrait` writes.")] if more > 0 else []),
    ]
