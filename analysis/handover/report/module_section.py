"""The modules of a report: their table, and their genes."""

from __future__ import annotations

from typing import Any

import numpy as np

from analysis.colours import module_colour
from analysis.handover.report.charts import DOUBT, bar
from analysis.handover.report.markup import Markup, join, short, tag
from analysis.handover.report.wording import MISSING, chance, count, figure, is_known
from analysis.study import Study

ROWS_OPEN = 25
LEAST_SURE = 12
MOST_SINGLES = 20
LIMIT_MARK = "*"

_HEADS = {
    "size": "genes",
    "internal_edges": "edges inside",
    "cut_edges": "edges cut",
    "internal_density": "inside density",
    "conductance": "conductance",
    "resolution_from": "holds at resolution",
    "returned": "comes back",
    "stability": "stability",
    "evidence": "evidence",
    "support": "support",
    "q_value": "q",
}
_HARVESTED = "share of chance"
"""What the q-value of a harvested module is: of the modules with its support or more, the share that chance gives."""
_WHOLE = ("size", "internal_edges", "cut_edges")
_LEFT = ("returned",)


def module_tables(study: Study) -> Markup:
    """Return the table of all modules; beyond the largest ones, folded."""
    table = study.module_table
    if study.returned is not None:
        table = table.assign(returned=study.returned)
    shown = [column for column in _HEADS if column in table and table[column].notna().any()]
    heads = _HEADS | ({"q_value": _HARVESTED} if study.settings.method == "harvest" else {})
    cells = [tag("th", heads[column], class_=None if column in _LEFT else "n", scope="col") for column in shown]
    head = tag("thead", tag("tr", tag("th", "module", scope="col"), cells))
    if not has_limit(study):
        table = table.assign(below_resolution_limit=False)
    told = _told(study)
    records = enumerate(table.head(told).to_dict("records"))
    rows = [_row(position, record, shown, study.copies) for position, record in records]
    parts = [_wide(head, rows[:ROWS_OPEN])]
    if rest := rows[ROWS_OPEN:]:
        summary = f"The other {count(len(rest), 'module')}, M{ROWS_OPEN + 1} to M{len(rows)}"
        parts.append(tag("details", tag("summary", summary), _wide(head, rest)))
    if single := len(table) - told:
        text = f"{count(single, 'module')} of a single gene each are in modules.csv and membership.csv alone."
        parts.append(tag("p", text, class_="note"))
    return join(parts)


def _told(study: Study) -> int:
    """Return how many modules the report tells of: all, but for single genes where there are very many."""
    single = int((study.modules.sizes == 1).sum())
    return len(study.modules) - (single if single > MOST_SINGLES else 0)


def has_limit(study: Study) -> bool:
    """Tell whether the resolution limit bears on these modules: where modularity was optimised, and some are below."""
    optimised = study.settings.method in ("leiden", "louvain") and study.settings.quality == "modularity"
    return optimised and bool(study.module_table["below_resolution_limit"].any())


def least_sure(study: Study) -> Markup | None:
    """Return the genes whose module is least sure, or None where none is in doubt."""
    table = study.membership
    sizes = study.module_table.set_index("module")["size"]
    doubtful = table[(table["confidence"] < DOUBT) & (table["module"].map(sizes) >= 3)]
    if doubtful.empty:
        return None
    first = doubtful.sort_values(["confidence", "degree", "gene"], ascending=[True, False, True]).head(LEAST_SURE)
    heads = [
        ("gene", None),
        ("module", None),
        ("stays there", None),
        ("second home", None),
        ("degree", "n"),
        ("role", None),
    ]
    head = tag("thead", tag("tr", [tag("th", text, class_=kind, scope="col") for text, kind in heads]))
    rows = [_doubtful_row(record) for record in first.to_dict("records")]
    more = len(doubtful) - len(first)
    rest = f" The other {more:,} are in membership.csv." if more else ""
    where = "copies" if study.copies else "runs"
    stay = "stays" if len(doubtful) == 1 else "stay"
    genes = count(len(doubtful), "gene")
    note = f"Of modules of three genes or more, {genes} {stay} in fewer than six of ten {where}.{rest}"
    return join([tag("p", note), _wide(head, rows)])


def gene_lists(study: Study) -> Markup | None:
    """Return the genes of every module that the table tells of, folded; doubtful ones in ochre."""
    numbers = study.modules.numbers[: _told(study)]
    table = study.membership[study.membership["module"].isin(numbers)]
    if table.empty:
        return None
    starts = np.flatnonzero((table["module"] != table["module"].shift()).to_numpy())
    genes, confidence, modules = (table[name].tolist() for name in ("gene", "confidence", "module"))
    names = study.settings.names
    lists = []
    for start, end in zip(starts.tolist(), [*starts[1:].tolist(), len(genes)], strict=True):
        module = modules[start]
        title = [tag("b", module), _name(names.get(module, "")), f" · {count(end - start, 'gene')}"]
        words = [
            tag("span", short(gene), class_="doubt" if is_known(sure) and sure < DOUBT else None)
            for gene, sure in zip(genes[start:end], confidence[start:end], strict=True)
        ]
        lists.append(tag("details", tag("summary", title), tag("p", words, class_="genes"), class_="module"))
    summary = tag("summary", f"Genes of each module ({count(len(lists), 'list')})")
    note = tag("p", "Surest first; genes in doubt (confidence below 0.6) are in ochre.", class_="note")
    return tag("details", summary, note, lists)


def _row(position: int, record: dict[Any, Any], shown: list[str], copies: int) -> Markup:
    dot = tag("span", class_="dot", style=f"background:{module_colour(position, record['size'])}")
    name = tag("td", dot, str(record["module"]), _name(record["name"]), class_="m")
    return tag("tr", name, [_cell(column, record, copies) for column in shown])


def _cell(column: str, record: dict[Any, Any], copies: int) -> Markup:
    value = record[column]
    if column == "internal_edges" and record["below_resolution_limit"]:
        return tag("td", count(value), tag("span", LIMIT_MARK, class_="mark doubt"), class_="n")
    if column == "returned":
        return tag("td", bar(value / copies), f"{value} of {copies}", class_="bar")
    if column == "resolution_from":
        return tag("td", f"{value:.2g} to {record['resolution_to']:.2g}" if is_known(value) else MISSING, class_="n")
    if column in _WHOLE:
        return tag("td", count(value), class_="n")
    return tag("td", chance(value) if column == "q_value" else figure(value), class_="n")


def _bar_cell(value: Any) -> Markup:
    return tag("td", [bar(value), figure(value)] if is_known(value) else MISSING, class_="bar")


def _doubtful_row(record: dict[Any, Any]) -> Markup:
    second = record["second_module"]
    home = f"{second} ({figure(record['second_confidence'])})" if isinstance(second, str) and second else MISSING
    return tag(
        "tr",
        tag("td", short(record["gene"])),
        tag("td", record["module"]),
        _bar_cell(record["confidence"]),
        tag("td", home),
        tag("td", count(record["degree"]), class_="n"),
        tag("td", record["role"] if isinstance(record["role"], str) else MISSING),
    )


def _name(name: str) -> Markup | None:
    return tag("span", f" “{short(name)}”", class_="name") if name else None


def _wide(head: Markup, rows: list[Markup]) -> Markup:
    return tag(
        "div", tag("table", head, tag("tbody", rows)), class_="wide", tabindex="0", role="group", aria_label="Table"
    )
