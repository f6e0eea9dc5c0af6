"""Other distributions on the same tail, and which of two fits better.

All are taken over the whole numbers from `x_min` on, as the power law is (Clauset, Shalizi & Newman 2009, Table 2.1).
Two are compared by the ratio of their likelihoods with the test of Vuong (1989), Econometrica 57; the power law is a
case of the truncated one, and these two are compared by the χ² distribution of twice the ratio (Wilks 1938).
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from analysis.network import FloatArray

DIRECT_TERMS = 2_000
REACH = 60.0
LEVEL = 0.1


@dataclass(frozen=True)
class Comparison:
    """Two distributions on one tail.

    Attributes
    ----------
    first, second : str
        `power law`, `log-normal`, `exponential`, `truncated power law`.
    log_ratio : float
        Log-likelihood of the first less that of the second; positive where the first fits better.
    p_value : float
        Chance of so large a ratio, of either sign, if both fitted equally well.
    """

    first: str
    second: str
    log_ratio: float
    p_value: float

    @property
    def better(self) -> str:
        """The one that fits better at the level 0.1; empty where the data do not tell."""
        if not self.p_value < LEVEL:
            return ""
        return self.first if self.log_ratio > 0 else self.second


def compare_on_tail(values: NDArray[Any], x_min: int, alpha: float) -> tuple[Comparison, ...]:
    """Compare the power law with the other three, and the log-normal with the exponential.

    Parameters
    ----------
    values : int array
        Those below `x_min` are left out.
    """
    distinct, counts = np.unique(values[values >= x_min], return_counts=True)
    numbers = distinct.astype(np.float64)
    power = log_power_law(numbers, x_min, alpha)
    normal = _fit_log_normal(numbers, counts)
    decay = log_exponential(numbers, x_min, counts)
    cut = _fit_truncated(numbers, counts, alpha)
    return (
        _vuong("power law", "log-normal", power, normal, counts),
        _vuong("power law", "exponential", power, decay, counts),
        _nested("power law", "truncated power law", power, cut, counts),
        _vuong("log-normal", "exponential", normal, decay, counts),
    )


def log_power_law(numbers: FloatArray, x_min: float, alpha: float) -> FloatArray:
    """Return ``−α ln x − ln ζ(α, x_min)``."""
    from scipy.special import zeta

    found: FloatArray = -alpha * np.log(numbers) - np.log(zeta(alpha, float(x_min)))
    return found


def log_exponential(numbers: FloatArray, x_min: float, counts: NDArray[Any]) -> FloatArray:
    """Return ``ln(1 − e^(−λ)) − λ(x − x_min)`` at the λ of greatest likelihood, ``ln(1 + 1 / (mean − x_min))``."""
    mean = float(np.average(numbers, weights=counts))
    rate = np.log1p(1 / (mean - x_min))
    found: FloatArray = np.log(-np.expm1(-rate)) - rate * (numbers - x_min)
    return found


def log_log_normal(numbers: FloatArray, mu: float, sigma: float) -> FloatArray:
    """Return the log of a log-normal's share between ``x − ½`` and ``x + ½``, of all that lies above ``x_min − ½``.

    `numbers` begins with `x_min`.
    """
    from scipy.special import log_ndtr

    low = log_ndtr(-(np.log(numbers - 0.5) - mu) / sigma)
    high = log_ndtr(-(np.log(numbers + 0.5) - mu) / sigma)
    with np.errstate(divide="ignore"):
        found: FloatArray = low + np.log(-np.expm1(np.minimum(high - low, 0.0))) - low[0]
    return found


def log_truncated(numbers: FloatArray, alpha: float, rate: float) -> FloatArray:
    """Return ``−α ln x − λx`` less the log of its sum over the whole numbers from `x_min` on.

    `numbers` begins with `x_min`. The sum is taken term by term for the first 2,000, then as the Euler–Maclaurin
    formula has it.
    """
    x_min = numbers[0]
    terms = np.arange(x_min, x_min + DIRECT_TERMS)
    end = x_min + DIRECT_TERMS
    shift = -alpha * np.log(x_min) - rate * x_min
    direct = np.exp(-alpha * np.log(terms) - rate * terms - shift).sum()
    # the rest as an integral over t = ln(x / end), by Gauss and Legendre
    nodes, weights = _LEGENDRE
    t = REACH / 2 * (nodes + 1)
    inner = np.exp((1 - alpha) * t + (1 - alpha) * np.log(end) - rate * end * np.exp(t) - shift)
    last = np.exp(-alpha * np.log(end) - rate * end - shift)
    rest = REACH / 2 * float(weights @ inner) + last / 2 + last * (alpha / end + rate) / 12
    found: FloatArray = -alpha * np.log(numbers) - rate * numbers - shift - np.log(direct + rest)
    return found


_LEGENDRE = np.polynomial.legendre.leggauss(300)


def _fit_log_normal(numbers: FloatArray, counts: NDArray[Any]) -> FloatArray:
    from scipy.optimize import minimize

    logs = np.log(numbers)
    mean = float(np.average(logs, weights=counts))
    spread = float(np.sqrt(np.average((logs - mean) ** 2, weights=counts))) or 1.0

    def cost(parts: FloatArray) -> float:
        mu, sigma = float(parts[0]), float(np.exp(parts[1]))
        if abs(mu) > 100 or not 1e-3 < sigma < 100:
            return 1e300
        total = -float(counts @ log_log_normal(numbers, mu, sigma))
        return total if np.isfinite(total) else 1e300

    starts = [(mean, np.log(spread)), (mean - 3 * spread, np.log(2 * spread))]
    found = [minimize(cost, np.array(start), method="Nelder-Mead", options=_PATIENCE) for start in starts]
    best = min(found, key=lambda each: float(each.fun))
    return log_log_normal(numbers, float(best.x[0]), float(np.exp(best.x[1])))


def _fit_truncated(numbers: FloatArray, counts: NDArray[Any], alpha: float) -> FloatArray:
    """Return the log of the fitted truncated power law; the rate is 0 or more, so that it never fits worse."""
    from scipy.optimize import minimize

    mean = float(np.average(numbers, weights=counts))

    def cost(parts: FloatArray) -> float:
        exponent, rate = float(parts[0]), float(np.exp(parts[1]))
        if not -5 < exponent < 30 or rate > 50:
            return 1e300
        total = -float(counts @ log_truncated(numbers, exponent, rate))
        return total if np.isfinite(total) else 1e300

    starts = [(alpha, np.log(0.1 / mean)), (max(alpha - 1, 0.1), np.log(1 / mean))]
    found = [minimize(cost, np.array(start), method="Nelder-Mead", options=_PATIENCE) for start in starts]
    best = min(found, key=lambda each: float(each.fun))
    bare = log_truncated(numbers, alpha, 0.0) if alpha > 1.5 else log_power_law(numbers, numbers[0], alpha)
    if -float(counts @ bare) <= best.fun:
        return bare
    return log_truncated(numbers, float(best.x[0]), float(np.exp(best.x[1])))


_PATIENCE: Any = {"maxiter": 400, "xatol": 1e-5, "fatol": 1e-7}


def _vuong(first: str, second: str, one: FloatArray, other: FloatArray, counts: NDArray[Any]) -> Comparison:
    """Compare by ``|R| / (σ √(2n))`` with the error function (Clauset, Shalizi & Newman 2009, eq. C.6)."""
    from scipy.special import erfc

    difference = one - other
    total = int(counts.sum())
    ratio = float(counts @ difference)
    spread = float(np.sqrt(counts @ (difference - ratio / total) ** 2 / total))
    p_value = float(erfc(abs(ratio) / (spread * np.sqrt(2 * total)))) if spread > 0 else 1.0
    return Comparison(first, second, ratio, p_value)


def _nested(first: str, second: str, one: FloatArray, other: FloatArray, counts: NDArray[Any]) -> Comparison:
    from scipy.special import chdtrc

    ratio = min(float(counts @ (one - other)), 0.0)
    return Comparison(first, second, ratio, float(chdtrc(1, -2 * ratio)))
