"""Spain: rows `station;d;m;y;value`, missing -100."""

from __future__ import annotations

import re

from hydroyield.record.faults import Source
from hydroyield.record.formats.build import Facts, Raw, make_rows
from hydroyield.record.formats.common import choose_series, fields_of, head, rows_of
from hydroyield.record.options import RecordOptions
from hydroyield.record.rows import Rows
from hydroyield.record.units import unit_in_header

_COLUMNS = ("station", "d", "m", "y", "value")
_ROW = re.compile(r"\s*\"?\w+\"?\s*;\s*\d{1,2}\s*;\s*\d{1,2}\s*;\s*\d{4}\s*;[^;]*;?")


def recognises(text: str) -> bool:
    """Five columns with a day, a month and a year in their places, below one header at most."""
    lines = [line for line in head(text, 6) if line.strip()]
    rows = [bool(_ROW.fullmatch(line)) for line in lines]
    return any(rows[:2]) and all(rows[rows.index(True) : 3])


def read(text: str, options: RecordOptions, source: Source) -> Rows:
    """Read a Spanish file. Raises RecordError."""
    lines = text.split("\n")
    start = next(k for k, line in enumerate(lines) if _ROW.fullmatch(line))
    header = fields_of(lines[start - 1], ";") if start else []
    names = header if len(header) == len(_COLUMNS) else list(_COLUMNS)
    numbers, columns = rows_of(lines, start, ";", names, source)
    stations = list(dict.fromkeys(columns[0]))
    station = choose_series(stations, stations, options, source, names[4])
    which = [k for k, name in enumerate(columns[0]) if name == station]
    facts = Facts(
        "semicolon",
        "day, month and year",
        names[4],
        decimal_mark=None,
        missing=("-100",),
        unit=unit_in_header(names[4]),
        usual_unit="m3/s",
        station=station,
    )
    dates = ["-".join(_padded(columns[k][j]) for k in (3, 2, 1)) for j in which]
    values = [columns[4][k] for k in which]
    return make_rows(Raw(dates, values, [numbers[k] for k in which]), facts, options, source)


def _padded(text: str) -> str:
    return text.strip().zfill(2)
