"""What the command line writes: results to the standard output, progress and faults to the standard error."""

from __future__ import annotations

import time
from typing import TextIO

from analysis.progress import Progress, silent

REDRAW_SECONDS = 0.1
WIDEST_PHRASE = 60


class Terminal:
    """The two streams of a command.

    Parameters
    ----------
    out, err : text streams
        For results; for everything else.
    """

    def __init__(self, out: TextIO, err: TextIO) -> None:
        self.out = out
        self.err = err
        self._line = False
        self._drawn = 0.0

    def say(self, text: str) -> None:
        """Write one line of results."""
        self.clear()
        self.out.write(text + "\n")

    def note(self, text: str) -> None:
        """Write one line aside."""
        self.clear()
        self.err.write(text + "\n")
        self.err.flush()

    def progress(self, *, quiet: bool = False) -> Progress:
        """Return a progress callable: one line that is rewritten where somebody looks on, else silence."""
        return silent if quiet or not self.err.isatty() else self._draw

    def clear(self) -> None:
        """Wipe the line of progress."""
        if self._line:
            self.err.write("\r\x1b[K")
            self.err.flush()
            self._line = False

    def _draw(self, fraction: float, phrase: str) -> None:
        now = time.monotonic()
        if now - self._drawn < REDRAW_SECONDS:
            return
        self._drawn = now
        self._line = True
        self.err.write(f"\r\x1b[K{100 * min(max(fraction, 0.0), 1.0):3.0f} %  {phrase[:WIDEST_PHRASE]}")
        self.err.flush()
