"""The portrait as one page: sentences, figures beside null networks, drawings, hubs."""

from __future__ import annotations

from collections.abc import Sequence

from analysis.handover.portrait.figures import CURVES, PortraitFigure
from analysis.handover.portrait.tables import REMOVAL_HEAD, WORDS, figure_rows, removal_rows
from analysis.handover.report.markup import Child, Markup, short, tag
from analysis.handover.report.style import STYLE
from analysis.handover.report.wording import figure as shown
from analysis.handover.report.wording import is_known
from analysis.network import Network
from analysis.portrait import Portrait
from analysis.portrait.hubs import CAUTION, Hubs
from analysis.portrait.summary import SOURCE
from analysis.portrait.tolerance import Tolerance
from analysis.verdicts import USE_CAUTION
from analysis.version import versions

POLICY = "default-src 'none'; style-src 'unsafe-inline'; img-src data:"
NOTHING = "–"


def portrait_page(network: Network, portrait: Portrait, figures: Sequence[PortraitFigure]) -> str:
    """Return the whole page as one HTML document."""
    title = f"Portrait of {short(network.label)}"
    head = tag(
        "head",
        tag("meta", charset="utf-8"),
        Markup(f'<meta http-equiv="Content-Security-Policy" content="{POLICY}"/>'),
        tag("meta", name="viewport", content="width=device-width, initial-scale=1"),
        tag("title", f"{title} · corymb"),
        tag("style", Markup(STYLE)),
    )
    first, *rest = portrait.summary.sentences() if portrait.summary else ("",)
    main = tag(
        "main",
        tag("p", first, class_="verdict"),
        tag("ul", [tag("li", each) for each in rest], class_="more") if rest else None,
        _figures_table(portrait),
        tag("section", tag("h2", "Figures"), tag("div", [_panel(each) for each in figures], class_="row")),
        _removals(portrait.tolerance) if portrait.tolerance is not None else None,
        _hubs(network, portrait.hubs) if portrait.hubs is not None else None,
    )
    foot = tag("footer", f"Written by corymb {versions()['corymb']}. {USE_CAUTION}")
    body = tag("body", tag("header", tag("h1", title), class_="head"), main, foot)
    return f"<!DOCTYPE html>\n{tag('html', head, body, lang='en-GB')}\n"


def _panel(figure: PortraitFigure) -> Markup:
    caption = tag("figcaption", figure.reading, " ", tag("span", f"After {figure.source}."))
    return tag("figure", tag("h3", figure.title), Markup(figure.svg), caption, class_="panel", title=figure.source)


def _figures_table(portrait: Portrait) -> Markup | None:
    if portrait.summary is None:
        return None
    rows = [
        [
            WORDS[row["figure"]],
            _shown(row["value"]),
            *(_shown(row[f"{kind}_{part}"]) for kind in ("same_degrees", "random") for part in ("mean", "sd", "z")),
        ]
        for row in figure_rows(portrait.summary)
        if row["figure"] in WORDS
    ]
    head = ["", "here", "same degrees", "± sd", "z", "random", "± sd", "z"]
    nulls = f"Beside {portrait.settings.nulls} random networks with the same degrees and as many with the same number "
    note = tag("p", f"{nulls}of edges. After {SOURCE}.", class_="note")
    return tag("section", tag("h2", "The network as a whole"), note, _table(head, rows))


def _removals(tolerance: Tolerance) -> Markup:
    rows = [[CURVES[row["removal"]][0], *(_shown(row[key]) for key in REMOVAL_HEAD)] for row in removal_rows(tolerance)]
    note = tag("p", tolerance.critical_sentence(), class_="note")
    return tag("section", tag("h2", "Removals"), note, _table(["genes removed", *REMOVAL_HEAD.values()], rows))


def _hubs(network: Network, hubs: Hubs) -> Markup:
    rows = [
        [
            short(network.names[node]),
            f"{hubs.degree[place]:,}",
            f"{hubs.core[place]:,}",
            _shown(float(hubs.clustering[place])),
            f"{hubs.lost[place]:,}",
            _shown(float(hubs.giant_without[place])),
        ]
        for place, node in enumerate(hubs.nodes.tolist())
    ]
    head = [
        "gene",
        "degree",
        "core",
        "clustering",
        "genes lost with it",
        "largest component without it and those above",
    ]
    sentences = [tag("p", each) for each in (hubs.sentence(), hubs.study_sentence()) if each]
    caution = tag("div", tag("p", CAUTION), class_="caution")
    return tag("section", tag("h2", "Hubs"), sentences, caution, _table(head, rows))


def _table(head: Sequence[str], rows: Sequence[Sequence[Child]]) -> Markup:
    top = tag("thead", tag("tr", [tag("th", each) for each in head]))
    body = tag("tbody", [tag("tr", [tag("td", each) for each in row]) for row in rows])
    return tag("div", tag("table", top, body), class_="wide")


def _shown(value: float) -> str:
    if not is_known(value):
        return NOTHING
    if float(value).is_integer() and abs(value) >= 1:
        return f"{int(value):,}"
    return shown(value, 4 if abs(value) < 0.1 else 2 if abs(value) >= 10 else 3)
