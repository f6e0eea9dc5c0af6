"""How many genes have how many edges, and which law that follows, if any."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Any

import numpy as np
from numpy.typing import NDArray

from analysis.network import FloatArray, Network, locked
from analysis.portrait.alternatives import Comparison, compare_on_tail
from analysis.portrait.power_law import PowerLaw, fit_power_law, sample_distances

BINS_PER_DECADE = 8
RULED_OUT = 0.1
FEW = 50
"""Values in a tail below which a power law cannot be told from others (Clauset, Shalizi & Newman 2009, section 5)."""
SOURCE = "Clauset, Shalizi & Newman 2009"


@dataclass(frozen=True, eq=False)
class DegreeDistribution:
    """Degrees and the laws tried on them.

    Attributes
    ----------
    degrees : int64 array, shape (distinct,)
        The degrees that occur, 1 or more.
    genes : int64 array, shape (distinct,)
        How many genes have each.
    reaching : float64 array, shape (distinct,)
        Share of all genes that have at least so many edges, ``P(K ≥ k)``.
    bin_degree, bin_density : float64 arrays, shape (bins,)
        Bins that widen with the degree: their geometric middle, and the share of genes per unit of degree.
    fit : PowerLaw or None
        None where there are too few different degrees.
    comparisons : tuple of Comparison
        On the tail of the fit; empty without one.
    """

    degrees: NDArray[np.int64]
    genes: NDArray[np.int64]
    reaching: FloatArray
    bin_degree: FloatArray
    bin_density: FloatArray
    fit: PowerLaw | None
    comparisons: tuple[Comparison, ...] = ()

    def judged(self, distances: NDArray[Any]) -> DegreeDistribution:
        """Return it with the goodness of the fit, from `sample_distances`."""
        return replace(self, fit=None if self.fit is None else self.fit.judged(distances))

    def comparison(self, first: str, second: str) -> Comparison | None:
        """Return one comparison, None where it was not made."""
        found = (each for each in self.comparisons if (each.first, each.second) == (first, second))
        return next(found, None)

    def sentence(self) -> str:
        """Say what the tests allow to be said, and no more."""
        if self.fit is None:
            return "There are too few different degrees to say which law they follow."
        return f"{self._tail()}; {self._law()}."

    def _tail(self) -> str:
        decay = [self.comparison(each, "exponential") for each in ("power law", "log-normal")]
        if any(each is not None and each.better == each.first for each in decay):
            return "Degrees are fat-tailed: far more genes have very many edges than an exponential would give"
        if any(each is not None and each.better == "exponential" for each in decay):
            return "Degrees are not fat-tailed: an exponential fits their tail better"
        return "Degrees are not shown to be fat-tailed: an exponential fits their tail about as well"

    def _law(self) -> str:
        fit = self.fit
        if fit is None:
            return ""
        told = f"power law with exponent {fit.alpha:.2f} ± {fit.error:.2f} from degree {fit.x_min} on"
        words = [f"of {fit.tail:,} genes, too few to tell laws apart; a {told}" if fit.tail < FEW else f"a {told}"]
        if fit.samples:
            verdict = "is ruled out" if fit.p_value < RULED_OUT else "is not ruled out"
            words.append(f"{verdict} by its own fit (p = {fit.p_value:.2g}, {fit.samples} samples)")
        else:
            words.append("is the best one, its fit not tested yet")
        return f"{' '.join(words)}{self._rivals()}"

    def _rivals(self) -> str:
        """Return how the power law stands to the log-normal and to its truncated form."""
        parts = []
        for rival in ("log-normal", "truncated power law"):
            found = self.comparison("power law", rival)
            if found is None:
                continue
            how = {"": "no better than", "power law": "better than", rival: "worse than"}[found.better]
            parts.append(f"{how} a {rival} (p = {found.p_value:.2g})")
        return f", and fits {' and '.join(parts)}" if parts else ""


@dataclass(frozen=True)
class DegreeTask:
    """Fits the laws; nothing is drawn."""

    def run(self, network: Network) -> DegreeDistribution:
        """Return the distribution, its fit not tested yet."""
        return degree_distribution(network)


@dataclass(frozen=True)
class FitSamplesTask:
    """Fits the degrees, draws samples from the fit, and fits them; `samples` of them, by `seed`."""

    samples: int
    seed: int

    def run(self, network: Network) -> FloatArray:
        """Return the distances of the samples, none where there is no fit."""
        fit = fit_power_law(network.degree)
        return np.zeros(0) if fit is None else sample_distances(fit, network.degree, self.samples, self.seed)


def degree_distribution(network: Network) -> DegreeDistribution:
    """Count degrees and fit the laws."""
    degrees, genes = np.unique(network.degree[network.degree >= 1], return_counts=True)
    degrees = degrees.astype(np.int64)
    reaching = genes[::-1].cumsum()[::-1] / max(network.node_count, 1)
    middle, density = _log_bins(degrees, genes, network.node_count)
    fit = fit_power_law(network.degree)
    comparisons = () if fit is None else compare_on_tail(network.degree, fit.x_min, fit.alpha)
    return DegreeDistribution(
        locked(degrees), locked(genes), locked(reaching), locked(middle), locked(density), fit, comparisons
    )


def degree_bins(highest: int) -> NDArray[np.int64]:
    """Return whole-numbered borders of bins that widen evenly on a log axis, from 1 to beyond the highest degree."""
    steps = int(np.ceil(BINS_PER_DECADE * np.log10(max(highest, 1) + 1))) + 1
    borders = np.unique(np.ceil(10 ** (np.arange(steps + 1) / BINS_PER_DECADE)).astype(np.int64))
    return borders[: int(np.searchsorted(borders, highest, side="right")) + 1]


def _log_bins(degrees: NDArray[Any], genes: NDArray[Any], nodes: int) -> tuple[FloatArray, FloatArray]:
    if not len(degrees):
        return np.zeros(0), np.zeros(0)
    borders = degree_bins(int(degrees[-1]))
    held, _ = np.histogram(degrees, bins=[*borders[:-1], borders[-1] - 0.5], weights=genes)
    middle = np.sqrt(borders[:-1] * (borders[1:] - 1.0))
    kept = held > 0
    return middle[kept], held[kept] / np.diff(borders)[kept] / nodes
