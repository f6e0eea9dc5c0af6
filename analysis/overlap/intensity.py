"""Clique percolation with weights: only k-cliques that are strong enough percolate."""

from __future__ import annotations

import numpy as np

from analysis.errors import LimitError, SettingError
from analysis.network import IntArray, Network
from analysis.overlap.cliques import Cliques
from analysis.overlap.percolation import join_cliques

CLIQUE_LIMIT = 2_000_000


def intense_communities(network: Network, k: int, intensity: float, limit: int = CLIQUE_LIMIT) -> list[IntArray]:
    """Return the communities of k-cliques whose intensity exceeds a threshold (Farkas, Ábel, Palla & Vicsek 2007).

    The intensity of a k-clique is the geometric mean of the weights of its ``k (k − 1) / 2`` edges (New Journal of
    Physics 9:180, eq. 1, after Onnela et al. 2005). A clique may hold edges below the threshold, which a cut by weight
    would have taken out. At threshold 0 these are the communities without weights.

    Raises
    ------
    LimitError
        Where there are too many k-cliques; never a cut-off answer.
    """
    if k < 3:
        raise SettingError(f"k is {k}; the intensity of cliques needs k of at least 3")
    found = network.igraph.cliques(min=k, max=k, max_results=limit + 1)
    if len(found) > limit:
        raise LimitError(
            f"the network has more than {limit:,} groups of {k} genes that are all joined; "
            "raise k, or leave out weak edges with --min-weight"
        )
    if not found:
        return []
    groups = np.array(found, np.int64)
    key = network.sources.astype(np.int64) * network.node_count + network.targets
    first, second = np.triu_indices(k, 1)
    low = np.minimum(groups[:, first], groups[:, second])
    high = np.maximum(groups[:, first], groups[:, second])
    logs = np.log(network.edge_weights)[np.searchsorted(key, low * network.node_count + high)]
    strong = groups[np.exp(logs.mean(axis=1)) > intensity]
    return join_cliques(Cliques.from_groups([tuple(group) for group in strong.tolist()], network.node_count), k)
