"""Meaning: which gene sets the modules are enriched in, names from them, and where functions cross modules."""

from __future__ import annotations

from typing import Any

from dash import dcc, html

from analysis.gene_sets.annotation_file import KEY as ANNOTATIONS
from analysis.handover.report.spread_figure import draw_spread, spread_rows
from analysis.meaning import (
    ENRICHMENT_CAUTION,
    LEVEL_CAUTION,
    SAME_SOURCE_CAUTION,
    SAME_SOURCE_QUESTION,
    SAME_SOURCE_UNKNOWN,
    Meaning,
    module_sentence,
    title_of,
)
from app.grids import enrichment_grid
from app.parts import button, fault, field, figure, heading, link, notice, number, sentence, sentences, table
from app.view import Pane, View

KEY = "meaning"
TITLE = "Meaning"
MODULES_SHOWN = 40
SETS_A_MODULE = 3
PAIRS_SHOWN = 20
SETS_SHOWN = 30
ANSWERS = {"yes": "yes", "no": "no", "unknown": "not known"}


def state(view: View) -> str:
    """Return how far the station is: done once the clustering shown was tested, stale while another one was."""
    if view.study is None or view.desk.meaning.chosen(view.fingerprint)["gene_sets"] is None:
        return "empty"
    return "done" if view.desk.meaning.found(view.study_id, view.study) is not None else "stale"


def render(view: View) -> Pane:
    """Return the outcome, the modules with names proposed, the spread of the sets, the settings and the files."""
    if view.study is None or view.fingerprint is None:
        return Pane(TITLE, [sentence("There is no clustering yet.", first=True)], [])
    chosen = view.desk.meaning.chosen(view.fingerprint)
    if chosen["gene_sets"] is None:
        return Pane(TITLE, _without_sets(view), [])
    meaning = view.desk.meaning.found(view.study_id, view.study)
    if meaning is None:
        message = view.desk.meaning.fault(view.study_id, view.study)
        waiting = (
            fault(message) if message else sentence("The modules are being tested with the gene sets.", first=True)
        )
        return Pane(TITLE, [waiting, *_settings(chosen), *_files(view, chosen)], [])
    body: list[Any] = [
        *sentences(meaning.sentences()[:3]),
        *_same_source(chosen),
        *_modules(view, meaning),
        *_all_pairs(meaning),
        *_spread(meaning),
        *_settings(chosen),
        *_files(view, chosen),
        *_reading(meaning),
        notice(f"{ENRICHMENT_CAUTION} {LEVEL_CAUTION}"),
    ]
    return Pane(TITLE, body, [button("Take all proposed names", {"type": "take-names", "index": 0}, kind="button")])


def _without_sets(view: View) -> list[Any]:
    first = "No gene sets yet. Give a file, and every module is tested with every set in it."
    return [sentence(first, first=True), *_drop_area(view), notice(f"{ENRICHMENT_CAUTION} {SAME_SOURCE_UNKNOWN}")]


def _drop_area(view: View) -> list[Any]:
    parts: list[Any] = [
        html.Div(
            [
                html.Strong("Drop a file of gene sets here"),
                html.Span("or press to choose one", className="hint"),
                html.Span(
                    "Tab-separated set lines (set, description, genes), two columns (gene and set), or annotations as "
                    "GAF 2.2. It is read on this machine and goes nowhere else.",
                    className="hint",
                ),
            ],
            className="drop",
            role="button",
            tabIndex=0,
            **{"data-upload": "gene_sets"},
        )
    ]
    if view.desk.meaning.has_sample(view.network):
        parts.append(button("Take the sample gene sets", {"type": "sample-sets", "index": 0}))
    return parts


def _same_source(chosen: dict[str, Any]) -> list[Any]:
    """Ask whether the sets were made from the same interactions, and warn."""
    answers = html.Div(
        [
            button(
                words,
                {"type": "same-source", "answer": answer},
                kind="",
                **{"aria-pressed": "true" if chosen["same_source"] == answer else "false"},
            )
            for answer, words in ANSWERS.items()
        ],
        className="segments",
        role="group",
        **{"aria-labelledby": "same-source-question"},
    )
    question = html.Div(
        [html.Div(SAME_SOURCE_QUESTION, className="field-label", id="same-source-question"), answers],
        className="question",
    )
    warning = {"yes": SAME_SOURCE_CAUTION, "unknown": SAME_SOURCE_UNKNOWN}.get(chosen["same_source"])
    return [question, notice(warning)] if warning else [question]


def _modules(view: View, meaning: Meaning) -> list[Any]:
    names = view.desk.workspace.names(view.study_id) if view.study_id else {}
    rows: list[list[Any]] = []
    enrichment = meaning.enrichment
    for module in range(min(len(enrichment.modules), MODULES_SHOWN)):
        label = enrichment.modules.labels[module]
        shown = link(label, {"type": "pick-module", "index": module})
        folds = meaning.folds(module)
        if not folds:
            rows.append([shown, html.Span(module_sentence(enrichment, module), className="hint")])
            continue
        best = [_best(meaning, each.pair, [int(enrichment.gene_set[pair]) for pair in each.under]) for each in folds]
        rows.append([shown, html.Div([*best[:SETS_A_MODULE], _naming(meaning, module, names.get(label, ""))])])
    hint = (
        "The strongest sets of each module, with common genes and q-value; sets that resemble a stronger one are "
        "folded under it. Take the name proposed, or type another; a name holds for this clustering."
    )
    return [
        heading("Modules"),
        html.P(hint, className="hint"),
        table(["module", "enriched in, and a name from it"], rows, name="Modules and their gene sets"),
    ]


def _best(meaning: Meaning, pair: int, under: list[int]) -> html.Div:
    enrichment = meaning.enrichment
    gene_set = int(enrichment.gene_set[pair])
    folded = "; ".join(title_of(enrichment.sets, each) for each in under)
    counts = (
        f" {enrichment.overlap[pair]} of {enrichment.sets.sizes[gene_set]}, q {number(float(enrichment.q_value[pair]))}"
    )
    parts: list[Any] = [
        link(title_of(enrichment.sets, gene_set), {"type": "light-set", "index": gene_set}),
        html.Span(counts, className="hint"),
    ]
    if under:
        parts.append(html.Span(f" and {len(under)} like it", className="hint", title=folded))
    return html.Div(parts)


def _naming(meaning: Meaning, module: int, given: str) -> html.Div:
    proposal = meaning.proposal(module)
    proposed = proposal.name if proposal else ""
    box = dcc.Input(
        id={"type": "proposed-name", "index": module},
        value=given or proposed,
        type="text",
        maxLength=80,
        className="name-field",
        autoComplete="off",
        debounce=False,
    )
    label = meaning.enrichment.modules.labels[module]
    named = html.Label([html.Span(f"name of {label}", className="unseen"), box], className="naming-field")
    take = button(
        "Named" if given else "Name it",
        {"type": "take-name", "index": module},
        kind="button quiet" if given else "button",
        title=proposal.reason if proposal else "",
        **{"aria-label": f"Name {label}"},
    )
    return html.Div([named, take], className="naming")


def _all_pairs(meaning: Meaning) -> list[Any]:
    return [heading("All enriched pairs"), enrichment_grid(meaning)]


def _spread(meaning: Meaning) -> list[Any]:
    """Return where functions cross modules: the sets enriched in several, and the pairs of modules that share them."""
    sets, _ = spread_rows(meaning)
    head = heading("Where functions and modules part")
    if not sets:
        return [head, sentence("No gene set is enriched in more than one module.")]
    spread, enrichment = meaning.spread, meaning.enrichment
    labels = enrichment.modules.labels
    several = sum(len(modules) > 1 for modules in spread.enriched)
    words = (
        f"{several} of the gene sets {'is' if several == 1 else 'are'} enriched in more than one module: one function, "
        "carried by parts of several structural modules."
    )
    rows = [
        [
            link(title_of(enrichment.sets, each), {"type": "light-set", "index": each}),
            f"{enrichment.sets.sizes[each]}",
            f"{spread.touched[each]}",
            number(float(spread.effective[each]), 1),
            ", ".join(labels[module] for module in spread.enriched[each]),
        ]
        for each in sets[:SETS_SHOWN]
    ]
    pairs = [
        [
            f"{labels[one]} and {labels[other]}",
            f"{len(shared)}",
            "; ".join(title_of(enrichment.sets, each) for each in shared[:SETS_A_MODULE]),
        ]
        for one, other, shared in spread.pairs()[:PAIRS_SHOWN]
    ]
    caption = (
        "Each row is a gene set, each column a module: the darker, the larger the share of the set's genes that lie in "
        "the module. A dot marks enrichment (q ≤ 0.05)."
    )
    drawn = draw_spread(meaning)
    return [
        head,
        sentence(words),
        *([figure(drawn, caption)] if drawn else []),
        table(
            ["gene set", "genes", "modules touched", "in effect", "enriched in"],
            rows,
            numeric=[1, 2, 3],
            name="Gene sets over modules",
        ),
        html.P(
            "In effect: the number of equal parts that would be as spread out (inverse Simpson index).",
            className="hint",
        ),
        table(["modules", "shared sets", ""], pairs, numeric=[1], name="Pairs of modules that share gene sets"),
    ]


def _settings(chosen: dict[str, Any]) -> list[Any]:
    sizes = [
        field(label, dcc.Input(value=chosen[key], type="number", min=1, step=1, id=f"meaning-{part}", debounce=True))
        for label, key, part in (("genes of a set, from", "min_size", "min"), ("to", "max_size", "max"))
    ]
    options = [{"label": "all genes", "value": "all"}, {"label": "cores only", "value": "core"}]
    chosen_core = "core" if chosen["core_only"] else "all"
    core = dcc.Dropdown(options, chosen_core, id="meaning-core", clearable=False, searchable=False)
    return [
        heading("What is tested"),
        html.Div([*sizes, field("of each module", core)], className="fields"),
        *_annotation_settings(chosen),
    ]


def _annotation_settings(chosen: dict[str, Any]) -> list[Any]:
    """Return the settings of annotation files; hidden for other files, since callbacks need them on the page."""
    shown = chosen["gene_sets"] is not None and chosen["gene_sets"].get("format") == ANNOTATIONS
    aspects = {"all": "all aspects", "P": "process", "F": "function", "C": "component"}
    aspect = dcc.Dropdown(
        [{"label": label, "value": key} for key, label in aspects.items()],
        chosen["aspect"] or "all",
        id="meaning-aspect",
        clearable=False,
        searchable=False,
    )
    codes = dcc.Input(value=chosen["evidence_out"], type="text", id="meaning-evidence", debounce=True)
    hint = "codes parted by blanks, such as IEA ND"
    return [
        html.Div(
            [field("aspect", aspect), field("evidence left out", codes, hint)],
            className="fields",
            style={} if shown else {"display": "none"},
        )
    ]


def _files(view: View, chosen: dict[str, Any]) -> list[Any]:
    rows = [["gene sets", chosen["gene_sets"]["name"], chosen["gene_sets"]["format"]]]
    rows += [
        [words, chosen[kind]["name"], ""]
        for kind, words in (("aliases", "aliases"), ("ontology", "ontology"))
        if chosen[kind] is not None
    ]
    more = [html.Button("Give an alias table", className="button", type="button", **{"data-upload": "aliases"})]
    if chosen["gene_sets"]["format"] == ANNOTATIONS:
        more.append(
            html.Button("Give an ontology (OBO)", className="button", type="button", **{"data-upload": "ontology"})
        )
    return [
        heading("Files"),
        table(["", "file", "read as"], rows, name="Files of the gene sets"),
        html.Div(more, className="fields"),
        *_drop_area(view),
    ]


def _reading(meaning: Meaning) -> list[Any]:
    told = meaning.sentences()[3:]
    return [html.Details([html.Summary("How the gene sets were read and matched"), *[sentence(each) for each in told]])]
