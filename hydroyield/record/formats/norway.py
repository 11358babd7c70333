"""Norway: JSON with `data[].observations[]`, or text rows such as `19731214/1200 10.76`.

A daily mean is stamped 11:00Z and belongs to its printed date.
"""

from __future__ import annotations

import re

from hydroyield.record.faults import Source
from hydroyield.record.formats.build import Facts, Raw, make_rows
from hydroyield.record.formats.common import (
    choose_series,
    head,
    listed,
    not_discharge,
    refuse_ragged,
)
from hydroyield.record.formats.france import json_lines, json_object, json_text
from hydroyield.record.options import RecordOptions
from hydroyield.record.rows import Rows
from hydroyield.record.units import known_unit, unit_in_header

_STAMP = re.compile(r"(\d{4})(\d\d)(\d\d)/(\d\d)(\d\d)")
_ROW = re.compile(r"\d{8}/\d{4}(\s|$)")
_MISSING = "-9999"
_DISCHARGE = 1001  # number of the parameter in this service


def recognises_json(text: str) -> bool:
    """An object with observations."""
    start = text[:20_000].lstrip()
    return start.startswith("{") and '"observations"' in start


def read_json(text: str, options: RecordOptions, source: Source) -> Rows:
    """Read the answer of the service. Raises RecordError."""
    series = _series(text, source)
    best = [name for name, entry in series.items() if _is_discharge(entry)]
    if not best:
        names = {
            json_text(entry.get("parameterName")) or "another parameter"
            for entry in series.values()
        }
        raise not_discharge(listed(sorted(names)), source)
    name = choose_series(series, best, options, source, "value")
    entry = series[name]
    counts = {other: len(_observations(item, source)) for other, item in series.items()}
    lines = json_lines(text, "time", sum(counts.values()))
    before = sum(counts[other] for other in list(series)[: list(series).index(name)])
    observations = _observations(entry, source)
    raw = Raw(
        [json_text(row.get("time")) for row in observations],
        [json_text(row.get("value")) for row in observations],
        lines[before : before + len(observations)],
        [_flag(row) for row in observations],
    )
    facts = Facts(
        "none",
        "time",
        "value",
        missing=(_MISSING,),
        unit=json_text(entry.get("unit")) or None,
        usual_unit="m3/s" if entry.get("parameter") == _DISCHARGE else None,
        station=json_text(entry.get("stationId")),
        series=json_text(entry.get("parameterName")),
        is_doubtful=lambda code: "correction" in code,
    )
    return make_rows(raw, facts, options, source)


def _series(text: str, source: Source) -> dict[str, dict[str, object]]:
    data = json_object(text, source).get("data")
    if not isinstance(data, list) or not data or not all(isinstance(item, dict) for item in data):
        raise source.error("there is no list 'data' with observations; download the answer again")
    named: dict[str, dict[str, object]] = {}
    for number, entry in enumerate(data, 1):
        keys = ("stationId", "parameter", "resolutionTime")
        name = " ".join(json_text(entry[key]) for key in keys if key in entry) or f"series {number}"
        named[name if name not in named else f"{name} ({number})"] = entry
    return named


def _observations(entry: dict[str, object], source: Source) -> list[dict[str, object]]:
    rows = entry.get("observations")
    if not isinstance(rows, list) or not all(isinstance(row, dict) for row in rows):
        raise source.error("there are no 'observations' in the data; download the answer again")
    return rows


def _is_discharge(entry: dict[str, object]) -> bool:
    if "parameter" in entry:
        return str(entry["parameter"]) == str(_DISCHARGE)
    unit = json_text(entry.get("unit"))
    return not unit or known_unit(unit) is not None


def _flag(row: dict[str, object]) -> str:
    """The correction where there is one, else the quality; "" where the row has neither."""
    if row.get("correction") not in (None, 0, "0"):
        return f"correction {row['correction']}"
    quality = row.get("quality")
    return "" if quality is None else f"quality {quality}"


def recognises_text(text: str) -> bool:
    """Rows that begin with a date, a slash and a time without a colon."""
    lines = [line for line in head(text) if line.strip()]
    rows = [bool(_ROW.match(line.strip())) for line in lines]
    return any(rows) and all(rows[rows.index(True) : -1])


def read_text(text: str, options: RecordOptions, source: Source) -> Rows:
    """Read rows of a stamp and a value. Raises RecordError."""
    lines = text.split("\n")
    start = next(k for k, line in enumerate(lines) if _ROW.match(line.strip()))
    numbers = [k + 1 for k in range(start, len(lines)) if lines[k].strip() and lines[k][0] != "#"]
    rows = [lines[n - 1].split() for n in numbers]
    refuse_ragged([min(len(row), 2) for row in rows], numbers, 2, source)
    choose_series(["value"], ["value"], options, source)
    unit = [
        (u, n) for n, line in enumerate(lines[:start], 1) if (u := unit_in_header(line.strip()))
    ]
    facts = Facts(
        "white space",
        "time",
        "value",
        missing=(_MISSING,),
        unit=unit[0][0] if unit else None,
        unit_line=unit[0][1] if unit else None,
    )
    dates = [_STAMP.sub(r"\1-\2-\3 \4:\5", row[0]) for row in rows]
    return make_rows(Raw(dates, [row[1] for row in rows], numbers), facts, options, source)
