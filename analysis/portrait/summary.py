"""Figures of the network as a whole, and the same figures of random networks."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, fields
from typing import Any

import numpy as np
from numpy.typing import NDArray

from analysis.network import FloatArray, Network
from analysis.portrait.distances import chosen_sources, search, small_world
from analysis.portrait.hierarchy import mean_by_degree
from analysis.portrait.uniform_network import uniform_network
from analysis.trust.nulls import rewire

DEGREES, UNIFORM = "degrees", "uniform"
NULL_SOURCES = 256
CLEAR = 2.0
SOURCE = (
    "assortativity: Newman 2002; k-core: Seidman 1983; clustering: Watts & Strogatz 1998; random networks: Maslov & "
    "Sneppen 2002 (same degrees), Erdős & Rényi 1959 (same number of edges)"
)


@dataclass(frozen=True)
class Figures:
    """Figures of one network; NaN where one is not defined.

    Attributes
    ----------
    nodes, edges : int
    density : float
        ``2m / (n(n − 1))``.
    components, giant_share : int, float
        Connected components; share of nodes in the largest.
    mean_degree, median_degree, degree_sd, highest_degree : float
    mean_strength, highest_strength : float
        Sums of weights; equal to degrees without weights.
    assortativity : float
        Pearson correlation of the degrees at the two ends of an edge (Newman 2002, eq. 4).
    core : int
        The largest k for which there is a k-core (Seidman 1983).
    transitivity : float
        Three times triangles over connected triples.
    clustering : float
        Mean local clustering, 0 for nodes with fewer than two edges (Watts & Strogatz 1998).
    mean_path : float
        Mean shortest path in the giant component.
    """

    nodes: int
    edges: int
    density: float
    components: int
    giant_share: float
    mean_degree: float
    median_degree: float
    degree_sd: float
    highest_degree: float
    mean_strength: float
    highest_strength: float
    assortativity: float
    core: int
    transitivity: float
    clustering: float
    mean_path: float


FIGURES = tuple(each.name for each in fields(Figures))
KEPT = {
    DEGREES: ("components", "giant_share", "assortativity", "core", "transitivity", "clustering", "mean_path"),
    UNIFORM: (
        "components",
        "giant_share",
        "degree_sd",
        "highest_degree",
        "assortativity",
        "core",
        "transitivity",
        "clustering",
        "mean_path",
    ),
}
"""Figures that a kind of null network leaves free, and that can be compared with it."""


@dataclass(frozen=True, eq=False)
class Measured:
    """What one null network gave.

    Attributes
    ----------
    kind : str
        `degrees` or `uniform`.
    figures : Figures
    by_degree : float64 array, shape (highest degree + 1,), or None
        Mean local clustering by degree; of networks with the same degrees.
    """

    kind: str
    figures: Figures
    by_degree: FloatArray | None = None


@dataclass(frozen=True, eq=False)
class OwnMeasured:
    """What the network itself gave.

    Attributes
    ----------
    figures : Figures
        Without the mean path, which takes longer.
    local : float64 array, shape (nodes,)
        Local clustering.
    core : int64 array, shape (nodes,)
        Core number.
    """

    figures: Figures
    local: FloatArray
    core: NDArray[np.int64]


@dataclass(frozen=True)
class NullFigure:
    """One figure over null networks: mean, sample standard deviation, number of networks that have it."""

    mean: float
    sd: float
    draws: int

    def z(self, value: float) -> float:
        """Return the distance of a value from the mean in standard deviations; NaN where they do not spread."""
        return (value - self.mean) / self.sd if self.sd > 0 else float("nan")


@dataclass(frozen=True, eq=False)
class Summary:
    """The network's figures beside those of null networks.

    Attributes
    ----------
    figures : Figures
    weighted : bool
    degrees, uniform : dict of str to NullFigure
        By the name of the figure; empty before any null network has come.
    """

    figures: Figures
    weighted: bool
    degrees: dict[str, NullFigure]
    uniform: dict[str, NullFigure]

    def null(self, kind: str, name: str) -> NullFigure | None:
        """Return a figure over null networks of a kind, None where there is none."""
        return (self.degrees if kind == DEGREES else self.uniform).get(name)

    def small_world(self, kind: str = UNIFORM) -> float:
        """Return the small-world coefficient against null networks of a kind (Humphries & Gurney 2008)."""
        clustering, path = self.null(kind, "clustering"), self.null(kind, "mean_path")
        if clustering is None or path is None:
            return float("nan")
        return small_world(self.figures.clustering, self.figures.mean_path, clustering.mean, path.mean)

    def sentences(self) -> list[str]:
        """Say what kind of network it is, plainest first."""
        figures = self.figures
        parts = (
            "in one piece"
            if figures.components == 1
            else f"in {figures.components:,} pieces, {100 * figures.giant_share:.0f} % of the genes in the largest"
        )
        first = (
            f"{figures.nodes:,} genes and {figures.edges:,} interactions, {parts}; a gene has "
            f"{figures.mean_degree:.1f} partners on average, half of the genes {figures.median_degree:.0f} or fewer, "
            f"one of them {figures.highest_degree:,.0f}."
        )
        return [first, *self._world(), *self._clustering()]

    def _world(self) -> list[str]:
        sigma = self.small_world()
        if np.isnan(sigma):
            return []
        if sigma > 1:
            told = "It is a small world: paths about as short as in a random network, and far more clustering"
            if sigma < CLEAR:
                told = "It is hardly a small world: clustering and paths are near those of a random network"
        else:
            told = "It is no small world: relative to its paths it has no more clustering than a random network"
        return [f"{told} (coefficient {sigma:.1f}, above 1 for a small world)."]

    def _clustering(self) -> list[str]:
        null = self.null(DEGREES, "clustering")
        if null is None or null.draws < CLEAR:
            return []
        value = self.figures.clustering
        z = null.z(value)
        how = "more than" if z > CLEAR else "less than" if z < -CLEAR else "about as much as"
        return [
            f"The partners of a gene are joined {how} the degrees alone would make them (clustering {value:.3f}, in "
            f"{null.draws} networks with the same degrees {null.mean:.3f} ± {null.sd:.3f})."
        ]


@dataclass(frozen=True)
class OwnFiguresTask:
    """Measures the network itself."""

    def run(self, network: Network) -> OwnMeasured:
        """Return all figures but the mean path."""
        local, core = local_clustering(network), core_numbers(network)
        return OwnMeasured(measure(network, local, core, float("nan")), local, core)


@dataclass(frozen=True)
class FiguresTask:
    """Draws a null network and measures it.

    Attributes
    ----------
    kind : str
        `degrees` or `uniform`.
    seed : int
    """

    kind: str
    seed: int

    def run(self, network: Network) -> Measured:
        """Return the figures of the network drawn."""
        drawn = (rewire if self.kind == DEGREES else uniform_network)(network.without_weights(), self.seed)
        local = local_clustering(drawn)
        path = float(search(drawn, chosen_sources(drawn, NULL_SOURCES, self.seed)).means.mean())
        by_degree = mean_by_degree(drawn.degree, local) if self.kind == DEGREES else None
        return Measured(self.kind, measure(drawn, local, core_numbers(drawn), path), by_degree=by_degree)


def local_clustering(network: Network) -> FloatArray:
    """Return the share of pairs of each node's partners that are joined, 0 where it has fewer than two."""
    return np.asarray(network.igraph.transitivity_local_undirected(mode="zero"), np.float64)


def core_numbers(network: Network) -> NDArray[np.int64]:
    """Return the largest k for which each node is in the k-core."""
    return np.asarray(network.igraph.coreness(), np.int64)


def measure(network: Network, local: FloatArray, core: NDArray[Any], mean_path: float) -> Figures:
    """Return the figures of a network."""
    degree, strength = network.degree.astype(np.float64), network.strength
    nodes, edges = network.node_count, network.edge_count
    pieces = np.bincount(network.components)
    some = nodes > 0
    return Figures(
        nodes,
        edges,
        2 * edges / (nodes * (nodes - 1)) if nodes > 1 else float("nan"),
        len(pieces),
        float(pieces[0] / nodes) if some else float("nan"),
        float(degree.mean()) if some else float("nan"),
        float(np.median(degree)) if some else float("nan"),
        float(degree.std()) if some else float("nan"),
        float(degree.max(initial=0)),
        float(strength.mean()) if some else float("nan"),
        float(strength.max(initial=0)),
        assortativity(network),
        int(core.max(initial=0)),
        _transitivity(degree, local),
        float(local.mean()) if some else float("nan"),
        mean_path,
    )


def assortativity(network: Network) -> float:
    """Return the correlation of the degrees at the two ends of an edge (Newman 2002); NaN where all are equal."""
    if not network.edge_count:
        return float("nan")
    one, other = network.degree[network.sources].astype(np.float64), network.degree[network.targets]
    mean = (one + other).mean() / 2
    spread = (one**2 + other.astype(np.float64) ** 2).mean() / 2 - mean**2
    return float(((one * other).mean() - mean**2) / spread) if spread > 1e-12 else float("nan")


def gather_nulls(found: Sequence[Measured], kind: str) -> dict[str, NullFigure]:
    """Return mean and spread of each figure over the null networks of a kind."""
    rows = [each.figures for each in found if each.kind == kind]
    if not rows:
        return {}
    answer = {}
    for name in KEPT[kind]:
        values = np.array([getattr(row, name) for row in rows], np.float64)
        known = values[~np.isnan(values)]
        if len(known):
            spread = float(known.std(ddof=1)) if len(known) > 1 else float("nan")
            answer[name] = NullFigure(float(known.mean()), spread, len(known))
    return answer


def _transitivity(degree: FloatArray, local: FloatArray) -> float:
    """Return joined pairs of partners over all pairs of partners, summed over nodes."""
    pairs = degree * (degree - 1) / 2
    total = float(pairs.sum())
    return float(local @ pairs) / total if total else float("nan")
