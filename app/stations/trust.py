"""Trust: what survives another seed, missing edges, another resolution, and chance."""

from __future__ import annotations

from typing import Any

from dash import html

from analysis.evidence import HARVEST
from analysis.handover.report.charts import null_chart
from analysis.study import Study
from analysis.verdicts import CLUSTERED_CAUTION, is_firm
from app.figures import noise_figure
from app.parts import bar, button, figure, heading, link, notice, number, sentence, sentences, table
from app.view import Pane, View

KEY = "trust"
TITLE = "Trust"
DOUBTFUL_SHOWN = 40
STRIP_SHOWN = 60


def state(view: View) -> str:
    """Return how far the station is: done once null networks were run too, stale where that was another clustering."""
    if view.study is None or view.fingerprint is None:
        return "empty"
    if view.study.nulls is not None or view.study.settings.method == HARVEST:
        return "done"
    others = view.desk.workspace.trail(view.fingerprint)
    return "stale" if any(entry.figures.get("p_value") is not None for entry in others) else "empty"


def render(view: View) -> Pane:
    """Return the verdict on the whole, the modules by stability, and the genes in doubt."""
    study = view.study
    if study is None:
        return Pane(TITLE, [sentence("There is no clustering yet.", first=True)], [])
    body: list[Any] = [
        *sentences(study.sentences),
        *_noise_figure(view),
        *_chance_figure(view, study),
        *_strip(study),
        *_doubtful(study),
        notice(CLUSTERED_CAUTION),
    ]
    return Pane(TITLE, body, _actions(view, study))


def _actions(view: View, study: Study) -> list[Any]:
    """Return buttons for what was not computed yet and takes long; on small networks it begins by itself."""
    if study.settings.method == HARVEST:
        return []
    actions = []
    if study.nulls is None and not view.wanted["nulls"]:
        actions.append(
            button("Compare with chance", {"type": "compare-with-chance", "index": 0}, kind="button primary")
        )
    if view.desk.curve(view.study_id) is None:
        actions.append(button("Noise curve", {"type": "noise-curve", "index": 0}))
    return actions


def _noise_figure(view: View) -> list[Any]:
    curve = view.desk.curve(view.study_id)
    if curve is None:
        return []
    words = (
        "How far the partition drifts (variation of information, 0 the same) as a share of the edges is rewired with "
        "degrees kept, beside random networks with the same degrees (Karrer, Levina & Newman 2008)."
    )
    return [heading("Under noise"), sentence(curve.sentence()), figure(noise_figure(curve), words)]


def _chance_figure(view: View, study: Study) -> list[Any]:
    nulls = study.nulls or view.draws
    if nulls is None or not len(nulls.draws):
        return []
    words = f"Modularity of {len(nulls.draws)} random networks with the same degrees, clustered likewise"
    return [heading("Against chance"), figure(null_chart(nulls), f"{words}; the line is this network.")]


def _strip(study: Study) -> list[Any]:
    """Return the modules, largest first, with how often they come back."""
    rows = []
    for module in range(min(len(study.modules), STRIP_SHOWN)):
        row = study.module_table.iloc[module]
        if row["size"] < 3:
            break
        returned = "–" if study.returned is None else f"{study.returned[module]} of {study.copies}"
        title = f"{row['module']} {row['name']}".strip()
        rows.append(
            [
                link(title, {"type": "pick-module", "index": module}),
                f"{row['size']}",
                bar(_share(study, module), doubt=not is_firm(study, module)),
                returned,
                number(float(row["stability"])),
                number(float(row["support"])),
                number(float(row["q_value"]), 3),
            ]
        )
    if not rows:
        return []
    head = ["module", "size", "comes back", "", "stability", "support", "q-value"]
    hint = (
        "Comes back: in how many noisy copies more than half of the module is found together again. Stability: its "
        "mean overlap with the best match over copies and over all resolutions. Support: stability times evidence; "
        "it orders modules by how likely they are real, and is no probability."
    )
    return [
        heading("Modules"),
        html.P(hint, className="hint"),
        table(head, rows, numeric=[1, 3, 4, 5, 6], name="Modules by stability"),
    ]


def _share(study: Study, module: int) -> float:
    return float("nan") if study.returned is None else float(study.returned[module]) / study.copies


def _doubtful(study: Study) -> list[Any]:
    table_ = study.membership[study.membership["confidence"] < 0.9].nsmallest(DOUBTFUL_SHOWN, "confidence")
    if table_.empty:
        return []
    rows = [
        [
            link(row["gene"], {"type": "pick-gene", "gene": row["gene"]}),
            row["module"],
            bar(float(row["confidence"]), doubt=row["confidence"] < 0.75),
            number(float(row["confidence"])),
            row["second_module"] if isinstance(row["second_module"], str) else "–",
            number(float(row["second_confidence"])),
        ]
        for _, row in table_.iterrows()
    ]
    head = ["gene", "module", "stays", "", "second home", ""]
    return [heading("Genes in doubt"), table(head, rows, numeric=[3, 5], name="Genes in doubt")]
