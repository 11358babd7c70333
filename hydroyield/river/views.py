"""What a record says of a river: its years, its months, its low flow and its storage."""

from __future__ import annotations

from dataclasses import dataclass, field
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from hydroyield.river.annual_curves import AnnualCurves, annual_curves, monthly_curves
from hydroyield.river.duration import quantile
from hydroyield.river.low_flow import LowFlow, base_flow_index, low_flow, seven_day_minima
from hydroyield.river.storage import MassCurve, mass_curve
from hydroyield.river.years import Calendar, MonthTable, count_months, usable_years

Floats = NDArray[np.float64]
Bools = NDArray[np.bool_]

CURVE_PERCENT = np.concatenate([[0.5, 1, 2, 3, 4], np.arange(5, 96), [96, 97, 98, 99, 99.5]])  # %


@dataclass(frozen=True)
class YearOfRiver:
    """One year of the record, every month of which has enough values.

    year : named by the calendar year in which it ends
    mean : discharge [m3/s]
    position : share of the years whose mean duration curve is no higher, 0 to 1
    minimum : smallest mean of seven days [m3/s]; None where days are missing
    filled : days estimated from a reference
    """

    year: int
    mean: float
    position: float
    minimum: float | None
    filled: int


@dataclass(frozen=True)
class RiverViews:
    """Statistics of a daily series, each computed when it is first asked for.

    dates : (n,) every day, datetime64[D]
    discharge : (n,) nan where missing [m3/s]
    start_month : first month of the hydrological year
    minimum_coverage : share of the days of a month that need a value
    filled : (n,) days estimated from a reference; None where none was
    """

    dates: NDArray[np.datetime64]
    discharge: Floats
    start_month: int = 10
    minimum_coverage: float = 0.9
    filled: Bools | None = field(default=None, repr=False)

    @cached_property
    def valid(self) -> Floats:
        """Discharge of the days with a value [m3/s]."""
        return self.discharge[~np.isnan(self.discharge)]

    @cached_property
    def whole_curve(self) -> Floats:
        """(p,) duration curve of all valid days at `CURVE_PERCENT` [m3/s]."""
        return quantile(self.valid, CURVE_PERCENT)

    # --- years and months -----------------------------------------------------------------------

    @cached_property
    def calendar(self) -> Calendar:
        """Calendar of the hydrological years."""
        return Calendar.of(self.dates, self.start_month)

    @cached_property
    def months(self) -> MonthTable:
        """Days with a value by month of the hydrological years."""
        return count_months(self.calendar, ~np.isnan(self.discharge))

    @cached_property
    def complete_years(self) -> list[int]:
        """Hydrological years in which every month has enough days with a value."""
        return _complete(self.months, self.minimum_coverage, self.start_month)

    @cached_property
    def annual(self) -> AnnualCurves:
        """Duration curve of each complete hydrological year."""
        return annual_curves(self.calendar.year, self.discharge, self.complete_years, CURVE_PERCENT)

    @cached_property
    def monthly(self) -> Floats:
        """(12, p) duration curve of each calendar month at `CURVE_PERCENT` [m3/s]."""
        return monthly_curves(self.calendar.month, self.discharge, CURVE_PERCENT)

    @cached_property
    def monthly_mean(self) -> Floats:
        """(12,) mean of each calendar month, nan where it has no value [m3/s]."""
        month = self.calendar.month[~np.isnan(self.discharge)] - 1
        count = np.bincount(month, minlength=12)
        total = np.bincount(month, self.valid, 12)
        means = np.full(12, np.nan)
        return np.asarray(np.divide(total, count, out=means, where=count > 0))

    def yearly_means(self) -> tuple[NDArray[np.int64], Floats]:
        """(y,) complete hydrological years, and the mean discharge of each [m3/s]."""
        years = np.asarray(self.complete_years, dtype=np.int64)
        days = ~np.isnan(self.discharge) & np.isin(self.calendar.year, years)
        place = np.searchsorted(years, self.calendar.year[days])
        total = np.bincount(place, self.discharge[days], years.size)
        return years, total / np.maximum(1, np.bincount(place, minlength=years.size))

    def years(self, start_month: int | None = None) -> list[YearOfRiver]:
        """Every complete year, hydrological or of another start (1: civil years)."""
        start = self.start_month if start_month is None else start_month
        calendar = Calendar.of(self.dates, start)
        months = count_months(calendar, ~np.isnan(self.discharge))
        complete = _complete(months, self.minimum_coverage, start)
        curves = annual_curves(calendar.year, self.discharge, complete, CURVE_PERCENT)
        minima = seven_day_minima(self.dates, self.discharge, start)
        filled = np.zeros(self.dates.size, bool) if self.filled is None else self.filled
        return [
            YearOfRiver(
                year,
                float(np.nanmean(self.discharge[calendar.year == year])),
                curves.position(year),
                minima.get(year),
                int(filled[calendar.year == year].sum()),
            )
            for year in complete
        ]

    # --- low flow -------------------------------------------------------------------------------

    @cached_property
    def low_flow_start(self) -> int:
        """First month of the years in which minima are taken: that with the highest mean.

        A dry season is then not cut in two.
        """
        means = self.monthly_mean
        return int(np.nanargmax(means)) + 1

    @cached_property
    def minima(self) -> dict[int, float]:
        """Smallest mean of seven days [m3/s] of each year that starts at `low_flow_start`."""
        return seven_day_minima(self.dates, self.discharge, self.low_flow_start)

    @cached_property
    def low_flow(self) -> LowFlow | None:
        """Seven-day minimum undercut once in ten years; None without a whole year."""
        return low_flow(list(self.minima.values())) if self.minima else None

    @cached_property
    def base_flow_index(self) -> float | None:
        """Share of the discharge that is base flow; None where the record is too short."""
        index = base_flow_index(self.discharge)
        return None if np.isnan(index) else index

    # --- storage --------------------------------------------------------------------------------

    @cached_property
    def mass_curve(self) -> MassCurve:
        """Cumulative volume less that of the mean flow."""
        return mass_curve(self.dates, self.discharge)


def _complete(months: MonthTable, minimum_coverage: float, start_month: int) -> list[int]:
    used, _ = usable_years(months, minimum_coverage, start_month)
    return [int(year) for year in months.years[used]]
