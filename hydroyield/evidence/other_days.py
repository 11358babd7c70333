"""Checks of the days that energy rests on: all valid days, and the steps within a day."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np
from numpy.typing import NDArray

from hydroyield.checks import Check, warn_unless
from hydroyield.energy import Estimate
from hydroyield.quantities import WH_PER_MWH
from hydroyield.record import Record
from hydroyield.record.daily import trapezoid_means
from hydroyield.river import Calendar, distinct_states
from hydroyield.river.duration import DAYS_PER_YEAR

Floats = NDArray[np.float64]

SMALL_DIFFERENCE = 0.05  # of the energy
STEP_DIFFERENCE = 0.02  # of the energy
MOST_DISCHARGES = 20_000  # distinct ones that are computed for a record finer than daily


def day_checks(record: Record, factor: float, energy: Estimate) -> Iterator[Check]:
    """How far energy depends on the choice of days and on daily means.

    record : at the gauge
    factor : from gauge to site
    """
    yield _all_days(energy)
    if record.finer is not None:
        yield _steps(record, factor, energy)


def _all_days(energy: Estimate) -> Check:
    """Energy of all days with a value against that of the years used."""
    power = power_of_days(energy)
    every = float(np.nanmean(power)) * 24 * DAYS_PER_YEAR / WH_PER_MWH
    used = energy.cells.per_year(energy.net_power) / WH_PER_MWH
    apart = every / used - 1 if used else 0.0
    words = (
        f"All days with a value, years left out among them, give {every:.4g} MWh a year "
        f"({100 * apart:+.1f} %)"
    )
    return warn_unless(
        "all_valid_days",
        abs(apart) <= SMALL_DIFFERENCE,
        apart,
        SMALL_DIFFERENCE,
        f"{words}.",
        f"{words}; the years left out, or the seasons missing in them, are unlike those used. "
        "Look at the gaps, and at minimum_month_coverage.",
    )


def power_of_days(energy: Estimate) -> Floats:
    """(n,) net power on every day of the record, nan where there is no value [W]."""
    scheme, cells = energy.scheme, energy.cells
    assert scheme.dates is not None  # a duration table has no days
    calendar = Calendar.of(scheme.dates, scheme.year_start_month)
    known = np.isin(calendar.year, cells.years) & ~np.isnan(scheme.discharge)
    rest = np.where(known, np.nan, scheme.discharge)
    power = _power(energy, rest, calendar.month)
    power[known] = energy.net_power[cells.cell_of_day]
    if scheme.waiting is not None:
        power[scheme.waiting & ~known] = -scheme.plant.electrical.imported
    return power


def _power(energy: Estimate, discharge: Floats, month: NDArray[np.int64]) -> Floats:
    """(n,) net power at discharges of given months, nan where there is none [W].

    Where there are more distinct states than `MOST_DISCHARGES`, each takes the power of the
    nearest of as many.
    """
    scheme = energy.scheme
    power = np.full(discharge.size, np.nan)
    valid = ~np.isnan(discharge)
    if not valid.any():
        return power
    season = scheme.rules.season_of_month[month[valid] - 1]
    distinct, rank = np.unique(discharge[valid], return_inverse=True)
    thin = max(1, -(-distinct.size * scheme.rules.season_count // MOST_DISCHARGES))
    river, season, place = distinct_states(distinct[rank // thin * thin], season)
    run = scheme.operate(river, season)
    power[valid] = scheme.net_power(run.output)[place]
    return power


def _steps(record: Record, factor: float, energy: Estimate) -> Check:
    """Energy from the values as they were recorded against energy from daily means."""
    finer, scheme = record.finer, energy.scheme
    assert finer is not None
    assert scheme.dates is not None
    days = finer.times // 86400
    month = days.astype("datetime64[D]").astype("datetime64[M]").astype(np.int64) % 12 + 1
    power = _power(energy, finer.discharge * factor, month)
    first, means, _ = trapezoid_means(finer.times, power, finer.step_seconds)
    start = int((np.datetime64(int(first), "D") - scheme.dates[0]).astype(np.int64))
    by_step = np.full(scheme.dates.size, np.nan)
    inside = np.arange(start, start + means.size)
    kept = (inside >= 0) & (inside < by_step.size)
    by_step[inside[kept]] = means[kept]
    by_day = power_of_days(energy)
    if scheme.waiting is not None:  # steps within a day know no day before
        by_day[scheme.waiting] = np.nan
    both = ~np.isnan(by_step) & ~np.isnan(by_day)
    whole = float(by_day[both].sum())
    apart = float(by_step[both].sum()) / whole - 1 if whole else 0.0
    words = (
        f"From the values as recorded (every {finer.step_seconds / 60:.3g} min) the energy is "
        f"{100 * apart:+.1f} % of that from daily means apart"
    )
    return warn_unless(
        "native_step",
        abs(apart) <= STEP_DIFFERENCE,
        apart,
        STEP_DIFFERENCE,
        f"{words}.",
        f"{words}; discharge changes much within a day, as on flashy or peaking rivers, and units "
        "cannot follow a daily mean. State both figures.",
    )
