"""Mass curve, and duration curves of single years and months."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from hydroyield.river.annual_curves import annual_curves, monthly_curves
from hydroyield.river.duration import quantile
from hydroyield.river.storage import mass_curve

DAY = 86400


def days(count: int) -> np.ndarray:
    return np.arange(np.datetime64("2001-01-01"), np.datetime64("2001-01-01") + count)


def smallest_reservoir(inflow: list[float]) -> float:
    """Capacity that delivers the mean at all times and spills nothing, by simulation [m3].

    A reservoir that starts so full that it just never runs dry; how full does it get?
    """
    mean = sum(inflow) / len(inflow)
    level, lowest = 0.0, 0.0
    for q in inflow:
        level += (q - mean) * DAY
        lowest = min(lowest, level)
    level = fullest = -lowest
    for q in inflow:
        level += (q - mean) * DAY
        fullest = max(fullest, level)
    return fullest


@settings(max_examples=50, deadline=None)
@given(st.lists(st.integers(0, 50).map(float), min_size=1, max_size=60))
def test_storage_against_a_simulated_reservoir(inflow: list[float]) -> None:
    found = mass_curve(days(len(inflow)), np.array(inflow))
    assert found.storage == pytest.approx(smallest_reservoir(inflow), abs=1e-3)
    assert found.departure[-1] == pytest.approx(0, abs=1e-3)


def test_a_square_wave_by_hand() -> None:
    """Ten days at 3, ten at 1: the mean is 2, and ten days x 1 m3/s are 864 000 m3."""
    found = mass_curve(days(20), np.repeat([3.0, 1.0], 10))
    assert (found.mean, found.storage) == (2.0, 864_000.0)
    assert found.highest == days(20)[9]
    assert found.filled_days == 0


def test_missing_days_count_as_the_mean() -> None:
    wave = np.repeat([3.0, np.nan, 1.0], 10)
    found = mass_curve(days(30), wave)
    assert (found.mean, found.storage, found.filled_days) == (2.0, 864_000.0, 10)


# --- curves -------------------------------------------------------------------------------------

YEAR = np.repeat([2001, 2002, 2003, 2004], 10)
FLOW = np.concatenate([np.arange(1.0, 11), np.arange(2.0, 12), np.arange(5.0, 15), [np.nan] * 10])
PERCENT = np.array([10.0, 50.0, 90.0])


def test_each_year_has_the_curve_of_its_own_days() -> None:
    curves = annual_curves(YEAR, FLOW, [2003, 2001, 2002], PERCENT)
    assert curves.years.tolist() == [2001, 2002, 2003]
    for row, start in zip(curves.discharge, (1, 2, 5), strict=True):
        np.testing.assert_allclose(row, quantile(np.arange(start, start + 10.0), PERCENT))


def test_bands_median_and_position() -> None:
    curves = annual_curves(YEAR, FLOW, [2001, 2002, 2003], PERCENT)
    low, high = curves.band(1.0)
    np.testing.assert_array_equal(low, curves.discharge[0])
    np.testing.assert_array_equal(high, curves.discharge[2])
    np.testing.assert_array_equal(curves.median(), curves.discharge[1])
    assert [curves.position(year) for year in (2001, 2002, 2003)] == pytest.approx(
        [1 / 3, 2 / 3, 1]
    )
    inner = curves.band(0.5)  # the quarter and three quarters of three years, linear between them
    np.testing.assert_allclose(inner[0], (curves.discharge[0] + curves.discharge[1]) / 2)


def test_no_years_no_curves() -> None:
    assert annual_curves(YEAR, FLOW, [], PERCENT).discharge.shape == (0, 3)


def test_months_without_a_value_are_nan() -> None:
    month = np.repeat([1, 2], 20)
    curves = monthly_curves(month, FLOW, PERCENT)
    np.testing.assert_allclose(curves[0], quantile(FLOW[:20], PERCENT))
    np.testing.assert_allclose(curves[1], quantile(FLOW[20:30], PERCENT))
    assert np.isnan(curves[2:]).all()
