"""Modules: a partition or a cover over a network, and the figures of each module that need no second run."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field
from functools import cached_property
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from analysis.network import FloatArray, IntArray, Network, locked

if TYPE_CHECKING:
    import pandas as pd

NO_MODULE = -1


@dataclass(frozen=True, eq=False)
class Modules:
    """Modules over the nodes of a network, largest first; ties go to the one with the first node by name.

    Attributes
    ----------
    node_count : int
        Nodes of the network.
    members : tuple of int32 arrays
        Node indices of each module, ascending. Module `i` is `M{i+1}` on screen and in files.
    method : str
        Key of the method in `analysis.methods.METHODS`.
    settings : mapping
        The method's settings, as plain values.
    quality : float
        The method's own objective on this result; NaN where it has none.
    seed : int
        Seed of the run that gave it.
    """

    node_count: int
    members: tuple[IntArray, ...]
    method: str = ""
    settings: Mapping[str, float | int | str | None] = field(default_factory=dict)
    quality: float = float("nan")
    seed: int = 0

    @classmethod
    def from_labels(
        cls,
        labels: NDArray[Any],
        *,
        method: str = "",
        settings: Mapping[str, float | int | str | None] | None = None,
        quality: float = float("nan"),
        seed: int = 0,
    ) -> Modules:
        """Build a partition from one label per node; negative labels mean *in no module*."""
        order = np.argsort(labels, kind="stable")
        _, starts = np.unique(labels[order], return_index=True)
        groups = [group for group in np.split(order, starts[1:]) if len(group) and labels[group[0]] >= 0]
        return cls.from_members(len(labels), groups, method=method, settings=settings, quality=quality, seed=seed)

    @classmethod
    def from_members(
        cls,
        node_count: int,
        groups: Iterable[NDArray[Any]],
        *,
        method: str = "",
        settings: Mapping[str, float | int | str | None] | None = None,
        quality: float = float("nan"),
        seed: int = 0,
    ) -> Modules:
        """Build a partition or a cover from groups of node indices, in any order."""
        members = [np.unique(group).astype(np.int32) for group in groups]
        members = [group for group in members if len(group)]
        members.sort(key=lambda group: (-len(group), group.tolist()))
        return cls(node_count, tuple(locked(group) for group in members), method, dict(settings or {}), quality, seed)

    def __len__(self) -> int:
        return len(self.members)

    @cached_property
    def sizes(self) -> IntArray:
        """Number of members of each module, shape (modules,)."""
        return locked(np.array([len(group) for group in self.members], np.int32))

    @cached_property
    def memberships(self) -> tuple[IntArray, IntArray]:
        """All (node, module) pairs, sorted by node then module: two int32 arrays of one length."""
        if not self.members:
            return locked(np.zeros(0, np.int32)), locked(np.zeros(0, np.int32))
        nodes = np.concatenate(self.members)
        modules = np.repeat(np.arange(len(self.members), dtype=np.int32), self.sizes)
        order = np.lexsort((modules, nodes))
        return locked(nodes[order]), locked(modules[order])

    @cached_property
    def homes(self) -> IntArray:
        """Number of modules that each node is in, shape (nodes,)."""
        return locked(np.bincount(self.memberships[0], minlength=self.node_count).astype(np.int32))

    @property
    def is_cover(self) -> bool:
        """Whether some node is in more than one module."""
        return bool(np.any(self.homes > 1))

    @cached_property
    def labels(self) -> IntArray:
        """One module per node, `NO_MODULE` where in none; of several, the largest. Shape (nodes,)."""
        labels = np.full(self.node_count, NO_MODULE, np.int32)
        nodes, modules = self.memberships
        labels[nodes[::-1]] = modules[::-1]
        return locked(labels)

    @cached_property
    def full_labels(self) -> IntArray:
        """Like `labels`, but every node in no module gets a label of its own, so that it is a partition."""
        labels = self.labels.copy()
        alone = labels == NO_MODULE
        labels[alone] = len(self.members) + np.arange(int(alone.sum()))
        return locked(labels)

    @property
    def left_out(self) -> int:
        """Number of nodes in no module."""
        return int((self.homes == 0).sum())

    @property
    def numbers(self) -> list[str]:
        """`M1`, `M2`, … as on screen and in files."""
        return [f"M{position + 1}" for position in range(len(self.members))]


def modularity(network: Network, labels: NDArray[Any], resolution: float = 1.0) -> float:
    """Newman's modularity with a resolution.

    ``Q = Σ_c [ W_c / W − γ (K_c / 2W)² ]`` with `W` the total weight, `W_c` the weight inside module `c`,
    `K_c` its summed strength (Newman & Girvan 2004; γ: Reichardt & Bornholdt 2006).

    Parameters
    ----------
    labels : int array, shape (nodes,)
        Non-negative label of each node.

    Returns
    -------
    float
        0 for a network without edges.
    """
    total = float(network.edge_weights.sum())
    if total == 0:
        return 0.0
    inside = labels[network.sources] == labels[network.targets]
    strength = np.bincount(labels, network.strength)
    within = float(network.edge_weights[inside].sum())
    return within / total - resolution * float(((strength / (2 * total)) ** 2).sum())


def extended_modularity(network: Network, modules: Modules) -> float:
    """Modularity of a cover, each pair of nodes shared out over their numbers of modules.

    ``EQ = 1/2W Σ_c Σ_{v,w∈c} (1/(O_v O_w)) [A_vw − k_v k_w / 2W]`` (Shen, Cheng, Cai & Hu 2009, eq. 2). A node in no
    module counts as a module of its own, as theirs do, so that covers that leave nodes out compare with partitions.
    Equals `modularity` of `Modules.full_labels` for a partition.
    """
    total = float(network.edge_weights.sum())
    if total == 0:
        return 0.0
    share = 1.0 / np.maximum(modules.homes, 1)
    inside = 0.0
    expected = float((network.strength[modules.homes == 0] ** 2).sum())
    for group in modules.members:
        block = network.adjacency[group][:, group]
        # sums, not dot products: those differ in the last digit with the number of threads
        inside += float((share[group] * (block @ share[group])).sum())
        expected += float((network.strength[group] * share[group]).sum()) ** 2
    return inside / (2 * total) - expected / (2 * total) ** 2


def standard_modularity(network: Network, modules: Modules) -> float:
    """Modularity at resolution 1, by which results of all settings compare; for a cover the extended one."""
    if modules.is_cover:
        return extended_modularity(network, modules)
    return modularity(network, modules.full_labels)


@dataclass(frozen=True)
class ModuleFigures:
    """Figures of each module, all arrays of shape (modules,).

    Attributes
    ----------
    size, internal_edges, cut_edges : int64 arrays
        Members; edges with both ends inside; edges with one end inside.
    internal_weight, strength : float64 arrays
        Weight inside; summed strength of the members.
    internal_density : float64 array
        `internal_edges / (size (size − 1) / 2)`; 0 for single nodes.
    conductance : float64 array
        Weight of the cut over the smaller of the strengths inside and outside (Kannan, Vempala & Vetta 2004);
        0 for a whole component.
    below_resolution_limit : bool array
        Fewer internal edges than `√(2m)`, so that modularity at resolution 1 could not be trusted to keep the module
        apart from a neighbour (Fortunato & Barthélemy 2007: `l < √(2L)`).
    evidence : float64 array
        Nats per member; see `evidence_per_member`.
    """

    size: NDArray[np.int64]
    internal_edges: NDArray[np.int64]
    cut_edges: NDArray[np.int64]
    internal_weight: FloatArray
    strength: FloatArray
    internal_density: FloatArray
    conductance: FloatArray
    below_resolution_limit: NDArray[np.bool_]
    evidence: FloatArray


def score_modules(network: Network, modules: Modules) -> ModuleFigures:
    """Compute the figures of every module, partition or cover, in time linear in the members' edges."""
    count = len(modules)
    size = modules.sizes.astype(np.int64)
    internal_edges, internal_weight = _inside(network, modules)
    nodes, owners = modules.memberships
    degree = np.bincount(owners, network.degree[nodes], count)
    strength = np.bincount(owners, network.strength[nodes], count).astype(np.float64)
    cut_edges = np.rint(degree - 2 * internal_edges).astype(np.int64)
    cut_weight = np.maximum(strength - 2 * internal_weight, 0.0)
    cut_weight[cut_edges == 0] = 0.0
    outside = 2 * float(network.edge_weights.sum()) - strength
    smaller = np.minimum(strength, outside)
    conductance = np.divide(cut_weight, smaller, out=np.zeros(count), where=(cut_weight > 0) & (smaller > 0))
    pairs = size * (size - 1) / 2
    return ModuleFigures(
        size=size,
        internal_edges=internal_edges,
        cut_edges=cut_edges,
        internal_weight=internal_weight,
        strength=strength,
        internal_density=np.divide(internal_edges, pairs, out=np.zeros(count), where=pairs > 0),
        conductance=conductance,
        below_resolution_limit=internal_edges < np.sqrt(2.0 * network.edge_count),
        evidence=evidence_per_member(network, size, internal_weight, strength),
    )


def evidence_per_member(
    network: Network, size: NDArray[Any], internal_weight: NDArray[Any], strength: NDArray[Any]
) -> FloatArray:
    """How much denser modules are than the configuration model expects, in nats per member.

    With `s` members, `N = s(s−1)/2` pairs, weights scaled by `c = Σw / Σw²`, `q = c·W_in / N` and
    `p = c·K² / (4W) / N`: ``T = (N/s) · [q ln(q/p) + (1−q) ln((1−q)/(1−p))]`` where `q > p`, else 0: the
    Kullback–Leibler form of Traag, Krings & Van Dooren 2013 (Scientific Reports 3:2930, eq. 4) against the
    configuration model in place of the overall density, per member so that sizes compare. `q` and `p` are held
    below 1.

    Parameters
    ----------
    size, internal_weight, strength : arrays of one shape
        As in `ModuleFigures`; need not belong to one clustering.
    """
    weights = network.edge_weights
    total = float(weights.sum())
    evidence = np.zeros(len(size))
    if total == 0:
        return evidence
    scale = total / float((weights**2).sum())
    pairs = size * (size - 1) / 2.0
    use = pairs > 0
    ceiling = 1 - 1e-12
    found = np.minimum(scale * internal_weight[use] / pairs[use], ceiling)
    expected = np.minimum(scale * strength[use] ** 2 / (4 * total) / pairs[use], ceiling)
    with np.errstate(divide="ignore", invalid="ignore"):
        divergence = found * np.log(found / expected) + (1 - found) * np.log((1 - found) / (1 - expected))
    divergence = np.where(found > expected, np.maximum(divergence, 0.0), 0.0)  # rounding may fall below 0
    evidence[use] = pairs[use] / size[use] * divergence
    return evidence


def expected_density(network: Network, members: NDArray[Any]) -> float:
    """Return the inside density that the members' degrees alone would give, edges counting one each.

    ``D (D − 1) / (2 (2m − 1))`` edges for summed degree `D`, the mean of the configuration model (Newman 2010,
    Networks, section 13.2), over all pairs; NaN for a single node.
    """
    total = int(network.degree[members].sum())
    pairs = len(members) * (len(members) - 1) / 2
    if not pairs or not network.edge_count:
        return float("nan")
    return float(min(total * (total - 1) / (2 * (2 * network.edge_count - 1)) / pairs, 1.0))


def module_table(network: Network, modules: Modules) -> pd.DataFrame:
    """Return the figures of each module as a table, one row a module, `module` being `M1, M2, …`."""
    import pandas as pd

    figures = score_modules(network, modules)
    return pd.DataFrame(
        {
            "module": modules.numbers,
            "size": figures.size,
            "internal_edges": figures.internal_edges,
            "cut_edges": figures.cut_edges,
            "internal_density": figures.internal_density,
            "conductance": figures.conductance,
            "evidence": figures.evidence,
            "below_resolution_limit": figures.below_resolution_limit,
        }
    )


def _inside(network: Network, modules: Modules) -> tuple[NDArray[np.int64], FloatArray]:
    """Edges and weight inside each module."""
    count = len(modules)
    if modules.is_cover:
        return _inside_cover(network, modules)
    labels = modules.labels
    own = labels[network.sources]
    inside = (own == labels[network.targets]) & (own != NO_MODULE)
    edges = np.bincount(own[inside], minlength=count)
    weight = np.bincount(own[inside], network.edge_weights[inside], count)
    return edges.astype(np.int64), weight.astype(np.float64)


def _inside_cover(network: Network, modules: Modules) -> tuple[NDArray[np.int64], FloatArray]:
    """Count each edge once in every module that holds both of its ends, by sparse products."""
    from scipy.sparse import csr_array, triu

    nodes, owners = modules.memberships
    shape = (network.node_count, len(modules))
    member = csr_array((np.ones(len(nodes)), (nodes, owners)), shape=shape)
    upper = triu(network.adjacency, k=1, format="csr")
    weight = np.asarray((member.multiply(upper @ member)).sum(axis=0)).ravel()
    upper.data = np.ones_like(upper.data)
    edges = np.asarray((member.multiply(upper @ member)).sum(axis=0)).ravel()
    return np.rint(edges).astype(np.int64), weight.astype(np.float64)
