"""Which partition is best at which resolution: the upper envelope of straight lines."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from analysis.methods.leiden import weight_unit
from analysis.network import FloatArray, IntArray, Network


@dataclass(frozen=True, eq=False)
class Domain:
    """A partition and the range of resolution over which it is the best of all that were found.

    Attributes
    ----------
    resolution_from, resolution_to : float
        Ends of the range, within the sweep.
    labels : int32 array, shape (nodes,)
        From the largest module.
    modules : int
        Number of modules, single nodes included.
    """

    resolution_from: float
    resolution_to: float
    labels: IntArray
    modules: int


def quality_lines(network: Network, table: NDArray[np.int32], quality: str) -> FloatArray:
    """Return `A` and `B` of partitions, shape (partitions, 2); their quality at resolution γ is ``A − γB``.

    Modularity: ``A = Σ_c W_c / W``, ``B = Σ_c (K_c / 2W)²``. Constant Potts model: ``A = Σ_c W_c`` in units of the
    weights' 95 % quantile, ``B = Σ_c n_c (n_c − 1) / 2``. See `analysis.methods.leiden.Leiden`.

    Parameters
    ----------
    table : int32 array, shape (partitions, nodes)
        Non-negative labels.
    """
    total = float(network.edge_weights.sum())
    unit = weight_unit(network) if quality == "cpm" and total else max(total, 1.0)
    lines = np.zeros((len(table), 2))
    for row, labels in enumerate(table):
        inside = labels[network.sources] == labels[network.targets]
        lines[row, 0] = network.edge_weights[inside].sum() / unit
        if quality == "cpm":
            sizes = np.bincount(labels).astype(np.float64)
            lines[row, 1] = (sizes * (sizes - 1) / 2).sum()
        elif total:
            lines[row, 1] = ((np.bincount(labels, network.strength) / (2 * total)) ** 2).sum()
    return lines


def upper_envelope(
    inside: FloatArray, penalty: FloatArray, low: float, high: float
) -> tuple[NDArray[np.int64], FloatArray]:
    """Find which of the lines ``A − γB`` is highest where, for γ within `[low, high]` (CHAMP: Weir et al. 2017).

    Parameters
    ----------
    inside, penalty : float64 arrays of one shape
        `A` and `B` of each partition; at least one.

    Returns
    -------
    winners : int64 array
        Positions of the lines on the envelope, from the coarsest to the finest; of equal lines the first.
    ends : float64 array, one longer
        Line `winners[i]` is best from ``ends[i]`` to ``ends[i + 1]``.
    """
    winners: list[int] = []
    starts: list[float] = []
    for line in np.lexsort((np.arange(len(inside)), -inside, -penalty)).tolist():
        start = low
        while winners:
            last = winners[-1]
            if penalty[last] == penalty[line]:  # parallel, and not above the one that came first
                start = np.inf
                break
            start = float((inside[last] - inside[line]) / (penalty[last] - penalty[line]))
            if start > starts[-1]:
                break
            winners.pop()
            starts.pop()
            start = low
        if start < high or not winners:
            winners.append(line)
            starts.append(max(start, low))
    return np.array(winners), np.array([*starts, high])
