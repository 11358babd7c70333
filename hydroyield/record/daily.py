"""Daily means of a cleaned record.

A value of a daily record belongs to its printed date. Finer values are joined by straight lines
in time; a gap longer than three usual steps is not bridged, and a day counts when 90 % of its
24 hours are covered.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from hydroyield.record.faults import Source
from hydroyield.record.rows import USED, Rows

DAY_SECONDS = 86400
BRIDGED_STEPS = 3  # longest gap that is bridged, in usual steps
COVERAGE = 0.9  # share of a day that must be covered


@dataclass(frozen=True)
class Daily:
    """Daily means in the unit of the file.

    dates : every calendar day from the first to the last with a value, shape (n,)
    means : daily means [unit of the file], nan where missing, shape (n,)
    daily : whether the record was daily already
    step_minutes : usual step between rows [min]; one day for a single row
    partial_days : days with some coverage, but too little
    """

    dates: NDArray[np.datetime64]
    means: NDArray[np.float64]
    daily: bool
    step_minutes: float
    partial_days: int


def daily_means(rows: Rows, source: Source) -> Daily:
    """Daily means of rows in order of time, each time once, some with a value.

    Raises RecordError when the usual step is longer than a day, or no day is covered.
    """
    is_daily = _one_a_day(rows.dates)
    stamps = np.sort(rows.dates).astype(np.int64) * DAY_SECONDS if is_daily else rows.times
    steps = np.diff(stamps) if len(stamps) > 1 else np.array([DAY_SECONDS])
    middle = (len(steps) - 1) // 2, len(steps) // 2
    lower, upper = np.partition(steps, middle)[list(middle)]
    step = (float(lower) + float(upper)) / 2
    _refuse_coarse(float(lower), source)
    used = rows.reasons == USED
    if is_daily:
        first, values = _on_calendar(rows.dates[used], rows.values[used])
        partial = 0
    else:
        first, values, partial = trapezoid_means(rows.times[used], rows.values[used], step)
        _refuse_uncovered(values, source)
    start, stop = _span(values)
    days = first + np.arange(start, stop)
    return Daily(days.astype("datetime64[D]"), values[start:stop], is_daily, step / 60, partial)


def _one_a_day(dates: NDArray[np.datetime64]) -> bool:
    """Whether no date stands twice; dates (n,) in order of time."""
    if (dates[1:] == dates[:-1]).any():
        return False
    return np.unique(dates).size == dates.size  # 24:00 may stand before 00:00 of the day


def _refuse_coarse(step: float, source: Source) -> None:
    if step > DAY_SECONDS:
        raise source.error(
            f"the usual step between rows is {step / DAY_SECONDS:.3g} days; energy needs daily "
            "or finer values, so give the daily record of the gauge"
        )


def _refuse_uncovered(values: NDArray[np.float64], source: Source) -> None:
    if np.isnan(values).all():
        raise source.error(
            f"no day is covered to {COVERAGE:.0%} by the rows; give a record of whole days"
        )


def _on_calendar(
    dates: NDArray[np.datetime64], values: NDArray[np.float64]
) -> tuple[int, NDArray[np.float64]]:
    """First day since 1970-01-01, and the values with nan on days without one."""
    days = dates.astype(np.int64)
    first = int(days.min())
    calendar = np.full(int(days.max()) - first + 1, np.nan)
    calendar[days - first] = values
    return first, calendar


def trapezoid_means(
    times: NDArray[np.int64], values: NDArray[np.float64], step: float
) -> tuple[int, NDArray[np.float64], int]:
    """Time-weighted daily means, straight between the points.

    times : [s] since 1970-01-01, rising, shape (n,); values : shape (n,)
    step : usual step [s]

    Returns the first day [d since 1970-01-01], the mean of each day from there on, nan where
    less than COVERAGE of it is covered, and the number of days covered in part.
    """
    first, last = int(times[0] // DAY_SECONDS), int(times[-1] // DAY_SECONDS)
    midnights = np.arange(first + 1, last + 1, dtype=np.int64) * DAY_SECONDS
    bridged = np.diff(times) <= BRIDGED_STEPS * step
    place = np.searchsorted(times, midnights)
    split = bridged[place - 1] & (times[place] != midnights)
    midnights, place = midnights[split], place[split]
    if midnights.size:
        values = np.insert(values, place, np.interp(midnights, times, values))
        times = np.insert(times, place, midnights)
        bridged = np.insert(bridged, place - 1, True)
    covered = np.diff(times) * bridged
    begins = np.searchsorted(times[:-1], np.arange(first, last + 1) * DAY_SECONDS)
    coverage = _sums(covered, begins)
    volume = _sums(covered * (values[:-1] + values[1:]) / 2, begins)
    valid = coverage >= COVERAGE * DAY_SECONDS
    means = np.full(len(coverage), np.nan)
    means[valid] = volume[valid] / coverage[valid]
    return first, means, int(np.count_nonzero(~valid & (coverage > 0)))


def _sums(values: NDArray[np.float64], begins: NDArray[np.int64]) -> NDArray[np.float64]:
    """Sums of runs of values, which begin at rising positions; 0 for a run without values."""
    sums = np.zeros(begins.size)
    filled = np.diff(begins, append=values.size) > 0
    sums[filled] = np.add.reduceat(values, begins[filled])
    return sums


def _span(values: NDArray[np.float64]) -> tuple[int, int]:
    """Positions from the first value to behind the last."""
    known = np.flatnonzero(~np.isnan(values))
    return int(known[0]), int(known[-1]) + 1
