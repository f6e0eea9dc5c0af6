"""All distinct modules of a sweep, pooled."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from analysis.modules import evidence_per_member
from analysis.network import FloatArray, IntArray, Network
from analysis.trust.chains import LabelTable

SMALLEST = 3


@dataclass(frozen=True, eq=False)
class ModulePool:
    """Distinct modules of three genes or more, in the order in which they were first met.

    Attributes
    ----------
    members : tuple of int32 arrays
        Node indices of each module, ascending.
    resolution : float64 array, shape (modules,)
        Geometric mean of the resolutions at which the module was found, member for member.
    internal_weight, strength : float64 arrays, shape (modules,)
        Weight inside; summed strength of the members.
    """

    members: tuple[IntArray, ...]
    resolution: FloatArray
    internal_weight: FloatArray
    strength: FloatArray

    @property
    def sizes(self) -> NDArray[np.int64]:
        """Number of members of each module."""
        return np.array([len(group) for group in self.members], np.int64)

    def evidence(self, network: Network) -> FloatArray:
        """Return the evidence per member of each module; see `analysis.modules.evidence_per_member`."""
        return evidence_per_member(network, self.sizes, self.internal_weight, self.strength)


@dataclass
class _Found:
    """Modules of one partition: their keys, and what is needed to list the members of the new ones."""

    keys: NDArray[np.uint64]
    internal_weight: FloatArray
    strength: FloatArray
    order: NDArray[np.int64]
    starts: NDArray[np.int64]
    ends: NDArray[np.int64]
    resolution: float


def pool_modules(network: Network, tables: Sequence[LabelTable], resolutions: FloatArray) -> ModulePool:
    """Pool the distinct modules of partitions of a network.

    Two modules are the same where their member sets are. Each node has a random 64-bit number; the sum over a module's
    members, modulo 2⁶⁴, stands for the set: among 100,000 modules, two different sets meet by chance once in a few
    thousand million pools.

    Parameters
    ----------
    tables : sequence of int32 arrays, each of shape (resolutions, nodes)
    resolutions : float64 array, shape (resolutions,)
    """
    marks = np.random.default_rng(0).integers(0, 2**64, network.node_count, np.uint64)
    found = [
        _modules_of(network, labels, marks, resolution)
        for table in tables
        for labels, resolution in zip(table, resolutions.tolist(), strict=True)
    ]
    keys = np.concatenate([each.keys for each in found])
    owner = np.repeat(np.arange(len(found)), [len(each.keys) for each in found])
    place = np.concatenate([np.arange(len(each.keys)) for each in found])
    _, first, number, times = np.unique(keys, return_index=True, return_inverse=True, return_counts=True)
    log_resolution = np.log([each.resolution for each in found])[owner]
    mean = np.exp(np.bincount(number, log_resolution, len(first)) / times)
    met = np.argsort(first)  # in the order of meeting, not of the random keys
    where = [(found[i], j) for i, j in zip(owner[first[met]].tolist(), place[first[met]].tolist(), strict=True)]
    return ModulePool(
        tuple(each.order[each.starts[j] : each.ends[j]].astype(np.int32) for each, j in where),
        mean[met],
        np.concatenate([each.internal_weight for each in found])[first[met]],
        np.concatenate([each.strength for each in found])[first[met]],
    )


def _modules_of(network: Network, labels: NDArray[np.int32], marks: NDArray[np.uint64], resolution: float) -> _Found:
    sizes = np.bincount(labels)
    order = np.argsort(labels, kind="stable")
    ends = np.cumsum(sizes)
    starts = ends - sizes
    large = np.flatnonzero(sizes >= SMALLEST)
    running = np.concatenate([np.zeros(1, np.uint64), np.cumsum(marks[order])])  # wraps around, as it should
    own = labels[network.sources]
    inside = own == labels[network.targets]
    weight = np.bincount(own[inside], network.edge_weights[inside], len(sizes)).astype(np.float64)
    strength = np.bincount(labels, network.strength, len(sizes)).astype(np.float64)
    keys = running[ends[large]] - running[starts[large]]
    return _Found(keys, weight[large], strength[large], order, starts[large], ends[large], resolution)
