"""The one palette of modules: in reports, in figures, and on the map on screen (`assets/glue.js` has the same)."""

from __future__ import annotations

# Okabe & Ito 2008 without black and yellow first, then darker and browner companions; yellow is too pale for paper.
MODULE_COLOURS = (
    "#0072b2",
    "#e69f00",
    "#009e73",
    "#cc79a7",
    "#56b4e9",
    "#d55e00",
    "#5b4ea3",
    "#b3a800",
    "#3d7a2b",
    "#a0522d",
    "#1f9e9a",
    "#c2478b",
    "#7a6ff0",
    "#8c6d1f",
)
SMALL = "#9aa5a3"
SMALLEST_COLOURED = 5
"""Members from which a module has a colour of its own."""


def module_colour(position: int, size: int) -> str:
    """Return the colour of module `position` (0 is M1); grey for small ones."""
    return MODULE_COLOURS[position % len(MODULE_COLOURS)] if size >= SMALLEST_COLOURED else SMALL
