"""Two clusterings side by side, in the reading pane."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from analysis.compare import Comparison, comparison_sentences
from analysis.handover.report.flow_figure import draw_flows
from app.parts import figure, heading, link, number, sentence, sentences, table
from app.view import Pane, View

TITLE = "comparison"
SENTENCES_FIRST = 3
MATCHES_SHOWN = 60
GENES_SHOWN = 100
PRESERVED_SHOWN = 60
FLOW_WORDS = (
    "Bands are as wide as the genes that two modules share; small modules go together. A gene of several modules "
    "counts in each."
)


def compare_pane(view: View, pick: Mapping[str, Any]) -> Pane:
    """Return what two pinned clusterings have in common.

    Parameters
    ----------
    pick : mapping
        `first`, `second` (ids of clusterings) and `labels` (two texts).
    """
    first, second = pick["labels"]
    found = view.desk.comparison(pick["first"], pick["second"], (first, second))
    if found is None:
        gone = "One of the two clusterings is not kept any more; return to it in the trail, then compare."
        return Pane(TITLE, [sentence(gone, first=True)], [])
    told = comparison_sentences(found)
    body = [
        *sentences(told[:SENTENCES_FIRST]),
        heading("Where the genes are"),
        figure(draw_flows(found), FLOW_WORDS),
        heading("Agreement"),
        _agreement(found),
        *_preservation(found),
        heading("Best matches"),
        _matches(found),
        *_moved(view, found),
    ]
    return Pane(TITLE, body, [])


def _agreement(found: Comparison) -> Any:
    meanings = found.scores.meanings
    rows = [[name, number(value, 3), meanings[name]] for name, value in found.scores.figures.items()]
    return table(["score", "value", "what it means"], rows, numeric=[1], name="Agreement of the two clusterings")


def _matches(found: Comparison) -> Any:
    rows = [
        [row["module"], f"{row['size']:,}", row["best_match"] or "none", f"{row['shared']:,}", number(row["jaccard"])]
        for row in found.matches.query("clustering == 'first' and size >= 3").head(MATCHES_SHOWN).to_dict("records")
    ]
    head = [found.first, "genes", found.second, "shared", "Jaccard"]
    return table(head, rows, numeric=[1, 3, 4], name="Best match of each module")


def _moved(view: View, found: Comparison) -> list[Any]:
    if found.moved.empty:
        return []
    index = view.network.index if view.network is not None else {}
    rows = [
        [_gene(row["gene"], index), row["first"] or "none", row["second"] or "none", row["change"]]
        for row in found.moved.head(GENES_SHOWN).to_dict("records")
    ]
    more = len(found.moved) - len(rows)
    note = [sentence(f"{more:,} more; corymb compare writes all of them.")] if more else []
    head = ["gene", "was in", "is in", ""]
    return [heading("Genes that changed homes"), table(head, rows, name="Genes that changed homes"), *note]


def _gene(gene: str, index: Mapping[str, int]) -> Any:
    return link(gene, {"type": "pick-gene", "gene": gene}) if gene in index else gene


def _preservation(found: Comparison) -> list[Any]:
    if found.preservation is None:
        return []
    rows = [
        [
            f"{row['module']} of {found.first if row['modules_of'] == 'first' else found.second}",
            f"{row['size']:,}",
            number(row["z_density"], 1),
            number(row["z_connectivity"], 1),
            number(row["z_summary"], 1),
            row["evidence"],
        ]
        for row in found.preservation.head(PRESERVED_SHOWN).to_dict("records")
    ]
    words = (
        "Does the other network hold a module together? z of density and connectivity against random modules of the "
        "same size; below 2 there is no evidence, from 10 on it is strong (Langfelder et al. 2011)."
    )
    head = ["module", "genes", "z density", "z connectivity", "z both", ""]
    return [
        heading("Held together in the other network"),
        sentence(words),
        table(head, rows, numeric=[1, 2, 3, 4], name="Preservation of modules"),
    ]
