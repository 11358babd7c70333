"""The calendar of a record: months, hydrological years, and which years can be used."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from hydroyield.quantities import HOURS_PER_DAY

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]

MONTH_NAMES = (
    "January", "February", "March", "April", "May", "June", "July",
    "August", "September", "October", "November", "December",
)  # fmt: skip


@dataclass(frozen=True)
class Calendar:
    """Months and hydrological years of a run of days.

    year : (n,) hydrological year of each day, named by the calendar year in which it ends
    month : (n,) calendar month of each day, 1 to 12
    start_month : first month of the hydrological year
    """

    year: Ints
    month: Ints
    start_month: int

    @classmethod
    def of(cls, dates: NDArray[np.datetime64], start_month: int) -> Calendar:
        """Calendar of `dates` (n,), datetime64[D]."""
        months = dates.astype("datetime64[M]").astype(np.int64)  # months since January 1970
        month = months % 12 + 1
        year = 1970 + months // 12
        return cls(year + ((month >= start_month) & (start_month > 1)), month, start_month)


def months_in_order(start_month: int) -> list[int]:
    """The twelve calendar months in the order of a hydrological year."""
    return [(start_month - 1 + i) % 12 + 1 for i in range(12)]


def month_days(year: Ints, month: Ints, start_month: int) -> Ints:
    """Days of each calendar month that lies in a hydrological year; arrays of one shape."""
    calendar_year = year - ((month >= start_month) & (start_month > 1))
    first = (12 * (calendar_year - 1970) + month - 1).astype("datetime64[M]")
    last = (first + 1).astype("datetime64[D]") - first.astype("datetime64[D]")
    return np.asarray(last.astype(np.int64))


@dataclass(frozen=True)
class MonthTable:
    """Every month of the hydrological years that a record touches.

    years : (y,) names of the years
    days : (y, 12) days of each month, January first [d]
    valid : (y, 12) days with a value [d]
    """

    years: Ints
    days: Ints
    valid: Ints

    @property
    def hours(self) -> Floats:
        """(y, 12) hours of each month, January first."""
        return self.days.astype(np.float64) * HOURS_PER_DAY


def count_months(calendar: Calendar, has_value: NDArray[np.bool_]) -> MonthTable:
    """Count the days with a value in each month of each hydrological year."""
    years = np.arange(calendar.year.min(), calendar.year.max() + 1)
    slot = 12 * (calendar.year - years[0]) + calendar.month - 1
    valid = np.bincount(slot[has_value], minlength=12 * years.size).reshape(-1, 12)
    days = month_days(
        np.repeat(years, 12), np.tile(np.arange(1, 13), years.size), calendar.start_month
    )
    return MonthTable(years, days.reshape(-1, 12), valid)


def usable_years(
    months: MonthTable, minimum_coverage: float, start_month: int
) -> tuple[NDArray[np.bool_], dict[str, str]]:
    """Hydrological years in which every calendar month has enough days with a value.

    minimum_coverage : share of the days of a month that need a value

    Returns a mask (y,) over `months.years`, and for each other year the reason in words.
    """
    # a month without any value has no mean, whatever the coverage asked for
    enough = (months.valid > 0) & (months.valid >= minimum_coverage * months.days - 1e-9)
    used: NDArray[np.bool_] = np.asarray(enough.all(axis=1))
    reasons = {
        str(months.years[row]): _reason(months, row, enough[row], start_month)
        for row in np.flatnonzero(~used).tolist()
    }
    return used, reasons


def _reason(months: MonthTable, row: int, enough: NDArray[np.bool_], start_month: int) -> str:
    short = [
        f"{MONTH_NAMES[m - 1]} {months.valid[row, m - 1]} of {months.days[row, m - 1]}"
        for m in months_in_order(start_month)
        if not enough[m - 1]
    ]
    shown = ", ".join(short[:4]) + (f" and {len(short) - 4} more months" if len(short) > 4 else "")
    return f"too few days with a value: {shown}"


def span(year: int, start_month: int) -> str:
    """A hydrological year for people: "1991/92", or "1992" where it is the calendar year."""
    return str(year) if start_month == 1 else f"{year - 1}/{year % 100:02d}"
