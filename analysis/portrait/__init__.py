"""The portrait of a network as a whole, before modules come into it; one file a subject."""

from __future__ import annotations

from analysis.portrait.alternatives import Comparison
from analysis.portrait.degree_distribution import DegreeDistribution
from analysis.portrait.distances import Distances
from analysis.portrait.hierarchy import Hierarchy
from analysis.portrait.hubs import Hubs
from analysis.portrait.portrait import Portrait, PortraitSettings, run_portrait
from analysis.portrait.power_law import PowerLaw
from analysis.portrait.summary import Figures, NullFigure, Summary
from analysis.portrait.tolerance import RemovalCurve, Tolerance

__all__ = ["PORTRAIT_TYPES", "Portrait", "PortraitSettings", "run_portrait"]

PORTRAIT_TYPES = (
    Portrait,
    PortraitSettings,
    Summary,
    Figures,
    NullFigure,
    DegreeDistribution,
    PowerLaw,
    Comparison,
    Hierarchy,
    Distances,
    Tolerance,
    RemovalCurve,
    Hubs,
)
"""All types of which a portrait is made, for whoever keeps one."""
