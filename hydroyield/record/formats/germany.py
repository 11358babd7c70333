"""Germany outside Bavaria, in three forms.

`Datum;Tagesmittelwert;...;"Fehlwerte: -777"` with decimal comma; `"date";"value"` with decimal
point; and a header of `#` with RINVAL, above rows such as `192011011200 2.550000`.
"""

from __future__ import annotations

import re

from hydroyield.record.faults import Source
from hydroyield.record.formats.build import Facts, Raw, make_rows
from hydroyield.record.formats.common import (
    choose_series,
    fields_of,
    head,
    not_discharge,
    refuse_ragged,
    rows_of,
)
from hydroyield.record.options import RecordOptions
from hydroyield.record.rows import Rows
from hydroyield.record.units import unit_in_header

_MISSING = re.compile(r"Fehlwerte?\s*:?\s*(-?[\d.,]+)", re.IGNORECASE)
_RINVAL = re.compile(r"RINVAL\s*(-?\d+(?:\.\d*)?)")
_STAMP = re.compile(r"(\d{4})(\d\d)(\d\d)(\d\d)(\d\d)(\d\d)?")
_UNIT_ENTRY = re.compile(r"(?:Einheit|Unit)\s*:?\s*(.+)", re.IGNORECASE)
_LEVEL = ("wasserstand", "pegelstand")


def recognises_daily(text: str) -> bool:
    """Names of date and daily mean, and the number that marks missing values."""
    return _daily_header(head(text, 40)) is not None


def _daily_header(lines: list[str]) -> int | None:
    return next(
        (k for k, line in enumerate(lines)
         if line.strip('"').startswith("Datum") and "mittelwert" in line and _MISSING.search(line)),
        None,
    )  # fmt: skip


def read_daily(text: str, options: RecordOptions, source: Source) -> Rows:
    """Read `Datum;Tagesmittelwert;...`. Raises RecordError."""
    lines = text.split("\n")
    start = _daily_header(lines[:40])
    assert start is not None
    names = fields_of(lines[start], ";")
    numbers, columns = rows_of(lines, start + 1, ";", names, source, fewer=len(names) - 2)
    said = [field for line in lines[: start + 1] for field in fields_of(line, ";")]
    if level := next((field for field in said if field.lower().startswith(_LEVEL)), None):
        raise not_discharge(f"'{level}'", source, start + 1)
    place = next(k for k, name in enumerate(names) if "mittelwert" in name)
    series = names[1 : max(2, len(columns))]
    choose_series(series, [names[place]], options, source)
    missing = _MISSING.search(lines[start])
    assert missing is not None
    if numbers and place >= len(columns):
        raise source.error(
            f"the rows have no column '{names[place]}'; download it again", start + 2
        )
    facts = Facts(
        "semicolon",
        names[0],
        names[place],
        decimal_mark="comma",
        missing=(missing[1],),
        unit=_entry(said) or next((u for field in said if (u := unit_in_header(field))), None),
        unit_line=start + 1,
    )
    values = columns[place] if numbers else []
    return make_rows(Raw(columns[0], values, numbers), facts, options, source)


def _entry(fields: list[str]) -> str | None:
    """The unit in a field such as "Einheit: m³/s"."""
    found = next((m for field in fields if (m := _UNIT_ENTRY.fullmatch(field))), None)
    return found[1].strip() if found else None


def recognises_pairs(text: str) -> bool:
    """The quoted names of date and value, with a semicolon between them, and nothing else."""
    return head(text, 1)[0].strip() == '"date";"value"'


def read_pairs(text: str, options: RecordOptions, source: Source) -> Rows:
    """Read `"date";"value"`. Raises RecordError."""
    names = ["date", "value"]
    numbers, columns = rows_of(text.split("\n"), 1, ";", names, source)
    choose_series(["value"], ["value"], options, source)
    facts = Facts("semicolon", "date", "value", missing=("-777", "-999"), unit_line=1)
    return make_rows(Raw(columns[0], columns[1], numbers), facts, options, source)


def recognises_stamps(text: str) -> bool:
    """A header of comments in which the number that marks missing values stands."""
    lines = head(text, 40)
    return any(line.startswith("#") and _RINVAL.search(line) for line in lines)


def read_stamps(text: str, options: RecordOptions, source: Source) -> Rows:
    """Read rows of a stamp and a value below a header with RINVAL. Raises RecordError."""
    lines = text.split("\n")
    comments = {n: line for n, line in enumerate(lines, 1) if line.startswith("#")}
    said = {key: found for key in ("RINVAL", "CUNIT", "SANR", "SNAME", "CNAME")
            if (found := _said(key, comments)) is not None}  # fmt: skip
    numbers = [n for n, line in enumerate(lines, 1) if line.strip() and n not in comments]
    rows = [lines[n - 1].split() for n in numbers]
    refuse_ragged([min(len(row), 2) for row in rows], numbers, 2, source)
    parameter, line = said.get("CNAME", ("", None))
    if parameter.upper() in ("W", "WASSERSTAND", "N", "NIEDERSCHLAG"):
        raise not_discharge(f"'{parameter}'", source, line)
    choose_series(["value"], ["value"], options, source)
    unit, line = said.get("CUNIT", (None, None))
    facts = Facts(
        "white space",
        "timestamp",
        "value",
        missing=(said["RINVAL"][0],),
        unit=unit,
        unit_line=line,
        station=said.get("SANR", ("", 0))[0],
        series=parameter or said.get("SNAME", ("", 0))[0],
    )
    flags = [row[2] if len(row) > 2 else "" for row in rows]
    dates = [_spelled(row[0]) for row in rows]
    raw = Raw(dates, [row[1] for row in rows], numbers, flags if any(flags) else ())
    return make_rows(raw, facts, options, source)


def _said(key: str, comments: dict[int, str]) -> tuple[str, int] | None:
    """What the header says under a key, and the line."""
    pattern = _RINVAL if key == "RINVAL" else re.compile(rf"(?<![A-Z]){key}\s*([^|*;#]+)")
    for number, line in comments.items():
        if found := pattern.search(line):
            return found[1].strip(), number
    return None


def _spelled(stamp: str) -> str:
    """192011011200 as 1920-11-01 12:00; anything else as it stands."""
    match = _STAMP.fullmatch(stamp)
    if match is None:
        return stamp
    year, month, day, hour, minute, second = match.groups()
    clock = f"{hour}:{minute}" + (f":{second}" if second else "")
    return f"{year}-{month}-{day} {clock}"
