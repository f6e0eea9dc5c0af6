"""A discrete power law fitted to the tail of whole numbers, and how well it fits.

After Clauset, Shalizi & Newman (2009), SIAM Review 51: the exponent by maximum likelihood (eq. 3.5), the beginning of
the tail where the distance of Kolmogorov and Smirnov is least (section 3.3), goodness of fit by refitting samples drawn
from the fit (section 4.1).
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Any

import numpy as np
from numpy.typing import NDArray

from analysis.network import FloatArray

SMALLEST_TAIL = 10
LOWEST, HIGHEST = 1.01, 25.0
"""Bounds of the exponent."""
SECTIONS = 60
GOLDEN = (np.sqrt(5.0) - 1) / 2
TABLE = 20_000
LARGEST = 1e15


@dataclass(frozen=True)
class PowerLaw:
    """A fitted power law, ``P(x) = x^(−α) / ζ(α, x_min)`` for whole numbers from `x_min` on.

    Attributes
    ----------
    x_min : int
        Where the tail begins.
    alpha : float
        Exponent.
    error : float
        Standard error of the exponent, from the curvature of the likelihood.
    tail, total : int
        Values in the tail; all positive values.
    distance : float
        Kolmogorov–Smirnov distance between tail and fit.
    p_value : float
        ``(r + 1) / (n + 1)``, `r` of `n` samples drawn from the fit lie as far from their own fit; NaN where none was
        drawn. Below 0.1 the power law is ruled out (Clauset, Shalizi & Newman 2009, section 4.2).
    samples : int
        `n`.
    """

    x_min: int
    alpha: float
    error: float
    tail: int
    total: int
    distance: float
    p_value: float = float("nan")
    samples: int = 0

    def judged(self, distances: NDArray[Any]) -> PowerLaw:
        """Return the fit with its goodness, from the distances of samples drawn from it."""
        reached = int((distances >= self.distance).sum())
        return replace(self, p_value=(reached + 1) / (len(distances) + 1), samples=len(distances))


def fit_power_law(values: NDArray[Any]) -> PowerLaw | None:
    """Fit a power law; None where no tail of ten values has two different ones.

    Parameters
    ----------
    values : int array
        Those below 1 are left out.
    """
    from scipy.special import zeta

    distinct, counts = np.unique(values[values >= 1], return_counts=True)
    numbers = distinct.astype(np.float64)
    left = counts[::-1].cumsum()[::-1]
    starts = np.flatnonzero(left[:-1] >= SMALLEST_TAIL)
    if not len(starts):
        return None
    logs = (counts * np.log(numbers))[::-1].cumsum()[::-1]
    alphas = _exponents(numbers[starts], left[starts], logs[starts])
    distances = _distances(numbers, left, starts, alphas)
    best = int(np.argmin(distances))
    start, alpha = int(starts[best]), float(alphas[best])
    step = 1e-4 * alpha
    around = np.log(zeta(np.array([alpha - step, alpha, alpha + step]), numbers[start]))
    curvature = float(around[0] - 2 * around[1] + around[2]) / step**2
    error = 1 / np.sqrt(left[start] * curvature) if curvature > 0 else float("nan")
    return PowerLaw(int(distinct[start]), alpha, float(error), int(left[start]), int(left[0]), float(distances[best]))


def _exponents(x_min: FloatArray, tail: NDArray[Any], logs: FloatArray) -> FloatArray:
    """Return the exponent of greatest likelihood for each beginning, by golden sections: the likelihood is concave."""
    from scipy.special import zeta

    def cost(alpha: FloatArray) -> FloatArray:
        found: FloatArray = tail * np.log(zeta(alpha, x_min)) + alpha * logs
        return found

    low, high = np.full(len(x_min), LOWEST), np.full(len(x_min), HIGHEST)
    one, two = high - GOLDEN * (high - low), low + GOLDEN * (high - low)
    cost_one, cost_two = cost(one), cost(two)
    for _ in range(SECTIONS):
        lower = cost_one < cost_two
        high, low = np.where(lower, two, high), np.where(lower, low, one)
        fresh = np.where(lower, high - GOLDEN * (high - low), low + GOLDEN * (high - low))
        cost_fresh = cost(fresh)
        one, two = np.where(lower, fresh, two), np.where(lower, one, fresh)
        cost_one, cost_two = np.where(lower, cost_fresh, cost_two), np.where(lower, cost_one, cost_fresh)
        if np.max(high - low) < 1e-7:
            break
    middle: FloatArray = (low + high) / 2
    return middle


def _distances(numbers: FloatArray, left: NDArray[Any], starts: NDArray[Any], alphas: FloatArray) -> FloatArray:
    """Return the greatest difference of the two distributions, over all whole numbers, for each beginning."""
    from scipy.special import zeta

    found = np.empty(len(starts))
    after = np.append(left[1:], 0)
    for place, start in enumerate(starts):
        alpha, tail = alphas[place], numbers[start:]
        whole = zeta(alpha, tail[0])
        reaching = zeta(alpha, tail) / whole
        beyond = reaching - tail**-alpha / whole
        found[place] = max(
            np.abs(reaching - left[start:] / left[start]).max(), np.abs(beyond - after[start:] / left[start]).max()
        )
    return found


def sample_distances(fit: PowerLaw, values: NDArray[Any], samples: int, seed: int) -> FloatArray:
    """Return how far samples drawn from a fit lie from their own fits, shape (samples,).

    Each sample has as many values: those of the tail are drawn from the power law, those below it from the values that
    were found there (Clauset, Shalizi & Newman 2009, section 4.1).
    """
    random = np.random.default_rng(seed)
    body = values[(values >= 1) & (values < fit.x_min)]
    found = np.empty(samples)
    for place in range(samples):
        tail = random.binomial(fit.total, fit.tail / fit.total)
        drawn = draw_power_law(fit.x_min, fit.alpha, tail, random)
        below = random.choice(body, fit.total - tail) if len(body) else np.zeros(0, np.int64)
        again = fit_power_law(np.concatenate([drawn, below]))
        found[place] = 0.0 if again is None else again.distance
    return found


def draw_power_law(x_min: int, alpha: float, count: int, random: np.random.Generator) -> NDArray[np.int64]:
    """Draw whole numbers from a power law, by inversion; far out by the continuous form (their eq. D.6)."""
    from scipy.special import zeta

    chance = 1.0 - random.random(count)
    numbers = np.arange(x_min, x_min + TABLE, dtype=np.float64)
    reaching = zeta(alpha, numbers) / zeta(alpha, float(x_min))
    # the last number that a share `chance` or more of the distribution reaches
    place = np.searchsorted(-reaching, -chance, side="right") - 1
    drawn = numbers[np.maximum(place, 0)]
    far = chance <= reaching[-1]
    stretch = (chance[far] / reaching[-1]) ** (-1 / (alpha - 1))
    drawn[far] = np.floor(np.minimum((numbers[-1] - 0.5) * stretch + 0.5, LARGEST))
    return drawn.astype(np.int64)
