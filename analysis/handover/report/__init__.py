"""`report.html`: one file that can be read anywhere, without a network, in ten years."""

from __future__ import annotations

from analysis.handover.bundle import Bundle


def report_file(bundle: Bundle) -> dict[str, bytes]:
    """Return `report.html`, with styles and figures inside; it asks no other host and runs no script."""
    from analysis.handover.report.page import report_page
    from analysis.layout import layout

    return {"report.html": report_page(bundle, layout(bundle.study.network)).encode()}
