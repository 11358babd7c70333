"""The reader of plain delimited text: a column of dates, a column of values, any layout."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from hydroyield.errors import Fault, RecordError
from hydroyield.record.columns import Chosen, choose_columns
from hydroyield.record.dates import Dates, read_dates
from hydroyield.record.faults import Source, attempt, in_lines
from hydroyield.record.numbers import Numbers, read_numbers
from hydroyield.record.options import RecordOptions
from hydroyield.record.rows import USED, Layout, Rows
from hydroyield.record.shapes import looks_like_clock
from hydroyield.record.split_dates import with_joined_dates
from hydroyield.record.table import Table, read_table
from hydroyield.record.units import factor_of, settle_unit, unit_in_header


def read_plain(text: str, options: RecordOptions, source: Source) -> Rows:
    """Read delimited text. Raises RecordError with every fault found in units, values and dates."""
    table = with_joined_dates(read_table(text, source), options, source)
    chosen = choose_columns(table, options, source)
    faults: list[Fault] = []
    unit = attempt(faults, lambda: _unit(table, chosen.value, options, source))
    numbers = attempt(faults, lambda: _numbers(table, chosen.value, options, source))
    dates = attempt(faults, lambda: _dates(table, chosen, numbers, options, source))
    if unit is None or numbers is None or dates is None:
        raise RecordError(sorted(faults, key=lambda fault: fault.line or 0))
    return _rows(table, chosen, unit, numbers, dates)


Unit = tuple[str, str, float]


def _unit(table: Table, value: int, options: RecordOptions, source: Source) -> Unit:
    """The unit, where it was found, and its factor [m3/s]."""
    name = table.names[value]
    unit, place = settle_unit(
        options, name, unit_in_header(name), table.units[value], table.header_line, source
    )
    return unit, place, factor_of(unit, options.gauge_area_m2, source)


def _numbers(table: Table, value: int, options: RecordOptions, source: Source) -> Numbers:
    texts = table.columns[value]
    return read_numbers(texts, table.lines, options.missing, options.decimal_mark, source)


DatesOfRows = tuple[Dates, NDArray[np.bool_]]


def _dates(
    table: Table, chosen: Chosen, numbers: Numbers | None, options: RecordOptions, source: Source
) -> DatesOfRows:
    """The dates of the rows that have one, and which rows these are."""
    texts = table.columns[chosen.date]
    dated = np.fromiter(map(bool, map(str.strip, texts)), np.bool_, len(texts))
    if not dated.all() and numbers is not None:
        _refuse_blank_date(table, ~dated & (numbers.reasons == USED), source)
    if chosen.clock is not None:
        texts = list(map(_joined, texts, table.columns[chosen.clock]))
    if not dated.all():
        texts = [text for text, has_date in zip(texts, dated, strict=True) if has_date]
    if not texts:
        raise source.error("no row has a date; give each value its date")
    return read_dates(texts, table.lines[dated], options.date_order, source), dated


def _joined(date: str, clock: str) -> str:
    no_clock = not clock.strip() or (looks_like_clock(clock) and clock.strip()[0] == "-")
    return date if no_clock else f"{date.strip()} {clock.strip()}"


def _refuse_blank_date(table: Table, blank: NDArray[np.bool_], source: Source) -> None:
    if blank.any():
        lines = table.lines[blank]
        raise source.error(
            f"{in_lines(lines)}: a value without a date; write the date or remove the row",
            int(lines[0]),
        )


def _rows(table: Table, chosen: Chosen, unit: Unit, numbers: Numbers, dates: DatesOfRows) -> Rows:
    read, dated = dates
    layout = Layout(
        table.delimiter,
        numbers.decimal_mark,
        read.description,
        table.names[chosen.date],
        table.names[chosen.value],
        unit[0],
        unit[1],
    )
    return Rows(
        read.dates,
        read.seconds,
        numbers.values[dated],
        table.lines[dated],
        numbers.reasons[dated],
        unit[2],
        layout,
        numbers.checks,
    )
