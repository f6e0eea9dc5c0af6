"""A list of genes that was typed or pasted: where each is, and which are missing."""

from __future__ import annotations

from collections import Counter
from typing import Any

from app.parts import NOTHING, heading, link, sentence, table
from app.view import Pane, View

GENES_SHOWN = 300
MISSING_SHOWN = 200


def listing(view: View, pick: Any) -> Pane:
    """Return the genes found with their modules, a count per module, and the words that name no gene here."""
    network = view.network
    if network is None:
        return Pane("found", [], [])
    genes, missing, similar = pick.get("genes", []), pick.get("missing", []), pick.get("similar", [])
    body: list[Any] = [sentence(_verdict(len(genes), len(missing)), first=True)]
    if similar:
        rows = [[link(network.names[node], _gene(network.names[node]))] for node in similar]
        body += [heading("Similar names"), table(["gene"], rows, name="Similar names")]
    if genes:
        body += _per_module(view, genes) + _genes(view, genes)
    if missing:
        shown = ", ".join(missing[:MISSING_SHOWN])
        more = f" and {len(missing) - MISSING_SHOWN} more" if len(missing) > MISSING_SHOWN else ""
        body += [heading("Not in this network"), sentence(f"{shown}{more}")]
    return Pane("found", body, [])


def _verdict(found: int, missing: int) -> str:
    if not found:
        return "No gene or module of that name is in this network."
    if not missing:
        return f"All {found} genes are in this network."
    return f"{found} of {found + missing} are in this network."


def _per_module(view: View, genes: list[int]) -> list[Any]:
    if view.study is None:
        return []
    labels = view.study.modules.labels
    counts = Counter(int(labels[node]) for node in genes)
    rows = [
        [
            link(f"M{module + 1}", {"type": "pick-module", "index": module}) if module >= 0 else "in no module",
            f"{count}",
            f"{view.study.modules.sizes[module]}" if module >= 0 else "",
        ]
        for module, count in sorted(counts.items(), key=lambda item: (-item[1], item[0]))
    ]
    return [heading("By module"), table(["module", "of the list", "size"], rows, numeric=[1, 2], name="By module")]


def _genes(view: View, genes: list[int]) -> list[Any]:
    network = view.network
    if network is None:
        return []
    labels = view.study.modules.labels if view.study is not None else None
    rows = [
        [
            link(network.names[node], _gene(network.names[node])),
            f"M{labels[node] + 1}" if labels is not None and labels[node] >= 0 else NOTHING,
            f"{network.degree[node]}",
        ]
        for node in genes[:GENES_SHOWN]
    ]
    return [heading("Genes"), table(["gene", "module", "degree"], rows, numeric=[2], name="Genes found")]


def _gene(name: str) -> dict[str, str]:
    return {"type": "pick-gene", "gene": name}
