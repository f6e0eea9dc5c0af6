"""The sortable, filterable tables of modules and genes."""

from __future__ import annotations

from collections.abc import Hashable, Sequence
from typing import Any

import dash_ag_grid as dag
import numpy as np

from analysis.meaning import Meaning, enrichment_table, title_of
from analysis.study import Study

ROW_HEIGHT, HEADER_HEIGHT, SCROLL_BAR, HIGHEST = 30, 34, 20, 300
THEME = (
    "themeQuartz.withParams({fontFamily: 'inherit', fontSize: 13, accentColor: 'var(--leaf)', "
    "backgroundColor: 'var(--panel)', foregroundColor: 'var(--ink)', headerBackgroundColor: 'var(--panel)', "
    "headerTextColor: 'var(--ink-soft)', borderColor: 'var(--line)', spacing: 5, wrapperBorderRadius: 6})"
)


EXPONENT = "params.value == null ? '–' : params.value.toExponential(1)"
PAIRS_SHOWN = 5_000


def module_grid(study: Study, hues: Sequence[int]) -> Any:
    """Return the table of modules; a click opens the passport."""
    table = study.module_table
    figures = ["internal_density", "conductance", "stability", "evidence", "support", "q_value"]
    rows = table[["module", "name", "size", *figures]].replace({np.nan: None}).to_dict("records")
    for position, row in enumerate(rows):
        row["hue"] = int(hues[position]) if position < len(hues) else -1
        row["id"] = str(position)
    columns = [
        _column("module", "module", 96, cellRenderer="ModuleCell", comparator={"function": "corymbByNumber"}),
        _column("name", "name", 98, filter="agTextColumnFilter"),
        _number("size", "size", 72, 0),
        _number("stability", "stability", 94),
        _number("support", "support", 92),
        _number("internal_density", "density", 86),
        _number("conductance", "conductance", 112),
        _number("evidence", "evidence", 92),
        _number("q_value", "q-value", 86, 3),
    ]
    return _grid("module-grid", columns, rows, "params.data.id")


def gene_grid(study: Study) -> Any:
    """Return the membership table; a click opens the passport."""
    names = ["gene", "module", "confidence", "second_module", "degree", "role"]
    rows = study.membership[names].replace({np.nan: None}).to_dict("records")
    for row in rows:
        row["id"] = f"{row['gene']}\t{row['module']}"
    columns = [
        _column("gene", "gene", 92, filter="agTextColumnFilter"),
        _column("module", "module", 90, filter="agTextColumnFilter", comparator={"function": "corymbByNumber"}),
        _number("confidence", "stays here", 106),
        _column("second_module", "second home", 124),
        _number("degree", "degree", 88, 0),
        _column("role", "role", 140, filter="agTextColumnFilter"),
    ]
    return _grid("gene-grid", columns, rows, "params.data.id")


def enrichment_grid(meaning: Meaning) -> Any:
    """Return the enriched pairs of a module and a gene set, strongest first."""
    enrichment = meaning.enrichment
    called = np.concatenate([enrichment.enriched(module) for module in range(len(enrichment.modules))])
    pairs = called[np.argsort(enrichment.p_value[called], kind="stable")][:PAIRS_SHOWN].astype(np.int64)
    table = enrichment_table(enrichment, pairs)
    table["gene_set"] = [title_of(enrichment.sets, gene_set) for gene_set in enrichment.gene_set[pairs].tolist()]
    rows = table.to_dict("records")
    for position, row in enumerate(rows):
        row["id"] = str(position)
    columns = [
        _column("module", "module", 90, filter="agTextColumnFilter", comparator={"function": "corymbByNumber"}),
        _column("gene_set", "gene set", 190, filter="agTextColumnFilter"),
        _number("overlap", "overlap", 86, 0),
        _number("set_size", "of set", 78, 0),
        _number("module_size", "of module", 100, 0),
        _number("fold", "fold", 72, 1),
        _column("q_value", "q-value", 90, type="rightAligned", valueFormatter={"function": EXPONENT}),
        _column("genes", "genes", 260, filter="agTextColumnFilter", tooltipField="genes"),
    ]
    return _grid("enrichment-grid", columns, rows, "params.data.id")


def height(rows: int) -> int:
    """Return how high a table of so many rows is drawn, in pixels: a few need no empty room below them."""
    return min(HIGHEST, HEADER_HEIGHT + ROW_HEIGHT * max(rows, 1) + SCROLL_BAR)


def _grid(grid_id: str, columns: list[dict[str, Any]], rows: list[dict[Hashable, Any]], row_id: str) -> Any:
    return dag.AgGrid(
        id=grid_id,
        columnDefs=columns,
        rowData=rows,
        getRowId=row_id,
        defaultColDef={"sortable": True, "resizable": True, "filter": "agNumberColumnFilter", "suppressMovable": True},
        dashGridOptions={
            "rowHeight": ROW_HEIGHT,
            "headerHeight": HEADER_HEIGHT,
            "suppressCellFocus": False,
            "animateRows": False,
            "rowSelection": {"mode": "singleRow", "checkboxes": False, "enableClickSelection": True},
            "theme": {"function": THEME},
            # Tab leaves the table; inside it the arrow keys move. Enter opens what a click opens.
            "tabToNextHeader": {"function": "corymbLeave(params)"},
            "tabToNextCell": {"function": "corymbLeave(params)"},
        },
        eventListeners={"cellKeyDown": ["corymbOpen(params, setGridProps)"]},
        persistence=True,
        persistence_type="session",
        persisted_props=["filterModel", "columnState"],
        style={"height": f"{height(len(rows))}px", "width": "100%"},
    )


def _column(key: str, title: str, width: int, **extra: Any) -> dict[str, Any]:
    return {"field": key, "headerName": title, "width": width, **extra}


def _number(key: str, title: str, width: int, digits: int = 2) -> dict[str, Any]:
    text = f"params.value == null ? '–' : params.value.toFixed({digits})"
    return _column(key, title, width, type="rightAligned", valueFormatter={"function": text})
