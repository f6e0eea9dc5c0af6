"""The one graph type that every step takes."""

from __future__ import annotations

import hashlib
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from functools import cached_property
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

if TYPE_CHECKING:
    import igraph
    import pandas as pd

IntArray = NDArray[np.int32]
FloatArray = NDArray[np.float64]


def locked(array: NDArray[Any]) -> NDArray[Any]:
    """Return the array, contiguous and read-only."""
    array = np.ascontiguousarray(array)
    array.flags.writeable = False
    return array


@dataclass(frozen=True, eq=False)
class Network:
    """An undirected simple network in canonical order.

    Nodes are sorted by name, each edge has `source < target`, edges are sorted: two files with the same
    interactions in any order give the same object. Build one with `Network.from_edges`.

    Attributes
    ----------
    names : tuple of str
        Node names, sorted, unique.
    sources, targets : int32 array, shape (edges,)
        Ends of each edge as indices into `names`.
    weights : float64 array, shape (edges,), or None
        Positive and finite; None where the network is unweighted.
    label : str
        What to call the network on screen, usually the file's name.
    provenance : mapping of str to str
        Where it came from: file name, weight column, cut. Not part of the fingerprint.
    """

    names: tuple[str, ...]
    sources: IntArray
    targets: IntArray
    weights: FloatArray | None = None
    label: str = "network"
    provenance: Mapping[str, str] = field(default_factory=dict)

    @classmethod
    def from_edges(
        cls,
        ends: Sequence[tuple[str, str]],
        weights: Sequence[float] | None = None,
        *,
        nodes: Sequence[str] = (),
        label: str = "network",
        provenance: Mapping[str, str] | None = None,
    ) -> Network:
        """Put edges given by name into canonical order.

        Parameters
        ----------
        ends : sequence of (str, str)
            No self-loops, each pair once (in either direction); intake merges before it calls.
        weights : sequence of float, optional
            One positive finite value per edge.
        nodes : sequence of str
            Further nodes, for those without an edge.

        Raises
        ------
        ValueError
            Where a pair is a self-loop or stands twice, or a weight is not positive and finite.
        """
        names = sorted({name for pair in ends for name in pair} | set(nodes))
        index = {name: position for position, name in enumerate(names)}
        pairs = np.fromiter((index[name] for pair in ends for name in pair), np.int32).reshape(-1, 2)
        values = None if weights is None else np.asarray(weights, np.float64)
        return cls.from_indices(tuple(names), pairs, values, label=label, provenance=provenance)

    @classmethod
    def from_indices(
        cls,
        names: tuple[str, ...],
        pairs: NDArray[Any],
        weights: NDArray[Any] | None = None,
        *,
        label: str = "network",
        provenance: Mapping[str, str] | None = None,
    ) -> Network:
        """Put edges given by index, shape (edges, 2), into canonical order; `names` must be sorted."""
        if list(names) != sorted(set(names)):
            raise ValueError("node names must be sorted and unique")
        low, high = pairs.min(axis=1, initial=2**31 - 1), pairs.max(axis=1, initial=-1)
        if np.any(low == high):
            raise ValueError("self-loops must be removed first")
        order = np.lexsort((high, low))
        low, high = low[order].astype(np.int32), high[order].astype(np.int32)
        if np.any((np.diff(low) == 0) & (np.diff(high) == 0)):
            raise ValueError("an edge stands twice")
        if weights is not None:
            weights = np.asarray(weights, np.float64)[order]
            if not np.all(np.isfinite(weights) & (weights > 0)):
                raise ValueError("weights must be positive and finite")
            weights = locked(weights)
        return cls(names, locked(low), locked(high), weights, label, dict(provenance or {}))

    @property
    def node_count(self) -> int:
        """Return the number of nodes."""
        return len(self.names)

    @property
    def edge_count(self) -> int:
        """Return the number of edges."""
        return len(self.sources)

    @cached_property
    def fingerprint(self) -> str:
        """SHA-256 (hex) of the canonical node and edge list with weights, as UTF-8 text and raw float64."""
        digest = hashlib.sha256()
        digest.update("\n".join(self.names).encode())
        digest.update(b"\0")
        digest.update(self.sources.astype("<i4").tobytes())
        digest.update(self.targets.astype("<i4").tobytes())
        if self.weights is not None:
            digest.update(b"weights")
            digest.update(self.weights.astype("<f8").tobytes())
        return digest.hexdigest()

    @cached_property
    def index(self) -> dict[str, int]:
        """Position of each node name."""
        return {name: position for position, name in enumerate(self.names)}

    @cached_property
    def edge_weights(self) -> FloatArray:
        """Weights, all one where the network has none."""
        return self.weights if self.weights is not None else np.ones(self.edge_count)

    @cached_property
    def upper_weight(self) -> float:
        """95 % quantile of the weights: what a strong edge has, whatever outliers there are; 1 where unweighted."""
        return 1.0 if self.weights is None or not len(self.weights) else float(np.quantile(self.weights, 0.95))

    @cached_property
    def degree(self) -> IntArray:
        """Number of edges of each node, shape (nodes,)."""
        ends = np.concatenate([self.sources, self.targets])
        return locked(np.bincount(ends, minlength=self.node_count).astype(np.int32))

    @cached_property
    def strength(self) -> FloatArray:
        """Sum of the weights of each node's edges, shape (nodes,)."""
        return locked(
            np.bincount(self.sources, self.edge_weights, self.node_count)
            + np.bincount(self.targets, self.edge_weights, self.node_count)
        )

    @cached_property
    def igraph(self) -> igraph.Graph:
        """The same network for igraph; edge attribute `weight` where weighted. Never change it."""
        import igraph

        # pairs one by one: from a list of lists the same graph takes three times as long
        graph = igraph.Graph(self.node_count, zip(self.sources.tolist(), self.targets.tolist(), strict=True))
        if self.weights is not None:
            graph.es["weight"] = self.weights.tolist()
        return graph

    @cached_property
    def components(self) -> IntArray:
        """Connected component of each node, numbered from the largest; shape (nodes,)."""
        from scipy.sparse.csgraph import connected_components

        _, labels = connected_components(self.adjacency, directed=False)
        order = np.argsort(-np.bincount(labels), kind="stable")
        rank = np.empty_like(order)
        rank[order] = np.arange(len(order))
        return locked(rank[labels].astype(np.int32))

    @cached_property
    def adjacency(self) -> Any:
        """Symmetric sparse matrix (CSR) of the weights, shape (nodes, nodes)."""
        from scipy.sparse import csr_array

        rows = np.concatenate([self.sources, self.targets])
        columns = np.concatenate([self.targets, self.sources])
        values = np.concatenate([self.edge_weights, self.edge_weights])
        return csr_array((values, (rows, columns)), shape=(self.node_count, self.node_count))

    def without_weights(self) -> Network:
        """Return the same edges, each counting one."""
        return Network(self.names, self.sources, self.targets, None, self.label, self.provenance)

    def with_edges(self, kept: NDArray[np.bool_]) -> Network:
        """Return the network with a part of its edges and all of its nodes."""
        weights = None if self.weights is None else locked(self.weights[kept])
        return Network(
            self.names,
            locked(self.sources[kept]),
            locked(self.targets[kept]),
            weights,
            self.label,
            self.provenance,
        )

    def subnetwork(self, nodes: NDArray[Any]) -> Network:
        """Return the network among the given nodes (indices, any order)."""
        nodes = np.unique(nodes)
        position = np.full(self.node_count, -1, np.int32)
        position[nodes] = np.arange(len(nodes))
        kept = (position[self.sources] >= 0) & (position[self.targets] >= 0)
        weights = None if self.weights is None else locked(self.weights[kept])
        return Network(
            tuple(self.names[node] for node in nodes),
            locked(position[self.sources[kept]]),
            locked(position[self.targets[kept]]),
            weights,
            self.label,
            self.provenance,
        )

    def edge_table(self) -> pd.DataFrame:
        """Return the edges by name: `source, target` and, where weighted, `weight`."""
        import pandas as pd

        names = np.array(self.names, object)
        table = pd.DataFrame({"source": names[self.sources], "target": names[self.targets]})
        if self.weights is not None:
            table["weight"] = self.weights
        return table

    def __reduce__(self) -> tuple[Any, ...]:
        """Pickle the arrays alone: views that can be made again do not travel to workers."""
        fields = (self.names, self.sources, self.targets, self.weights, self.label, dict(self.provenance))
        return (Network, fields)

    def __eq__(self, other: object) -> bool:
        return isinstance(other, Network) and self.fingerprint == other.fingerprint

    def __hash__(self) -> int:
        return hash(self.fingerprint)
