"""Stations: one file each; the registry is the order of the path.

A station module has `KEY`, `TITLE`, `state(view)` (`done`, `stale` or `empty`) and `render(view)`, which returns a
`Pane`. Callbacks of its own stand in `app/wiring/`, in a file of the same name.
"""

from __future__ import annotations

from app.stations import bridges, handover, intake, meaning, modules, portrait, trust

STATIONS = {station.KEY: station for station in (intake, portrait, modules, trust, bridges, meaning, handover)}
START = modules.KEY
