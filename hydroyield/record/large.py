"""A fast way into large plain records of the most common shape, with the same result.

Dates of ISO 8601 in the first column are read from the bytes of all rows at once, and values by the
parser of pandas beside it. Whatever is unusual in the file, this steps aside, and the general
reader understands or refuses it.
"""

from __future__ import annotations

import re
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass
from io import BytesIO

import numpy as np
from numpy.typing import NDArray

from hydroyield.errors import RecordError
from hydroyield.record.columns import choose_columns
from hydroyield.record.dates import FIRST_YEAR
from hydroyield.record.faults import Source
from hydroyield.record.numbers import number_of_mark
from hydroyield.record.options import RecordOptions
from hydroyield.record.plain import read_plain
from hydroyield.record.rows import BLANK, MARKED, USED, Layout, Rows
from hydroyield.record.table import read_table
from hydroyield.record.text import Document

Bytes = NDArray[np.uint8]
Ints = NDArray[np.int64]
Floats = NDArray[np.float64]

LARGE = 2_000_000  # bytes; below, the general reader is quick, too
LAST_YEAR = 2200
_MARKS = {"comma": ",", "semicolon": ";", "tab": "\t"}
_ISO = re.compile(r"\d{4}-\d\d-\d\d(?:[ T]\d\d:\d\d(?::\d\d)?)?")
_DIGITS = {"year": (0, 1, 2, 3), "month": (5, 6), "day": (8, 9), "hour": (11, 12),
           "minute": (14, 15), "second": (17, 18)}  # fmt: skip


def read_large(
    document: Document, options: RecordOptions, source: Source, *, least: int = LARGE
) -> Rows | None:
    """The rows of a large plain file; None where the general reader has to look.

    least : size from which a file is large [bytes]
    """
    content = document.content
    if len(content) < least or not document.is_ascii or b'"' in content:
        return None
    if b"\r" in content:
        content = content.replace(b"\r\n", b"\n")
    shape = _Shape.of(document.head, options, source)
    if shape is None:
        return None
    with ThreadPoolExecutor(1) as beside:  # both let go of the interpreter while they work
        parsing = beside.submit(_values, content, shape)
        dates = _dates(np.frombuffer(content, np.uint8), shape)
        values = parsing.result()
    if dates is None or values is None or values.size != dates[0].size:
        return None
    return _rows(content, *dates, values, shape, options)


@dataclass(frozen=True)
class _Shape:
    """What the head of a file says of all of it.

    first_line : line of the first row
    width : number of columns
    value : position of the column of values; that of dates is the first
    mark : between the columns
    date : a date as it is printed
    layout, factor : as in `Rows`
    """

    first_line: int
    width: int
    value: int
    mark: str
    date: str
    layout: Layout
    factor: float

    @classmethod
    def of(cls, head: str, options: RecordOptions, source: Source) -> _Shape | None:
        try:
            rows = read_plain(head, options, source)
            table = read_table(head, source)
            chosen = choose_columns(table, options, source)
        except RecordError:
            return None
        dates, first = table.columns[chosen.date], int(table.lines[0])
        usual = (
            chosen.date == 0
            and chosen.clock is None
            and rows.layout.decimal_mark == "point"
            and not rows.checks
            and np.array_equal(rows.lines, np.arange(first, first + rows.lines.size))
            and _ISO.fullmatch(dates[0]) is not None
        )
        mark = _MARKS.get(table.delimiter)
        if mark is None or not usual:
            return None
        width, value = len(table.names), chosen.value
        return cls(first, width, value, mark, dates[0], rows.layout, rows.factor)


# --- dates ----------------------------------------------------------------------------------------


def _dates(content: Bytes, shape: _Shape) -> tuple[NDArray[np.datetime64], Ints] | None:
    """Dates and seconds of the day of all rows; None where one is written in another way."""
    starts = _starts(content, shape)
    length = len(shape.date)
    if not starts.size or starts[-1] + length >= content.size:
        return None
    written = shape.date + shape.mark
    for place, letter in enumerate(written):
        if not letter.isdigit() and (content[starts + place] != ord(letter)).any():
            return None
    parts = {}
    for name, places in _DIGITS.items():
        if places[-1] < length:
            part = _number(content, starts, places)
            if part is None:
                return None
            parts[name] = part
    return _possible(parts)


def _starts(content: Bytes, shape: _Shape) -> Ints:
    """Position of the first byte of each row."""
    ends = np.flatnonzero(content == ord("\n"))
    starts = np.concatenate([[0], ends + 1])[shape.first_line - 1 :]
    return starts[:-1] if content[-1] == ord("\n") else starts


def _number(content: Bytes, starts: Ints, places: tuple[int, ...]) -> NDArray[np.int32] | None:
    """The whole number that digits print in every row; None where one is no digit."""
    number = np.zeros(starts.size, dtype=np.int32)
    for place in places:
        digit = content[starts + place] - np.uint8(ord("0"))
        if (digit > 9).any():  # what is no digit wraps around
            return None
        number *= 10
        number += digit
    return number


def _possible(
    parts: dict[str, NDArray[np.int32]],
) -> tuple[NDArray[np.datetime64], Ints] | None:
    year, month, day = (parts.pop(name) for name in ("year", "month", "day"))
    if year.min() < FIRST_YEAR or year.max() > LAST_YEAR or month.min() < 1 or month.max() > 12:
        return None
    months = np.arange(np.datetime64(f"{FIRST_YEAR}-01"), np.datetime64(f"{LAST_YEAR + 1}-02"))
    begins = months.astype("datetime64[D]").astype(np.int64)
    which = (year - FIRST_YEAR) * 12 + month - 1
    if day.min() < 1 or (day > np.diff(begins)[which]).any():
        return None
    dates = begins[which]
    dates += day - 1
    seconds = np.zeros(day.size, dtype=np.int64)
    for name, most, factor in (("hour", 23, 3600), ("minute", 59, 60), ("second", 59, 1)):
        if name in parts:
            if parts[name].max() > most:
                return None
            seconds += parts[name] * factor
    return dates.view("datetime64[D]"), seconds


# --- values ---------------------------------------------------------------------------------------


def _values(content: bytes, shape: _Shape) -> Floats | None:
    """The values, nan where blank; None where a field is no number."""
    import pandas as pd

    try:
        column = pd.read_csv(
            BytesIO(content),
            sep=shape.mark,
            header=None,
            skiprows=shape.first_line - 1,
            usecols=[shape.value],
            keep_default_na=False,
            na_values=[""],
            skip_blank_lines=False,
        )[shape.value]
    except (ValueError, pd.errors.ParserError):
        return None
    if column.dtype.kind not in "if":
        return None
    values = column.to_numpy(dtype=np.float64, copy=True)
    return None if np.isinf(values).any() else values


def _rows(
    content: bytes,
    dates: NDArray[np.datetime64],
    seconds: Ints,
    values: Floats,
    shape: _Shape,
    options: RecordOptions,
) -> Rows | None:
    blank = np.isnan(values)
    if not _is_regular(content, shape, values.size, int(np.count_nonzero(blank))):
        return None
    reasons = np.full(values.size, USED, dtype=np.uint8)
    reasons[blank] = BLANK
    for mark in options.missing:
        number = number_of_mark(mark)
        if number is not None:
            reasons[values == number] = MARKED
    values[reasons != USED] = np.nan
    values += 0.0  # no negative zero
    lines = np.arange(shape.first_line, shape.first_line + values.size)
    return Rows(dates, seconds, values, lines, reasons, shape.factor, shape.layout)


def _is_regular(content: bytes, shape: _Shape, count: int, blanks: int) -> bool:
    """Whether every row has all its columns."""
    mark, pair = shape.mark.encode(), shape.width == 2
    if pair and not blanks:
        return True  # a row without its mark would have no value
    above = content.split(b"\n", shape.first_line - 1)[: shape.first_line - 1]
    marks = content.count(mark) - sum(line.count(mark) for line in above)
    if marks != count * (shape.width - 1):
        return False
    if not blanks:
        return True
    # a value that is blank ends its line, or it cannot be told from a row that was cut
    return pair and content.count(mark + b"\n") + content.endswith(mark) == blanks
