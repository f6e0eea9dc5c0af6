"""Callbacks: each reads ids, asks the desk, returns components. One file per subject."""

from __future__ import annotations

from dash import Dash

from app.desk import Desk
from app.wiring import (
    bridges,
    clientside,
    closeup,
    compare,
    meaning,
    modules,
    network,
    pane,
    picking,
    portrait,
    progress,
    trust,
)


def wire(app: Dash, desk: Desk) -> None:
    """Add all callbacks to the application."""
    for subject in (network, modules, progress, pane, picking, closeup, trust, bridges, portrait, compare, meaning):
        subject.wire(app, desk)
    clientside.wire(app)
