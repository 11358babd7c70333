"""A short record lengthened from a long one."""

from __future__ import annotations

import numpy as np
import pandas as pd
import pytest
from hypothesis import given
from hypothesis import strategies as st

from hydroyield.record import Record
from hydroyield.record.lengthening import lengthen, lengthening_checks, move1, period_check


def record(start: str, values: np.ndarray) -> Record:
    dates = pd.date_range(start, periods=len(values), freq="D")
    return Record.from_series(pd.Series(values, index=dates, dtype=float))


def two_rivers(days: int = 4000, noise: float = 0.3) -> tuple[np.ndarray, np.ndarray]:
    """Invented discharges of two like rivers."""
    draw = np.random.default_rng(7)
    season = 0.8 * np.cos(2 * np.pi * np.arange(days) / 365.25)
    weather = np.zeros(days)
    for day in range(1, days):
        weather[day] = 0.95 * weather[day - 1] + 0.3 * draw.normal()
    own = np.exp(0.2 + 1.2 * (season + weather) + noise * draw.normal(size=days))
    return own, np.exp(1.5 + season + weather)


# --- the line ------------------------------------------------------------------------------------


@given(st.integers(0, 10_000), st.integers(5, 60))
def test_mean_and_deviation_are_kept_exactly(seed: int, count: int) -> None:
    """Hirsch (1982): over the concurrent period MOVE.1 keeps both moments of y."""
    draw = np.random.default_rng(seed)
    x = draw.normal(3.0, 2.0, count)
    y = 0.4 * x + draw.normal(-1.0, 1.0, count)
    slope, intercept, r = move1(x, y)
    estimated = intercept + slope * x
    assert estimated.mean() == pytest.approx(y.mean(), abs=1e-12)
    assert estimated.std(ddof=1) == pytest.approx(y.std(ddof=1), rel=1e-12)
    # least squares shrinks the deviation to |r| of it
    fitted = np.polyval(np.polyfit(x, y, 1), x)
    assert fitted.std(ddof=1) == pytest.approx(abs(r) * y.std(ddof=1), rel=1e-9)


def test_the_line_falls_where_the_correlation_is_negative() -> None:
    x = np.array([1.0, 2.0, 3.0, 4.0])
    slope, intercept, r = move1(x, np.array([8.0, 7.0, 4.0, 1.0]))
    assert r < 0
    # by hand: s_y = sqrt(30/3), s_x = sqrt(5/3), means 5 and 2.5
    assert slope == pytest.approx(-np.sqrt(30 / 5))
    assert intercept == pytest.approx(5 + 2.5 * np.sqrt(6))


# --- what is filled ------------------------------------------------------------------------------


def test_an_exact_power_law_is_found_again() -> None:
    _, other = two_rivers(3000)
    own = 0.4 * other**1.3
    short = own.copy()
    short[:1500] = np.nan
    short[2000:2040] = np.nan
    found = lengthen(record("1990-01-01", short), record("1990-01-01", other))
    assert found.record.dates[0] == np.datetime64("1990-01-01")
    np.testing.assert_allclose(found.record.discharge, own, rtol=1e-9)
    assert found.correlation == pytest.approx(1.0)
    assert found.relations[0].slope == pytest.approx(1.3)
    np.testing.assert_array_equal(found.record.filled, np.isnan(short))


def test_measured_days_stay_as_they_are_and_only_the_rest_is_marked() -> None:
    own, other = two_rivers()
    short = own[2500:].copy()
    short[100:130] = np.nan
    measured = record("1996-11-04", short)  # 2500 days after the reference begins
    found = lengthen(measured, record("1990-01-01", other))
    assert found.record.dates.size == 4000
    filled = found.record.filled
    assert filled is not None
    assert filled.sum() == 2500 + 30
    kept = found.record.discharge[~filled]
    np.testing.assert_array_equal(kept, short[~np.isnan(short)])
    assert found.overlap == 1500 - 30


def test_seasons_have_lines_of_their_own() -> None:
    _, other = two_rivers(3000)
    dates = pd.date_range("1990-01-01", periods=3000, freq="D")
    winter = np.isin(dates.month, (12, 1, 2))
    own = np.where(winter, 2.0 * other, 0.5 * other**0.8)
    short = np.where(np.arange(3000) < 1000, np.nan, own)
    rivers = record("1990-01-01", short), record("1990-01-01", other)
    np.testing.assert_allclose(lengthen(*rivers, seasonal=True).record.discharge, own, rtol=1e-9)
    single = lengthen(*rivers).record.discharge
    assert np.abs(single[:1000] / own[:1000] - 1).max() > 0.2


def test_days_without_discharge_are_left_out_of_the_line_and_said() -> None:
    _, other = two_rivers(2000)
    own = 0.5 * other
    own[1500:1510] = 0.0  # dry at the site alone
    other = other.copy()
    other[[100, 200, 1800]] = 0.0
    own[1800] = 0.0
    short = np.where(np.arange(2000) < 1000, np.nan, own)
    found = lengthen(record("1990-01-01", short), record("1990-01-01", other))
    assert found.zero_days == 11
    assert found.relations[0].pairs == 1000 - 11
    assert found.record.discharge[100] == found.record.discharge[200] == 0.0
    assert found.record.discharge[101] == pytest.approx(0.5 * other[101])
    assert "reference_zero_days" in {c.name for c in lengthening_checks(found)}


def test_too_few_days_in_common_are_refused_with_a_remedy() -> None:
    own, other = two_rivers(400)
    with pytest.raises(ValueError, match=r"only 20 days .* use another reference"):
        lengthen(record("1991-01-01", own[:20]), record("1990-12-31", other[:21]))
    with pytest.raises(ValueError, match="only 0 days"):
        lengthen(record("2011-01-01", own), record("1990-12-31", other))
    with pytest.raises(ValueError, match=r"\(June to August\).* leave `seasonal:` out"):
        lengthen(record("1991-01-01", own[:90]), record("1991-01-01", other[:300]), seasonal=True)


def test_a_constant_record_is_refused() -> None:
    _, other = two_rivers(400)
    with pytest.raises(ValueError, match="never changes"):
        lengthen(record("1990-01-01", np.full(200, 2.0)), record("1990-01-01", other))


# --- checks --------------------------------------------------------------------------------------


def outcomes(found: object) -> dict[str, str]:
    return {check.name: check.outcome for check in lengthening_checks(found)}  # type: ignore[arg-type]


def test_a_good_reference_passes_and_a_poor_one_is_named() -> None:
    own, other = two_rivers(noise=0.05)
    good = lengthen(record("1993-01-01", own[1096:]), record("1990-01-01", other))
    assert set(outcomes(good).values()) == {"pass"}
    draw = np.random.default_rng(3)
    poor = lengthen(record("1990-01-01", own[:500]), record("1990-01-01", draw.permutation(other)))
    assert outcomes(poor)["reference_overlap"] == "warn"
    assert outcomes(poor)["reference_correlation"] in ("warn", "fail")
    against = lengthen(record("1990-01-01", own[:2000]), record("1990-01-01", 1 / other))
    assert outcomes(against)["reference_correlation"] == "fail"


def test_a_wet_period_is_named() -> None:
    _, other = two_rivers(4000, noise=0.05)
    factor = np.where(np.arange(4000) < 2000, 1.5, 1.0)
    reference = other * factor
    wet = lengthen(record("1990-01-01", 0.5 * reference[:2000]), record("1990-01-01", reference))
    check = period_check(wet)
    assert check.outcome == "warn"
    assert check.value == pytest.approx(reference[:2000].mean() / reference.mean())
    assert "wet" in check.message
    whole = lengthen(record("1990-01-01", 0.5 * reference), record("1990-01-01", reference))
    assert period_check(whole).outcome == "pass"
