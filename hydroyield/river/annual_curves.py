"""Duration curves of single years and of calendar months.

Each year's curve is one sample, so that the curves of many years give bands (Vogel & Fennessey
1994, J. Water Resour. Plan. Manage. 120(4): 485-504).
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from hydroyield.river.duration import quantile

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]


@dataclass(frozen=True)
class AnnualCurves:
    """Duration curves of years.

    percent : (p,) exceedances [%]
    years : (y,) names of the years
    discharge : (y, p) [m3/s]
    """

    percent: Floats
    years: Ints
    discharge: Floats

    def band(self, share: float) -> tuple[Floats, Floats]:
        """(p,) lower and upper edge of the middle `share` of the years at each exceedance [m3/s].

        share : 0 to 1; 1 for all years
        """
        edges = np.quantile(self.discharge, [0.5 - share / 2, 0.5 + share / 2], axis=0)
        return edges[0], edges[1]

    def median(self) -> Floats:
        """(p,) median of the years at each exceedance [m3/s]."""
        return np.asarray(np.median(self.discharge, axis=0))

    def position(self, year: int) -> float:
        """Share of the years, this one included, whose curve has no higher mean, 0 to 1.

        Raises ValueError for a year that has no curve.
        """
        if year not in self.years:
            raise ValueError(f"the year {year} has no duration curve")
        means = self.discharge.mean(axis=1)
        own = means[self.years == year]
        return float((means <= own).mean())


def annual_curves(
    year: Ints, discharge: Floats, used: Iterable[int], percent: ArrayLike
) -> AnnualCurves:
    """Duration curve of the valid days of each year.

    year : (n,) year of each day
    discharge : (n,) nan where missing [m3/s]
    used : names of the years, each with a value
    percent : (p,) exceedances [%]
    """
    at, years = np.asarray(percent, dtype=np.float64), np.array(sorted(used), dtype=np.int64)
    valid = ~np.isnan(discharge)
    curves = [quantile(discharge[valid & (year == name)], at) for name in years]
    return AnnualCurves(at, years, np.array(curves).reshape(years.size, at.size))


def monthly_curves(month: Ints, discharge: Floats, percent: ArrayLike) -> Floats:
    """(12, p) duration curve of each calendar month, nan where it has no value [m3/s].

    month : (n,) 1 to 12
    discharge : (n,) nan where missing [m3/s]
    percent : (p,) exceedances [%]
    """
    at = np.asarray(percent, dtype=np.float64)
    curves = np.full((12, at.size), np.nan)
    valid = ~np.isnan(discharge)
    for number in range(1, 13):
        values = discharge[valid & (month == number)]
        if values.size:
            curves[number - 1] = quantile(values, at)
    return curves
