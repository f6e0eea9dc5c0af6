"""From a file, or the bytes of one, to a network and the report on how it was read."""

from __future__ import annotations

import hashlib
from pathlib import Path, PurePath
from typing import Any

import numpy as np

from analysis.errors import InputError
from analysis.intake.decoding import decode
from analysis.intake.formats import recognise
from analysis.intake.interactions import Interactions
from analysis.intake.merging import Merged, merge
from analysis.intake.names import EXAMPLES, name_warnings
from analysis.intake.opener import read_bytes
from analysis.intake.report import IntakeReport, Reading
from analysis.intake.unpacking import TEXT_WANTED, unpack
from analysis.network import Network
from analysis.progress import Progress, portion, silent

_ENDINGS = ".gz .gzip .bgz .txt .text .tsv .csv .tab .dat .edges .list"
ENDINGS = frozenset(_ENDINGS.split())
"""Endings that are left out of a network's label."""

WIDE_RANGE = 1e6
"""Ratio of the largest to the smallest weight from which on a few edges drown the others."""


def read_network(
    path: str | Path, *, weight: str | None = None, strict: bool = False, progress: Progress = silent
) -> Reading:
    """Read a network from a file.

    Parameters
    ----------
    path : str or Path
        Text in UTF-8, as it is or packed with gzip.
    weight : str or None
        None to guess the weight column, `"none"` to leave weights out, else its name or its number from 1.
    strict : bool
        Raise where a weight is text, rather than reject its row.
    progress : Progress
        Told how far the reading is.

    Returns
    -------
    Reading
        The network and the report.

    Raises
    ------
    InputError
        Where the file cannot be opened or gives no network.
    """
    return parse_network(read_bytes(Path(path)), str(path), weight=weight, strict=strict, progress=progress)


def parse_network(
    data: bytes,
    source: str,
    *,
    weight: str | None = None,
    strict: bool = False,
    progress: Progress = silent,
) -> Reading:
    """Read a network from the bytes of a file.

    Parameters
    ----------
    data : bytes
        The file as it lies on disk, or as it was sent.
    source : str
        Its name: for messages, and for the network's label.
    weight, strict, progress
        As for `read_network`.

    Returns
    -------
    Reading
        The network and the report.

    Raises
    ------
    InputError
        Where the bytes give no network.
    """
    progress(0.0, "unpacking")
    text, warnings = decode(unpack(data, source), source)
    interactions = recognise(text, source).parse(
        text, source, weight=weight, strict=strict, progress=portion(progress, 0.1, 0.8)
    )
    del text
    progress(0.8, "merging rows")
    merged = merge(interactions, label_of(source), _provenance(data, source, interactions))
    if not merged.network.node_count:
        raise _nothing_left(interactions, source)
    report = _report(source, interactions, merged, list(warnings))
    progress(1.0, "read")
    return Reading(merged.network, report)


def label_of(source: str) -> str:
    """Return the file's name without folder and known endings."""
    name = PurePath(source.replace("\\", "/")).name
    while (ending := PurePath(name).suffix.lower()) in ENDINGS:
        name = name[: -len(ending)]
    return name or "network"


def _provenance(data: bytes, source: str, interactions: Interactions) -> dict[str, str]:
    weight = interactions.columns.get("weight")
    return {
        "file": PurePath(source.replace("\\", "/")).name,
        "weight_column": "none" if weight is None else weight.column,
        "sha256": hashlib.sha256(data).hexdigest(),
    }


def _nothing_left(interactions: Interactions, source: str) -> InputError:
    """Return the error for a file without a usable row: it points at the first row and says what is wrong."""
    if not interactions.rejected:
        return InputError(source, "no interactions", TEXT_WANTED)
    first, count = interactions.rejected[0], len(interactions.rejected)
    others = "" if count == 1 else f"; none of the {count:,} rows can be used"
    remedy = TEXT_WANTED
    if first.reason.startswith("weight"):
        remedy = "expected positive numbers as weights; name their column with --weight, or give --weight none"
    return InputError(source, first.reason + others, remedy, first.line)


def _report(source: str, interactions: Interactions, merged: Merged, warnings: list[dict[str, Any]]) -> IntakeReport:
    network = merged.network
    sizes = np.bincount(network.components)
    weight = interactions.columns.get("weight")
    span = None
    if network.weights is not None and network.edge_count:
        span = (float(network.weights.min()), float(network.weights.max()))
    warnings += interactions.warnings
    warnings += name_warnings(network.names)
    warnings += _merging_warnings(merged, sizes.tolist(), span)
    return IntakeReport(
        source=source,
        format=interactions.format,
        separator=interactions.separator,
        header=interactions.header,
        columns=dict(interactions.columns),
        weight_column=None if weight is None else weight.column,
        rows=interactions.rows,
        edges=network.edge_count,
        nodes=network.node_count,
        self_loops=merged.self_loops,
        duplicates_merged=merged.duplicates_merged,
        rejected=interactions.rejected,
        warnings=tuple(warnings),
        components=len(sizes),
        giant_component=int(sizes.max()),
        fingerprint=network.fingerprint,
        comments=interactions.comments,
        blank_lines=interactions.blank_lines,
        weight_range=span,
    )


def _merging_warnings(merged: Merged, sizes: list[int], span: tuple[float, float] | None) -> list[dict[str, Any]]:
    """Return what there is to say about the network as a whole."""
    found: list[dict[str, Any]] = []
    if merged.differing:
        found.append({"kind": "duplicate_weights_differ", "count": merged.differing})
    if isolated := _isolated(merged.network):
        found.append({"kind": "isolated_nodes", "count": len(isolated), "examples": isolated[:EXAMPLES]})
    if len(sizes) > 1:
        found.append({"kind": "components", "count": len(sizes), "giant_component": max(sizes)})
    if span is not None and span[1] > WIDE_RANGE * span[0]:
        found.append({"kind": "weight_range", "low": span[0], "high": span[1]})
    return found


def _isolated(network: Network) -> list[str]:
    """Return the names of the nodes without an edge."""
    return [network.names[node] for node in np.flatnonzero(network.degree == 0).tolist()]
