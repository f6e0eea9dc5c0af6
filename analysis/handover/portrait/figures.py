"""The figures of a portrait: each with its reading, the source of its formulas, its drawing and its data."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from typing import Any

import numpy as np

from analysis.handover.csv_table import csv_bytes
from analysis.handover.portrait.plot import (
    BARS,
    BLUE,
    CURVE,
    GREY,
    INK,
    LEAF,
    OCHRE,
    Axis,
    Series,
    log_axis,
    plot,
    standalone,
)
from analysis.network import Network
from analysis.portrait import Portrait, degree_distribution, distances, hierarchy, hubs, tolerance
from analysis.portrait.alternatives import log_power_law
from analysis.portrait.degree_distribution import DegreeDistribution
from analysis.portrait.hierarchy import Hierarchy
from analysis.portrait.tolerance import BETWEENNESS, DEGREE, RANDOM, RECOMPUTED, Tolerance

CURVES = {
    RANDOM: ("at random", GREY),
    DEGREE: ("best connected first", LEAF),
    RECOMPUTED: ("the same, counted anew", BLUE),
    BETWEENNESS: ("by betweenness", OCHRE),
}


@dataclass(frozen=True, eq=False)
class PortraitFigure:
    """One figure.

    Attributes
    ----------
    key, title : str
        For file names; for the heading.
    reading : str
        What it says of this network, in one sentence or two.
    source : str
        Whose formulas these are.
    svg : str
    columns : mapping of str to list
        The data drawn.
    """

    key: str
    title: str
    reading: str
    source: str
    svg: str
    columns: Mapping[str, Any] = field(default_factory=dict)

    def picture(self) -> bytes:
        """Return the SVG as a file of its own."""
        return standalone(self.svg)

    def data(self) -> bytes:
        """Return the data as CSV."""
        import pandas as pd

        return csv_bytes(pd.DataFrame(dict(self.columns)))


def portrait_figures(network: Network, portrait: Portrait) -> list[PortraitFigure]:
    """Return the figures of the sections that have come."""
    found: list[PortraitFigure] = []
    if portrait.degrees is not None:
        found += [_binned(portrait.degrees), _cumulative(portrait.degrees, network)]
    if portrait.hierarchy is not None and len(portrait.hierarchy.degrees):
        found.append(_hierarchy(portrait.hierarchy))
    if portrait.distances is not None and portrait.distances.genes > 1:
        found.append(_distances(portrait.distances))
    if portrait.tolerance is not None:
        found.append(_tolerance(portrait.tolerance))
    if portrait.hubs is not None and portrait.hubs.studied is not None:
        found.append(_study(portrait.hubs))
    return found


def _binned(section: DegreeDistribution) -> PortraitFigure:
    x, y = section.bin_degree, section.bin_density
    series = [Series("genes", x, y), *_fitted(section, lambda share, law: share * np.exp(law))]
    drawn = plot("Share of genes by degree", log_axis("degree k", x), log_axis("share of genes, P(k)", y), series)
    columns = {"degree": x, "share_of_genes_per_degree": y}
    return PortraitFigure(
        "degree_distribution", "Degrees", section.sentence(), degree_distribution.SOURCE, drawn, columns
    )


def _cumulative(section: DegreeDistribution, network: Network) -> PortraitFigure:
    x, y = section.degrees.astype(np.float64), section.reaching
    series = [Series("genes", x, y)]
    fit = section.fit
    if fit is not None:
        from scipy.special import zeta

        points = np.unique(np.geomspace(fit.x_min, float(x[-1]), 60).round())
        share = fit.tail / network.node_count
        law = share * zeta(fit.alpha, points) / zeta(fit.alpha, float(fit.x_min))
        series.append(Series("power law, fitted", points, law, INK, CURVE, dashed=True))
    drawn = plot("Share of genes with so many edges or more", log_axis("degree k", x), log_axis("P(K ≥ k)", y), series)
    tenth, hundredth = (np.quantile(network.degree, q, method="higher") for q in (0.9, 0.99))
    reading = f"One gene in ten has {tenth:,} edges or more, one in a hundred {hundredth:,} or more."
    columns = {"degree": section.degrees, "genes": section.genes, "share_reaching": y}
    return PortraitFigure(
        "degrees_cumulative", "Degrees, cumulative", reading, degree_distribution.SOURCE, drawn, columns
    )


def _fitted(section: DegreeDistribution, scale: Callable[[float, Any], Any]) -> list[Series]:
    fit = section.fit
    if fit is None:
        return []
    points = np.unique(np.geomspace(fit.x_min, float(section.degrees[-1]), 60).round())
    share = float(section.reaching[np.searchsorted(section.degrees, fit.x_min)])
    law = scale(share, log_power_law(points, fit.x_min, fit.alpha))
    return [Series("power law, fitted", points, law, INK, CURVE, dashed=True)]


def _hierarchy(section: Hierarchy) -> PortraitFigure:
    x, y = section.bin_degree, section.bin_clustering
    series = [Series("this network", x, y)]
    if not np.isnan(section.bin_null).all():
        series.append(Series("same degrees", x, section.bin_null, GREY, CURVE))
    flat = np.full(len(x), section.flat)
    series.append(Series("random", x, flat, GREY, CURVE, dashed=True))
    heights = np.concatenate([each.y for each in series])
    drawn = plot("Clustering by degree", log_axis("degree k", x), log_axis("mean clustering, C(k)", heights), series)
    columns = {"degree": x, "clustering": y, "same_degrees": section.bin_null, "random": flat}
    return PortraitFigure("clustering_by_degree", "Hierarchy", section.sentence(), hierarchy.SOURCE, drawn, columns)


def _distances(section: distances.Distances) -> PortraitFigure:
    steps = np.arange(1, len(section.shares))
    shares = section.shares[1:]
    across = Axis("steps between two genes", 0.4, len(steps) + 0.6)
    up = Axis("share of pairs", 0.0, float(shares.max()) * 1.08, share=True)
    drawn = plot("Distances between genes", across, up, [Series("", steps.astype(float), shares, LEAF, BARS)])
    columns = {"steps": steps, "share_of_pairs": shares}
    return PortraitFigure("distances", "Distances", section.sentence(), distances.SOURCE, drawn, columns)


def _tolerance(section: Tolerance) -> PortraitFigure:
    series = []
    for curve in section.curves:
        words, colour = CURVES[curve.strategy]
        band = (curve.low, curve.high) if curve.draws > 1 else (None, None)
        series.append(Series(words, curve.removed, curve.giant, colour, CURVE, low=band[0], high=band[1]))
    across = Axis("genes removed", 0.0, 1.0, share=True)
    up = Axis("largest component", 0.0, 1.0, share=True)
    drawn = plot("Largest component as genes are removed", across, up, series)
    columns = {
        "removal": np.repeat([each.strategy for each in section.curves], [len(each.removed) for each in section.curves])
    }
    for name in ("removed", "giant", "low", "high"):
        columns[name] = np.concatenate([getattr(each, name) for each in section.curves])
    return PortraitFigure("removals", "Tolerance", section.sentence(), tolerance.SOURCE, drawn, columns)


def _study(section: hubs.Hubs) -> PortraitFigure:
    degree, studied = section.all_degree, section.all_studied
    x = studied + 1
    drawn = plot(
        "Degree against publications",
        log_axis("publications + 1", x),
        log_axis("degree", degree),
        [Series("", x, degree, LEAF)],
    )
    columns = {"publications": studied, "degree": degree}
    return PortraitFigure("study_bias", "Degree and study", section.study_sentence(), hubs.SOURCE, drawn, columns)
