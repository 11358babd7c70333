"""Canada, daily: a banner line, then ` ID,PARAM,Date,Value,SYM`; PARAM 1 is flow, 2 is level."""

from __future__ import annotations

import re

from hydroyield.record.faults import Source
from hydroyield.record.formats.build import Facts, Raw, make_rows
from hydroyield.record.formats.common import choose_series, fields_of, head, not_discharge, rows_of
from hydroyield.record.options import RecordOptions
from hydroyield.record.rows import Rows

_NAMES = ["ID", "PARAM", "Date", "Value", "SYM"]
_FLOW = "1"
_UNIT = re.compile(r"discharge[^()]*\(([^()]*)\)", re.IGNORECASE)


def recognises(text: str) -> bool:
    """The names of the columns in one of the first lines."""
    return any(fields_of(line, ",")[:4] == _NAMES[:4] for line in head(text, 20))


def read(text: str, options: RecordOptions, source: Source) -> Rows:
    """Read the flow of a Canadian file. Raises RecordError."""
    lines = text.split("\n")
    start = next(k for k, line in enumerate(lines) if fields_of(line, ",")[:4] == _NAMES[:4])
    banners = {line.strip() for line in lines[:start]}
    numbers, columns = rows_of(
        lines, start + 1, ",", fields_of(lines[start], ","), source,
        skip=lambda fields: ",".join(fields).strip() in banners,
    )  # fmt: skip
    station, parameter, dates, values = columns[:4]
    flags = columns[4] if len(columns) > 4 else ()
    stations = [
        s for s in dict.fromkeys(station) if (s, _FLOW) in set(zip(station, parameter, strict=True))
    ]
    if numbers and not stations:
        raise not_discharge("water levels (PARAM 2) only", source, numbers[0])
    name = choose_series(stations, stations, options, source, "Value") if numbers else ""
    which = [k for k in range(len(numbers)) if station[k] == name and parameter[k] == _FLOW]
    unit = next((found for line in lines[:start] if (found := _UNIT.search(line))), None)
    facts = Facts(
        "comma",
        "Date",
        "Value",
        unit=unit[1].strip() if unit else None,
        unit_line=1,
        usual_unit="m3/s",
        station=name,
        series="PARAM 1, discharge",
        is_doubtful=lambda code: code in ("B", "E"),
    )
    raw = Raw(
        [dates[k] for k in which],
        [values[k] for k in which],
        [numbers[k] for k in which],
        [flags[k] for k in which] if flags else (),
    )
    return make_rows(raw, facts, options, source)
