"""How figures and settings are written in the report."""

from __future__ import annotations

import math
from typing import Any

from analysis.intake.wording import counted

MISSING = "–"


def count(value: float, noun: str = "") -> str:
    """Return `1 gene`, `12,000 genes`, or the bare number."""
    return counted(int(value), noun) if noun else f"{int(value):,}"


def figure(value: Any, decimals: int = 2) -> str:
    """Return a figure with fixed decimals, a dash where it is missing."""
    return f"{value:,.{decimals}f}" if is_known(value) else MISSING


def chance(value: Any) -> str:
    """Return a p- or q-value with two significant digits."""
    return f"{value:.2g}" if is_known(value) else MISSING


def is_known(value: Any) -> bool:
    """Tell whether a figure was computed."""
    return value is not None and not (isinstance(value, float) and math.isnan(value))


def plain(value: Any) -> str:
    """Return a setting as it stands in the recipe."""
    if value is None:
        return MISSING
    if isinstance(value, float):
        return f"{value:g}" if float(f"{value:g}") == value else repr(value)
    return str(value)


def percent(share: float) -> str:
    """Return a share as `10 %`, not to be broken."""
    return f"{100 * share:.3g}\u00a0%"
