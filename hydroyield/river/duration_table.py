"""A river known by its duration curve alone: percentages of the time, and their discharges."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from hydroyield.quantities import HOURS_PER_DAY
from hydroyield.river.cells import Cells
from hydroyield.river.duration import DAYS_PER_YEAR

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]

STEPS = 5000  # even steps of exceedance by which the curve is read
MONTH_DAYS = (31, DAYS_PER_YEAR - 337, 31, 30, 31, 30, 31, 31, 30, 31, 30, 31)  # of a mean year


def read_table(percent: Sequence[float], discharge: Sequence[float]) -> Floats:
    """Discharges at even steps of exceedance, falling, shape (STEPS,) [m3/s].

    percent : (k,) share of the time, rising [%]
    discharge : (k,) equalled or exceeded in it, not rising [m3/s]

    Between the points runs a monotone cubic (PCHIP; Fritsch & Butland 1984, SIAM J. Sci. Stat.
    Comput. 5(2): 300-304), which is straight where the points are; beyond the first and the last
    point the discharge is constant.
    """
    from scipy.interpolate import PchipInterpolator

    at = 100 * np.arange(1, STEPS + 1) / (STEPS + 1)  # plotting positions of as many values
    inside = np.clip(at, percent[0], percent[-1])
    curve = PchipInterpolator(np.asarray(percent), np.asarray(discharge))(inside)
    return np.minimum.accumulate(np.clip(curve, min(discharge), max(discharge)))


def cells_of_table(discharge: Floats, season_of_month: Ints) -> Cells:
    """Cells of a mean year in which every month has the same duration curve.

    discharge : (n,) at even steps of exceedance [m3/s]
    season_of_month : (12,), see `WaterRules`

    The single year is named 0: it is a mean over all years and none of them.
    """
    distinct, rank = np.unique(discharge, return_inverse=True)
    seasons = int(season_of_month.max()) + 1
    month = np.repeat(np.arange(12), discharge.size)
    return Cells(
        discharge=np.tile(distinct, seasons),
        season=np.repeat(np.arange(seasons), distinct.size),
        cell_of_day=season_of_month[month] * distinct.size + np.tile(rank, 12),
        month_of_day=month,
        years=np.zeros(1, dtype=np.int64),
        hours=np.asarray([MONTH_DAYS]) * HOURS_PER_DAY,
        valid_days=np.full((1, 12), discharge.size),
    )
