"""The record condensed once: distinct pairs of season and discharge, and how often each occurs.

Power depends on the river's discharge, through the rules on the season, and for a plant that starts
at more water than it needs to run on whether it ran the day before. So every plant is
evaluated on the distinct pairs only, and energy by month and year follows from counting days: the
day-by-day run to rounding. Gauges report few digits, so a long record has far fewer cells than
days.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from hydroyield.river.years import Calendar, MonthTable

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]


@dataclass(frozen=True)
class Cells:
    """Distinct states of the river, and of a waiting plant, over the years used; the days in each.

    discharge : (c,) river discharge [m3/s]
    season : (c,) season, see `WaterRules`
    cell_of_day : (d,) cell of each day with a value
    month_of_day : (d,) 12 * year index + month - 1 of each day with a value
    years : (y,) names of the years used
    hours : (y, 12) hours of each month, January first [h]
    valid_days : (y, 12) days with a value
    waiting : (c,) the plant stood the day before and waits for more water; None where it never does
    """

    discharge: Floats
    season: Ints
    cell_of_day: Ints
    month_of_day: Ints
    years: Ints
    hours: Floats
    valid_days: Ints
    waiting: NDArray[np.bool_] | None = None

    @property
    def hours_per_year(self) -> float:
        """Mean hours of the years used."""
        return float(self.hours.sum() / self.years.size)

    @cached_property
    def weight(self) -> Floats:
        """(c,) hours a year that each cell stands for; they add up to `hours_per_year`."""
        hours_of_day = (self.hours / self.valid_days / self.years.size).ravel()[self.month_of_day]
        return np.asarray(
            np.bincount(self.cell_of_day, hours_of_day, self.discharge.size), dtype=np.float64
        )

    def weight_of(self, chance: Floats) -> Floats:
        """(c,) hours a year that each cell stands for in a state of the plant.

        chance : (y, 12) of the state, January first
        """
        hours_of_day = (self.hours * chance / self.valid_days / self.years.size).ravel()
        hours = np.bincount(self.cell_of_day, hours_of_day[self.month_of_day], self.discharge.size)
        return np.asarray(hours, dtype=np.float64)

    def mean(self, values: Floats) -> float:
        """Mean over the hours of the years used of a quantity given by cell, (c,)."""
        return self.per_year(values) / self.hours_per_year

    def per_year(self, values: Floats) -> float:
        """Yearly sum of a rate given by cell, (c,): W becomes Wh a year."""
        return float((self.weight * values).sum())

    def by_month(self, values: Floats) -> Floats:
        """Sums of a rate given by cell, for each year and month: W becomes Wh.

        values : (c,) rate per hour

        Returns (y, 12), January first: the mean over the valid days times the hours of the month.
        """
        totals = np.bincount(self.month_of_day, values[self.cell_of_day], self.hours.size)
        return totals.reshape(self.hours.shape) * (self.hours / self.valid_days)


def distinct_states(discharge: Floats, season: Ints) -> tuple[Floats, Ints, Ints]:
    """Distinct pairs of season and discharge.

    discharge, season : of days, both (n,); discharge in [m3/s], no nan

    Returns discharge and season of the pairs, both (c,), by season and then rising, and the pair of
    each day (n,).
    """
    distinct, rank = np.unique(discharge, return_inverse=True)
    pairs, place = np.unique(season * distinct.size + rank, return_inverse=True)
    return distinct[pairs % distinct.size], pairs // distinct.size, place


def condense(
    discharge: Floats,
    calendar: Calendar,
    months: MonthTable,
    used: NDArray[np.bool_],
    season_of_month: Ints,
    waiting: NDArray[np.bool_] | None = None,
) -> Cells:
    """Condense a daily series into cells.

    discharge : (n,) of every day, nan where missing [m3/s]
    calendar : of the same days
    months, used : from `count_months` and `usable_years`
    season_of_month : (12,), see `WaterRules`
    waiting : (n,) days on which the plant stands for what was the day before, which are cells of
        their own; None without
    """
    new_row = np.cumsum(used) - 1
    row = calendar.year - months.years[0]
    chosen = used[row] & ~np.isnan(discharge)
    month = calendar.month[chosen]
    waits = np.zeros(month.size, np.int64) if waiting is None else waiting[chosen].astype(np.int64)
    river, state, cell_of_day = distinct_states(
        discharge[chosen], 2 * season_of_month[month - 1] + waits
    )
    return Cells(
        discharge=river,
        season=state // 2,
        cell_of_day=cell_of_day,
        month_of_day=12 * new_row[row[chosen]] + month - 1,
        years=months.years[used],
        hours=months.hours[used],
        valid_days=months.valid[used],
        waiting=None if waiting is None else state % 2 == 1,
    )
