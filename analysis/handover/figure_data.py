"""The numbers behind the figures of the report, as CSV, to draw them anew."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from analysis.handover.bundle import Bundle
from analysis.handover.csv_table import csv_bytes
from analysis.modules import NO_MODULE

if TYPE_CHECKING:
    import pandas as pd

TENTHS = 10


def figure_data_files(bundle: Bundle) -> dict[str, bytes]:
    """Return `figure_data/`: the map, the sizes of the modules and, where known, confidence and null networks."""
    import pandas as pd

    study = bundle.study
    sizes, modules = np.unique(study.modules.sizes, return_counts=True)
    tables = {
        "map": _map(bundle),
        "sizes": pd.DataFrame({"genes": sizes, "modules": modules}),
    }
    confidence = study.membership["confidence"].to_numpy(np.float64)
    known = confidence[~np.isnan(confidence)]
    if len(known):
        counts, edges = np.histogram(known, bins=np.linspace(0, 1, TENTHS + 1))
        tables["confidence"] = pd.DataFrame({"from": edges[:-1], "to": edges[1:], "memberships": counts})
    if study.nulls is not None:
        draws = study.nulls.draws
        tables["null_networks"] = pd.DataFrame({"null_network": np.arange(1, len(draws) + 1), "modularity": draws})
    return {f"figure_data/{name}.csv": csv_bytes(table) for name, table in tables.items()}


def _map(bundle: Bundle) -> pd.DataFrame:
    import pandas as pd

    network, modules = bundle.study.network, bundle.study.modules
    numbers = np.array([*modules.numbers, None], object)
    labels = np.where(modules.labels == NO_MODULE, len(modules), modules.labels)
    return pd.DataFrame(
        {
            "gene": np.array(network.names, object),
            "x": bundle.positions[:, 0],
            "y": bundle.positions[:, 1],
            "module": numbers[labels],
            "degree": network.degree,
        }
    )
