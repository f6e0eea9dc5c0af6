"""A portrait handed over: JSON, tables, figures and a page."""

from __future__ import annotations

from analysis.handover.portrait.figures import PortraitFigure, portrait_figures
from analysis.handover.portrait.files import PortraitBundle, portrait_files

__all__ = ["PortraitBundle", "PortraitFigure", "portrait_figures", "portrait_files"]
