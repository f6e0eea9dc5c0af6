"""The portrait of a network as a whole, before modules come into it; one file a subject."""

from __future__ import annotations

from analysis.portrait.portrait import Portrait, PortraitSettings, run_portrait

__all__ = ["Portrait", "PortraitSettings", "run_portrait"]
