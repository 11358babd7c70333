"""Duration curves: ranks of ties, order, and quantiles as the inverse of exceedance."""

from __future__ import annotations

from typing import get_args

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from hydroyield.river.duration import (
    PLOTTING_CONSTANT,
    Position,
    characteristic_discharge,
    exceedance_percent,
    quantile,
)

POSITIONS = get_args(Position)
few_digits = st.integers(0, 400).map(lambda n: n / 8)  # many ties, as on a gauge
samples = st.lists(few_digits, min_size=1, max_size=20).map(np.array)
quick = settings(max_examples=50, deadline=None)
positions = st.sampled_from(POSITIONS)


def naive_exceedance(values: np.ndarray, position: Position) -> list[float]:
    """Count how many are equalled or exceeded, one by one."""
    constant = {"weibull": 0, "blom": 3 / 8, "cunnane": 2 / 5, "gringorten": 0.44, "hazen": 1 / 2}
    a, n = constant[position], len(values)
    return [100 * (sum(w >= v for w in values) - a) / (n + 1 - 2 * a) for v in values]


def test_every_position_has_its_constant() -> None:
    assert set(PLOTTING_CONSTANT) == set(POSITIONS)


@quick
@given(values=samples, position=positions)
def test_exceedance_against_counting(values: np.ndarray, position: Position) -> None:
    np.testing.assert_allclose(
        exceedance_percent(values, position), naive_exceedance(values, position), rtol=1e-13
    )


def test_equal_values_share_the_largest_rank() -> None:
    # ranks 1, 2 to 4, 5 of five values: the three equal ones have rank 4 of 5 + 1
    assert exceedance_percent([7.0, 3.0, 3.0, 9.0, 3.0]).tolist() == pytest.approx(
        [200 / 6, 500 / 6, 500 / 6, 100 / 6, 500 / 6]
    )


@quick
@given(values=samples, position=positions)
def test_a_larger_discharge_is_exceeded_less_often(values: np.ndarray, position: Position) -> None:
    order = np.argsort(values)
    exceeded = exceedance_percent(values, position)[order]
    assert (np.diff(exceeded) <= 0).all()
    rises = np.diff(values[order]) > 0
    assert (np.diff(exceeded)[rises] < 0).all()


@quick
@given(values=samples, position=positions)
def test_quantile_is_the_inverse_of_exceedance(values: np.ndarray, position: Position) -> None:
    back = quantile(values, exceedance_percent(values, position), position)
    np.testing.assert_allclose(back, values, atol=1e-9)


@quick
@given(
    values=samples,
    percent=st.lists(st.floats(0, 100), min_size=2, max_size=8),
    position=positions,
)
def test_quantiles_fall_and_stay_inside(
    values: np.ndarray, percent: list[float], position: Position
) -> None:
    found = quantile(values, np.sort(percent), position)
    assert (np.diff(found) <= 1e-12).all()
    assert found.min() >= values.min()
    assert found.max() <= values.max()


@quick
@given(values=samples, percent=st.floats(0, 100), position=positions)
def test_quantile_against_two_neighbours(
    values: np.ndarray, percent: float, position: Position
) -> None:
    falling = sorted(values.tolist(), reverse=True)
    a, n = PLOTTING_CONSTANT[position], len(falling)
    rank = percent / 100 * (n + 1 - 2 * a) + a  # rank of that exceedance, not a whole number
    rank = min(max(rank, 1.0), float(n))
    upper = int(rank)
    lower = min(upper + 1, n)
    expected = falling[upper - 1] + (rank - upper) * (falling[lower - 1] - falling[upper - 1])
    assert float(quantile(values, percent, position)) == pytest.approx(expected, abs=1e-9)


@quick
@given(values=samples, percent=st.floats(0, 100))
def test_quantiles_scale_with_the_unit(values: np.ndarray, percent: float) -> None:
    litres = quantile(1000 * values, percent)
    np.testing.assert_allclose(litres, 1000 * quantile(values, percent), rtol=1e-12, atol=1e-12)


def test_a_single_value_holds_for_every_percentage() -> None:
    assert quantile([4.2], [0.0, 50.0, 100.0]).tolist() == [4.2, 4.2, 4.2]
    assert exceedance_percent([4.2]).tolist() == [50.0]


def test_the_shape_is_that_of_the_percentages() -> None:
    assert quantile([1.0, 2.0, 3.0], [[10.0, 50.0], [60.0, 90.0]]).shape == (2, 2)
    assert quantile([1.0, 2.0, 3.0], 50.0).shape == ()


@pytest.mark.parametrize("length", [365.25, 365.0])
def test_a_day_of_the_year_is_its_share_of_the_year(length: float) -> None:
    values = np.random.default_rng(3).gamma(2.0, 5.0, 800)
    wanted = [10, 90, 180, 347, 355]
    found = characteristic_discharge(values, wanted, length)
    expected = [float(quantile(values, 100 * day / length)) for day in wanted]
    assert found.tolist() == pytest.approx(expected, rel=1e-13)
    assert (np.diff(found) < 0).all()
