"""Corrections for many tests."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import NDArray

from analysis.network import FloatArray


def benjamini_hochberg(p_values: NDArray[Any], *, tests: int | None = None) -> FloatArray:
    """Return q-values: the smallest false discovery rate at which each test would be called.

    ``q_(i) = min over j ≥ i of p_(j) · m / j`` for the `m` tests in ascending order, at most 1 (Benjamini & Hochberg
    1995).

    Parameters
    ----------
    p_values : float array, shape (tests,)
        NaN where no test was made; such entries are not counted among the tests and stay NaN.
    tests : int, optional
        Number of tests made, where those that are not in `p_values` all had a p-value of one.

    Raises
    ------
    ValueError
        Where a p-value lies outside 0 to 1, or there are more p-values than `tests`.
    """
    p_values = np.asarray(p_values, np.float64)
    tested = np.flatnonzero(~np.isnan(p_values))
    made = p_values[tested]
    if np.any((made < 0) | (made > 1)):
        raise ValueError("p-values lie between 0 and 1")
    count = len(made) if tests is None else tests
    if count < len(made):
        raise ValueError("there are more p-values than tests")
    order = np.argsort(made, kind="stable")
    scaled = made[order] * (count / np.arange(1, len(made) + 1))
    q_values = np.full(p_values.shape, np.nan)
    q_values[tested[order]] = np.minimum(np.minimum.accumulate(scaled[::-1])[::-1], 1.0)
    return q_values
