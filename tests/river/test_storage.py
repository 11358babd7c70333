"""Mass curve: steady flow, a sine in closed form, and a search for the smallest reservoir."""

from __future__ import annotations

from itertools import accumulate
from math import pi

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from hydroyield.river.storage import mass_curve

DAY = 86400  # s
INFLOWS = st.lists(st.integers(0, 8), min_size=1, max_size=12)


def days(count: int) -> np.ndarray:
    return np.arange(np.datetime64("2001-01-01"), np.datetime64("2001-01-01") + count)


def survives(inflow: list[int], capacity: int, start: int) -> bool:
    """Whether a reservoir delivers the mean without running dry or spilling.

    Water in m3/s days, times the number of days, so that everything is a whole number.
    """
    changes = [len(inflow) * q - sum(inflow) for q in inflow]
    return all(0 <= level <= capacity for level in accumulate(changes, initial=start))


def searched_capacity(inflow: list[int]) -> float:
    """Smallest capacity for which any start survives, by trying all [m3]."""
    capacity = 0
    while not any(survives(inflow, capacity, start) for start in range(capacity + 1)):
        capacity += 1
    return capacity / len(inflow) * DAY


@settings(max_examples=40, deadline=None)
@given(INFLOWS)
def test_storage_is_the_smallest_reservoir_of_a_search(inflow: list[int]) -> None:
    found = mass_curve(days(len(inflow)), np.array(inflow, dtype=float))
    assert found.storage == pytest.approx(searched_capacity(inflow), abs=1e-3)


@pytest.mark.parametrize("flow", [0.0, 0.1, 2.0, 123.456])
def test_a_steady_river_needs_no_storage(flow: float) -> None:
    found = mass_curve(days(3653), np.full(3653, flow))
    assert found.mean == pytest.approx(flow)
    assert found.storage == pytest.approx(0, abs=1e-6 * DAY)


def test_a_sine_in_closed_form() -> None:
    """Q = m + a sin(2 pi t / T): half a wave above the mean holds a T / pi."""
    period, height = 360, 2.0
    wave = 5 + height * np.sin(2 * pi * (np.arange(3 * period) + 0.5) / period)
    found = mass_curve(days(3 * period), wave)
    assert found.storage == pytest.approx(height * period * DAY / pi, rel=1e-4)


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


def test_the_curve_stands_lowest_after_a_dry_start() -> None:
    found = mass_curve(days(20), np.repeat([1.0, 3.0], 10))
    assert found.departure[9] == found.departure.min() == -864_000
    assert (found.lowest, found.highest) == (days(20)[9], days(20)[19])


def test_a_record_without_a_value() -> None:
    with pytest.raises(ValueError, match="a day with a value"):
        mass_curve(days(3), np.full(3, np.nan))
