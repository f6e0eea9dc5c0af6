"""What was asked, how the resolution was chosen, which genes lie between modules, and the names that were given."""

from __future__ import annotations

import numpy as np

from analysis.evidence import HARVEST
from analysis.handover.report.markup import Markup, short, tag
from analysis.handover.report.wording import count, figure, is_known, plain
from analysis.study import Study

BRIDGES = 12
LEAST_SPREAD = 0.62  # participation above which Guimerà & Amaral 2005 call a gene a connector
WIDE = "Which wide neighbourhoods does the network fall into: groups with more edges inside than their degrees give?"
TIGHT = "Which tight groups does the network hold: groups with at least a chosen share of all possible edges inside?"
SHARED = "Which groups are chains of cliques, so that a gene may belong to several?"
EACH = "Which groups hold, each at its own resolution, and are better supported than what chance gives?"


def question(study: Study) -> Markup:
    """Return the question that the method answers."""
    by_method = {HARVEST: EACH, "clique-percolation": SHARED}
    asked = by_method.get(study.settings.method, TIGHT if study.settings.quality == "cpm" else WIDE)
    return tag("section", tag("h2", "The question"), tag("p", asked))


def resolution(study: Study) -> Markup:
    """Return how the resolution came about, and how far the modules depend on it."""
    parts = [tag("p", sentence) for sentence in _chosen(study)]
    return tag("section", tag("h2", "How the resolution was chosen"), parts)


def bridges(study: Study) -> Markup | None:
    """Return the genes whose edges are spread most over several modules; None where there is none."""
    table = study.membership[study.membership["participation"] > LEAST_SPREAD].drop_duplicates("gene")
    if table.empty:
        return None
    first = table.sort_values(["participation", "degree", "gene"], ascending=[False, False, True]).head(BRIDGES)
    heads = (("gene", None), ("module", None), ("edges", "n"), ("participation", "n"), ("role", None))
    head = tag("thead", tag("tr", [tag("th", text, class_=kind, scope="col") for text, kind in heads]))
    rows = [
        tag(
            "tr",
            tag("td", short(row["gene"])),
            tag("td", row["module"]),
            tag("td", count(row["degree"]), class_="n"),
            tag("td", figure(row["participation"]), class_="n"),
            tag("td", row["role"] if isinstance(row["role"], str) else ""),
        )
        for row in first.to_dict("records")
    ]
    note = (
        f"{count(len(table), 'gene')} with edges spread over several modules (participation above {LEAST_SPREAD}); the "
        "first are listed, all are in membership.csv. Genes of few edges reach a high participation easily."
    )
    return tag("section", tag("h2", "Bridges"), tag("p", note, class_="note"), _wide(head, rows))


def notes(study: Study) -> Markup | None:
    """Return the names given to modules; None where none was given."""
    named = [(module, name) for module, name in study.settings.names.items() if name]
    if not named:
        return None
    sizes = dict(zip(study.modules.numbers, study.modules.sizes.tolist(), strict=True))
    rows = [
        tag("tr", tag("td", module), tag("td", short(name, 200)), tag("td", count(sizes.get(module, 0)), class_="n"))
        for module, name in sorted(named, key=lambda pair: (len(pair[0]), pair[0]))
    ]
    heads = [tag("th", text, scope="col") for text in ("module", "name")] + [
        tag("th", "genes", class_="n", scope="col")
    ]
    words = "Names were given by people, from what they know; they are no result of the computation."
    table = _wide(tag("thead", tag("tr", heads)), rows)
    return tag("section", tag("h2", "Notes"), tag("p", words, class_="note"), table)


def _chosen(study: Study) -> list[str]:
    settings = study.settings
    if settings.method == HARVEST:
        return ["None was chosen: every module was taken at the resolution at which it is best supported."]
    if settings.method == "clique-percolation":
        return [f"There is none; the size of the cliques, k = {settings.k}, was given."]
    shown = plain(study.modules.settings.get("resolution", settings.resolution))
    if study.suggestion:
        return [study.suggestion, *_range(study)]
    given = f"The resolution {shown} was given, and not taken from a sweep. Every resolution gives some modules."
    return [given, *_range(study)]


def _range(study: Study) -> list[str]:
    """Say over which stretch of resolution the modules of three genes or more are found again, in the middle."""
    table = study.module_table[study.module_table["size"] >= 3]
    ratio = (table["resolution_to"] / table["resolution_from"]).to_numpy(np.float64)
    middle = float(np.median(ratio[~np.isnan(ratio)])) if (~np.isnan(ratio)).any() else float("nan")
    if not is_known(middle):
        return []
    return [
        f"The median module of three genes or more is found again over a stretch of resolution whose end is "
        f"{figure(middle, 1)} times its beginning; the table tells it for each."
    ]


def _wide(head: Markup, rows: list[Markup]) -> Markup:
    return tag(
        "div", tag("table", head, tag("tbody", rows)), class_="wide", tabindex="0", role="group", aria_label="Table"
    )
