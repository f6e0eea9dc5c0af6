"""`membership.xlsx`: both tables as a workbook in which text is text.

A spreadsheet that opens a CSV may make dates of `SEPT2`, `MARCH1` or `1-Dec` (Ziemann, Eren & El-Osta 2016). In a
workbook each cell has a type: text cells are written as inline strings (ECMA-376, Office Open XML, part 1, 18.3.1.4 and
18.18.11) in the number format `@`, so that they stay text when they are edited, and are never a formula. The archive is
not compressed, so that the same tables give the same bytes everywhere.
"""

from __future__ import annotations

import io
import math
import re
import zipfile
from typing import TYPE_CHECKING, Any
from xml.sax.saxutils import escape, quoteattr

import numpy as np

from analysis.handover.bundle import Bundle
from analysis.study import MEMBERSHIP_COLUMNS, MODULE_COLUMNS

if TYPE_CHECKING:
    import pandas as pd

EPOCH = (1980, 1, 1, 0, 0, 0)
NOT_IN_XML = re.compile("[^\t\n\r\u0020-\ud7ff\ue000-\ufffd\U00010000-\U0010ffff]")
"""Characters that no XML 1.0 document may hold (W3C, Extensible Markup Language 1.0, production 2)."""
HEAD, TEXT = 1, 2
"""Positions of the cell formats in `_STYLES`."""
_DECLARATION = '<?xml version="1.0" encoding="UTF-8" standalone="yes"?>\n'
_MAIN = "http://schemas.openxmlformats.org/spreadsheetml/2006/main"
_OFFICE = "http://schemas.openxmlformats.org/officeDocument/2006/relationships"
_PACKAGE = "http://schemas.openxmlformats.org/package/2006"
_KINDS = "application/vnd.openxmlformats-officedocument.spreadsheetml"
_STYLES = (
    f'<styleSheet xmlns="{_MAIN}"><fonts count="2"><font><sz val="11"/><name val="Calibri"/></font>'
    '<font><b/><sz val="11"/><name val="Calibri"/></font></fonts>'
    '<fills count="2"><fill><patternFill patternType="none"/></fill><fill><patternFill patternType="gray125"/></fill>'
    '</fills><borders count="1"><border><left/><right/><top/><bottom/><diagonal/></border></borders>'
    '<cellStyleXfs count="1"><xf numFmtId="0" fontId="0" fillId="0" borderId="0"/></cellStyleXfs><cellXfs count="3">'
    '<xf numFmtId="0" fontId="0" fillId="0" borderId="0" xfId="0"/>'
    '<xf numFmtId="49" fontId="1" fillId="0" borderId="0" xfId="0" applyNumberFormat="1" applyFont="1"/>'
    '<xf numFmtId="49" fontId="0" fillId="0" borderId="0" xfId="0" applyNumberFormat="1"/></cellXfs>'
    '<cellStyles count="1"><cellStyle name="Normal" xfId="0" builtinId="0"/></cellStyles></styleSheet>'
)


def workbook_file(bundle: Bundle) -> dict[str, bytes]:
    """Return `membership.xlsx` with the sheets `membership` and `modules`."""
    sheets = {
        "membership": bundle.study.membership[list(MEMBERSHIP_COLUMNS)],
        "modules": bundle.study.module_table[list(MODULE_COLUMNS)],
    }
    return {"membership.xlsx": workbook_bytes(sheets)}


def workbook_bytes(sheets: dict[str, pd.DataFrame]) -> bytes:
    """Return a workbook of tables by the names of their sheets, without index; figures that are missing stay empty."""
    numbered = list(enumerate(sheets.items(), start=1))
    parts = {
        "[Content_Types].xml": _content_types(len(sheets)),
        "_rels/.rels": _relations({"rId1": ("officeDocument", "xl/workbook.xml")}),
        "xl/workbook.xml": _workbook(list(sheets)),
        "xl/_rels/workbook.xml.rels": _relations(
            {f"rId{place}": ("worksheet", f"worksheets/sheet{place}.xml") for place, _ in numbered}
            | {f"rId{len(sheets) + 1}": ("styles", "styles.xml")}
        ),
        "xl/styles.xml": _STYLES,
        **{f"xl/worksheets/sheet{place}.xml": _sheet(table) for place, (_, table) in numbered},
    }
    target = io.BytesIO()
    with zipfile.ZipFile(target, "w", zipfile.ZIP_STORED) as archive:
        for name, content in parts.items():
            entry = zipfile.ZipInfo(name, EPOCH)
            entry.create_system = 3
            entry.external_attr = 0o644 << 16
            archive.writestr(entry, (_DECLARATION + content).encode())
    return target.getvalue()


def _content_types(sheets: int) -> str:
    overrides = {"/xl/workbook.xml": "sheet.main", "/xl/styles.xml": "styles"}
    overrides |= {f"/xl/worksheets/sheet{place}.xml": "worksheet" for place in range(1, sheets + 1)}
    listed = "".join(
        f'<Override PartName="{part}" ContentType="{_KINDS}.{kind}+xml"/>' for part, kind in overrides.items()
    )
    return (
        f'<Types xmlns="{_PACKAGE}/content-types">'
        '<Default Extension="rels" ContentType="application/vnd.openxmlformats-package.relationships+xml"/>'
        f'<Default Extension="xml" ContentType="application/xml"/>{listed}</Types>'
    )


def _relations(targets: dict[str, tuple[str, str]]) -> str:
    listed = "".join(
        f'<Relationship Id="{key}" Type="{_OFFICE}/{kind}" Target="{target}"/>'
        for key, (kind, target) in targets.items()
    )
    return f'<Relationships xmlns="{_PACKAGE}/relationships">{listed}</Relationships>'


def _workbook(names: list[str]) -> str:
    listed = "".join(
        f'<sheet name={quoteattr(name)} sheetId="{place}" r:id="rId{place}"/>'
        for place, name in enumerate(names, start=1)
    )
    return f'<workbook xmlns="{_MAIN}" xmlns:r="{_OFFICE}"><sheets>{listed}</sheets></workbook>'


def _sheet(table: pd.DataFrame) -> str:
    head = "".join(_cell(str(name), HEAD) for name in table.columns)
    columns = [[_cell(value) for value in table[name].tolist()] for name in table.columns]
    rows = "".join(f"<row>{''.join(cells)}</row>" for cells in zip(*columns, strict=True))
    frozen = '<pane ySplit="1" topLeftCell="A2" activePane="bottomLeft" state="frozen"/>'
    return (
        f'<worksheet xmlns="{_MAIN}"><sheetViews><sheetView workbookViewId="0">{frozen}</sheetView></sheetViews>'
        f'<cols><col min="1" max="{len(columns)}" width="16" customWidth="1"/></cols>'
        f"<sheetData><row>{head}</row>{rows}</sheetData></worksheet>"
    )


def _cell(value: Any, style: int = TEXT) -> str:
    """Return one cell: text as text, numbers so that they read back exactly, nothing for what is missing."""
    if value is None:
        return "<c/>"
    if isinstance(value, str):
        text = escape(NOT_IN_XML.sub("\ufffd", value)).replace("\r", "&#13;")
        return f'<c s="{style}" t="inlineStr"><is><t xml:space="preserve">{text}</t></is></c>' if text else "<c/>"
    if isinstance(value, (bool, np.bool_)):
        return f'<c t="b"><v>{int(value)}</v></c>'
    if isinstance(value, (int, np.integer)):
        return f"<c><v>{int(value)}</v></c>"
    number = float(value)
    if math.isnan(number):
        return "<c/>"
    return f"<c><v>{number!r}</v></c>" if math.isfinite(number) else _cell(repr(number))
