"""The folder that remembers: networks, trails, notes, computed arrays, and the jobs that did not end."""

from __future__ import annotations

from app.workspace.entries import NetworkEntry, TrailEntry, UnfinishedJob, clustering_id
from app.workspace.errors import WorkspaceError
from app.workspace.store import default_folder
from app.workspace.workspace import Workspace

__all__ = [
    "NetworkEntry",
    "TrailEntry",
    "UnfinishedJob",
    "Workspace",
    "WorkspaceError",
    "clustering_id",
    "default_folder",
]
