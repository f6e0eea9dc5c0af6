"""`summary.json`: the figures of the whole clustering."""

from __future__ import annotations

import json
import math
from typing import Any

from analysis.handover.bundle import Bundle, Source
from analysis.intake.report import IntakeReport
from analysis.network import Network
from analysis.study import NullDraws
from analysis.version import versions


def summary_file(bundle: Bundle) -> dict[str, bytes]:
    """Return `summary.json`."""
    return {"summary.json": json_bytes(summarise(bundle))}


def json_bytes(content: Any) -> bytes:
    """Return valid JSON with numbers that read back exactly; `null` for what is not a number."""
    return (json.dumps(_plain(content), indent=2, ensure_ascii=False, allow_nan=False) + "\n").encode()


def summarise(bundle: Bundle) -> dict[str, Any]:
    """Return the summary as plain values; figures that were not computed are None."""
    study = bundle.study
    return {
        "network": describe_network(study.network, bundle.report, bundle.source),
        "method": study.settings.method,
        "settings": study.settings.as_dict(),
        "quality": study.modules.quality,
        "modularity": study.modularity,
        "modules": len(study.modules),
        "genes_in_no_module": study.modules.left_out,
        "genes_in_several_modules": int((study.modules.homes > 1).sum()),
        "shown": study.shown,
        "suggestion": study.suggestion or None,
        "stability": {"seed_ami": study.seed_ami, "noise_ami": study.noise_ami},
        "significance": _significance(study.nulls),
        "sentences": list(study.sentences),
        **({} if bundle.meaning is None else {"meaning": bundle.meaning.summary()}),
        "versions": versions(),
    }


def describe_network(network: Network, report: IntakeReport | None, source: Source | None) -> dict[str, Any]:
    """Return the figures of a network and of how it was read."""
    found: dict[str, Any] = {
        "nodes": network.node_count,
        "edges": network.edge_count,
        "fingerprint": network.fingerprint,
        "label": network.label,
        "weighted": network.weights is not None,
        "components": int(network.components.max()) + 1 if network.node_count else 0,
        "genes_without_edges": int((network.degree == 0).sum()),
    }
    if source is not None:
        found |= {"file": source.name, "sha256": source.sha256}
    if report is not None:
        counts = ("rows", "self_loops", "duplicates_merged")
        found["intake"] = {count: getattr(report, count) for count in counts} | {
            "edges": report.edges,
            "rejected": len(report.rejected),
            "weight_column": report.weight_column,
        }
        found["edges_below_min_weight"] = report.edges - network.edge_count
    return found


def _significance(nulls: NullDraws | None) -> dict[str, Any]:
    if nulls is None:
        return dict.fromkeys(("null_networks", "null_mean", "null_sd", "z", "p_value"))
    return {
        "null_networks": len(nulls.draws),
        "null_mean": float(nulls.draws.mean()),
        "null_sd": float(nulls.draws.std(ddof=1)) if len(nulls.draws) > 1 else None,
        "z": nulls.z,
        "p_value": nulls.p_value,
    }


def _plain(value: Any) -> Any:
    """Return the value for JSON: NumPy scalars as Python's, what is not finite as None."""
    if isinstance(value, dict):
        return {str(key): _plain(item) for key, item in value.items()}
    if isinstance(value, (list, tuple)):
        return [_plain(item) for item in value]
    if hasattr(value, "item"):
        value = value.item()
    return None if isinstance(value, float) and not math.isfinite(value) else value
