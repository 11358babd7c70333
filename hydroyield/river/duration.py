"""Flow duration curves: how often a discharge is equalled or exceeded.

Plotting positions follow (m - a) / (N + 1 - 2a) for the m-th largest of N values (Cunnane 1978,
J. Hydrol. 37: 205-222, collects them). Weibull's a = 0 is the default; among equal values the
largest rank counts.
"""

from __future__ import annotations

from typing import Literal

import numpy as np
from numpy.typing import ArrayLike, NDArray

Floats = NDArray[np.float64]
Position = Literal["weibull", "blom", "cunnane", "gringorten", "hazen"]

PLOTTING_CONSTANT: dict[Position, float] = {
    "weibull": 0.0,
    "blom": 0.375,
    "cunnane": 0.4,
    "gringorten": 0.44,
    "hazen": 0.5,
}
DAYS_PER_YEAR = 365.25
EXCEEDANCES = (1, 5, 10, 20, 30, 40, 50, 60, 70, 80, 90, 95, 99)  # %, those of every result
CHARACTERISTIC_DAYS = (10, 30, 90, 180, 270, 355)  # d, those of every result


def _positions(count: int, position: Position) -> Floats:
    constant = PLOTTING_CONSTANT[position]
    rank = np.arange(1, count + 1, dtype=np.float64)
    return (rank - constant) / (count + 1 - 2 * constant)


def exceedance_percent(values: ArrayLike, position: Position = "weibull") -> Floats:
    """Percent of time that each value is equalled or exceeded.

    values : array_like, (n,) [m3/s], or any unit; no nan
    position : plotting position

    Returns (n,) [%], in the order of `values`. Equal values share the largest rank.
    """
    array = np.asarray(values, dtype=np.float64)
    rising = np.sort(array)
    rank = array.size - np.searchsorted(rising, array, side="left")  # largest rank of a tie
    return 100 * _positions(array.size, position)[rank - 1]


def quantile(values: ArrayLike, percent: ArrayLike, position: Position = "weibull") -> Floats:
    """Value that is equalled or exceeded in `percent` of the time.

    values : array_like, (n,) [m3/s], or any unit; no nan
    percent : array_like [%]
    position : plotting position

    Returns an array of the shape of `percent`: linear between ranks, and the largest or smallest
    value beyond the first or last rank.
    """
    falling = np.sort(np.asarray(values, dtype=np.float64))[::-1]
    share = np.asarray(percent, dtype=np.float64) / 100
    found: Floats = np.interp(share, _positions(falling.size, position), falling)
    return found


def characteristic_discharge(
    values: ArrayLike, days: ArrayLike, days_per_year: float = DAYS_PER_YEAR
) -> Floats:
    """Discharge equalled or exceeded on so many days of a year.

    values : array_like, (n,) [m3/s]; no nan
    days : array_like [d]
    days_per_year : length of the year that the days are counted in [d]; laws that fix a day
        count, such as the 347 days of Q347, use 365

    Returns [m3/s], of the shape of `days`.
    """
    return quantile(values, 100 * np.asarray(days, dtype=np.float64) / days_per_year)


def usual_exceedances(values: ArrayLike) -> dict[str, float]:
    """Discharge equalled or exceeded at `EXCEEDANCES`, by the percentage as text [m3/s].

    values : array_like, (n,) [m3/s]; no nan
    """
    found = quantile(values, EXCEEDANCES)
    return {str(p): float(q) for p, q in zip(EXCEEDANCES, found, strict=True)}


def usual_characteristic(values: ArrayLike) -> dict[str, float]:
    """Discharge equalled or exceeded on `CHARACTERISTIC_DAYS`, by the days as text [m3/s].

    values : array_like, (n,) [m3/s]; no nan
    """
    found = characteristic_discharge(values, CHARACTERISTIC_DAYS)
    return {str(d): float(q) for d, q in zip(CHARACTERISTIC_DAYS, found, strict=True)}
