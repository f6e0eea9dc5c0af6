"""The folder that remembers networks, clusterings, whole results and the names given to modules."""

from __future__ import annotations

import json
import logging
import threading
from collections import OrderedDict
from collections.abc import Mapping
from pathlib import Path
from typing import Any, Generic, TypeVar

from analysis.errors import CorymbError
from analysis.network import Network
from analysis.study import Study
from app.workspace.content import ContentFiles
from app.workspace.database import Database
from app.workspace.encoding import network_from_arrays, network_to_arrays, study_from_arrays, study_to_arrays
from app.workspace.entries import CLUSTERING_COLUMNS, NetworkEntry, TrailEntry, now, to_json, trail_entry
from app.workspace.errors import WorkspaceError
from app.workspace.store import Store

logger = logging.getLogger(__name__)

NETWORK = "network"
STUDY = "study"
NETWORKS_AT_HAND = 4
STUDIES_AT_HAND = 8

Value = TypeVar("Value")


class Workspace(Store):
    """Networks, trails, notes and computed arrays, kept in one folder. Any thread may call it.

    Open one with `Workspace.open(folder)`.
    """

    def __init__(self, folder: Path, database: Database, files: ContentFiles) -> None:
        super().__init__(folder, database, files)
        self._networks: _AtHand[Network] = _AtHand(NETWORKS_AT_HAND)
        self._studies: _AtHand[Study] = _AtHand(STUDIES_AT_HAND)

    # Networks

    def add_network(self, network: Network, report_json: Mapping[str, Any], raw: bytes | None, file_name: str) -> None:
        """Keep a network with its intake report and, where given, the file's own bytes.

        The same interactions again, perhaps from another file, take the place of the former label, file and report;
        the trail stays.
        """
        report = self._files.keep(to_json(report_json).encode(), ".json")
        kept_raw = None if raw is None else self._files.keep(raw, ".raw")
        self._keep_network_arrays(network)
        values = {
            "fingerprint": network.fingerprint,
            "label": network.label,
            "file_name": file_name,
            "nodes": network.node_count,
            "edges": network.edge_count,
            "provenance": to_json(dict(network.provenance)),
            "report": report,
            "raw": kept_raw,
            "raw_name": None if raw is None else file_name,
            "opened_at": now(),
        }
        with self._database.change() as connection:
            connection.execute(
                """INSERT INTO networks VALUES (:fingerprint, :label, :file_name, :nodes, :edges, :provenance, :report,
                    :raw, :raw_name, :opened_at, (SELECT ifnull(max(turn), 0) + 1 FROM networks))
                ON CONFLICT (fingerprint) DO UPDATE SET label = excluded.label, file_name = excluded.file_name,
                    provenance = excluded.provenance, report = excluded.report, raw = ifnull(excluded.raw, raw),
                    raw_name = ifnull(excluded.raw_name, raw_name), opened_at = excluded.opened_at,
                    turn = excluded.turn""",
                values,
            )
        self._networks.put(network.fingerprint, network)

    def mark_opened(self, fingerprint: str) -> None:
        """Note that a network is at hand again, so that it is listed first."""
        with self._database.change() as connection:
            connection.execute(
                "UPDATE networks SET opened_at = ?, turn = (SELECT max(turn) + 1 FROM networks) WHERE fingerprint = ?",
                (now(), fingerprint),
            )

    def networks(self) -> list[NetworkEntry]:
        """Return all networks, the one opened last first."""
        found = self._database.rows(
            "SELECT fingerprint, label, file_name, nodes, edges, opened_at FROM networks ORDER BY turn DESC"
        )
        return [NetworkEntry(*row) for row in found]

    def network(self, fingerprint: str) -> Network:
        """Return a network.

        Raises
        ------
        WorkspaceError
            Where it is not kept here, or its file is damaged.
        """
        at_hand = self._networks.get(fingerprint)
        if at_hand is not None:
            return at_hand
        label, provenance = self._network_row(fingerprint, "label, provenance")
        network = self._load_network(fingerprint, label, json.loads(provenance))
        self._networks.put(fingerprint, network)
        return network

    def report(self, fingerprint: str) -> dict[str, Any]:
        """Return the intake report of a network, as it was given to `add_network`."""
        (name,) = self._network_row(fingerprint, "report")
        report: dict[str, Any] = json.loads(self._files.read(name))
        return report

    def raw(self, fingerprint: str) -> tuple[str, bytes] | None:
        """Return the name and the bytes of the file a network was read from, where they were kept."""
        name, content = self._network_row(fingerprint, "raw_name, raw")
        return None if content is None else (name, self._files.read(content))

    # The trail

    def save_clustering(self, entry: TrailEntry) -> TrailEntry:
        """Add a clustering to the trail of its network and return it with its time and place.

        The same clustering again keeps both, takes the new figures and, unless it is empty, the new name.
        """
        self._network_row(entry.fingerprint, "label")
        with self._database.change() as connection:
            connection.execute(
                """INSERT INTO clusterings VALUES (:id, :fingerprint, :settings, :figures, :name, :created_at,
                    (SELECT ifnull(max(turn), 0) + 1 FROM clusterings WHERE fingerprint = :fingerprint))
                ON CONFLICT (id) DO UPDATE SET settings = excluded.settings, figures = excluded.figures,
                    name = CASE excluded.name WHEN '' THEN name ELSE excluded.name END""",
                {
                    "id": entry.id,
                    "fingerprint": entry.fingerprint,
                    "settings": to_json(dict(entry.settings)),
                    "figures": to_json(dict(entry.figures)),
                    "name": entry.name,
                    "created_at": now(),
                },
            )
        return self._clustering(entry.id)

    def trail(self, fingerprint: str) -> list[TrailEntry]:
        """Return the clusterings of a network in the order in which they were first made."""
        found = self._database.rows(
            f"SELECT {CLUSTERING_COLUMNS} FROM clusterings WHERE fingerprint = ? ORDER BY turn",  # noqa: S608
            (fingerprint,),
        )
        return [trail_entry(row) for row in found]

    def clustering(self, clustering_id: str) -> TrailEntry | None:
        """Return one clustering of any trail, or None."""
        found = self._database.rows(f"SELECT {CLUSTERING_COLUMNS} FROM clusterings WHERE id = ?", (clustering_id,))  # noqa: S608
        return trail_entry(found[0]) if found else None

    def name_clustering(self, clustering_id: str, name: str) -> TrailEntry:
        """Give a clustering of the trail a name, or take it away with an empty one."""
        self._clustering(clustering_id)
        with self._database.change() as connection:
            connection.execute("UPDATE clusterings SET name = ? WHERE id = ?", (name, clustering_id))
        return self._clustering(clustering_id)

    def save_study(self, clustering_id: str, study: Study) -> None:
        """Keep a whole result under the id of its clustering."""
        self._keep_network_arrays(study.network)
        self.save_arrays(STUDY, clustering_id, study_to_arrays(study))
        self._studies.put(clustering_id, study)

    def study(self, clustering_id: str) -> Study | None:
        """Return a whole result, exactly as it was saved, or None where there is none.

        One that is damaged, or that another version of corymb wrote in another form, counts as none; the log says so.
        """
        at_hand = self._studies.get(clustering_id)
        if at_hand is not None:
            return at_hand
        arrays = self.arrays(STUDY, clustering_id)
        if arrays is None:
            return None
        try:
            study = study_from_arrays(arrays, self._any_network)
        except (KeyError, TypeError, CorymbError) as error:
            logger.warning("the result %s cannot be read (%s); it will be computed again", clustering_id, error)
            return None
        self._studies.put(clustering_id, study)
        return study

    # Notes

    def set_name(self, fingerprint: str, clustering_id: str, module: str, name: str) -> None:
        """Give a module (`M2`) a name, kept as typed; an empty one takes it away."""
        entry = self._clustering(clustering_id)
        if entry.fingerprint != fingerprint:
            raise WorkspaceError(f"clustering {clustering_id} is not one of this network")
        with self._database.change() as connection:
            if name:
                connection.execute(
                    """INSERT INTO module_names VALUES (?, ?, ?, ?)
                    ON CONFLICT (clustering, module) DO UPDATE SET name = excluded.name,
                        changed_at = excluded.changed_at""",
                    (clustering_id, module, name, now()),
                )
            else:
                connection.execute(
                    "DELETE FROM module_names WHERE clustering = ? AND module = ?", (clustering_id, module)
                )

    def names(self, clustering_id: str) -> dict[str, str]:
        """Return the names given to modules of a clustering, by module."""
        found = self._database.rows(
            "SELECT module, name FROM module_names WHERE clustering = ? ORDER BY length(module), module",
            (clustering_id,),
        )
        return {str(module): str(name) for module, name in found}

    def _network_row(self, fingerprint: str, columns: str) -> tuple[Any, ...]:
        found = self._database.rows(f"SELECT {columns} FROM networks WHERE fingerprint = ?", (fingerprint,))  # noqa: S608
        if not found:
            raise WorkspaceError(f"the workspace {self.folder} has no network {fingerprint[:12]}…; open its file again")
        return found[0]

    def _clustering(self, clustering_id: str) -> TrailEntry:
        entry = self.clustering(clustering_id)
        if entry is None:
            raise WorkspaceError(f"the workspace {self.folder} has no clustering {clustering_id}; make it again")
        return entry

    def _keep_network_arrays(self, network: Network) -> None:
        if self._networks.get(network.fingerprint) is None:
            self.save_arrays(NETWORK, network.fingerprint, network_to_arrays(network))

    def _load_network(self, fingerprint: str, label: str, provenance: Mapping[str, str]) -> Network:
        try:
            arrays = self._arrays(NETWORK, fingerprint)
        except WorkspaceError as error:
            raise WorkspaceError(f"{error}: open the network's own file again, and the trail is there again") from error
        if arrays is None:
            raise WorkspaceError(f"the workspace {self.folder} has no network {fingerprint[:12]}…; open its file again")
        return network_from_arrays(arrays, label, provenance)

    def _any_network(self, fingerprint: str) -> Network:
        """Return a network of the list, or one that only a study uses."""
        at_hand = self._networks.get(fingerprint)
        return at_hand if at_hand is not None else self._load_network(fingerprint, "network", {})


class _AtHand(Generic[Value]):
    """The few values used last; any thread may ask."""

    def __init__(self, most: int) -> None:
        self._most = most
        self._values: OrderedDict[str, Value] = OrderedDict()
        self._lock = threading.Lock()

    def get(self, key: str) -> Value | None:
        with self._lock:
            if key in self._values:
                self._values.move_to_end(key)
            return self._values.get(key)

    def put(self, key: str, value: Value) -> None:
        with self._lock:
            self._values[key] = value
            self._values.move_to_end(key)
            while len(self._values) > self._most:
                self._values.popitem(last=False)
