"""`membership.csv` and `modules.csv`."""

from __future__ import annotations

from analysis.handover.bundle import Bundle
from analysis.handover.csv_table import csv_bytes
from analysis.study import MEMBERSHIP_COLUMNS, MODULE_COLUMNS


def membership_file(bundle: Bundle) -> dict[str, bytes]:
    """Return `membership.csv`: one row per gene and module."""
    return {"membership.csv": csv_bytes(bundle.study.membership[list(MEMBERSHIP_COLUMNS)])}


def modules_file(bundle: Bundle) -> dict[str, bytes]:
    """Return `modules.csv`: one row per module."""
    return {"modules.csv": csv_bytes(bundle.study.module_table[list(MODULE_COLUMNS)])}
