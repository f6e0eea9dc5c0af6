"""Progress is a callable that defaults to silence; a stop is an exception raised from it."""

from __future__ import annotations

from collections.abc import Callable

Progress = Callable[[float, str], None]
"""Takes a fraction in [0, 1] and a phrase; raises `analysis.errors.Cancelled` to stop the work."""


def silent(_fraction: float, _phrase: str) -> None:
    """Report nothing."""


def portion(progress: Progress, start: float, end: float) -> Progress:
    """Give a part of a longer work its own scale from 0 to 1 within `[start, end]` of the whole."""

    def report(fraction: float, phrase: str) -> None:
        progress(start + (end - start) * fraction, phrase)

    return report
