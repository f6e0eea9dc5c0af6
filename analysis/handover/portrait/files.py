"""What `corymb portrait` writes: `portrait.json`, tables, figures with their data, a page."""

from __future__ import annotations

from dataclasses import dataclass, fields, is_dataclass
from typing import Any

import numpy as np

from analysis.handover.bundle import Source
from analysis.handover.csv_table import csv_bytes
from analysis.handover.portrait.figures import portrait_figures
from analysis.handover.portrait.page import portrait_page
from analysis.handover.portrait.tables import figure_rows, figure_table, hub_table, removal_rows
from analysis.handover.summary import describe_network, json_bytes
from analysis.intake import IntakeReport
from analysis.network import Network
from analysis.portrait import Portrait
from analysis.portrait.hubs import CAUTION, Hubs
from analysis.version import versions


@dataclass(frozen=True, eq=False)
class PortraitBundle:
    """What a portrait hands over.

    Attributes
    ----------
    network : Network
    portrait : Portrait
        Complete.
    report : IntakeReport or None
    source : Source or None
        The network's file.
    """

    network: Network
    portrait: Portrait
    report: IntakeReport | None = None
    source: Source | None = None


def portrait_files(bundle: PortraitBundle) -> dict[str, bytes]:
    """Return the content of every file by its relative path."""
    network, portrait = bundle.network, bundle.portrait
    figures = portrait_figures(network, portrait)
    files = {
        "portrait.json": json_bytes(portrait_content(bundle)),
        "report.html": portrait_page(network, portrait, figures).encode(),
    }
    if portrait.summary is not None:
        files["summary.csv"] = csv_bytes(figure_table(portrait.summary))
    if portrait.hubs is not None:
        files["hubs.csv"] = csv_bytes(hub_table(network, portrait.hubs))
    for figure in figures:
        files[f"figures/{figure.key}.svg"] = figure.picture()
        files[f"figure_data/{figure.key}.csv"] = figure.data()
    return files


def portrait_content(bundle: PortraitBundle) -> dict[str, Any]:
    """Return a portrait as plain values; what was not computed is None."""
    network, portrait = bundle.network, bundle.portrait
    content: dict[str, Any] = {
        "network": describe_network(network, bundle.report, bundle.source),
        "settings": plain(portrait.settings),
        "sentences": portrait.sentences(),
        "caution": CAUTION,
        "summary": None if portrait.summary is None else figure_rows(portrait.summary),
    }
    for section in ("degrees", "hierarchy", "distances"):
        content[section] = plain(getattr(portrait, section))
    if portrait.tolerance is not None:
        content["tolerance"] = {
            "kappa": portrait.tolerance.kappa,
            "random_critical_share_expected": portrait.tolerance.random_critical,
            "left_out": portrait.tolerance.left_out or None,
            "removals": removal_rows(portrait.tolerance),
        }
    content["hubs"] = None if portrait.hubs is None else _hubs(network, portrait.hubs)
    return {**content, "versions": versions()}


def plain(value: Any) -> Any:
    """Return frozen results as dictionaries and lists."""
    if is_dataclass(value):
        return {part.name: plain(getattr(value, part.name)) for part in fields(value)}
    if isinstance(value, np.ndarray):
        return value.tolist()
    return [plain(each) for each in value] if isinstance(value, tuple) else value


def _hubs(network: Network, hubs: Hubs) -> dict[str, Any]:
    table = hub_table(network, hubs)
    return {
        "least_degree": hubs.cut,
        "genes": [dict(zip(table.columns, row, strict=True)) for row in table.itertuples(index=False)],
        "publications": None
        if hubs.studied is None
        else {"genes": hubs.counted, "rank_correlation": hubs.correlation, "p_value": hubs.p_value},
    }
