"""`report.html`: one file that can be read anywhere, without a network, in ten years; and its map and sources."""

from __future__ import annotations

from analysis.handover.bundle import Bundle


def report_file(bundle: Bundle) -> dict[str, bytes]:
    """Return `report.html`, with styles and figures inside; it asks no other host and runs no script."""
    from analysis.handover.report.page import report_page

    return {"report.html": report_page(bundle, bundle.positions).encode()}


def references_file(bundle: Bundle) -> dict[str, bytes]:
    """Return `references.bib`: what the methods paragraph cites, and corymb itself, as BibTeX in UTF-8."""
    from analysis.handover.report.bibliography import bibliography
    from analysis.handover.report.citations import cited_keys
    from analysis.handover.report.methods_text import methods_sentences

    return {"references.bib": bibliography(cited_keys(methods_sentences(bundle))).encode()}


def map_svg_file(bundle: Bundle) -> dict[str, bytes]:
    """Return `map.svg`."""
    from analysis.handover.report import map_files

    return map_files.map_svg_file(bundle)


def map_pdf_file(bundle: Bundle) -> dict[str, bytes]:
    """Return `map.pdf`."""
    from analysis.handover.report import map_files

    return map_files.map_pdf_file(bundle)
