"""Leaves out the weak edges of a network."""

from __future__ import annotations

import math
from dataclasses import replace

from analysis.errors import SettingError
from analysis.network import Network


def cut_by_weight(network: Network, lowest: float) -> Network:
    """Return the network without edges whose weight is below `lowest`; all genes stay.

    The provenance tells of the cut: `min_weight`, `edges_left_out`.

    Raises
    ------
    SettingError
        Where the network has no weights, or no edge would be left.
    """
    if not math.isfinite(lowest):
        raise SettingError(f"--min-weight is {lowest}; give a number")
    if network.weights is None:
        raise SettingError(
            "--min-weight needs weights, and none were read; name their column with --weight, or leave --min-weight out"
        )
    kept = network.weights >= lowest
    if not kept.any():
        highest = float(network.weights.max(initial=0.0))
        raise SettingError(f"--min-weight is {lowest:g} and the highest weight is {highest:g}: no edge would be left")
    provenance = {
        **network.provenance,
        "min_weight": repr(float(lowest)),
        "edges_left_out": str(int((~kept).sum())),
    }
    return replace(network.with_edges(kept), provenance=provenance)
