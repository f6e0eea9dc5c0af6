"""The hypergeometric distribution, for very many tests at once."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import NDArray

from analysis.network import FloatArray

NEGLIGIBLE = 1e-17
"""A term this small beside the sum no longer changes it."""


def upper_tail(overlap: NDArray[Any], module_size: NDArray[Any], set_size: NDArray[Any], background: int) -> FloatArray:
    """Return P(X ≥ overlap): how often chance alone gives such an overlap or a larger one (one-sided Fisher test).

    X counts the genes of a set of size `K` among `n` genes drawn without replacement from `N`:
    ``P(X = i) = C(K, i) C(N − K, n − i) / C(N, n)`` (Fisher 1935). The first term comes from log-gamma, the others by
    ``P(i + 1) / P(i) = (K − i)(n − i) / ((i + 1)(N − K − n + i + 1))``; above the mean they are summed upwards, below
    it downwards and taken from one, so that the sum always falls fast and nothing cancels.

    Parameters
    ----------
    overlap, module_size, set_size : int arrays, shape (tests,)
        `k`, `n`, `K`; all at most `background`.
    background : int
        `N`.

    Returns
    -------
    float64 array, shape (tests,)
        Equal to `scipy.stats.hypergeom.sf(k - 1, N, K, n)` within 1e-9 of the value.
    """
    # most tests repeat the same numbers: each triple is worked out once
    triples = np.stack([np.asarray(each, np.int64) for each in (overlap, module_size, set_size)])
    base = background + 1
    keys = (triples[0] * base + triples[1]) * base + triples[2]
    _, first, inverse = np.unique(keys, return_index=True, return_inverse=True)
    k, n, size = triples[:, first]
    low = np.maximum(0, n + size - background)
    high = np.minimum(n, size)
    above = k * background > n * size
    values = np.empty(len(k))
    values[above] = _sum(k[above], n[above], size[above], background, up=True)
    below = ~above
    values[below] = 1.0 - _sum(k[below] - 1, n[below], size[below], background, up=False)
    values[k <= low] = 1.0
    values[k > high] = 0.0
    tail: FloatArray = np.clip(values, 0.0, 1.0)[inverse]
    return tail


def _sum(start: NDArray[Any], n: NDArray[Any], size: NDArray[Any], background: int, *, up: bool) -> FloatArray:
    """Return the sum of P(i) from `start` on, upwards or downwards; 0 where `start` is no possible count."""
    low, high = np.maximum(0, n + size - background), np.minimum(n, size)
    total = np.zeros(len(start))
    active = np.flatnonzero((start >= low) & (start <= high))
    total[active] = term = np.exp(_log_probability(start[active], n[active], size[active], background))
    i = start[active].astype(np.float64)
    n, size = n.astype(np.float64), size.astype(np.float64)
    while len(active):
        drawn, marked = n[active], size[active]
        if up:
            term = term * (marked - i) * (drawn - i) / ((i + 1) * (background - marked - drawn + i + 1))
            i = i + 1
        else:
            term = term * i * (background - marked - drawn + i) / ((marked - i + 1) * (drawn - i + 1))
            i = i - 1
        total[active] += term
        going = term > NEGLIGIBLE * total[active]
        active, term, i = active[going], term[going], i[going]
    return total


def _log_probability(k: NDArray[Any], n: NDArray[Any], size: NDArray[Any], background: int) -> FloatArray:
    from scipy.special import gammaln

    logs = gammaln(np.arange(background + 1) + 1.0)  # log i! for every i

    def choose(total: Any, part: NDArray[Any]) -> Any:
        return logs[total] - logs[part] - logs[total - part]

    probability: FloatArray = choose(size, k) + choose(background - size, n - k) - choose(background, n)
    return probability
