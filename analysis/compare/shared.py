"""The genes that two networks share, and the modules of each on them."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from analysis.agreement import membership_matrix
from analysis.compare.result import Clustering
from analysis.errors import SettingError


@dataclass(frozen=True, eq=False)
class Shared:
    """Modules on the genes that both networks have; modules keep their numbers, and may be empty here.

    Attributes
    ----------
    genes : tuple of str
        Sorted names.
    first_nodes, second_nodes : int64 arrays, shape (genes,)
        Index of each gene in either network.
    first, second : sparse 0/1 arrays (CSR), shape (genes, modules)
    """

    genes: tuple[str, ...]
    first_nodes: NDArray[np.int64]
    second_nodes: NDArray[np.int64]
    first: Any
    second: Any


def share(first: Clustering, second: Clustering) -> Shared:
    """Return what two clusterings have in common.

    Raises
    ------
    SettingError
        Where no gene of one network has the name of a gene of the other.
    """
    genes = tuple(sorted(first.network.index.keys() & second.network.index.keys()))
    if not genes:
        raise SettingError(
            f"no gene of {first.label} has the name of a gene of {second.label}; bring both networks to the same "
            "kind of names first"
        )
    nodes = [
        np.fromiter((clustering.network.index[gene] for gene in genes), np.int64, len(genes))
        for clustering in (first, second)
    ]
    return Shared(
        genes,
        nodes[0],
        nodes[1],
        membership_matrix(first.modules)[nodes[0]],
        membership_matrix(second.modules)[nodes[1]],
    )


def sizes(membership: Any) -> NDArray[np.int64]:
    """Return the number of genes of each column, shape (modules,)."""
    return np.asarray(membership.sum(axis=0)).ravel().astype(np.int64)
