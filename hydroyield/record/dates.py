"""From the texts of a column to dates and clock times, one format for the whole column.

The order of day and month is decided over the whole column; where it stays open, it is asked for.
"""

from __future__ import annotations

import datetime
import re
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from hydroyield.errors import RecordError
from hydroyield.record.faults import Source, quoted_texts
from hydroyield.record.months import days_in_month, start_of_month
from hydroyield.record.shapes import (
    FORMATS,
    codes_and_shapes,
    format_of,
    groups,
    has_short_year,
    numbers_of_shape,
)

FIRST_YEAR = 1800  # no discharge was gauged daily before


@dataclass(frozen=True)
class Dates:
    """A column read as dates.

    dates : printed dates, datetime64[D], shape (n,)
    seconds : written clock time [s] since midnight, 0 to 86400, shape (n,)
    description : the format in words, such as "DD.MM.YYYY hh:mm"
    """

    dates: NDArray[np.datetime64]
    seconds: NDArray[np.int64]
    description: str


def read_dates(
    texts: Sequence[str], lines: NDArray[np.int64], order: str | None, source: Source
) -> Dates:
    """Read a column of dates.

    texts : the fields, shape (n,); lines : their line numbers, shape (n,)
    order : "day_first", "month_first", or None to find it in the column

    Raises RecordError for text that is no date, mixed formats, an order of day and month that
    cannot be known, impossible dates and years that no record covers.
    """
    parts = _Parts.of(list(map(str.strip, texts)), lines, source)
    if parts.layout == "year_last":
        day_first = _day_first(parts, order)
        day, month = (parts.a, parts.b) if day_first else (parts.b, parts.a)
    else:
        day_first, month, day = False, parts.a, parts.b
    dates = _possible_dates(parts, month, day)
    return Dates(dates, parts.seconds, _description(parts, day_first))


@dataclass(frozen=True)
class _Parts:
    """The printed numbers of every text, shape (n,), and what all texts have in common."""

    texts: list[str]
    lines: NDArray[np.int64]
    source: Source
    year: NDArray[np.int64]
    a: NDArray[np.int64]
    b: NDArray[np.int64]
    seconds: NDArray[np.int64]
    layout: str
    separator: str
    clock: bool
    zone: bool

    @classmethod
    def of(cls, texts: list[str], lines: NDArray[np.int64], source: Source) -> _Parts:
        codes, shapes = codes_and_shapes(texts)
        numbers = np.full((4, len(texts)), -1, dtype=np.int64)
        matches: list[tuple[str, re.Match[str], int]] = []
        for shape, rows, first in groups(shapes):
            name = format_of(shape)
            if name is None:
                continue
            match = FORMATS[name].fullmatch(shape)
            assert match is not None
            matches.append((name, match, first))
            numbers[:, rows] = numbers_of_shape(codes[rows], match)
        _refuse_no_date(texts, lines, numbers[0] < 0, source)
        _refuse_mixture(texts, lines, matches, source)
        name, match, _ = matches[0]
        separator = match.groupdict().get("sep") or ""
        clock = any(m["hour"] for _, m, _ in matches)
        zone = any(m["zone"] for _, m, _ in matches)
        year, a, b, seconds = numbers
        return cls(texts, lines, source, year, a, b, seconds, name, separator, clock, zone)

    def fault_lines(self, rows: NDArray[np.bool_]) -> tuple[str, int]:
        """The texts of the rows for a message, and the first line."""
        which = np.flatnonzero(rows)
        return quoted_texts([self.texts[i] for i in which], self.lines[which]), int(
            self.lines[which[0]]
        )


def _refuse_no_date(
    texts: list[str], lines: NDArray[np.int64], bad: NDArray[np.bool_], source: Source
) -> None:
    which = np.flatnonzero(bad)
    if not which.size:
        return
    short = [has_short_year(texts[i]) for i in which]
    faults = []
    for rows, what in (
        (which[np.array(short)], "has a year of two digits; write the year with four"),
        (which[~np.array(short)], "is no date that is read here; write 2020-01-31 or 31.01.2020"),
    ):
        if rows.size:
            names = quoted_texts([texts[i] for i in rows], lines[rows])
            faults.append(source.fault(f"{names} {what}", lines[rows[0]]))
    raise RecordError(faults)


def _refuse_mixture(
    texts: list[str],
    lines: NDArray[np.int64],
    matches: list[tuple[str, re.Match[str], int]],
    source: Source,
) -> None:
    kinds: dict[tuple[str, str | None], int] = {}
    for name, match, first in matches:
        kinds.setdefault((name, match.groupdict().get("sep")), first)
    if len(kinds) > 1:
        one, other = list(kinds.values())[:2]
        raise source.error(
            f"dates are written in different ways: '{texts[one]}' (line {lines[one]}) and "
            f"'{texts[other]}' (line {lines[other]}); write all of them the same way",
            int(lines[other]),
        )


def _day_first(parts: _Parts, order: str | None) -> bool:
    if order is not None:
        return order == "day_first"
    first_is_day = np.flatnonzero((parts.a > 12) & (parts.a <= 31) & (parts.b <= 12))
    second_is_day = np.flatnonzero((parts.b > 12) & (parts.b <= 31) & (parts.a <= 12))
    if first_is_day.size and second_is_day.size:
        raise _two_orders(parts, int(first_is_day[0]), int(second_is_day[0]))
    if not first_is_day.size and not second_is_day.size:
        raise _order_in_doubt(parts)
    return bool(first_is_day.size)


def _two_orders(parts: _Parts, one: int, other: int) -> Exception:
    message = (
        f"the day stands first in '{parts.texts[one]}' (line {parts.lines[one]}) but second in "
        f"'{parts.texts[other]}' (line {parts.lines[other]}); write all dates in the same order"
    )
    return parts.source.error(message, int(parts.lines[max(one, other)]))


def _order_in_doubt(parts: _Parts) -> Exception:
    row = int(np.argmax((parts.a != parts.b) & (parts.a <= 12) & (parts.b <= 12)))
    a, b = int(parts.a[row]), int(parts.b[row])
    message = (
        f"is {parts.texts[row].split()[0]} the {_ordinal(a)} of {_month(b)} or the {_ordinal(b)} "
        f"of {_month(a)}? No date in the file tells; add `date_order: day_first` or "
        "`date_order: month_first` under discharge.record"
    )
    return parts.source.error(message, int(parts.lines[row]), "date_order")


def _ordinal(number: int) -> str:
    ending = (
        "th" if 10 <= number % 100 <= 20 else {1: "st", 2: "nd", 3: "rd"}.get(number % 10, "th")
    )
    return f"{number}{ending}"


def _month(number: int) -> str:
    names = "January February March April May June July August September October November December"
    return names.split()[number - 1] if 1 <= number <= 12 else f"month {number}"


def _possible_dates(
    parts: _Parts, month: NDArray[np.int64], day: NDArray[np.int64]
) -> NDArray[np.datetime64]:
    faults = []
    month_ok = (month >= 1) & (month <= 12)
    shown_month = np.where(month_ok, month, 1)
    possible = month_ok & (day >= 1) & (day <= days_in_month(parts.year, shown_month))
    impossible = ~possible | (parts.seconds < 0)
    if impossible.any():
        names, line = parts.fault_lines(impossible)
        what = "is an impossible date or time"
        faults.append(parts.source.fault(f"{names} {what}; correct it in the file", line))
    last_year = datetime.date.today().year + 1
    far = ~impossible & ((parts.year < FIRST_YEAR) | (parts.year > last_year))
    if far.any():
        names, line = parts.fault_lines(far)
        what = f"lies outside the years {FIRST_YEAR} to {last_year}; correct the year in the file"
        faults.append(parts.source.fault(f"{names} {what}", line))
    if faults:
        raise RecordError(faults)
    first = start_of_month(parts.year, month).astype("datetime64[D]")
    dates: NDArray[np.datetime64] = first + (day - 1).astype("timedelta64[D]")
    return dates


def _description(parts: _Parts, day_first: bool) -> str:
    s = parts.separator
    words = {
        "year_first": f"YYYY{s}MM{s}DD",
        "compact": "YYYYMMDD",
        "year_last": f"DD{s}MM{s}YYYY" if day_first else f"MM{s}DD{s}YYYY",
    }[parts.layout]
    words += " hh:mm" if parts.clock else ""
    return words + (", offset from UTC not applied (clock time as written)" if parts.zone else "")
