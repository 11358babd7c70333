"""The forms in which dates are printed, and the numbers in texts of one form.

The shape of a text is the text with every digit written as 0. Each shape is understood once, and
the digits of all texts of a shape are read together.
"""

from __future__ import annotations

import re
from collections.abc import Iterator, Sequence

import numpy as np
from numpy.typing import NDArray

_WIDTH = 40  # longest text that can be a date and a time
_CLOCK = (
    r"(?:(?:T| +)(?P<hour>0{1,2}):(?P<minute>00)(?::(?P<second>00)(?:[.,]0{1,9})?)?"
    r"(?: ?(?P<half>[AP]M))?)?"
)
_ZONE = r" ?(?P<zone>Z|UTC|GMT|[+-]00(?::?00)?)?"
_YEAR_FIRST = r"(?P<year>0000)(?P<sep>[-/.])(?P<a>0{1,2})(?P=sep)(?P<b>0{1,2})"
_YEAR_LAST = r"(?P<a>0{1,2})(?P<sep>[-/.])(?P<b>0{1,2})(?P=sep)(?P<year>0000)"
_COMPACT = r"(?P<year>0000)(?P<a>00)(?P<b>00)"
FORMATS = {
    name: re.compile(date + _CLOCK + _ZONE)
    for name, date in (
        ("year_first", _YEAR_FIRST),
        ("year_last", _YEAR_LAST),
        ("compact", _COMPACT),
    )
}
_SHORT_YEAR = re.compile(r"0{1,2}([-/.])0{1,2}\1(?:00)" + _CLOCK + _ZONE)
_COMPACT_DATE = re.compile(r"(1[89]|20)\d\d(0[1-9]|1[0-2])(0[1-9]|[12]\d|3[01])(\D.*)?", re.ASCII)
_DIGIT = re.compile(r"\d", re.ASCII)
_CLOCK_ONLY = re.compile(r"\d{1,2}:\d{2}(:\d{2}([.,]\d{1,9})?)?( ?[AP]M)?|-+:-+", re.ASCII)


def looks_like_date(text: str) -> bool:
    """Whether a text has the form of a date, possible or not."""
    shape = _DIGIT.sub("0", text.strip().upper())
    name = format_of(shape)
    if name == "compact":
        return _COMPACT_DATE.fullmatch(text.strip()) is not None
    return name is not None or _SHORT_YEAR.fullmatch(shape) is not None


def looks_like_split_date(fields: Sequence[str]) -> bool:
    """Whether the fields of a row begin with year, month and day, in any order, and go on."""
    try:
        first, second, third = (float(field) for field in fields[:3])
    except ValueError:
        return False
    year, others = (first, (second, third)) if first > 31 else (third, (first, second))
    in_range = 1700 <= year <= 2200 and all(1 <= part <= 31 for part in others)
    return len(fields) > 3 and in_range and min(others) <= 12


def looks_like_clock(text: str) -> bool:
    """Whether a text is a clock time without a date, or the mark --:-- for none."""
    return _CLOCK_ONLY.fullmatch(text.strip()) is not None


def has_short_year(text: str) -> bool:
    """Whether a text has the form of a date with a year of two digits."""
    return _SHORT_YEAR.fullmatch(_DIGIT.sub("0", text.upper())) is not None


def format_of(shape: str) -> str | None:
    """ "year_first", "year_last" or "compact", None for a shape that is no date."""
    return next((name for name, form in FORMATS.items() if form.fullmatch(shape)), None)


def codes_and_shapes(texts: list[str]) -> tuple[NDArray[np.uint8], NDArray[np.bytes_]]:
    """The characters of all texts, shape (n, width), and the shapes, shape (n,)."""
    width = max(1, min(_WIDTH, max(map(len, texts))))
    fields = "\n".join(texts).encode("ascii", "replace").upper().split(b"\n")
    codes = np.array(fields, dtype=f"S{width}").view(np.uint8).reshape(len(texts), width)
    shapes = np.where((codes >= ord("0")) & (codes <= ord("9")), np.uint8(ord("0")), codes)
    return codes, shapes.view(f"S{width}").ravel()


def groups(
    shapes: NDArray[np.bytes_],
) -> Iterator[tuple[str, slice | NDArray[np.int64], int]]:
    """Each distinct shape in order of appearance, its rows and its first row."""
    if (shapes == shapes[0]).all():
        yield shapes[0].decode(), slice(None), 0
        return
    distinct, first, inverse = np.unique(shapes, return_index=True, return_inverse=True)
    members = np.split(np.argsort(inverse, kind="stable"), np.cumsum(np.bincount(inverse))[:-1])
    for k in np.argsort(first):
        yield distinct[k].decode(), members[k], int(first[k])


def numbers_of_shape(codes: NDArray[np.uint8], match: re.Match[str]) -> NDArray[np.int64]:
    """year, a, b and seconds of rows that share a shape, shape (4, rows)."""
    year, a, b = (_number(codes, match.span(name)) for name in ("year", "a", "b"))
    if not match["hour"]:
        return np.stack([year, a, b, np.zeros_like(year)])
    hour, minute = (_number(codes, match.span(name)) for name in ("hour", "minute"))
    second = _number(codes, match.span("second")) if match["second"] else np.zeros_like(hour)
    if match["half"]:
        late = 12 * (match["half"] == "PM")
        hour = np.where((hour >= 1) & (hour <= 12), hour % 12 + late, 99)
    seconds = hour * 3600 + minute * 60 + second
    possible = (hour <= 24) & (minute < 60) & (second < 60) & (seconds <= 86400)
    return np.stack([year, a, b, np.where(possible, seconds, -1)])


def _number(codes: NDArray[np.uint8], span: tuple[int, int]) -> NDArray[np.int64]:
    value = np.zeros(len(codes), dtype=np.int64)
    for column in range(*span):
        value = value * 10 + (codes[:, column] - np.uint8(ord("0")))
    return value
