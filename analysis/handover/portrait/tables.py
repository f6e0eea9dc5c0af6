"""The tables of a portrait: figures beside null networks, hubs, laws, removals."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np

from analysis.network import Network
from analysis.portrait.hubs import Hubs
from analysis.portrait.summary import DEGREES, FIGURES, UNIFORM, Summary
from analysis.portrait.tolerance import Tolerance

if TYPE_CHECKING:
    import pandas as pd

WORDS = {
    "nodes": "genes",
    "edges": "interactions",
    "density": "density",
    "components": "components",
    "giant_share": "share of genes in the largest",
    "mean_degree": "mean degree",
    "median_degree": "median degree",
    "degree_sd": "standard deviation of degrees",
    "highest_degree": "highest degree",
    "mean_strength": "mean strength",
    "highest_strength": "highest strength",
    "assortativity": "assortativity of degrees",
    "core": "innermost k-core",
    "transitivity": "transitivity",
    "clustering": "mean clustering",
    "mean_path": "mean shortest path",
}

REMOVAL_HEAD = {
    "critical_share": "falls apart at",
    "robustness": "R",
    "giant_without_5_percent": "largest component without 5 %",
    "giant_without_20_percent": "without 20 %",
}


def figure_rows(summary: Summary) -> list[dict[str, Any]]:
    """Return one row a figure: its name, value, and mean, spread and z over both kinds of null networks."""
    rows = []
    for name in FIGURES:
        if "strength" in name and not summary.weighted:
            continue
        value = getattr(summary.figures, name)
        row: dict[str, Any] = {"figure": name, "value": value}
        for kind, words in ((DEGREES, "same_degrees"), (UNIFORM, "random")):
            null = summary.null(kind, name)
            row |= {
                f"{words}_mean": np.nan if null is None else null.mean,
                f"{words}_sd": np.nan if null is None else null.sd,
                f"{words}_z": np.nan if null is None else null.z(value),
            }
        rows.append(row)
    for kind, words in ((UNIFORM, "random"), (DEGREES, "same_degrees")):
        rows.append({"figure": f"small_world_against_{words}", "value": summary.small_world(kind)})
    return rows


def figure_table(summary: Summary) -> pd.DataFrame:
    """Return `figure_rows` as a table."""
    import pandas as pd

    return pd.DataFrame(figure_rows(summary))


def hub_table(network: Network, hubs: Hubs) -> pd.DataFrame:
    """Return one row a hub, the best connected first."""
    import pandas as pd

    table = pd.DataFrame(
        {
            "gene": [network.names[node] for node in hubs.nodes.tolist()],
            "degree": hubs.degree,
            "core": hubs.core,
            "clustering": hubs.clustering,
            "genes_lost_with_it": hubs.lost,
            "giant_without_it_and_above": hubs.giant_without,
        }
    )
    if hubs.studied is not None:
        table["publications"] = hubs.studied
    return table


def removal_rows(tolerance: Tolerance) -> list[dict[str, Any]]:
    """Return one row an order of removal: critical share, R, orders drawn."""
    return [
        {
            "removal": curve.strategy,
            "critical_share": curve.critical,
            "robustness": curve.robustness,
            "giant_without_5_percent": curve.at(0.05),
            "giant_without_20_percent": curve.at(0.2),
            "draws": curve.draws,
        }
        for curve in tolerance.curves
    ]
