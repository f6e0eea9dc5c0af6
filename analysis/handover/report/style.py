"""The style sheet of the report; nothing is fetched, fonts are the reader's own."""

from __future__ import annotations

STYLE = """
:root { --paper: #fbfaf6; --panel: #fff; --line: #dcdcd2; --ink: #1d2a2f; --soft: #5a6a70; --leaf: #2d6a4f;
  --pale-leaf: #e3efe7; --ochre: #9a5b00; --pale-ochre: #fbf0dc;
  color-scheme: light; }
* { box-sizing: border-box; }
html { -webkit-text-size-adjust: 100%; }
body { margin: 0; background: var(--paper); color: var(--ink); font: 15px/1.55 "Atkinson Hyperlegible", "Segoe UI",
  "Helvetica Neue", "Noto Sans", "DejaVu Sans", Arial, sans-serif; overflow-wrap: anywhere; }
main, header.head, footer { max-width: 1000px; margin: 0 auto; padding: 0 28px; }
header.head { padding-top: 26px; }
.brand { display: flex; align-items: center; gap: 9px; font-weight: 700; font-size: 16px; }
.brand svg { width: 26px; height: 26px; }
h1 { font-size: 30px; line-height: 1.2; margin: 26px 0 4px; letter-spacing: -.01em; text-wrap: balance; }
h2 { font-size: 21px; line-height: 1.25; margin: 46px 0 8px; }
h3 { font-size: 15px; margin: 0 0 2px; }
p { margin: 0 0 10px; max-width: 84ch; text-wrap: pretty; }
.under { color: var(--soft); margin: 0; }
.verdict { font-size: 19px; line-height: 1.5; margin: 22px 0 8px; max-width: 72ch; }
.more { margin: 0 0 18px; padding: 0; list-style: none; max-width: 84ch; }
.more li { margin: 0 0 5px; padding-left: 17px; position: relative; }
.more li::before { content: ""; position: absolute; left: 2px; top: .62em; width: 6px; height: 6px; border-radius: 50%;
  background: var(--leaf); }
.facts { display: grid; grid-template-columns: repeat(auto-fit, minmax(128px, 1fr)); margin: 22px 0 0; padding: 0;
  border: 1px solid var(--line); border-radius: 7px; background: var(--panel); overflow: hidden; }
.facts div { padding: 12px 16px 11px; box-shadow: -1px -1px 0 var(--line); }
.facts div { display: flex; flex-direction: column; justify-content: space-between; }
.facts dt { color: var(--soft); font-size: 13px; line-height: 1.3; }
.facts dd { margin: 0; font-size: 22px; line-height: 1.25; font-weight: 700; font-variant-numeric: tabular-nums; }
figure { margin: 14px 0 0; }
figure.panel { background: var(--panel); border: 1px solid var(--line); border-radius: 7px; padding: 16px 18px 14px; }
figure.map { background: var(--paper); border: 1px solid var(--line); border-radius: 7px; overflow: hidden; }
figure.map svg { display: block; width: 100%; height: auto; max-height: 720px; }
figure.map figcaption { background: var(--panel); border-top: 1px solid var(--line); padding: 11px 18px 12px; }
figcaption, .note { color: var(--soft); font-size: 13px; line-height: 1.5; }
figcaption { margin-top: 6px; }
.row { display: grid; grid-template-columns: repeat(auto-fit, minmax(290px, 1fr)); gap: 16px; }
.row figure svg { display: block; width: 100%; height: auto; margin: 6px 0 2px; }
svg text { font-family: inherit; fill: var(--soft); font-size: 12px; }
.caution { background: var(--pale-ochre); color: #6f4200; border-radius: 7px; padding: 14px 18px 12px;
  margin: 14px 0 0; }
.caution ul { margin: 0; padding-left: 18px; max-width: 76ch; } .caution li { margin: 0 0 5px; }
.wide { overflow-x: auto; background: var(--panel); border: 1px solid var(--line); border-radius: 7px;
  margin: 12px 0 0; }
table { border-collapse: collapse; width: 100%; font-size: 14px; font-variant-numeric: tabular-nums; }
th { overflow-wrap: normal; text-align: left; font-weight: 400; color: var(--soft); font-size: 13px; line-height: 1.25;
  vertical-align: bottom; }
th, td { padding: 4.5px 7px; border-bottom: 1px solid #ecece4; }
th:first-child, td:first-child { padding-left: 18px; } th:last-child, td:last-child { padding-right: 18px; }
tr:last-child td { border-bottom: 0; }
th.n, td.n { text-align: right; } td.n { white-space: nowrap; }
.mark { position: absolute; padding-left: 1px; }
td.m { white-space: nowrap; font-weight: 700; } td.m span.name { font-weight: 400; white-space: normal; }
.dot { display: inline-block; width: 11px; height: 11px; border-radius: 3px; margin-right: 8px; vertical-align: -1px;
  print-color-adjust: exact; -webkit-print-color-adjust: exact; }
td.bar { white-space: nowrap; } td.bar svg { width: 56px; height: 8px; margin-right: 8px; vertical-align: 1px; }
.doubt { color: var(--ochre); }
details { margin: 12px 0 0; }
summary { cursor: pointer; color: var(--leaf); font-weight: 700; border-radius: 6px; }
summary:focus-visible { outline: 2px solid var(--leaf); outline-offset: 3px; }
details.module { border-bottom: 1px solid #ecece4; margin: 0; padding: 6px 0; }
details.module summary { font-weight: 400; color: var(--ink); }
.genes { margin: 6px 0 6px 20px; max-width: none; line-height: 1.75; }
.genes span { margin-right: .85em; display: inline-block; max-width: 100%; }
code { font-family: ui-monospace, "SF Mono", Menlo, Consolas, "DejaVu Sans Mono", monospace; font-size: .92em; }
pre { background: var(--pale-leaf); border-radius: 7px; padding: 11px 16px; margin: 10px 0; overflow-x: auto;
  white-space: pre-wrap; }
ol.sources { padding-left: 24px; font-size: 13px; line-height: 1.5; max-width: 96ch; }
ol.sources li { margin: 0 0 4px; }
.pairs { display: grid; grid-template-columns: repeat(auto-fit, minmax(300px, 1fr)); gap: 16px; align-items: start; }
.pairs td:last-child { text-align: right; }
footer { color: var(--soft); font-size: 13px; padding-top: 40px; padding-bottom: 48px; }
@media print {
  @page { margin: 15mm 13mm; }
  body { background: #fff; font-size: 10pt; }
  main, header.head, footer { max-width: none; padding: 0; }
  h2 { break-after: avoid; margin-top: 24px; } figure, .facts, .caution, tr { break-inside: avoid; }
  .wide { overflow: visible; } th, td { padding: 3px 5px; }
  details::details-content { content-visibility: visible; block-size: auto; }
  svg, .caution, .facts, pre { print-color-adjust: exact; -webkit-print-color-adjust: exact; }
}
"""
