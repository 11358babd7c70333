"""Duration curves of single years and months."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from hydroyield.river.annual_curves import AnnualCurves, annual_curves, monthly_curves
from hydroyield.river.duration import quantile

PERCENT = np.array([10.0, 50.0, 90.0])
YEARS = st.lists(
    st.lists(st.integers(0, 40).map(float), min_size=5, max_size=5), min_size=1, max_size=8
)


def curves_of(years: list[list[float]]) -> AnnualCurves:
    names = np.arange(2001, 2001 + len(years))
    return annual_curves(np.repeat(names, 5), np.array(years).ravel(), names.tolist(), PERCENT)


@settings(max_examples=50, deadline=None)
@given(YEARS)
def test_wider_bands_hold_narrower_ones(years: list[list[float]]) -> None:
    curves = curves_of(years)
    (low, high), (inner_low, inner_high) = curves.band(0.9), curves.band(0.3)
    assert (low <= inner_low).all()
    assert (inner_low <= curves.median() + 1e-9).all()
    assert (curves.median() <= inner_high + 1e-9).all()
    assert (inner_high <= high).all()
    np.testing.assert_allclose(curves.band(0.0), [curves.median()] * 2)


@settings(max_examples=50, deadline=None)
@given(YEARS)
def test_position_against_counting(years: list[list[float]]) -> None:
    curves = curves_of(years)
    means = [sum(row) for row in curves.discharge.tolist()]
    for year, own in zip(curves.years.tolist(), means, strict=True):
        expected = sum(mean <= own + 1e-9 for mean in means) / len(means)
        assert curves.position(year) == pytest.approx(expected)


@pytest.mark.parametrize("count", [1, 2])
def test_a_year_without_a_curve_has_no_position(count: int) -> None:
    curves = curves_of([[1.0, 2.0, 3.0, 4.0, 5.0]] * count)
    with pytest.raises(ValueError, match="2050 has no duration curve"):
        curves.position(2050)


YEAR = np.repeat([2001, 2002, 2003, 2004], 10)
FLOW = np.concatenate([np.arange(1.0, 11), np.arange(2.0, 12), np.arange(5.0, 15), [np.nan] * 10])


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
