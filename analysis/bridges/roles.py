"""Genes between modules: within-module degree, participation, and the seven roles."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from analysis.agreement import membership_matrix
from analysis.modules import Modules
from analysis.network import FloatArray, Network

ROLES = (
    "ultra-peripheral",
    "peripheral",
    "non-hub connector",
    "non-hub kinless",
    "provincial hub",
    "connector hub",
    "kinless hub",
)
HUB_Z = 2.5
ROUNDING = 1e-9


@dataclass(frozen=True)
class RoleTable:
    """Cartography of the nodes; one row per (node, module) pair, in the order of `Modules.memberships`.

    Attributes
    ----------
    within_module_z : float64 array, shape (pairs,)
        ``z = (κ − mean κ) / sd κ`` over the module's members, `κ` the node's edges inside the module, population
        standard deviation (Guimerà & Amaral 2005, Nature 433:895, eq. 1); 0 where all members are alike.
    participation : float64 array, shape (pairs,)
        ``P = 1 − Σ_s (κ_s / k)²`` (eq. 2). A neighbour in several modules counts in each by its share; one in no module
        counts as a module of its own. 0 for a node without edges.
    role : int8 array, shape (pairs,)
        Position in `ROLES`, by the paper's thresholds.
    """

    within_module_z: FloatArray
    participation: FloatArray
    role: NDArray[np.int8]


def assign_roles(network: Network, modules: Modules) -> RoleTable:
    """Return within-module degree z, participation and role of every member of every module; edges count one each."""
    nodes, _ = modules.memberships
    adjacency = network.without_weights().adjacency
    z = _within_module_z(adjacency, modules)
    participation = _participation(adjacency, modules, network.degree)[nodes]
    return RoleTable(z, participation, classify(z, participation))


def classify(within_module_z: NDArray[Any], participation: NDArray[Any]) -> NDArray[np.int8]:
    """Return the role of each node (Guimerà & Amaral 2005); hubs have z ≥ 2.5, the limits of P go to the lower role."""
    plain = np.searchsorted([0.05 + ROUNDING, 0.62 + ROUNDING, 0.80 + ROUNDING], participation)
    hub = 4 + np.searchsorted([0.30 + ROUNDING, 0.75 + ROUNDING], participation)
    return np.where(within_module_z >= HUB_Z - ROUNDING, hub, plain).astype(np.int8)


def _within_module_z(adjacency: Any, modules: Modules) -> FloatArray:
    nodes, owners = modules.memberships
    count = len(modules)
    if count == 0:
        return np.zeros(0)
    inside = np.asarray((adjacency @ membership_matrix(modules))[nodes, owners], np.float64).ravel()
    size = np.maximum(modules.sizes, 1)
    mean = np.bincount(owners, inside, count) / size
    spread = np.sqrt(np.bincount(owners, (inside - mean[owners]) ** 2, count) / size)
    z: FloatArray = np.zeros(len(nodes))
    np.divide(inside - mean[owners], spread[owners], out=z, where=spread[owners] > 1e-12)
    return z


def _participation(adjacency: Any, modules: Modules, degree: NDArray[Any]) -> FloatArray:
    from scipy.sparse import csr_array

    nodes, owners = modules.memberships
    alone = np.flatnonzero(modules.homes == 0)
    rows = np.concatenate([nodes, alone])
    columns = np.concatenate([owners, len(modules) + np.arange(len(alone))])
    share = 1.0 / np.maximum(modules.homes, 1)[rows]
    shape = (modules.node_count, len(modules) + len(alone))
    links = adjacency @ csr_array((share, (rows, columns)), shape=shape)
    squares = np.asarray(links.multiply(links).sum(axis=1)).ravel()
    connected = degree > 0
    spread = np.divide(squares, degree.astype(np.float64) ** 2, out=np.ones(len(degree)), where=connected)
    participation: FloatArray = np.maximum(1.0 - spread, 0.0)
    return participation
