"""Months, hydrological years and coverage, against the standard calendar and naive loops."""

from __future__ import annotations

import calendar
import datetime

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from hydroyield.river.years import (
    Calendar,
    MonthTable,
    count_months,
    month_days,
    months_in_order,
    span,
    usable_years,
)


def days(first: str, last: str) -> np.ndarray:
    return np.arange(first, np.datetime64(last) + 1, dtype="datetime64[D]")


def naive_year(day: datetime.date, start_month: int) -> int:
    """A hydrological year is named by the calendar year in which its last day lies."""
    last = day
    while (last + datetime.timedelta(days=1)).month != start_month or (
        last + datetime.timedelta(days=1)
    ).day != 1:
        last += datetime.timedelta(days=1)
    return last.year


@pytest.mark.parametrize("start_month", range(1, 13))
def test_calendar_agrees_with_the_standard_one(start_month: int) -> None:
    dates = days("1999-11-25", "2001-03-05")[::7]
    found = Calendar.of(dates, start_month)
    plain = dates.astype(object)
    assert found.month.tolist() == [day.month for day in plain]
    assert found.year.tolist() == [naive_year(day, start_month) for day in plain]


@pytest.mark.parametrize("start_month", range(1, 13))
def test_a_hydrological_year_starts_on_the_first_of_its_month(start_month: int) -> None:
    first = np.datetime64(f"1991-{start_month:02d}-01")
    before, on = Calendar.of(np.array([first - 1, first]), start_month).year
    assert on == before + 1
    assert on == (1991 if start_month == 1 else 1992)


def test_days_before_1970_have_their_own_month_and_year() -> None:
    dates = days("1899-12-30", "1900-03-02")
    found = Calendar.of(dates, 10)
    assert found.month.tolist() == [day.month for day in dates.astype(object)]
    assert set(found.year.tolist()) == {1900}
    assert (found.month == 2).sum() == 28  # 1900 was not a leap year


def test_months_in_order_start_with_the_first_of_the_year() -> None:
    dates = days("2001-01-01", "2001-01-02")
    october = [10, 11, 12, 1, 2, 3, 4, 5, 6, 7, 8, 9]
    assert months_in_order(Calendar.of(dates, 10).start_month) == october
    assert months_in_order(Calendar.of(dates, 1).start_month) == list(range(1, 13))


@pytest.mark.parametrize("start_month", range(1, 13))
@pytest.mark.parametrize("year", [1900, 1996, 2000, 2001, 2004, 2100])
def test_month_days_with_leap_years(year: int, start_month: int) -> None:
    months = np.arange(1, 13)
    found = month_days(np.full(12, year), months, start_month)
    expected = [
        calendar.monthrange(year - 1 if start_month > 1 and m >= start_month else year, m)[1]
        for m in months.tolist()
    ]
    assert found.tolist() == expected


@given(
    start=st.dates(datetime.date(1890, 1, 1), datetime.date(2090, 1, 1)),
    length=st.integers(1, 900),
    start_month=st.integers(1, 12),
    seed=st.integers(0, 2**32 - 1),
)
@settings(max_examples=30, deadline=None)
def test_count_months_against_a_loop(
    start: datetime.date, length: int, start_month: int, seed: int
) -> None:
    dates = np.datetime64(start) + np.arange(length)
    has_value = np.random.default_rng(seed).random(length) < 0.8
    table = count_months(Calendar.of(dates, start_month), has_value)
    counted: dict[tuple[int, int], int] = {}
    for day, present in zip(dates.astype(object), has_value, strict=True):
        year = day.year + (start_month > 1 and day.month >= start_month)
        counted[year, day.month] = counted.get((year, day.month), 0) + int(present)
    for row, year in enumerate(table.years.tolist()):
        assert table.valid[row].tolist() == [counted.get((year, m), 0) for m in range(1, 13)]
    first, last = min(counted)[0], max(counted)[0]
    assert table.years.tolist() == list(range(first, last + 1))
    # the February of a year that starts in January or February lies in the named year or before
    leap = [calendar.isleap(y - (start_month == 2)) for y in table.years.tolist()]
    assert (table.days.sum(axis=1) == 365 + np.array(leap)).all()
    assert (table.hours == 24 * table.days).all()


def test_a_break_of_years_leaves_rows_of_zeros() -> None:
    dates = np.concatenate([days("1990-01-01", "1990-01-31"), days("1993-01-01", "1993-01-31")])
    table = count_months(Calendar.of(dates, 1), np.ones(dates.size, bool))
    assert table.years.tolist() == [1990, 1991, 1992, 1993]
    assert table.valid.sum(axis=1).tolist() == [31, 0, 0, 31]


def one_year(valid_of_month: dict[int, int]) -> MonthTable:
    """The calendar year 2001, complete but for the months named."""
    lengths = np.array([calendar.monthrange(2001, m)[1] for m in range(1, 13)])
    valid = np.array([valid_of_month.get(m, lengths[m - 1]) for m in range(1, 13)])
    return MonthTable(np.array([2001]), lengths[None], valid[None])


@pytest.mark.parametrize(
    ("month", "coverage", "least"),
    # the least whole number of days not below the share: 0.9 of 30, 31 and 28 is 27, 27.9 and 25.2
    [
        (4, 0.9, 27),
        (1, 0.9, 28),
        (2, 0.9, 26),
        (4, 0.7, 21),
        (4, 1.0, 30),
        (1, 0.5, 16),
        (6, 0.1, 3),
    ],
)
def test_coverage_at_its_edge(month: int, coverage: float, least: int) -> None:
    used, reasons = usable_years(one_year({month: least}), coverage, 1)
    assert used.tolist() == [True]
    assert reasons == {}
    used, reasons = usable_years(one_year({month: least - 1}), coverage, 1)
    assert used.tolist() == [False]
    assert list(reasons) == ["2001"]


@settings(max_examples=40, deadline=None)
@given(
    share=st.integers(1, 100),
    valid=st.lists(st.integers(0, 28), min_size=12, max_size=12),
)
def test_coverage_in_whole_numbers(share: int, valid: list[int]) -> None:
    table = one_year(dict(enumerate(valid, start=1)))
    used, _ = usable_years(table, share / 100, 1)
    lengths = table.days[0].tolist()
    assert used[0] == all(100 * v >= share * n for v, n in zip(valid, lengths, strict=True))


def test_a_month_without_any_value_is_never_enough() -> None:
    used, _ = usable_years(one_year({7: 0}), 0.0, 1)
    assert used.tolist() == [False]


def test_the_reason_names_the_months_in_the_order_of_the_year() -> None:
    _, reasons = usable_years(one_year({2: 3, 11: 0}), 0.9, 10)
    assert reasons["2001"] == "too few days with a value: November 0 of 30, February 3 of 28"


def test_a_long_reason_is_cut() -> None:
    _, reasons = usable_years(one_year(dict.fromkeys(range(1, 13), 0)), 0.9, 1)
    assert reasons["2001"].endswith("April 0 of 30 and 8 more months")


@pytest.mark.parametrize(
    ("year", "start_month", "text"),
    [(1992, 10, "1991/92"), (1992, 1, "1992"), (2000, 11, "1999/00"), (2001, 4, "2000/01")],
)
def test_span_for_people(year: int, start_month: int, text: str) -> None:
    assert span(year, start_month) == text
