"""Poland: rows without a header, by hydrological year.

Columns: station, name, river, hydrological year, month of that year, day, level, flow,
temperature, calendar month. November and December belong to the calendar year before.
"""

from __future__ import annotations

import re

from hydroyield.record.faults import Source
from hydroyield.record.formats.build import Facts, Raw, make_rows
from hydroyield.record.formats.common import choose_series, fields_of, head, rows_of
from hydroyield.record.options import RecordOptions
from hydroyield.record.rows import Rows

_COLUMNS = (
    "station", "name", "river", "hydrological year", "hydrological month", "day", "level", "flow",
    "temperature", "month",
)  # fmt: skip
_STATION, _YEAR, _HYDRO_MONTH, _DAY, _FLOW, _MONTH = 0, 3, 4, 5, 7, 9
_FIRST_MONTH = 11  # November is month 1 of the hydrological year
_WHOLE = re.compile(r"\d{1,4}")
_MARKS = {",": "comma", ";": "semicolon"}


def recognises(text: str) -> bool:
    """Ten columns; a year, the two ways to count its month, and a day in their places."""
    lines = [line for line in head(text, 5) if line.strip()]
    return bool(lines) and all(_fits(fields_of(line, _mark(line))) for line in lines[:2])


def _mark(line: str) -> str:
    return ";" if line.count(";") > line.count(",") else ","


def _fits(row: list[str]) -> bool:
    if len(row) != len(_COLUMNS) or not row[_STATION].isdigit() or len(row[_YEAR]) != 4:
        return False
    return all(_WHOLE.fullmatch(row[k]) for k in (_YEAR, _HYDRO_MONTH, _DAY, _MONTH))


def read(text: str, options: RecordOptions, source: Source) -> Rows:
    """Read a Polish file of daily values. Raises RecordError."""
    lines = text.split("\n")
    mark = _mark(lines[0])
    numbers, columns = rows_of(lines, 0, mark, _COLUMNS, source)
    stations = list(dict.fromkeys(columns[_STATION]))
    station = choose_series(stations, stations, options, source, "flow")
    which = [k for k, name in enumerate(columns[_STATION]) if name == station]
    dates = [_date([column[k] for column in columns], numbers[k], source) for k in which]
    facts = Facts(
        _MARKS[mark],
        "year, month and day",
        "flow",
        decimal_mark=None,
        missing=("99999.999", "99999,999"),
        usual_unit="m3/s",
        station=station,
    )
    values = [columns[_FLOW][k] for k in which]
    return make_rows(Raw(dates, values, [numbers[k] for k in which]), facts, options, source)


def _date(row: list[str], line: int, source: Source) -> str:
    """The calendar date, as text. Raises RecordError where the two months contradict."""
    if not all(_WHOLE.fullmatch(row[k]) for k in (_YEAR, _HYDRO_MONTH, _DAY, _MONTH)):
        raise source.error("year, month or day is not a whole number; correct it", line)
    year, hydro_month, day, month = (int(row[k]) for k in (_YEAR, _HYDRO_MONTH, _DAY, _MONTH))
    if (hydro_month + _FIRST_MONTH - 2) % 12 + 1 != month:
        raise source.error(
            f"month {hydro_month} of the hydrological year is not calendar month {month}; the "
            "first is November; correct the one that is wrong",
            line,
        )
    return f"{year - (month >= _FIRST_MONTH):04d}-{month:02d}-{day:02d}"
