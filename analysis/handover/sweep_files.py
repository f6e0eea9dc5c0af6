"""What `corymb sweep` writes: the table over resolutions, the plateaus and the suggestion."""

from __future__ import annotations

from dataclasses import asdict
from typing import Any

from analysis.handover.bundle import SweepBundle
from analysis.handover.csv_table import csv_bytes
from analysis.handover.recipe import sweep_recipe_file
from analysis.handover.summary import describe_network, json_bytes
from analysis.trust.sweep import Plateau, Sweep
from analysis.version import versions


def sweep_bundle_files(bundle: SweepBundle) -> dict[str, bytes]:
    """Return `sweep.csv`, `summary.json` and, where the network came from a file, `recipe.toml`."""
    return {
        "sweep.csv": csv_bytes(bundle.sweep.table()),
        "summary.json": json_bytes(_summarise(bundle)),
        **sweep_recipe_file(bundle),
    }


def sweep_sentences(sweep: Sweep) -> list[str]:
    """Return what the sweep says in words: its extent, its plateaus, and the suggestion with its reason."""
    points = sweep.points
    extent = (
        f"From resolution {points[0].resolution:.3g} to {points[-1].resolution:.3g} the network has "
        f"{points[0].modules:,} to {points[-1].modules:,} modules."
    )
    plateaus = [_plateau_sentence(rank, plateau) for rank, plateau in enumerate(sweep.plateaus[:3], start=1)]
    return [sweep.suggestion.reason, extent, *plateaus]


def _plateau_sentence(rank: int, plateau: Plateau) -> str:
    return (
        f"Plateau {rank}: from {plateau.resolution_from:.3g} to {plateau.resolution_to:.3g}, {plateau.modules:,} "
        f"modules in its middle, agreement {plateau.agreement:.2f}."
    )


def _summarise(bundle: SweepBundle) -> dict[str, Any]:
    sweep = bundle.sweep
    return {
        "network": describe_network(bundle.network, bundle.report, bundle.source),
        "settings": asdict(sweep.settings) | {"weight": bundle.weight, "min_weight": bundle.min_weight},
        "resolutions": len(sweep.points),
        "plateaus": [_plateau(plateau) for plateau in sweep.plateaus],
        "suggestion": {
            "resolution": sweep.suggestion.resolution,
            "stands_out": sweep.suggestion.stands_out,
            "reason": sweep.suggestion.reason,
        },
        "sentences": sweep_sentences(sweep),
        "versions": versions(),
    }


def _plateau(plateau: Plateau) -> dict[str, Any]:
    figures = ("resolution_from", "resolution_to", "modules", "agreement", "score")
    return {figure: getattr(plateau, figure) for figure in figures}
