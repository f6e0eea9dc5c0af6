"""The map of modules: how many edges join each pair, and how many chance would."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from analysis.modules import Modules
from analysis.network import FloatArray, IntArray, Network, locked


@dataclass(frozen=True, eq=False)
class ModuleLinks:
    """Links between modules, one row a pair that an edge joins, strongest beyond chance first.

    Attributes
    ----------
    first, second : int32 arrays, shape (links,)
        Positions of the modules, `first < second`.
    edges : float64 array
        Edges between the two; an edge at a gene of several modules is shared out over them.
    expected : float64 array
        Mean number under the configuration model.
    z : float64 array
        Distance from it in standard deviations of that model; NaN where it has none.
    """

    first: IntArray
    second: IntArray
    edges: FloatArray
    expected: FloatArray
    z: FloatArray

    def beyond_chance(self) -> NDArray[np.bool_]:
        """Which links have more edges than chance would give."""
        found: NDArray[np.bool_] = self.edges > self.expected
        return found


def link_modules(network: Network, modules: Modules) -> ModuleLinks:
    """Count edges between modules and compare with the configuration model.

    The model joins the 2m ends of edges at random. With `a` and `b` ends in two modules, the number of edges between
    them has mean ``ab / (2m − 1)`` (Newman 2010, Networks, section 13.2) and second factorial moment
    ``a (a − 1) b (b − 1) / ((2m − 1)(2m − 3))``, of which the variance follows. Edges count one each.
    """
    from scipy.sparse import triu

    ends = 2.0 * network.edge_count
    shares = _shares(modules)
    adjacency = network.without_weights().adjacency
    table = triu(shares.T @ (adjacency @ shares), k=1).tocoo()
    degree = np.asarray(shares.T @ network.degree.astype(np.float64))
    a, b = degree[table.row], degree[table.col]
    expected = a * b / max(ends - 1, 1)
    pairs = a * np.maximum(a - 1, 0) * b * np.maximum(b - 1, 0) / (max(ends - 1, 1) * max(ends - 3, 1))
    variance = expected + pairs - expected**2
    spread = np.sqrt(np.maximum(variance, 0))
    z = np.divide(table.data - expected, spread, out=np.full(len(a), np.nan), where=spread > 1e-9)
    order = np.lexsort((table.col, table.row, -np.nan_to_num(z, nan=-np.inf)))
    return ModuleLinks(
        locked(table.row[order].astype(np.int32)),
        locked(table.col[order].astype(np.int32)),
        locked(table.data[order].astype(np.float64)),
        locked(expected[order]),
        locked(z[order]),
    )


def bridge_genes(network: Network, modules: Modules, first: int, second: int, count: int = 5) -> list[tuple[int, int]]:
    """Return the genes with most edges across a pair of modules, and how many, most first."""
    inside = [np.zeros(network.node_count, bool), np.zeros(network.node_count, bool)]
    inside[0][modules.members[first]] = True
    inside[1][modules.members[second]] = True
    across = np.zeros(network.node_count, np.int64)
    for one, other in (inside, inside[::-1]):
        crossing = one[network.sources] & other[network.targets]
        across += np.bincount(network.sources[crossing], minlength=network.node_count)
        across += np.bincount(network.targets[crossing], minlength=network.node_count)
    order = np.argsort(-across, kind="stable")[:count]
    return [(int(node), int(across[node])) for node in order if across[node]]


def _shares(modules: Modules) -> Any:
    """Return the sparse matrix of each node's share in each module, shape (nodes, modules)."""
    from scipy.sparse import csr_array

    nodes, owners = modules.memberships
    values = 1.0 / np.maximum(modules.homes[nodes], 1)
    return csr_array((values, (nodes, owners)), shape=(modules.node_count, len(modules)))
