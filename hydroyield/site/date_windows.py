"""Windows of the year in a site file: 08-10 to 08-19, the same in every year."""

from __future__ import annotations

import re
from typing import Annotated, Any

from pydantic import BeforeValidator, PlainSerializer, WithJsonSchema

from hydroyield.site.faults import Finding, refuse, shown
from hydroyield.site.fields import kind_of

LONGEST = (31, 29, 31, 30, 31, 30, 31, 31, 30, 31, 30, 31)  # d, of each month
_WINDOW = re.compile(r"(\d\d?)-(\d\d?)(?:\s+to\s+(\d\d?)-(\d\d?))?")
WANTED = "08-10 to 08-19 (month-day, both included)"

Day = tuple[int, int]  # month and day
Window = tuple[Day, Day]  # first and last day, both included


def read_windows(value: Any) -> tuple[Window, ...]:
    """Windows of a list, or one alone. Raises ValueError, or the findings of every window."""
    written = [value] if isinstance(value, str) else value
    if not isinstance(written, list | tuple):
        raise ValueError(f"{kind_of(value)} stands where dates belong; write [{WANTED}]")
    if not written:
        raise ValueError(f"the list is empty; write [{WANTED}], or take the key out")
    windows: list[Window] = []
    findings: list[Finding] = []
    taken: set[Day] = set()
    for index, entry in enumerate(written):
        try:
            window = entry if _is_window(entry) else _window(entry)
        except ValueError as error:
            findings.append(((index,), str(error)))
            continue
        days = set(_days_of(window))
        if days & taken:
            findings.append(((index,), "shares days with a window before it; name each day once"))
        taken |= days
        windows.append(window)
    if findings:
        refuse(findings)
    return tuple(windows)


def _is_window(entry: Any) -> bool:
    """Whether it has been read already."""
    return isinstance(entry, tuple) and all(isinstance(day, tuple) for day in entry)


def _window(entry: Any) -> Window:
    found = _WINDOW.fullmatch(entry.strip()) if isinstance(entry, str) else None
    if found is None:
        raise ValueError(f"'{shown(entry)}' is no window of dates; write {WANTED}")
    numbers = [int(part) for part in found.groups() if part is not None]
    first, last = (numbers[0], numbers[1]), (numbers[-2], numbers[-1])
    for month, day in (first, last):
        if not (1 <= month <= 12 and 1 <= day <= LONGEST[month - 1]):
            raise ValueError(f"{month:02d}-{day:02d} is no day of the year; write {WANTED}")
    return first, last


def _days_of(window: Window) -> list[Day]:
    """Every day of a window in a leap year."""
    year = [(month, day) for month in range(1, 13) for day in range(1, LONGEST[month - 1] + 1)]
    first, last = (year.index(day) for day in window)
    return year[first : last + 1] if last >= first else year[first:] + year[: last + 1]


def _written(windows: tuple[Window, ...]) -> list[str]:
    """Windows as a site file states them."""
    return [
        f"{month:02d}-{day:02d} to {last_month:02d}-{last_day:02d}"
        for (month, day), (last_month, last_day) in windows
    ]


Windows = Annotated[
    tuple[Window, ...],
    BeforeValidator(read_windows),
    PlainSerializer(_written, return_type=list[str], when_used="json"),
    WithJsonSchema(
        {
            "anyOf": [
                {"type": "string"},
                {"type": "array", "items": {"type": "string"}, "minItems": 1},
            ]
        }
    ),
]
