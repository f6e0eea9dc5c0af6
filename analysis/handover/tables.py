"""`membership.csv` and `modules.csv`, and the first of them in other forms."""

from __future__ import annotations

import io
from importlib.util import find_spec

from analysis.errors import SettingError
from analysis.handover.bundle import Bundle
from analysis.handover.csv_table import csv_bytes
from analysis.study import MEMBERSHIP_COLUMNS, MODULE_COLUMNS


def membership_file(bundle: Bundle) -> dict[str, bytes]:
    """Return `membership.csv`: one row per gene and module."""
    return {"membership.csv": csv_bytes(bundle.study.membership[list(MEMBERSHIP_COLUMNS)])}


def modules_file(bundle: Bundle) -> dict[str, bytes]:
    """Return `modules.csv`: one row per module."""
    return {"modules.csv": csv_bytes(bundle.study.module_table[list(MODULE_COLUMNS)])}


def tsv_file(bundle: Bundle) -> dict[str, bytes]:
    """Return `membership.tsv`: the same with tabs."""
    return {"membership.tsv": csv_bytes(bundle.study.membership[list(MEMBERSHIP_COLUMNS)], "\t")}


def parquet_file(bundle: Bundle) -> dict[str, bytes]:
    """Return `membership.parquet`, names as they are.

    Raises
    ------
    SettingError
        Where pyarrow, which writes this form, is not installed: it is no dependency of corymb.
    """
    check_parquet()
    target = io.BytesIO()
    bundle.study.membership[list(MEMBERSHIP_COLUMNS)].to_parquet(target, engine="pyarrow", index=False)
    return {"membership.parquet": target.getvalue()}


def check_parquet() -> None:
    """Raise `SettingError` where no Parquet can be written here."""
    if not can_write_parquet():
        raise SettingError(
            "Parquet is written by pyarrow, which is not installed here; pip install pyarrow, or take CSV"
        )


def can_write_parquet() -> bool:
    """Tell whether pyarrow is installed."""
    return find_spec("pyarrow") is not None
