"""Passports: the one-page evidence for a module or a gene."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
from dash import dcc, html

from analysis.meaning import module_sentence as enrichment_sentence
from analysis.meaning import title_of
from analysis.modules import expected_density
from analysis.network import Network
from analysis.study import Study
from analysis.trust.ensemble import standing
from analysis.verdicts import DEGREE_CAUTION, STRUCTURE_CAUTION, module_sentence
from app.parts import NOTHING, bar, button, heading, link, notice, number, sentence, swatch, table
from app.view import Pane, View

DOUBT = 0.75
GENES_SHOWN = 300
PARTNERS_SHOWN = 60


def module_passport(view: View, module: int) -> Pane:
    """Return the passport of a module of the study shown."""
    study = view.study
    if study is None or not 0 <= module < len(study.modules):
        return Pane("module passport", [sentence("This module is not in the clustering shown.", first=True)], [])
    row = study.module_table.iloc[module]
    hues = view.hues()
    title = html.H1(
        [
            swatch(hues[module] if module < len(hues) else None),
            html.Span(row["module"]),
            html.Span(f"“{row['name']}”" if row["name"] else "", className="given-name"),
        ],
        className="passport-title",
    )
    body: list[Any] = [
        title,
        sentence(module_sentence(study, module), first=True),
        _module_evidence(study, module),
        notice(STRUCTURE_CAUTION),
        *_gene_sets(view, module),
        *_members(study, module),
    ]
    actions = [
        _name_field(row),
        button("Name it", {"type": "name-module", "index": module}),
        button("Close-up", {"type": "close-up", "kind": "module", "index": module}),
        button("Hand over", {"type": "go-on", "station": "handover"}, kind="button primary"),
    ]
    return Pane("module passport", body, actions)


def gene_passport(view: View, node: int) -> Pane:
    """Return the passport of a gene of the network at hand."""
    network, study = view.network, view.study
    if network is None or not 0 <= node < network.node_count:
        return Pane("gene passport", [sentence("This gene is not in the network at hand.", first=True)], [])
    gene = network.names[node]
    title = html.H1(gene, className="passport-title")
    if study is None:
        return Pane("gene passport", [title, sentence("The modules are being worked out.", first=True)], [])
    rows = study.membership[study.membership["gene"] == gene]
    body = [title, sentence(_gene_verdict(gene, rows, study), first=True)]
    if len(rows):
        body.append(_gene_evidence(rows))
    body += [notice(DEGREE_CAUTION), *_partners(network, study, node)]
    actions = [button("Close-up", {"type": "close-up", "kind": "gene", "index": node})]
    return Pane("gene passport", body, actions)


def _module_evidence(study: Study, module: int) -> html.Table:
    row = study.module_table.iloc[module]
    expected = expected_density(study.network, study.modules.members[module])
    lines: list[list[Any]] = [
        ["genes", "", f"{row['size']:,}", ""],
        ["interactions inside / leaving", "", f"{row['internal_edges']:,} / {row['cut_edges']:,}", ""],
        *_returned(study, module),
        ["stability over all resolutions", bar(float(row["stability"])), number(float(row["stability"])), ""],
        [
            "inside density",
            bar(float(row["internal_density"])),
            number(float(row["internal_density"])),
            number(expected),
        ],
        ["conductance", bar(float(row["conductance"])), number(float(row["conductance"])), ""],
        ["evidence, nats per gene", "", number(float(row["evidence"])), "0"],
        ["support", "", number(float(row["support"])), ""],
    ]
    if not math.isnan(row["q_value"]):
        lines.append(["q-value against chance modules", "", number(float(row["q_value"]), 3), ""])
    if row["below_resolution_limit"]:
        lines.append(["below the resolution limit", "", "yes", ""])
    return table(["evidence", "", "here", "from degrees"], lines, numeric=[2, 3], name="Evidence for the module")


def _returned(study: Study, module: int) -> list[list[Any]]:
    if study.returned is None:
        return []
    share = float(study.returned[module]) / study.copies
    return [
        [
            "comes back in noisy copies",
            bar(share, doubt=share < DOUBT),
            f"{study.returned[module]} of {study.copies}",
            "",
        ]
    ]


def _gene_sets(view: View, module: int) -> list[Any]:
    """Return the sets that a module is enriched in, where gene sets were given."""
    meaning = view.desk.meaning.found(view.study_id, view.study)
    if meaning is None:
        return []
    enrichment = meaning.enrichment
    lines = [
        [
            link(title_of(enrichment.sets, gene_set), {"type": "light-set", "index": gene_set}),
            f"{enrichment.overlap[pair]} of {enrichment.sets.sizes[gene_set]}",
            number(float(enrichment.fold[pair]), 1),
            number(float(enrichment.q_value[pair]), 3),
        ]
        for pair, gene_set in ((each.pair, int(enrichment.gene_set[each.pair])) for each in meaning.folds(module)[:5])
    ]
    words = sentence(enrichment_sentence(enrichment, module))
    if not lines:
        return [heading("Gene sets"), words]
    rows = table(["gene set", "overlap", "fold", "q-value"], lines, numeric=[1, 2, 3], name="Gene sets of the module")
    return [heading("Gene sets"), words, rows]


def _members(study: Study, module: int) -> list[Any]:
    number_ = study.modules.numbers[module]
    rows = study.membership[study.membership["module"] == number_]
    homes = study.modules.homes[[study.network.index[gene] for gene in rows["gene"]]]
    words = standing(rows["confidence"].to_numpy(np.float64), homes)
    lines = [
        [
            link(row["gene"], {"type": "pick-gene", "gene": row["gene"]}),
            html.Span(
                [
                    bar(float(row["confidence"]), doubt=row["confidence"] < DOUBT),
                    number(float(row["confidence"])),
                    html.Span(f" {words[place]}", className="hint"),
                ]
            ),
            row["second_module"] if isinstance(row["second_module"], str) else NOTHING,
            f"{row['degree']}",
            row["role"],
        ]
        for place, (_, row) in enumerate(rows.head(GENES_SHOWN).iterrows())
    ]
    head = ["gene", "stays here", "second home", "degree", "role"]
    parts: list[Any] = [heading("Genes"), table(head, lines, numeric=[3], name="Genes of the module")]
    if len(rows) > GENES_SHOWN:
        parts.append(sentence(f"{len(rows) - GENES_SHOWN} more; all stand in the table of genes."))
    return parts


def _name_field(row: Any) -> Any:
    return dcc.Input(
        id="module-name",
        value=row["name"],
        placeholder="a name for this module",
        type="text",
        maxLength=80,
        className="name-field",
        autoComplete="off",
    )


def _gene_verdict(gene: str, rows: Any, study: Study) -> str:
    if not len(rows):
        return f"{gene} is in none of the modules shown."
    if len(rows) > 1:
        return f"{gene} is shared by {', '.join(rows['module'])}."
    row = rows.iloc[0]
    if math.isnan(row["confidence"]):
        return f"{gene} is in {row['module']}; no further runs say how surely."
    words = "surely" if row["confidence"] >= 0.9 else "mostly" if row["confidence"] >= 0.75 else "with doubt"
    basis = f"{study.copies} noisy copies" if study.copies else "the runs with other seeds"
    text = f"{gene} is in {row['module']}, {words}: it stays there in {row['confidence']:.0%} of {basis}"
    if isinstance(row["second_module"], str):
        text += f", and is found in {row['second_module']} in {row['second_confidence']:.0%}"
    return text.replace("%", " %") + "."


def _gene_evidence(rows: Any) -> html.Table:
    lines = [
        [
            link(row["module"], {"type": "pick-module", "index": int(row["module"][1:]) - 1}),
            number(float(row["confidence"])),
            number(float(row["within_module_z"])),
            number(float(row["participation"])),
            row["role"],
        ]
        for _, row in rows.iterrows()
    ]
    head = ["module", "stays", "degree z", "participation", "role"]
    return table(head, lines, numeric=[1, 2, 3], name="Place of the gene")


def _partners(network: Network, study: Study, node: int) -> list[Any]:
    first = network.targets[network.sources == node]
    second = network.sources[network.targets == node]
    weights = np.concatenate(
        [network.edge_weights[network.sources == node], network.edge_weights[network.targets == node]]
    )
    partners = np.concatenate([first, second])
    labels = study.modules.labels[partners]
    counts = np.bincount(labels[labels >= 0], minlength=len(study.modules))
    spread = [
        [link(study.modules.numbers[module], {"type": "pick-module", "index": int(module)}), f"{counts[module]}"]
        for module in np.argsort(-counts, kind="stable")
        if counts[module]
    ]
    order = np.lexsort((partners, -weights))[:PARTNERS_SHOWN]
    lines = [
        [
            link(network.names[partners[place]], {"type": "pick-gene", "gene": network.names[partners[place]]}),
            study.modules.numbers[labels[place]] if labels[place] >= 0 else NOTHING,
            number(float(weights[place]), 3) if network.weights is not None else "",
        ]
        for place in order
    ]
    head = ["partner", "module", "weight" if network.weights is not None else ""]
    parts: list[Any] = [
        heading(f"{len(partners)} interactions, by module"),
        table(["module", "interactions"], spread, numeric=[1], name="Interactions by module"),
        heading("Partners" if len(partners) <= PARTNERS_SHOWN else f"The first {PARTNERS_SHOWN} partners"),
        table(head, lines, numeric=[2], name="Partners"),
    ]
    return parts
