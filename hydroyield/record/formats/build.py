"""From the texts of a series and what a file says about it to `Rows`."""

from __future__ import annotations

import re
from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from hydroyield.checks import Check
from hydroyield.errors import Fault, RecordError
from hydroyield.record.dates import Dates, read_dates
from hydroyield.record.faults import Source, attempt
from hydroyield.record.numbers import Numbers, read_numbers
from hydroyield.record.options import RecordOptions
from hydroyield.record.rows import REPEATED_HOUR, USED, Layout, Rows
from hydroyield.record.units import factor_of, known_unit, settle_unit

_ZONE = re.compile(r"([+-])(\d\d):?(\d\d)?$|([A-Z]{1,5})$")


@dataclass(frozen=True)
class Raw:
    """One series of a file as text, in the order of the file; every sequence has length n.

    dates : dates, with clock times where the file has them
    values : values as printed
    lines : line numbers
    flags : codes of quality, "" where there is none; empty where the format has none
    zones : time zones where they stand apart from the dates ("EST"); empty elsewhere
    """

    dates: Sequence[str]
    values: Sequence[str]
    lines: Sequence[int]
    flags: Sequence[str] = ()
    zones: Sequence[str] = ()


def _no_flag(code: str) -> bool:
    return False


@dataclass(frozen=True)
class Facts:
    """What a format or the head of a file says about the series that was taken.

    delimiter, date_column, value_column : as in the receipt
    decimal_mark : "point", "comma", or None to find it in the column
    missing : marks for "no value" of the format
    unit : unit as the file states it, None where it states none; unit_line : where
    usual_unit : unit that the format implies where the file states none
    station, series : what the file says it holds
    catchment_area_m2 : [m2], None where the file gives none
    is_doubtful : whether a code of quality says estimated or affected by ice
    checks : findings of the reader
    """

    delimiter: str
    date_column: str
    value_column: str
    decimal_mark: str | None = "point"
    missing: tuple[str, ...] = ()
    unit: str | None = None
    unit_line: int | None = None
    usual_unit: str | None = None
    station: str = ""
    series: str = ""
    catchment_area_m2: float | None = None
    is_doubtful: Callable[[str], bool] = _no_flag
    checks: tuple[Check, ...] = ()


def make_rows(raw: Raw, facts: Facts, options: RecordOptions, source: Source) -> Rows:
    """Read the texts of a series. Raises RecordError with every fault in unit, values and dates."""
    _refuse_other_date_column(facts, options, source)
    if not raw.dates:
        raise source.error("the file has its head but no rows with values; download it again")
    lines = np.asarray(raw.lines, dtype=np.int64)
    faults: list[Fault] = []
    unit = attempt(faults, lambda: _unit(facts, options, source))
    numbers = attempt(faults, lambda: _numbers(raw, lines, facts, options, source))
    order = options.date_order or "day_first"
    texts = _in_one_line(raw.dates)
    dates = attempt(faults, lambda: read_dates(texts, lines, order, source))
    if unit is None or numbers is None or dates is None:
        raise RecordError(sorted(faults, key=lambda fault: fault.line or 0))
    flags = np.array(raw.flags, dtype=np.str_) if len(raw.flags) else None
    repeated = _repeated_hour(dates, raw)
    return Rows(
        dates.dates,
        dates.seconds,
        np.where(repeated, np.nan, numbers.values),
        lines,
        np.where(repeated & (numbers.reasons == USED), np.uint8(REPEATED_HOUR), numbers.reasons),
        unit[2],
        _layout(facts, numbers, dates, unit),
        (*facts.checks, *_area_check(facts, options), *numbers.checks, *_cut_check(raw, numbers)),
        flags,
        frozenset(code for code in set(raw.flags) if facts.is_doubtful(code)),
    )


def _in_one_line(texts: Sequence[str]) -> Sequence[str]:
    """Texts without line ends, which XML and JSON allow inside a text."""
    return [" ".join(text.split()) for text in texts] if "\n" in "".join(texts) else texts


def _refuse_other_date_column(facts: Facts, options: RecordOptions, source: Source) -> None:
    if options.date_column not in (None, facts.date_column):
        raise source.error(
            f"this format has its dates in '{facts.date_column}'; leave `date_column:` out, or add "
            "`file_format: plain` under discharge.record to read the file as a plain table",
            key="date_column",
        )


def _numbers(
    raw: Raw, lines: NDArray[np.int64], facts: Facts, options: RecordOptions, source: Source
) -> Numbers:
    missing = (*facts.missing, *options.missing)
    mark = options.decimal_mark or facts.decimal_mark
    return read_numbers(raw.values, lines, missing, mark, source)


def _layout(facts: Facts, numbers: Numbers, dates: Dates, unit: tuple[str, str, float]) -> Layout:
    return Layout(
        facts.delimiter,
        numbers.decimal_mark,
        dates.description,
        facts.date_column,
        facts.value_column,
        unit[0],
        unit[1],
        facts.station,
        facts.series,
        facts.catchment_area_m2,
    )


def _unit(facts: Facts, options: RecordOptions, source: Source) -> tuple[str, str, float]:
    """The unit, where it was found, and its factor [m3/s]."""
    if facts.unit:
        unit, place = _stated_unit(facts, options, source), "file"
    elif facts.usual_unit and options.unit is None:
        unit, place = facts.usual_unit, "file"
    else:
        unit, place = settle_unit(options, facts.value_column, None, None, facts.unit_line, source)
    return unit, place, factor_of(unit, options.gauge_area_m2, source)


def _stated_unit(facts: Facts, options: RecordOptions, source: Source) -> str:
    assert facts.unit is not None
    stated = known_unit(facts.unit)
    if stated is None:
        raise source.error(
            f"the file says that its values are in '{facts.unit}', which is no unit of discharge "
            "that is read here; download the discharge of the gauge",
            facts.unit_line,
        )
    if options.unit is not None:
        wanted, _ = settle_unit(options, facts.value_column, None, None, None, source)
        if wanted != stated:
            raise source.error(
                f"the site file says {wanted} but the record says {stated}; correct the one that "
                "is wrong, or leave `unit:` out",
                facts.unit_line,
                "unit",
            )
    return stated


def _repeated_hour(dates: Dates, raw: Raw) -> NDArray[np.bool_]:
    """Rows of the hour that is written twice when clocks go back: the second pass of it."""
    repeated = np.zeros(len(dates.dates), dtype=np.bool_)
    zones = list(raw.zones or raw.dates)
    if not raw.zones and "offset" not in dates.description:
        return repeated
    ends = [zone[-6:] for zone in zones]  # "+01:00"
    known = {end: _offset(end) for end in set(ends)}
    offsets = np.fromiter(map(known.__getitem__, ends), np.int64, len(ends))
    if (offsets == offsets[0]).all():
        return repeated
    times = dates.dates.astype(np.int64) * 86400 + dates.seconds
    order = np.lexsort((-offsets, times))
    same = (np.diff(times[order]) == 0) & (np.diff(offsets[order]) != 0)
    repeated[order[1:][same]] = True
    return repeated


def _offset(zone: str) -> int:
    """Offset from UTC [min]; of zones given by name only whether summer time is kept counts."""
    match = _ZONE.search(zone.strip())
    if match is None:
        return 0
    if match[4]:
        return 60 if match[4].endswith("DT") or match[4] in ("CEST", "BST") else 0
    minutes = int(match[2]) * 60 + int(match[3] or 0)
    return minutes if match[1] == "+" else -minutes


def _area_check(facts: Facts, options: RecordOptions) -> tuple[Check, ...]:
    if facts.catchment_area_m2 is None or options.gauge_area_m2 is None:
        return ()
    ratio = facts.catchment_area_m2 / options.gauge_area_m2
    words = (
        f"The file gives a catchment of {facts.catchment_area_m2 / 1e6:.6g} km2, the site file "
        f"{options.gauge_area_m2 / 1e6:.6g} km2 for the gauge"
    )
    good = 0.95 <= ratio <= 1.05
    message = f"{words}." if good else f"{words}; look whether this is the right gauge."
    return (Check("record_catchment_area", "pass" if good else "warn", ratio, 1.05, message),)


def _cut_check(raw: Raw, numbers: Numbers) -> tuple[Check, ...]:
    """A last value with fewer decimals than all others, which agree, may have been cut."""
    used = np.flatnonzero(numbers.reasons == USED)
    if used.size < 3 or used[-1] != len(raw.values) - 1:
        return ()
    others = {_decimals(text) for text in {raw.values[k] for k in used[:-1].tolist()}}
    last = _decimals(raw.values[-1])
    if len(others) > 1 or last >= min(others):
        return ()
    message = (
        f"The last row (line {raw.lines[-1]}) has the value {raw.values[-1].strip()} with fewer "
        "decimals than all others; look whether the file was cut short."
    )
    return (Check("record_last_row", "warn", float(last), float(min(others)), message),)


def _decimals(text: str) -> int:
    return len("".join(re.split("[.,]", text.strip())[1:]))
