"""The discrete power law, its rivals, and what is said of them.

The four data sets of Clauset, Shalizi & Newman (2009) are not shipped here; on them the same functions give the values
of their Table 6.1 (words 7, 1.95; terrorism 12, 2.4; blackouts 230,000, 2.3; flares 323, 1.79), which was seen once by
hand and cannot be repeated by the gate.
"""

from __future__ import annotations

import numpy as np
import pytest
from scipy import optimize, stats
from scipy.special import zeta

from analysis.portrait.alternatives import compare_on_tail, log_exponential, log_log_normal, log_truncated
from analysis.portrait.degree_distribution import degree_bins, degree_distribution
from analysis.portrait.power_law import draw_power_law, fit_power_law, sample_distances
from tests.graphs import lettered, random_network


def drawn(alpha: float, x_min: int, count: int, seed: int = 1) -> np.ndarray:
    return draw_power_law(x_min, alpha, count, np.random.default_rng(seed))


@pytest.mark.parametrize(("alpha", "x_min"), [(1.8, 1), (2.5, 1), (2.5, 6), (3.4, 20)])
def test_it_finds_the_exponent_that_samples_were_drawn_with(alpha: float, x_min: int):
    fit = fit_power_law(drawn(alpha, x_min, 20_000))
    assert fit is not None
    assert fit.alpha == pytest.approx(alpha, abs=4 * fit.error + 0.01)
    assert fit.x_min < 4 * x_min


def test_drawn_numbers_follow_the_law():
    values = drawn(2.2, 3, 50_000)
    numbers = np.arange(3, 40)
    expected = 50_000 * numbers**-2.2 / zeta(2.2, 3)
    seen = np.array([(values == number).sum() for number in numbers])
    chi = ((seen - expected) ** 2 / expected).sum()
    assert stats.chi2.sf(chi, len(numbers)) > 1e-4


def test_fit_is_that_of_a_search_by_brute_force():
    """Scan beginnings and compute each likelihood and distance by the formulas as they stand (eqs. 3.5 and 3.9)."""
    values = drawn(2.4, 4, 400, seed=3)
    best = (np.inf, 0, 0.0)
    for x_min in np.unique(values)[:-1]:
        tail = values[values >= x_min]
        if len(tail) < 10:
            break

        def cost(alpha: float, tail: np.ndarray = tail, x_min: int = x_min) -> float:
            return len(tail) * np.log(zeta(alpha, x_min)) + alpha * np.log(tail).sum()

        alpha = optimize.minimize_scalar(cost, bounds=(1.01, 25), method="bounded", options={"xatol": 1e-9}).x
        numbers = np.arange(x_min, tail.max() + 1)
        ours = np.array([(tail <= number).mean() for number in numbers])
        model = 1 - zeta(alpha, numbers + 1) / zeta(alpha, x_min)
        best = min(best, (float(np.abs(ours - model).max()), int(x_min), float(alpha)))
    fit = fit_power_law(values)
    assert fit is not None
    assert (fit.distance, fit.x_min, fit.alpha) == pytest.approx(best, rel=1e-4)
    assert fit.tail == (values >= fit.x_min).sum()


def test_standard_error_is_the_spread_of_fits():
    spread = np.std([fit.alpha for seed in range(60) if (fit := fit_tail(drawn(2.5, 1, 2_000, seed))) is not None])
    fit = fit_tail(drawn(2.5, 1, 2_000))
    assert fit is not None
    assert fit.error == pytest.approx(spread, rel=0.35)


def fit_tail(values: np.ndarray):
    """Fit with the beginning held: all small values are so many that the least distance is at the first."""
    fit = fit_power_law(values)
    return fit if fit is not None and fit.x_min == 1 else None


def test_goodness_of_fit_keeps_a_power_law_and_refuses_another():
    values = drawn(2.5, 2, 2_000)
    fit = fit_power_law(values)
    assert fit is not None
    assert fit.judged(sample_distances(fit, values, 40, 1)).p_value > 0.1
    rng = np.random.default_rng(2)
    other = np.concatenate([drawn(2.5, 2, 1_000), np.full(400, 9), rng.poisson(9, 600)])
    wrong = fit_power_law(other[other >= 2])
    assert wrong is not None
    assert wrong.judged(np.full(99, 0.0)).p_value == 0.01
    assert wrong.judged(np.full(99, 1.0)).p_value == 1.0


def test_too_few_different_values_have_no_fit():
    assert fit_power_law(np.array([], int)) is None
    assert fit_power_law(np.full(100, 3)) is None
    assert fit_power_law(np.array([0, 0, 1, 2])) is None
    assert "too few" in degree_distribution(lettered("ab bc")).sentence()


@pytest.mark.parametrize(("alpha", "rate", "x_min"), [(2.5, 1e-3, 1), (1.2, 1e-4, 5), (0.3, 0.01, 2), (3.0, 2.0, 1)])
def test_truncated_power_law_is_the_sum_of_its_terms(alpha: float, rate: float, x_min: int):
    numbers = np.arange(x_min, x_min + 1_000_000, dtype=float)
    direct = np.exp(-alpha * np.log(numbers) - rate * numbers).sum()
    found = log_truncated(numbers[:1], alpha, rate)[0]
    assert found == pytest.approx(-alpha * np.log(x_min) - rate * x_min - np.log(direct), rel=1e-9, abs=1e-11)


def test_other_laws_sum_to_one():
    numbers = np.arange(4, 200_000, dtype=float)
    counts = np.zeros(len(numbers), int)
    counts[[0, 3, 10]] = (30, 20, 3)
    assert np.exp(log_exponential(numbers, 4, counts)).sum() == pytest.approx(1)
    assert np.exp(log_log_normal(numbers, 1.5, 1.1)).sum() == pytest.approx(1)
    # the exponential over whole numbers is the geometric distribution
    mean = np.average(numbers, weights=counts)
    np.testing.assert_allclose(
        log_exponential(numbers[:50], 4, counts[:50]), stats.geom.logpmf(numbers[:50] - 3, 1 / (mean - 3))
    )


def test_comparisons_prefer_the_law_that_the_numbers_come_from():
    rng = np.random.default_rng(4)
    geometric = rng.geometric(0.1, 4_000) + 4
    by_name = {(each.first, each.second): each for each in compare_on_tail(geometric, 5, 2.0)}
    assert by_name["power law", "exponential"].better == "exponential"
    assert by_name["power law", "truncated power law"].better == "truncated power law"
    power = {(each.first, each.second): each for each in compare_on_tail(drawn(2.2, 5, 4_000), 5, 2.2)}
    assert power["power law", "exponential"].better == "power law"
    assert power["log-normal", "exponential"].better == "log-normal"
    assert power["power law", "log-normal"].better != "log-normal"
    assert power["power law", "truncated power law"].log_ratio <= 0
    lognormal = np.round(rng.lognormal(2.5, 0.5, 6_000)).astype(int)
    found = {(each.first, each.second): each for each in compare_on_tail(lognormal, 8, 2.5)}
    assert found["power law", "log-normal"].better == "log-normal"


def test_the_p_value_is_vuong_s():
    values = drawn(2.3, 2, 500)
    comparison = compare_on_tail(values, 2, 2.3)[1]
    counts = np.ones(len(values), int)
    numbers = values.astype(float)
    ours = -2.3 * np.log(numbers) - np.log(zeta(2.3, 2))
    differences = ours - log_exponential(numbers, 2, counts)
    score = differences.sum() / (differences.std() * np.sqrt(len(values)))
    assert comparison.log_ratio == pytest.approx(differences.sum())
    assert comparison.p_value == pytest.approx(2 * stats.norm.sf(abs(score)))


def test_counts_and_bins_hold_every_gene():
    network = random_network(2, nodes=200, edges=700)
    section = degree_distribution(network)
    assert section.genes.sum() == (network.degree > 0).sum()
    for degree, share in zip(section.degrees, section.reaching, strict=True):
        assert share == pytest.approx((network.degree >= degree).mean())
    borders = degree_bins(int(network.degree.max()))
    assert borders[0] == 1
    assert borders[-1] > network.degree.max() >= borders[-2]


def test_a_random_network_is_not_called_fat_tailed_or_scale_free():
    sentence = degree_distribution(random_network(1, nodes=600, edges=6_000)).sentence()
    assert "not" in sentence.split(";")[0]
    assert "scale-free" not in sentence
