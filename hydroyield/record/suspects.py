"""Doubts about the days of a record: what looks wrong, and the series without it.

Nothing is mended. Each doubt is a check, and where the doubtful days can be left out or read
otherwise it carries that other series, so that its effect can be computed.
"""

from __future__ import annotations

import datetime
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from hydroyield.checks import Check, warn_unless
from hydroyield.record.unit_steps import unit_step

Floats = NDArray[np.float64]
Bools = NDArray[np.bool_]
Dates = NDArray[np.datetime64]

# limits without a source are common practice, set so that long unregulated records pass
SHORTEST_STUCK = 15  # d of one value
STUCK_TIMES_USUAL = 3.0  # the same against the longest runs that this record has elsewhere
SPIKE = 10.0  # times both neighbours, up or down
EVENTS_AT_MAXIMUM = 3  # separate floods that reach one and the same largest value
SAME_MAXIMUM = 1e-3  # relative
MOST_DOUBTFUL = 0.05  # of the days
SPECIFIC_YIELD = (1.0, 150.0)  # l/s per km2
YEARS_SINCE_END = 5
UNEVEN_GAPS = 0.1  # share missing of one month above that of the whole record
FEWEST_MISSING = 30  # d in all, below which gaps are not held against the months
LAST_YEARS, FEWEST_YEARS = 15, 25
LAST_YEARS_APART = 0.1  # of the mean
SHOWN = 3  # dates named in a message

MONTHS = (
    "January", "February", "March", "April", "May", "June", "July",
    "August", "September", "October", "November", "December",
)  # fmt: skip


@dataclass(frozen=True)
class Suspect:
    """A doubt about a record, and the series without it where one can be made.

    check : the finding
    alternative : (n,) the daily series with the doubtful days treated otherwise, nan where
        missing [m3/s]; None where none can be made
    treatment : what was done in it, in words; "" without
    """

    check: Check
    alternative: Floats | None = None
    treatment: str = ""


def suspects_of_days(
    dates: Dates,
    discharge: Floats,
    *,
    doubtful: Bools | None = None,
    catchment_area_m2: float | None = None,
    today: datetime.date | None = None,
) -> tuple[Suspect, ...]:
    """Every doubt about a daily series, those that came to nothing among them.

    dates : (n,) every calendar day, datetime64[D]
    discharge : (n,) nan where missing, at least one value [m3/s]
    doubtful : (n,) days whose code says estimated or affected by ice; None without codes
    catchment_area_m2 : of the gauge [m2]; None where it is not known
    today : by which the age of the record is told
    """
    found = [
        _stuck(dates, discharge),
        _repeated_maximum(dates, discharge),
        _unit_step(dates, discharge),
        _spikes(dates, discharge),
        _leap_days(dates, discharge),
        _gaps_by_month(dates, discharge),
        _ended(dates, discharge, today or datetime.date.today()),
        _last_years(dates, discharge),
    ]
    if doubtful is not None:
        found.append(_doubtful(discharge, doubtful))
    if catchment_area_m2 is not None:
        found.append(_specific_yield(discharge, catchment_area_m2))
    return tuple(suspect for suspect in found if suspect is not None)


def _without(discharge: Floats, days: Bools) -> Floats:
    return np.where(days, np.nan, discharge)


def _named(dates: Dates, days: Bools | Sequence[int]) -> str:
    """ "2001-05-03, 2003-11-07, 2009-01-15 and 4 more"."""
    chosen = dates[days]
    rest = f" and {chosen.size - SHOWN} more" if chosen.size > SHOWN else ""
    return ", ".join(map(str, chosen[:SHOWN])) + rest


def _days(count: int) -> str:
    return f"the {count} day left out" if count == 1 else f"the {count} days left out"


# --- values ---------------------------------------------------------------------------------------


def _runs(discharge: Floats) -> tuple[NDArray[np.int64], NDArray[np.int64]]:
    """First day and length of each run of one value other than zero; gaps end a run."""
    starts = np.flatnonzero(np.concatenate([[True], discharge[1:] != discharge[:-1]]))
    lengths = np.diff(np.append(starts, discharge.size))
    kept = np.nan_to_num(discharge[starts]) > 0
    return starts[kept], lengths[kept]


def _stuck(dates: Dates, discharge: Floats) -> Suspect:
    starts, lengths = _runs(discharge)
    usual = float(np.quantile(lengths, 0.999)) if lengths.size > 1000 else 1.0
    limit = max(SHORTEST_STUCK, STUCK_TIMES_USUAL * usual)
    longest = int(lengths.max(initial=0))
    long = lengths > limit
    check = warn_unless(
        "record_stuck_values",
        not long.any(),
        longest,
        limit,
        f"No value other than zero stands for more than {longest} days on end.",
        f"One value stands for up to {longest} days on end ({long.sum()} times more than "
        f"{limit:.0f} days, from {_named(dates, starts[long].tolist())}), longer than elsewhere in "
        "this record; a stuck sensor, a filled gap or a regulated river. Ask the gauge's keeper.",
    )
    if not long.any():
        return Suspect(check)
    days = np.zeros(discharge.size, bool)
    for start, length in zip(starts[long].tolist(), lengths[long].tolist(), strict=True):
        days[start + 1 : start + length] = True
    return Suspect(check, _without(discharge, days), _days(int(days.sum())))


def _repeated_maximum(dates: Dates, discharge: Floats) -> Suspect:
    """Floods cut off at one value; a record that hardly varies is left alone."""
    top, middle = float(np.nanmax(discharge)), float(np.nanmedian(discharge))
    at_top = np.nan_to_num(discharge) >= top * (1 - SAME_MAXIMUM)
    first = at_top & ~np.concatenate([[False], at_top[:-1]])
    events = int(first.sum())
    fine = events < EVENTS_AT_MAXIMUM or top <= 2 * middle
    check = warn_unless(
        "record_repeated_maximum",
        fine,
        events,
        EVENTS_AT_MAXIMUM - 1,
        f"The largest discharge, {top:.4g} m3/s, is reached in {events} flood(s).",
        f"The largest discharge, {top:.4g} m3/s, is reached in {events} separate floods "
        f"({_named(dates, first)}); rating or logger end there, and floods were larger. Energy "
        "changes only if the plant runs in such floods; ask for the range of the rating.",
    )
    if fine:
        return Suspect(check)
    days = int(at_top.sum())
    return Suspect(check, _without(discharge, at_top), f"{_days(days)} at the largest value")


def _unit_step(dates: Dates, discharge: Floats) -> Suspect:
    found = unit_step(discharge)
    if found is None:
        fine = "The level of the record never jumps as it does when a unit changes."
        return Suspect(Check("record_unit_step", "pass", 1.0, 10.0, fine))
    odd = found.factor_of_day != 1.0
    first, last = dates[odd][0], dates[odd][-1]
    message = (
        f"From {first} to {last} the discharge stands about {found.factor:.4g} times as high as "
        f"before or after, as if the unit had changed ({found.units}); ask the gauge's keeper, and "
        "correct the file."
    )
    check = Check("record_unit_step", "warn", found.factor, 10.0, message)
    treatment = f"the days from {first} to {last} divided by {found.factor:.4g}"
    return Suspect(check, discharge / found.factor_of_day, treatment)


def _spikes(dates: Dates, discharge: Floats) -> Suspect:
    """Single days far above or far below both neighbours."""
    before, here, after = discharge[:-2], discharge[1:-1], discharge[2:]
    with np.errstate(invalid="ignore"):
        higher, lower = np.maximum(before, after), np.minimum(before, after)
        up = (lower > 0) & (here > SPIKE * higher)
        down = (here < lower / SPIKE) & (lower > 0)
    days = np.zeros(discharge.size, bool)
    days[1:-1] = up | down
    count = int(days.sum())
    check = warn_unless(
        "record_spikes",
        not count,
        count,
        0,
        f"No single day stands {SPIKE:g} times above or below both its neighbours.",
        f"{count} single day(s) stand more than {SPIKE:g} times above or below both neighbours "
        f"({_named(dates, days)}); slips of a decimal point or of the sensor. Look at them.",
    )
    return Suspect(check, _without(discharge, days), _days(count)) if count else Suspect(check)


# --- codes and catchment --------------------------------------------------------------------------


def _doubtful(discharge: Floats, doubtful: Bools) -> Suspect:
    days = doubtful & ~np.isnan(discharge)
    count, known = int(days.sum()), int((~np.isnan(discharge)).sum())
    share = count / known
    words = f"{count} days ({share:.1%}) are marked as estimated or affected by ice"
    check = warn_unless(
        "record_doubtful_flags",
        share <= MOST_DOUBTFUL,
        share,
        MOST_DOUBTFUL,
        f"{words}.",
        f"{words}; winter and low flow are often among them. Ask how they were estimated.",
    )
    if share <= MOST_DOUBTFUL or count == known:
        return Suspect(check)
    return Suspect(check, _without(discharge, days), _days(count))


def _specific_yield(discharge: Floats, area: float) -> Suspect:
    found = 1000 * float(np.nanmean(discharge)) / (area / 1e6)
    low, high = SPECIFIC_YIELD
    words = f"The catchment yields {found:.3g} l/s per km2 on average"
    return Suspect(
        warn_unless(
            "record_specific_yield",
            low <= found <= high,
            found,
            low if found < low else high,
            f"{words}.",
            f"{words}, outside {low:g} to {high:g} (common practice); look at the unit of the "
            "record, at the catchment area, and whether this is the right gauge.",
        )
    )


# --- calendar -------------------------------------------------------------------------------------


def _leap_days(dates: Dates, discharge: Floats) -> Suspect:
    """A calendar of 365 days loses every 29 February."""
    month = dates.astype("datetime64[M]")
    is_leap_day = (month.astype(np.int64) % 12 == 1) & (dates - month == np.timedelta64(28, "D"))
    place = np.flatnonzero(is_leap_day)
    place = place[(place > 0) & (place < dates.size - 1)]
    known = ~np.isnan(discharge)
    place = place[known[place - 1] & known[place + 1]]
    lost = int((~known[place]).sum())
    return Suspect(
        warn_unless(
            "record_leap_days",
            lost < 2 or 2 * lost < place.size,
            lost,
            1,
            f"{place.size - lost} of {place.size} leap days inside the record have a value.",
            f"{lost} of {place.size} leap days have no value though the days around them have; the "
            "file was made with a calendar of 365 days. Ask for the original record.",
        )
    )


def _gaps_by_month(dates: Dates, discharge: Floats) -> Suspect:
    month = dates.astype("datetime64[M]").astype(np.int64) % 12
    missing = np.isnan(discharge)
    days = np.bincount(month, minlength=12)
    lost = np.bincount(month[missing], minlength=12)
    share = lost / np.maximum(days, 1)
    overall = float(missing.mean())
    uneven = share - overall > UNEVEN_GAPS
    worst = float((share - overall).max())
    few = int(missing.sum()) < FEWEST_MISSING
    named = ", ".join(f"{MONTHS[k]} {lost[k]} of {days[k]}" for k in np.flatnonzero(uneven))
    return Suspect(
        warn_unless(
            "record_gaps_by_month",
            few or not uneven.any(),
            max(0.0, worst),
            UNEVEN_GAPS,
            "The days without a value are spread over the months, or few.",
            f"Days without a value gather in some months ({named}); the mean of all days then "
            "leans to the others. The years used have every month; look at how many are left.",
        )
    )


def _ended(dates: Dates, discharge: Floats, today: datetime.date) -> Suspect:
    last = dates[~np.isnan(discharge)][-1]
    years = float((np.datetime64(today, "D") - last).astype(np.int64)) / 365.25
    return Suspect(
        warn_unless(
            "record_ended",
            years <= YEARS_SINCE_END,
            years,
            YEARS_SINCE_END,
            f"The record ends on {last}.",
            f"The record ended {years:.0f} years ago, on {last}; climate, abstractions and the "
            "gauge may have changed since. Look for later years, or for a gauge that still runs.",
        )
    )


def _last_years(dates: Dates, discharge: Floats) -> Suspect | None:
    if dates.size < FEWEST_YEARS * 365.25:
        return None
    early = dates <= dates[-1] - np.timedelta64(round(LAST_YEARS * 365.25), "D")
    whole = float(np.nanmean(discharge))
    if np.isnan(discharge[~early]).all() or whole <= 0:
        return None
    ratio = float(np.nanmean(discharge[~early])) / whole
    words = f"The last {LAST_YEARS} years have {ratio:.2f} times the mean of the whole record"
    fine = abs(ratio - 1) <= LAST_YEARS_APART
    check = warn_unless(
        "record_last_15_years",
        fine,
        ratio,
        1 + LAST_YEARS_APART if ratio > 1 else 1 - LAST_YEARS_APART,
        f"{words}.",
        f"{words}; the coming years may be more like them. State the energy of both.",
    )
    if fine:
        return Suspect(check)
    return Suspect(check, _without(discharge, early), f"the last {LAST_YEARS} years alone")
