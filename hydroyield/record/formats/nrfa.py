"""UK National River Flow Archive: lines `group,key,value`, then `date,value[,flag]`.

A value covers the day from 09:00 GMT on its printed date to 08:59 on the next.
"""

from __future__ import annotations

import re

from hydroyield.checks import Check
from hydroyield.record.faults import Source
from hydroyield.record.formats.build import Facts, Raw, make_rows
from hydroyield.record.formats.common import (
    choose_series,
    fields_of,
    head,
    not_discharge,
    refuse_ragged,
)
from hydroyield.record.options import RecordOptions
from hydroyield.record.rows import Rows

_DATA = re.compile(r"\"?\d{4}-")
_RAIN = ("rainfall", "cdr", "level", "stage", "temperature")
WATER_DAY = Check(
    "record_day_start",
    "pass",
    9.0,
    None,
    "A value covers the day from 09:00 on its printed date to 08:59 on the next; it was kept on "
    "its printed date.",
)


def recognises(text: str) -> bool:
    """Lines of a station and of a kind of data above the first row."""
    starts = [line.lstrip('"').replace('"', "").split(",")[:2] for line in head(text)]
    return ["station", "id"] in starts and any(start[0] in ("dataType", "data") for start in starts)


def read(text: str, options: RecordOptions, source: Source) -> Rows:
    """Read an NRFA file. Raises RecordError."""
    lines = text.split("\n")
    start = next((k for k, line in enumerate(lines) if _DATA.match(line)), len(lines))
    keys = {
        ",".join(fields[:2]): (fields[2], number)
        for number, line in enumerate(lines[:start], 1)
        if len(fields := fields_of(line, ",")) > 2
    }
    kind = keys.get("dataType,name", keys.get("dataType,id", ("", 0)))
    if any(word in kind[0].lower() for word in _RAIN):
        raise not_discharge(f"'{kind[0]}'", source, kind[1])
    choose_series(["value"], ["value"], options, source)
    unit = keys.get("dataType,units", ("", 0))
    facts = Facts(
        "comma",
        "date",
        "value",
        missing=("M",),
        unit=unit[0] or None,
        unit_line=unit[1] or None,
        station=" ".join(keys[key][0] for key in ("station,id", "station,name") if key in keys),
        series=kind[0],
        is_doubtful=lambda code: code == "E",
        checks=(WATER_DAY,),
    )
    return make_rows(_raw(lines, start, source), facts, options, source)


def _raw(lines: list[str], start: int, source: Source) -> Raw:
    numbers = [k + 1 for k in range(start, len(lines)) if lines[k].strip()]
    rows = [fields_of(lines[number - 1], ",") for number in numbers]
    widths = [2 if len(row) == 3 else len(row) for row in rows]
    refuse_ragged(widths, numbers, 2, source)
    flags = [row[2] if len(row) == 3 else "" for row in rows]
    return Raw([row[0] for row in rows], [row[1] for row in rows], numbers, flags)
