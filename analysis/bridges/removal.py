"""What if it were gone: the change that the removal of a gene, or of a set, makes."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import cached_property
from typing import Any

import numpy as np
from numpy.typing import NDArray

from analysis.modules import Modules
from analysis.network import FloatArray, IntArray, Network, locked

GROUPS = 24
EXACT_NODES = 2_000
SOURCES, RANKING_SOURCES, CANDIDATE_SOURCES = 128, 64, 32
AT_A_TIME = 64
ROUNDING = 1e-12


@dataclass(frozen=True)
class Split:
    """A module that a removal parts: its position, and the genes of each piece, largest first."""

    module: int
    pieces: tuple[int, ...]


@dataclass(frozen=True, eq=False)
class Paths:
    """Shortest paths between genes, from all genes or from a sample of them.

    Attributes
    ----------
    efficiency : float
        Mean of ``1 / distance`` over pairs of genes in different modules, 0 where no path joins them (Latora &
        Marchiori 2001); between 0 and 1.
    pairs : int64 array, shape (groups, groups)
        Pairs joined by a path, by the module of each end; the groups are the largest modules, and last all the rest.
    lengths : float64 array, shape (groups, groups)
        Mean length of those paths; NaN where there is none.
    """

    efficiency: float
    pairs: NDArray[np.int64]
    lengths: FloatArray


@dataclass(frozen=True, eq=False)
class Removal:
    """What changes when genes are taken out; all figures are about the other genes.

    Attributes
    ----------
    removed : int32 array
    giant_before, giant_after : int
        Other genes in the largest connected component.
    before, after : Paths
    split : tuple of Split
        Modules whose other genes were connected inside the module and fall into pieces, those with most genes parted
        off first.
    sources : int
        Genes from which paths were measured.
    exact : bool
        Whether these are all.
    """

    removed: IntArray
    giant_before: int
    giant_after: int
    before: Paths
    after: Paths
    split: tuple[Split, ...]
    sources: int
    exact: bool

    @property
    def efficiency_lost(self) -> float:
        """Share of the efficiency between modules that is lost."""
        return 0.0 if self.before.efficiency == 0 else 1.0 - self.after.efficiency / self.before.efficiency

    def sentence(self, network: Network) -> str:
        """Say it in words."""
        count = len(self.removed)
        who = network.names[self.removed[0]] if count == 1 else f"these {count} genes"
        return f"Without {who}, {self._giant_words()}, {self._split_words()}, and {self._path_words()}."

    def _giant_words(self) -> str:
        lost = self.giant_before - self.giant_after
        if lost == 0:
            return "the giant component keeps all its other genes"
        return f"{lost:,} other {'gene leaves' if lost == 1 else 'genes leave'} the giant component"

    def _split_words(self) -> str:
        count = len(self.split)
        if count == 0:
            return "no module falls apart"
        return "one module falls into pieces" if count == 1 else f"{count:,} modules fall into pieces"

    def _path_words(self) -> str:
        if self.efficiency_lost < ROUNDING:
            return "paths between modules stay as short"
        return f"paths between modules lose {100 * self.efficiency_lost:.3g} % of their efficiency"


def remove_genes(network: Network, modules: Modules, nodes: Sequence[int] | NDArray[Any], seed: int = 1) -> Removal:
    """Measure what the removal of genes changes.

    Up to `EXACT_NODES` genes paths are measured from all of them, else from `SOURCES` genes drawn with the seed.
    """
    removed = np.unique(np.asarray(nodes, np.int32))
    probe = _Probe(network, modules, seed)
    silent = np.zeros(network.node_count, bool)
    silent[removed] = True
    before, giant_before = probe.paths(silent, blocked=False), _giant(network, np.zeros_like(silent), silent)
    after, giant_after = probe.paths(silent, blocked=True), _giant(network, silent, silent)
    split = [
        Split(module, pieces)
        for module in np.unique(_modules_of(modules, removed)).tolist()
        if len(pieces := _pieces(network, modules.members[module], silent)) > 1
    ]
    split.sort(key=lambda each: (each.pieces[0] - sum(each.pieces), each.module))
    exact = len(probe.sources) == network.node_count
    return Removal(locked(removed), giant_before, giant_after, before, after, tuple(split), len(probe.sources), exact)


@dataclass(frozen=True, eq=False)
class RankRemovals:
    """Task: the effect of each of some genes, taken out one by one; float64, shape (genes, 3).

    Columns: genes that leave the giant component, modules that fall into pieces, share of efficiency lost.
    """

    modules: Modules
    nodes: IntArray
    seed: int

    def run(self, network: Network) -> FloatArray:
        """Take each out."""
        probe = _Probe(network, self.modules, self.seed, RANKING_SOURCES)
        cutting = set(network.igraph.articulation_points())
        rows = [probe.effect(int(node), cutting=int(node) in cutting) for node in self.nodes]
        return np.array(rows, np.float64).reshape(-1, 3)


@dataclass(frozen=True, eq=False)
class RemovalRanking:
    """Genes by what their removal would change, largest effect first.

    Attributes
    ----------
    nodes : int32 array, shape (genes,)
    giant_lost, modules_split : int64 arrays
    efficiency_lost : float64 array
        As in `Removal`.
    """

    nodes: IntArray
    giant_lost: NDArray[np.int64]
    modules_split: NDArray[np.int64]
    efficiency_lost: FloatArray


def candidates(network: Network, modules: Modules, count: int = 300, seed: int = 1) -> IntArray:
    """Return the genes whose removal is worth trying: half by betweenness, half by edges into other modules.

    Betweenness (Freeman 1977) is that of paths from all genes of a small network, else from a sample of sources.
    """
    sources = _sources(network, seed, CANDIDATE_SOURCES)
    betweenness = np.array(network.igraph.betweenness(directed=False, sources=sources.tolist()))
    labels = modules.full_labels
    leaving = labels[network.sources] != labels[network.targets]
    outside = np.bincount(network.sources[leaving], minlength=network.node_count)
    outside = outside + np.bincount(network.targets[leaving], minlength=network.node_count)
    order = np.column_stack([np.argsort(-betweenness, kind="stable"), np.argsort(-outside, kind="stable")]).ravel()
    _, first = np.unique(order, return_index=True)
    return locked(order[np.sort(first)][:count].astype(np.int32))


def rank_tasks(modules: Modules, nodes: IntArray, *, seed: int = 1, chunk: int = 10) -> list[RankRemovals]:
    """Return the tasks whose results `gather_ranking` puts together."""
    bare = Modules(modules.node_count, modules.members)
    return [RankRemovals(bare, nodes[start : start + chunk], seed) for start in range(0, len(nodes), chunk)]


def gather_ranking(nodes: IntArray, found: Sequence[FloatArray]) -> RemovalRanking:
    """Order the candidates by loss of efficiency between modules, then by modules split and genes parted off."""
    effects = np.concatenate([np.zeros((0, 3)), *found])
    order = np.lexsort((nodes, -effects[:, 0], -effects[:, 1], -effects[:, 2]))
    giant, split = effects[order, 0].astype(np.int64), effects[order, 1].astype(np.int64)
    return RemovalRanking(locked(nodes[order]), locked(giant), locked(split), locked(effects[order, 2]))


class _Probe:
    """Measures paths between modules from the same sources again and again."""

    def __init__(self, network: Network, modules: Modules, seed: int, most: int = SOURCES) -> None:
        adjacency = network.adjacency
        self.network = network
        self.modules = modules
        self.rows = (adjacency.indptr.astype(np.int32), adjacency.indices.astype(np.int32))
        labels = modules.full_labels
        shown = min(len(modules), GROUPS)
        self.homes = (labels, np.minimum(labels, shown).astype(np.int32))
        self.groups = shown + 1
        self.sources = _sources(network, seed, most)

    def search(self, silent: NDArray[np.bool_], *, blocked: bool) -> tuple[NDArray[np.int64], FloatArray, FloatArray]:
        """Return the table of distances, and the sums of 1 / distance by node and by source."""
        from analysis.bridges.compiled import FARTHEST, search_between

        table = np.zeros((FARTHEST + 1, self.groups, self.groups), np.int64)
        sums = (table, np.zeros(len(silent)), np.zeros(len(silent)))
        closed = silent if blocked else np.zeros_like(silent)
        sources = self.sources[~silent[self.sources]]
        for start in range(0, len(sources), AT_A_TIME):
            search_between(self.rows, (closed, silent), sources[start : start + AT_A_TIME], self.homes, sums)
        return sums

    def paths(self, silent: NDArray[np.bool_], *, blocked: bool) -> Paths:
        """Return the paths among the genes that are not silent."""
        table, near, _ = self.search(silent, blocked=blocked)
        pairs = table.sum(axis=0)
        total = np.tensordot(np.arange(len(table)), table, 1)
        lengths = np.divide(total, pairs, out=np.full(pairs.shape, np.nan), where=pairs > 0)
        apart = self.pairs_apart(silent)
        return Paths(float(near.sum()) / apart if apart else 0.0, locked(pairs), locked(lengths))

    def pairs_apart(self, silent: NDArray[np.bool_]) -> int:
        """Count the pairs (source, gene) in different modules, silent ones left out."""
        labels, kept = self.homes[0], ~silent
        sources = self.sources[kept[self.sources]]
        in_module = np.bincount(labels[kept], minlength=int(labels.max(initial=0)) + 1)
        return int((kept.sum() - in_module[labels[sources]]).sum())

    @cached_property
    def whole(self) -> tuple[FloatArray, FloatArray]:
        """Sums of 1 / distance by node and by source with nothing taken out."""
        _, by_node, by_source = self.search(np.zeros(self.network.node_count, bool), blocked=False)
        return by_node, by_source

    def effect(self, node: int, *, cutting: bool) -> tuple[int, int, float]:
        """Return genes lost to the giant component, modules split, share of efficiency lost, without one gene."""
        silent = np.zeros(self.network.node_count, bool)
        silent[node] = True
        by_node, by_source = self.whole
        before = float(by_node.sum()) - by_node[node] - by_source[node]  # pairs with the gene itself do not count
        after = float(self.search(silent, blocked=True)[1].sum())
        lost = 0
        if cutting:
            lost = _giant(self.network, np.zeros_like(silent), silent) - _giant(self.network, silent, silent)
        own = _modules_of(self.modules, np.array([node]))
        split = sum(len(_pieces(self.network, self.modules.members[module], silent)) > 1 for module in own)
        return lost, split, 1.0 - after / before if before > ROUNDING else 0.0


def _sources(network: Network, seed: int, most: int) -> IntArray:
    if network.node_count <= EXACT_NODES:
        return np.arange(network.node_count, dtype=np.int32)
    drawn = np.random.default_rng(seed).choice(network.node_count, most, replace=False)
    return np.sort(drawn).astype(np.int32)


def _modules_of(modules: Modules, nodes: NDArray[Any]) -> NDArray[np.int32]:
    pairs, owners = modules.memberships
    return owners[np.isin(pairs, nodes)]


def _giant(network: Network, blocked: NDArray[np.bool_], silent: NDArray[np.bool_]) -> int:
    """Count the genes that are not silent in the largest component of what is not blocked."""
    from scipy.sparse.csgraph import connected_components

    kept = np.flatnonzero(~blocked)
    if not len(kept):
        return 0
    _, labels = connected_components(network.adjacency[kept][:, kept], directed=False)
    largest = np.bincount(labels).argmax()
    return int((~silent[kept][labels == largest]).sum())


def _pieces(network: Network, members: NDArray[Any], removed: NDArray[np.bool_]) -> tuple[int, ...]:
    """Return the sizes of the pieces into which the members fall that were one piece before; one or none otherwise."""
    from scipy.sparse.csgraph import connected_components

    block = network.adjacency[members][:, members]
    _, whole = connected_components(block, directed=False)
    kept = np.flatnonzero(~removed[members])
    if not len(kept):
        return ()
    _, parts = connected_components(block[kept][:, kept], directed=False)
    if len(np.unique(parts)) <= len(np.unique(whole[kept])):
        return (len(kept),)
    return tuple(sorted(np.bincount(parts).tolist(), reverse=True))
