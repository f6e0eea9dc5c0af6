"""What the workspace lists: networks, the clusterings of a trail, jobs that did not end."""

from __future__ import annotations

import hashlib
import json
from collections.abc import Mapping
from dataclasses import dataclass
from datetime import UTC, datetime
from typing import Any

NOT_COMPUTED_FROM = frozenset({"names"})
"""Settings that change what is written down, not what is computed."""


@dataclass(frozen=True)
class NetworkEntry:
    """A network that the workspace keeps.

    Attributes
    ----------
    fingerprint : str
        Of `analysis.network.Network`.
    label, file_name : str
        What it is called on screen; name of the file it came from.
    nodes, edges : int
        Its size.
    opened_at : str
        When it was opened last: UTC, ISO 8601.
    """

    fingerprint: str
    label: str
    file_name: str
    nodes: int
    edges: int
    opened_at: str


@dataclass(frozen=True)
class TrailEntry:
    """One clustering of the trail. Make a new one with `TrailEntry.of`.

    Attributes
    ----------
    id : str
        `clustering_id` of fingerprint and settings.
    fingerprint : str
        Of the network.
    settings : mapping
        `StudySettings.as_dict()`.
    figures : mapping
        Plain values to list it by: modules, modularity, agreement over seeds.
    name : str
        Given by the user; may be empty.
    created_at : str
        When it was first saved: UTC, ISO 8601. Empty before.
    order : int
        Place in the trail of its network, from 1, whatever the clock said. 0 before it is saved.
    """

    id: str
    fingerprint: str
    settings: Mapping[str, Any]
    figures: Mapping[str, Any]
    name: str = ""
    created_at: str = ""
    order: int = 0

    @classmethod
    def of(
        cls, fingerprint: str, settings: Mapping[str, Any], figures: Mapping[str, Any], name: str = ""
    ) -> TrailEntry:
        """Return an entry to be saved, with its id."""
        return cls(clustering_id(fingerprint, settings), fingerprint, dict(settings), dict(figures), name)


@dataclass(frozen=True)
class UnfinishedJob:
    """Work that was begun and whose end was never recorded.

    Attributes
    ----------
    kind, key : str
        As given to `app.jobs.Jobs.start`.
    request : mapping
        What is needed to begin it again, as plain values.
    started_at : str
        UTC, ISO 8601.
    """

    kind: str
    key: str
    request: Mapping[str, Any]
    started_at: str


def clustering_id(fingerprint: str, settings: Mapping[str, Any]) -> str:
    """Return one short id for a network and the settings that decide its clustering.

    Names given to modules do not count, and `1` is the same resolution as `1.0`.

    Returns
    -------
    str
        32 hexadecimal digits, from SHA-256.
    """
    decisive = {key: value for key, value in settings.items() if key not in NOT_COMPUTED_FROM}
    text = json.dumps([fingerprint, _plain(decisive)], sort_keys=True, separators=(",", ":"))
    return hashlib.sha256(text.encode()).hexdigest()[:32]


CLUSTERING_COLUMNS = "id, fingerprint, settings, figures, name, created_at, turn"


def trail_entry(row: tuple[Any, ...]) -> TrailEntry:
    """Return the entry of a database row with `CLUSTERING_COLUMNS`."""
    identifier, fingerprint, settings, figures, name, created_at, turn = row
    return TrailEntry(identifier, fingerprint, json.loads(settings), json.loads(figures), name, created_at, turn)


def now() -> str:
    """Return the time in UTC as ISO 8601, to the millisecond."""
    return datetime.now(UTC).isoformat(timespec="milliseconds")


def to_json(value: Any) -> str:
    """Return plain values as JSON; floats keep every bit, NaN included, and NumPy's numbers become Python's."""
    return json.dumps(value, default=_number)


def _number(value: Any) -> Any:
    import numpy as np

    if isinstance(value, np.generic):
        return value.item()
    raise TypeError(f"a value of type {type(value).__name__} cannot be kept as plain text")


def _plain(value: Any) -> Any:
    """Bring numbers that are equal to one form, at any depth."""
    if isinstance(value, Mapping):
        return {str(key): _plain(inner) for key, inner in value.items()}
    if isinstance(value, (list, tuple)):
        return [_plain(inner) for inner in value]
    if value is None or isinstance(value, (bool, str, int)):
        return value
    number = float(value)
    return int(number) if number.is_integer() else number
