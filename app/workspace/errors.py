"""What goes wrong with the folder that remembers."""

from __future__ import annotations

from analysis.errors import CorymbError


class WorkspaceError(CorymbError):
    """A workspace that cannot be opened, read or written; the message names the place and what to do."""
