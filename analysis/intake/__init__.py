"""From a file to a network and a report on how it was read.

::

    opener ─▶ unpacking ─▶ decoding ─▶ formats ─▶ one format ─▶ merging ─▶ Network
    (bytes)    (gzip)       (text)     (which?)   (rows)        names   ─▶ IntakeReport

Only `opener` touches files. A format is one file and one line in `formats.FORMATS`.
"""

from __future__ import annotations

from analysis.intake.formats import FORMATS, Format
from analysis.intake.reading import parse_network, read_network
from analysis.intake.report import IntakeReport, Reading, Rejected, Role

__all__ = [
    "FORMATS",
    "Format",
    "IntakeReport",
    "Reading",
    "Rejected",
    "Role",
    "parse_network",
    "read_network",
]
