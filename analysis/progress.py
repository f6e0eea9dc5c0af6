"""Progress is a callable that defaults to silence; a stop is an exception raised from it."""

from __future__ import annotations

import time
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


def within(progress: Progress, seconds: float, error: Exception) -> Progress:
    """Raise the error once the work has taken longer; worker processes are then stopped, as when a user stops them."""
    end = time.monotonic() + seconds

    def report(fraction: float, phrase: str) -> None:
        if time.monotonic() > end:
            raise error
        progress(fraction, phrase)

    return report
