"""Chances of the states of a plant: against binomial tables and a count of every case."""

from __future__ import annotations

import datetime
import itertools

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from hydroyield.powerhouse.outages import Dated, Outages, Spread

YEAR = np.array([[31, 28, 31, 30, 31, 30, 31, 31, 30, 31, 30, 31]], dtype=float)


def chances(
    outages: Outages, counts: tuple[int, ...], month: int = 1
) -> dict[tuple[int, ...], float]:
    return {left: float(p[0, month - 1]) for left, p in outages.states(counts, YEAR)}


@pytest.mark.parametrize(
    ("units", "table"),
    [(2, [0.9025, 0.095, 0.0025]), (3, [0.857375, 0.135375, 0.007125, 0.000125])],
)
def test_forced_outages_are_binomial(units: int, table: list[float]) -> None:
    """Unavailability 0.05: chance that 0, 1, 2, ... units are out (binomial distribution)."""
    found = chances(Outages(forced_rate=0.05), (units,))
    assert [found[(units - out,)] for out in range(units + 1)] == pytest.approx(table)


def test_planned_days_take_one_unit_at_a_time() -> None:
    """Ten days of each of two units in the 31 days of August: 20 / 31 with one out."""
    found = Outages(planned=Spread(10, (8,)))
    assert chances(found, (2,), 8) == pytest.approx({(2,): 11 / 31, (1,): 20 / 31})
    assert chances(found, (2,), 7)[(2,)] == 1.0
    assert chances(found, (1, 1), 8) == pytest.approx(
        {(1, 1): 11 / 31, (0, 1): 10 / 31, (1, 0): 10 / 31}
    )


def test_what_all_units_share_takes_out_all() -> None:
    found = chances(Outages(forced_rate=0.1, common_rate=0.02), (2,))
    assert found == pytest.approx({(2,): 0.98 * 0.81, (1,): 0.98 * 0.18, (0,): 0.98 * 0.01 + 0.02})


def test_closed_months_and_days_of_standstill() -> None:
    outages = Outages(standstill=Spread(7, (2,)), closed=(1,))
    assert chances(outages, (1,), 1) == {(1,): 0.0, (0,): 1.0}
    assert chances(outages, (1,), 2) == pytest.approx({(1,): 0.75, (0,): 0.25})
    assert chances(outages, (1,), 3) == {(1,): 1.0, (0,): 0.0}


WINDOWS = (((8, 10), (8, 19)), ((2, 20), (3, 5)), ((12, 24), (1, 6)), ((5, 20), (5, 10)))


@pytest.mark.parametrize("window", WINDOWS)
@pytest.mark.parametrize("year", [2001, 2004])
def test_windows_of_the_year_against_the_calendar(
    window: tuple[tuple[int, int], tuple[int, int]], year: int
) -> None:
    """Every day of a year counted by its date."""
    lengths = YEAR.copy()
    lengths[0, 1] = 29 if year == 2004 else 28
    first, last = window
    counted = np.zeros(12)
    day = datetime.date(year, 1, 1)
    while day.year == year:
        at = (day.month, day.day)
        counted[day.month - 1] += (
            first <= at <= last if first <= last else at >= first or at <= last
        )
        day += datetime.timedelta(days=1)
    dated = Dated((window,))
    np.testing.assert_allclose(dated.chance(lengths)[0] * lengths[0], counted, atol=1e-12)
    if year == 2001:
        assert dated.days == pytest.approx(counted.sum())
        assert dated.months == tuple(int(m) + 1 for m in np.flatnonzero(counted))


def test_units_take_turns_in_a_window() -> None:
    """Ten days of August: one of two units is out on each, each of them on five."""
    found = Outages(planned=Dated((((8, 10), (8, 19)),), turns=2))
    assert chances(found, (2,), 8) == pytest.approx({(2,): 21 / 31, (1,): 10 / 31})
    assert found.planned is not None
    assert found.planned.days == pytest.approx(5)


def test_a_leap_february_has_a_day_more_for_the_same_days() -> None:
    leap = np.vstack([YEAR, YEAR])
    leap[1, 1] = 29
    chance = Spread(7, (2,)).chance(leap)
    assert chance[:, 1] == pytest.approx([7 / 28, 7 / 29])


@settings(max_examples=60, deadline=None)
@given(
    st.lists(st.integers(1, 3), min_size=1, max_size=3).map(tuple),
    st.floats(0, 0.3),
    st.floats(0, 0.1),
    st.integers(0, 3),
)
def test_every_unit_counted_one_by_one(
    counts: tuple[int, ...], rate: float, common: float, days: int
) -> None:
    """Each case of planned, forced and common outage by itself, as a tree."""
    group_of = [group for group, count in enumerate(counts) for _ in range(count)]
    total, one = len(group_of), days / 31
    expected: dict[tuple[int, ...], float] = {}
    for out in range(-1, total):
        planned = 1 - total * one if out < 0 else one
        left = [unit for unit in range(total) if unit != out]
        for up in itertools.product([True, False], repeat=len(left)):
            case = planned
            for runs in up:
                case *= 1 - rate if runs else rate
            state = [0] * len(counts)
            for unit, runs in zip(left, up, strict=True):
                state[group_of[unit]] += runs
            key = tuple(state)
            expected[key] = expected.get(key, 0.0) + (1 - common) * case
    nothing = (0,) * len(counts)
    expected[nothing] = expected.get(nothing, 0.0) + common
    outages = Outages(planned=Spread(days, (1,)), forced_rate=rate, common_rate=common)
    found = chances(outages, counts)
    assert sum(found.values()) == pytest.approx(1.0)
    for state, chance in expected.items():
        assert found.get(state, 0.0) == pytest.approx(chance, abs=1e-11)
