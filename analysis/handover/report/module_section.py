"""The modules of a report: their table, and their genes."""

from __future__ import annotations

from typing import Any

import numpy as np

from analysis.handover.report.charts import DOUBT, bar
from analysis.handover.report.colours import module_colour
from analysis.handover.report.markup import Markup, join, short, tag
from analysis.handover.report.wording import MISSING, chance, count, figure, is_known
from analysis.study import Study

ROWS_OPEN = 25
LEAST_SURE = 15
LIMIT_REMARK = "few edges inside"

_HEADS = {
    "size": "genes",
    "internal_edges": "edges inside",
    "cut_edges": "edges cut",
    "internal_density": "inside density",
    "conductance": "conductance",
    "stability": "stability",
    "evidence": "evidence",
    "support": "support",
    "p_value": "p",
    "q_value": "q",
}
_HARVESTED = "share of chance"
"""What the q-value of a harvested module is: of the modules with its support or more, the share that chance gives."""
_WHOLE = ("size", "internal_edges", "cut_edges")
_CHANCES = ("p_value", "q_value")


def module_tables(study: Study) -> Markup:
    """Return the table of all modules; beyond the largest ones, folded."""
    table = study.module_table
    shown = [column for column in _HEADS if column in _WHOLE or table[column].notna().any()]
    ranges = bool(table["resolution_from"].notna().any())
    limited = bool(table["below_resolution_limit"].any())
    records = table.to_dict("records")
    rows = [_row(position, record, shown, ranges, limited) for position, record in enumerate(records)]
    heads = _HEADS | ({"q_value": _HARVESTED} if study.settings.method == "harvest" else {})
    head = _head([heads[column] for column in shown], ranges, limited)
    parts = [_wide(head, rows[:ROWS_OPEN])]
    if rest := rows[ROWS_OPEN:]:
        summary = f"The other {count(len(rest), 'module')}, M{ROWS_OPEN + 1} to M{len(rows)}"
        parts.append(tag("details", tag("summary", summary), _wide(head, rest)))
    return join(parts)


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
    note = f"{count(len(doubtful), 'gene')} of modules of three or more stay there in fewer than six runs of ten.{rest}"
    return join([tag("p", note), _wide(head, rows)])


def gene_lists(study: Study) -> Markup:
    """Return the genes of every module, folded; doubtful ones in ochre."""
    table = study.membership
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


def _head(heads: list[str], ranges: bool, limited: bool) -> Markup:
    cells = [tag("th", "module", scope="col")]
    for head in heads:
        if head == "stability" and ranges:
            cells.append(tag("th", "holds at resolution", class_="n", scope="col"))
        cells.append(tag("th", head, class_=None if head == "stability" else "n", scope="col"))
    if limited:
        cells.append(tag("th", "remark", scope="col"))
    return tag("thead", tag("tr", cells))


def _row(position: int, record: dict[Any, Any], shown: list[str], ranges: bool, limited: bool) -> Markup:
    dot = tag("span", class_="dot", style=f"background:{module_colour(position, record['size'])}")
    cells = [tag("td", dot, str(record["module"]), _name(record["name"]), class_="m")]
    for column in shown:
        if column == "stability":
            cells += [_range(record)] if ranges else []
            cells.append(_bar_cell(record[column]))
        else:
            cells.append(tag("td", _figure(column, record[column]), class_="n"))
    if limited:
        remark = tag("span", LIMIT_REMARK, class_="doubt") if record["below_resolution_limit"] else ""
        cells.append(tag("td", remark))
    return tag("tr", cells)


def _figure(column: str, value: Any) -> str:
    if column in _WHOLE:
        return count(value)
    return chance(value) if column in _CHANCES else figure(value)


def _range(record: dict[Any, Any]) -> Markup:
    low, high = record["resolution_from"], record["resolution_to"]
    return tag("td", f"{low:.2g} to {high:.2g}" if is_known(low) else MISSING, class_="n")


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
