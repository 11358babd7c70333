"""Finding what stands between the columns, over the whole file."""

from __future__ import annotations

import csv
import re
from collections.abc import Callable, Iterator, Sequence

from hydroyield.record.numbers import looks_like_number
from hydroyield.record.shapes import looks_like_date

NAMES = {"\t": "tab", ";": "semicolon", "|": "pipe", ",": "comma", " ": "white space"}
_QUOTED = re.compile(r'"[^"\n]*"')
_SAMPLE = 200  # rows, spread over the file, on which a reading is tried


def split_line(line: str, delimiter: str) -> list[str]:
    """The fields of one line."""
    return next(split_lines([line], delimiter), [])


def split_lines(lines: Sequence[str], delimiter: str) -> Iterator[list[str]]:
    """The fields of each line, quotes respected; runs of white space count as one."""
    if delimiter != " ":
        return csv.reader(lines, delimiter=delimiter, skipinitialspace=delimiter != "\t")
    if not any('"' in line for line in lines):
        return map(str.split, lines)
    stripped = [line.replace("\t", " ").strip() for line in lines]
    return csv.reader(stripped, delimiter=" ", skipinitialspace=True)


def find_delimiter(lines: Sequence[str]) -> str | None:
    """The delimiter of a file, or None when the lines have one column only.

    lines : all lines with content. One that most lines contain and that gives a column of dates
    beside a column of numbers is right; otherwise one that most lines contain.
    """
    text = "\n".join(lines)
    if '"' in text:
        text = _QUOTED.sub("", text)
    sample = lines[:: max(1, len(lines) // _SAMPLE)]
    frequent = [mark for mark in NAMES if 2 * text.count(mark) >= len(lines)]
    present = [mark for mark in frequent if _in_most(mark, sample)]
    for mark in present:
        if _gives_dates_and_numbers(list(split_lines(sample, mark))):
            return mark
    return present[0] if present else None


def _in_most(mark: str, lines: Sequence[str]) -> bool:
    return 2 * sum(mark in _QUOTED.sub("", line) for line in lines) >= len(lines)


def _gives_dates_and_numbers(rows: list[list[str]]) -> bool:
    rows = [row for row in rows if len(row) > 1]
    width = max(map(len, rows), default=0)
    columns = [[row[k] for row in rows if len(row) > k] for k in range(width)]
    dates = [most(looks_like_date, column) for column in columns]
    numbers = [most(looks_like_number, column) for column in columns]
    return any(dates) and any(n and not d for n, d in zip(numbers, dates, strict=True))


def most(test: Callable[[str], bool], texts: Sequence[str]) -> bool:
    """Whether more than half of the texts with content pass a test."""
    filled = [text for text in texts if text.strip()]
    return bool(filled) and 2 * sum(map(test, filled)) > len(filled)
