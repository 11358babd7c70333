"""Trend, break and the error of a mean, against second ways to the same number."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy import stats

from hydroyield.river.trends import autocorrelation, break_in, standard_error_of_mean, trend

# few digits, so that ties occur
SERIES = st.lists(st.integers(0, 12).map(float), min_size=3, max_size=30)
quick = settings(max_examples=60, deadline=None)


def naive_trend(values: list[float]) -> tuple[float, float]:
    """S of Mann and Kendall by a double loop, and z with the variance corrected for ties."""
    n, s = len(values), 0
    for i in range(n):
        for j in range(i + 1, n):
            s += (values[j] > values[i]) - (values[j] < values[i])
    variance = n * (n - 1) * (2 * n + 5)
    for value in set(values):
        t = values.count(value)
        variance -= t * (t - 1) * (2 * t + 5)
    variance /= 18
    if s == 0 or variance == 0:
        return s, 0.0
    return s, (s - (1 if s > 0 else -1)) / variance**0.5


@quick
@given(SERIES)
def test_mann_kendall_against_a_double_loop(values: list[float]) -> None:
    _, z = naive_trend(values)
    found = trend(range(len(values)), values)
    assert found.z == pytest.approx(z, abs=1e-12)
    assert found.p_value == pytest.approx(2 * stats.norm.sf(abs(z)), abs=1e-12)


@quick
@given(SERIES)
def test_sen_slope_against_scipy(values: list[float]) -> None:
    years = np.arange(1990, 1990 + len(values))
    found = trend(years, values)
    assert found.slope == pytest.approx(stats.theilslopes(values, years).slope)
    assert found.intercept == pytest.approx(np.median(np.array(values) - found.slope * years))


def test_kendall_tau_of_scipy_sees_the_same_trend() -> None:
    """Without ties the asymptotic test of scipy differs by the continuity correction alone."""
    draw = np.random.default_rng(11)
    values = draw.normal(size=60) + 0.02 * np.arange(60)
    tau = stats.kendalltau(np.arange(60), values, method="asymptotic")
    s = tau.statistic * 60 * 59 / 2
    deviation = (60 * 59 * 125 / 18) ** 0.5
    assert trend(np.arange(60), values).z == pytest.approx((s - 1) / deviation)
    assert tau.pvalue == pytest.approx(2 * stats.norm.sf(s / deviation))


@quick
@given(SERIES.filter(lambda values: abs(naive_trend(values)[0]) > 1))
def test_ties_as_scipy_corrects_for_them(values: list[float]) -> None:
    """scipy's asymptotic test has the same variance, and no continuity correction."""
    s = abs(naive_trend(values)[0])
    years = range(len(values))
    expected = stats.kendalltau(years, values, method="asymptotic").pvalue
    without_correction = abs(trend(years, values).z) * s / (s - 1)
    assert 2 * stats.norm.sf(without_correction) == pytest.approx(expected, rel=1e-6)


def test_missing_years_count_as_time() -> None:
    found = trend([2000, 2001, 2011], [1.0, 2.0, 12.0])
    assert found.slope == pytest.approx(1.0)


def naive_break(values: list[float]) -> tuple[int, float]:
    """Pettitt's U_t by three loops."""
    n = len(values)
    best, where = -1.0, 0
    for t in range(1, n):
        u = sum(
            (values[j] > values[i]) - (values[j] < values[i]) for i in range(t) for j in range(t, n)
        )
        if abs(u) > best:
            best, where = abs(u), t
    return where, best


@quick
@given(SERIES)
def test_pettitt_against_three_loops(values: list[float]) -> None:
    where, k = naive_break(values)
    n = len(values)
    found = break_in(values)
    assert (found.position, found.statistic) == (where, k)
    assert found.p_value == pytest.approx(min(1, 2 * np.exp(-6 * k**2 / (n**3 + n**2))))
    assert found.before == pytest.approx(np.mean(values[:where]))
    assert found.after == pytest.approx(np.mean(values[where:]))


def test_a_step_is_found_where_it_is() -> None:
    draw = np.random.default_rng(1)
    values = np.concatenate([draw.normal(10, 1, 25), draw.normal(8, 1, 20)])
    found = break_in(values)
    assert abs(found.position - 25) <= 1
    assert found.p_value < 0.01
    assert break_in(draw.normal(size=40)).p_value > 0.05


@quick
@given(SERIES, st.integers(1, 2))
def test_autocorrelation_by_hand(values: list[float], lag: int) -> None:
    mean = sum(values) / len(values)
    top = sum((values[i] - mean) * (values[i + lag] - mean) for i in range(len(values) - lag))
    bottom = sum((v - mean) ** 2 for v in values)
    expected = top / bottom if bottom > 1e-12 else 0.0
    assert autocorrelation(values, lag) == pytest.approx(expected, abs=1e-9)


@pytest.mark.parametrize("value", [0.0, 0.1, 2.7, 123.456])
@pytest.mark.parametrize("count", [1, 3, 6, 25])
def test_equal_values_have_no_autocorrelation(value: float, count: int) -> None:
    """The mean of six times 0.1 is not 0.1 to the last digit."""
    assert autocorrelation([value] * count) == 0.0


def test_autocorrelation_with_itself_is_one() -> None:
    assert autocorrelation([1.0, 2.0, 4.0], lag=0) == pytest.approx(1.0)


@quick
@given(SERIES, st.sampled_from([1e-6, 1e3]))
def test_autocorrelation_does_not_depend_on_the_unit(values: list[float], factor: float) -> None:
    scaled = [factor * value for value in values]
    assert autocorrelation(scaled) == pytest.approx(autocorrelation(values), abs=1e-9)


def test_error_of_the_mean_of_independent_years() -> None:
    values = [3.0, 1.0, 3.0, 1.0, 3.0, 1.0]  # a negative autocorrelation counts as none
    found = standard_error_of_mean(values)
    assert found.autocorrelation < 0
    assert found.standard_error == pytest.approx(np.std(values, ddof=1) / 6**0.5)
    assert found.effective_count == 6


def test_error_of_the_mean_of_dependent_years_against_the_whole_covariance() -> None:
    """The variance of a mean is the sum of the covariance matrix over n^2."""
    draw = np.random.default_rng(8)
    values = np.zeros(40)
    for k in range(1, 40):
        values[k] = 0.6 * values[k - 1] + draw.normal()
    found = standard_error_of_mean(values)
    assert found.autocorrelation > 0.2
    apart = np.abs(np.subtract.outer(np.arange(40), np.arange(40)))
    covariance = values.var(ddof=1) * found.autocorrelation**apart
    assert found.standard_error == pytest.approx((covariance.sum() / 40**2) ** 0.5)


def test_too_few_values() -> None:
    with pytest.raises(ValueError, match="two values or more"):
        standard_error_of_mean([1.0])
    with pytest.raises(ValueError, match="two values or more"):
        break_in([1.0])
    assert trend([1], [2.0]).p_value == 1.0
    assert trend([1, 2], [2.0, 3.0]).slope == 1.0
