"""How many steps lie between two genes of the giant component, and whether that makes a small world."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from analysis.network import FloatArray, Network, locked
from analysis.portrait.neighbours import giant_nodes, neighbour_rows

EXACT_WORK = 1_000_000_000
"""Genes × edges of the giant component up to which all pairs are measured."""
SAMPLED_SOURCES = 2_048
BATCH = 64
NORMAL_95 = 1.959963984540054
SOURCE = "Watts & Strogatz 1998; Humphries & Gurney 2008"


@dataclass(frozen=True, eq=False)
class Searches:
    """What searches from some sources found.

    Attributes
    ----------
    counts : int64 array
        Pairs (source, other node) at each distance; the first stands for distance 0 and is 0.
    means : float64 array, shape (sources,)
        Mean distance from each source.
    farthest : int64 array, shape (sources,)
        Largest distance from each source.
    """

    counts: NDArray[np.int64]
    means: FloatArray
    farthest: NDArray[np.int64]


@dataclass(frozen=True, eq=False)
class Distances:
    """Shortest paths in the giant component.

    Attributes
    ----------
    genes : int
        Of the giant component.
    share : float
        Of all genes.
    sources : int
        Searches made; as many as genes where all pairs were measured.
    mean, mean_low, mean_high : float
        Mean distance of two genes, with its 95 % interval where it is from a sample of sources.
    shares : float64 array, shape (largest distance found + 1,)
        Share of pairs at each distance.
    diameter_low, diameter_high : int
        Bounds of the largest distance: the largest found, and twice the smallest of any source's largest.
    """

    genes: int
    share: float
    sources: int
    mean: float
    mean_low: float
    mean_high: float
    shares: FloatArray
    diameter_low: int
    diameter_high: int

    @property
    def exact(self) -> bool:
        """Whether all pairs were measured."""
        return self.sources == self.genes

    def sentence(self) -> str:
        """Say how far apart two genes are."""
        place = f"in the giant component ({self.genes:,} genes, {100 * self.share:.0f} % of all)"
        if self.genes < 2:
            return "No two genes are joined, so there is no distance to measure."
        if self.exact:
            return f"Two genes {place} are {self.mean:.2f} steps apart on average, at most {self.diameter_low}."
        bounds = f"{self.diameter_low} to {self.diameter_high}"
        return (
            f"Two genes {place} are {self.mean:.3f} steps apart on average (95 % from {self.mean_low:.3f} to "
            f"{self.mean_high:.3f}, from {self.sources:,} searches); the largest distance is {bounds}."
        )


@dataclass(frozen=True)
class SearchTask:
    """Searches from a part of the sources.

    Attributes
    ----------
    sources : int
        How many sources are drawn in all; 0 for every gene of the giant component.
    seed : int
    part, parts : int
        Which part of them is searched from here.
    """

    sources: int
    seed: int
    part: int = 0
    parts: int = 1

    def run(self, network: Network) -> Searches:
        """Search from the sources of this part."""
        return search(network, chosen_sources(network, self.sources, self.seed)[self.part :: self.parts])


def sources_to_draw(network: Network) -> int:
    """Return how many sources are worth searching from: 0 for all, where that ends soon."""
    nodes = giant_nodes(network)
    edges = int((network.components[network.sources] == 0).sum())
    return 0 if len(nodes) * edges <= EXACT_WORK or len(nodes) <= SAMPLED_SOURCES else SAMPLED_SOURCES


def chosen_sources(network: Network, count: int, seed: int) -> NDArray[np.int64]:
    """Return sources drawn from the giant component without repetition; all of them for 0 or too many."""
    nodes = giant_nodes(network)
    if count == 0 or count >= len(nodes):
        return nodes
    return np.sort(np.random.default_rng(seed).choice(nodes, count, replace=False))


def search(network: Network, sources: NDArray[Any]) -> Searches:
    """Search breadth-first from each source, 64 at a time."""
    from analysis.portrait.compiled import spread

    indptr, indices = neighbour_rows(network)
    counts = np.zeros(network.node_count + 1, np.int64)
    reached = np.zeros((2, len(sources)), np.int64)
    for start in range(0, len(sources), BATCH):
        part = slice(start, start + BATCH)
        spread(indptr, indices, sources[part].astype(np.int32), counts, reached[:, part])
    others = max(int((network.components == 0).sum()) - 1, 1)
    used = int(np.flatnonzero(counts).max(initial=0)) + 1
    return Searches(counts[:used], reached[0] / others, reached[1])


def gather_distances(network: Network, found: Sequence[Searches]) -> Distances:
    """Put the parts together."""
    genes = len(giant_nodes(network))
    longest = max((len(each.counts) for each in found), default=1)
    counts = np.zeros(longest, np.int64)
    for each in found:
        counts[: len(each.counts)] += each.counts
    means = np.concatenate([each.means for each in found]) if found else np.zeros(0)
    farthest = np.concatenate([each.farthest for each in found]) if found else np.zeros(0, np.int64)
    sources, share = len(means), genes / max(network.node_count, 1)
    if genes < 2 or not sources:
        missing = float("nan")
        return Distances(genes, share, sources, missing, missing, missing, locked(np.zeros(1)), 0, 0)
    mean = float(means.mean())
    # sampling without repetition from a finite number of genes (Cochran 1977, eq. 2.20)
    spread = float(means.std(ddof=1)) / np.sqrt(sources) * np.sqrt(1 - sources / genes) if sources > 1 else float("nan")
    lowest = int(farthest.max())
    highest = lowest if sources == genes else 2 * int(farthest.min())
    reach = NORMAL_95 * float(spread)
    shares = locked(counts / counts.sum())
    return Distances(genes, share, sources, mean, mean - reach, mean + reach, shares, lowest, highest)


def small_world(clustering: float, path: float, random_clustering: float, random_path: float) -> float:
    """Return ``(C / C_random) / (L / L_random)`` (Humphries & Gurney 2008); above 1 for a small world.

    NaN where a figure is missing or the random networks have no clustering.
    """
    if not (random_clustering > 0 and random_path > 0 and path > 0):
        return float("nan")
    return (clustering / random_clustering) / (path / random_path)
