"""Intake: what was read, what was merged or dropped, and why."""

from __future__ import annotations

from typing import Any

from dash import html

from app.parts import button, fault, heading, notice, sentences, table
from app.view import Pane, View

KEY = "intake"
TITLE = "Intake"
REJECTED_SHOWN = 50
RECENT_SHOWN = 12


def state(view: View) -> str:
    """Return how far the station is."""
    return "done" if view.fingerprint else "empty"


def render(view: View) -> Pane:
    """Return the drop area, the report of the network at hand, and networks opened before."""
    body: list[Any] = [_drop_area()]
    if view.fault:
        body.append(fault(view.fault))
    if view.fingerprint:
        body += _report(view.desk.workspace.report(view.fingerprint))
    body += _recent(view)
    return Pane(TITLE, body, [])


def _drop_area() -> html.Div:
    return html.Div(
        [
            html.Strong("Drop a file of interactions here"),
            html.Span("or press to choose one", className="hint"),
            html.Span(
                "Two columns of genes or proteins, with or without a score; tab, comma, semicolon or blanks; may be "
                "gzipped. It is read on this machine and goes nowhere else.",
                className="hint",
            ),
        ],
        id="drop",
        className="drop",
        role="button",
        tabIndex=0,
    )


def _report(report: dict[str, Any]) -> list[Any]:
    parts: list[Any] = [heading("What was read"), *sentences(report.get("sentences", []))]
    counts = [
        ["rows read", report["rows"]],
        ["interactions kept", report["edges"]],
        ["pairs that stood twice, merged", report["duplicates_merged"]],
        ["interactions of a gene with itself", report["self_loops"]],
        ["rows left out", len(report["rejected"])],
    ]
    parts.append(table(["", "count"], [[text, f"{value:,}"] for text, value in counts], numeric=[1], name="Rows"))
    if report["rejected"]:
        rows = [[f"{each['line']:,}", each["reason"]] for each in report["rejected"][:REJECTED_SHOWN]]
        parts += [heading("Rows left out"), table(["line", "reason"], rows, name="Rows left out")]
        more = len(report["rejected"]) - REJECTED_SHOWN
        if more > 0:
            parts.append(notice(f"{more:,} more; `corymb inspect FILE --json` lists all of them."))
    return parts


def _recent(view: View) -> list[Any]:
    entries = view.desk.workspace.networks()
    if not entries:
        return []
    rows = [
        [
            button(entry.label, {"type": "open-network", "fingerprint": entry.fingerprint}, kind="link"),
            f"{entry.nodes:,}",
            f"{entry.edges:,}",
            "at hand" if entry.fingerprint == view.fingerprint else "",
        ]
        for entry in entries[:RECENT_SHOWN]
    ]
    return [
        heading("Networks in this workspace"),
        table(["network", "genes", "interactions", ""], rows, numeric=[1, 2], name="Networks in this workspace"),
    ]
