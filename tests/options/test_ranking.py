"""Marginal energy, the frontier and the best by several aims: by hand, and by plain search."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from hydroyield.options.combination import Combination
from hydroyield.options.option import Option
from hydroyield.options.ranking import (
    Aim,
    Limits,
    choose,
    energy_aims,
    frontier,
    marginal_energy,
)

HOURS = 8760.0


def option(number: int, capacity: float, energy: float, units: int = 1) -> Option:
    """An option of so many kW that makes so many MWh in its one year."""
    return Option(
        number=number,
        combination=Combination(0, (1 / units,) * units, capacity / 10),
        type="kaplan",
        machine="kaplan",
        installed_capacity=capacity,
        rated_head=3.0,
        energy_by_month=np.full((1, 12), energy / 12),
        hours=HOURS,
        used_share=0.5,
        standing_hours=100.0,
        sizes=(),
        notes=(),
    )


def test_marginal_energy_by_hand() -> None:
    """100 to 150 kW brings 100 MWh: 2000 kWh for each kW; other kinds do not come between."""
    options = [option(1, 150, 700), option(2, 100, 600), option(3, 120, 650, units=2)]
    found = marginal_energy(options)
    assert found[0] == pytest.approx(2000)
    assert found[1:] == [None, None]


def test_two_of_one_capacity_have_no_marginal_energy() -> None:
    assert marginal_energy([option(1, 100, 600), option(2, 100, 610)]) == [None, None]


POINTS = st.lists(st.tuples(st.integers(0, 6), st.integers(0, 6)), min_size=1, max_size=12)


@settings(max_examples=200, deadline=None)
@given(POINTS)
def test_frontier_against_all_pairs(points: list[tuple[int, int]]) -> None:
    def beats(one: tuple[int, int], other: tuple[int, int]) -> bool:
        no_worse = one[0] <= other[0] and one[1] >= other[1]
        return no_worse and one != other

    cost, gain = np.array(points, dtype=float).T
    expected = [not any(beats(other, point) for other in points) for point in points]
    assert frontier(cost, gain).tolist() == expected


def test_capacities_that_differ_by_rounding_are_one() -> None:
    """Of 100 kW twice, but for floating point, only the one with more energy is not beaten."""
    found = frontier(np.array([100.00000000003, 100.0, 90.0]), np.array([600.0, 599.0, 500.0]))
    assert found.tolist() == [True, False, True]
    assert Limits(maximum_capacity=100).allow(option(1, 100 * (1 + 1e-12), 600))


def test_the_largest_energy_within_limits() -> None:
    small, middle, large = option(1, 100, 600), option(2, 200, 900), option(3, 300, 1000)
    aim = energy_aims(None)[0]
    every = [small, middle, large]
    assert choose(aim, every, Limits()).option is large
    assert choose(aim, every, Limits(maximum_capacity=250)).option is middle
    # 900 MWh / (200 kW x 8760 h) = 0.514; 1000 / (300 x 8760) = 0.381
    assert choose(aim, every, Limits(minimum_capacity_factor=0.5)).option is middle
    assert choose(aim, every, Limits(minimum_capacity_factor=0.9)).option is None


def test_the_wanted_capacity_factor_stops_where_a_further_kw_reaches_less() -> None:
    """From 100 to 200 kW a further kW brings 3000 kWh, or 0.342 of 8760 h; then 1000, or 0.114."""
    every = [option(1, 100, 600), option(2, 200, 900), option(3, 300, 1000)]

    def chosen(wanted: float) -> int | None:
        found = choose(energy_aims(wanted)[1], every, Limits()).option
        return None if found is None else found.number

    assert [chosen(wanted) for wanted in (0.36, 0.33, 0.12, 0.11)] == [1, 2, 2, 3]


def test_an_aim_without_worth_chooses_nothing() -> None:
    nothing = Aim("nothing", "nothing", lambda _: None)
    assert choose(nothing, [option(1, 100, 600)], Limits()).option is None
