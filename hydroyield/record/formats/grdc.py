"""Global Runoff Data Centre: `#` header, `# DATA`, `YYYY-MM-DD;hh:mm; Value`.

An older form has the columns `Original; Calculated; Flag`, either of which may be empty.
"""

from __future__ import annotations

import re

from hydroyield.record.faults import Source
from hydroyield.record.formats.build import Facts, Raw, make_rows
from hydroyield.record.formats.common import choose_series, head, rows_of
from hydroyield.record.numbers import is_number
from hydroyield.record.options import RecordOptions
from hydroyield.record.rows import Rows

_HEADER = re.compile(r"\s*YYYY-MM-DD\s*;", re.IGNORECASE)
_KEY = re.compile(r"#\s*([^:]+):\s*(.*)")
_KM2 = 1e6  # m2


def recognises(text: str) -> bool:
    """A comment at the top, and names that spell out how dates are written."""
    lines = head(text, 400)
    return lines[0].startswith("#") and any(map(_HEADER.match, lines))


def read(text: str, options: RecordOptions, source: Source) -> Rows:
    """Read a GRDC file. Raises RecordError."""
    lines = text.split("\n")
    start = next(k for k, line in enumerate(lines) if _HEADER.match(line))
    names = [name.strip() for name in lines[start].split(";")]
    numbers, columns = rows_of(lines, start + 1, ";", names, source)
    table = dict(zip(names, columns, strict=False))
    values = {name: table[name] for name in names[1:] if name in table and _holds_values(name)}
    name = choose_series(values, _best(values), options, source)
    if columns[0] and all(date.endswith("-00") for date in columns[0]):
        raise source.error("the file holds monthly means; download the daily means", numbers[0])
    clock = table.get("hh:mm", ["--:--"] * len(numbers))
    dates = [_joined(*parts) for parts in zip(table[names[0]], clock, strict=True)]
    unit, line = _find(lines[:start], "unit of measure")
    facts = Facts(
        "semicolon",
        names[0],
        name,
        missing=("-999.000",),
        unit=unit or None,
        unit_line=line,
        usual_unit="m3/s",
        station=_find(lines[:start], "grdc-no")[0],
        series=_find(lines[:start], "data set content")[0],
        catchment_area_m2=_area(_find(lines[:start], "catchment area")[0]),
    )
    return make_rows(
        Raw(dates, values[name], numbers, table.get("Flag", ())), facts, options, source
    )


def _holds_values(name: str) -> bool:
    return name.lower() not in ("hh:mm", "flag", "")


def _joined(date: str, clock: str) -> str:
    return date if "-" in clock or not clock else f"{date} {clock}"


def _best(values: dict[str, list[str]]) -> list[str]:
    """The columns that hold numbers; the original one where all others only repeat it."""
    filled = [name for name, texts in values.items() if any(map(_is_value, texts))]
    if not filled:
        return list(values)[:1]
    first = values[filled[0]]
    return filled[:1] if all(_agree(first, values[name]) for name in filled[1:]) else filled


def _is_value(text: str) -> bool:
    return is_number(text) and not text.startswith("-999")


def _agree(one: list[str], other: list[str]) -> bool:
    return all(
        float(a) == float(b)
        for a, b in zip(one, other, strict=True)
        if _is_value(a) and _is_value(b)
    ) and all(_is_value(a) for a, b in zip(one, other, strict=True) if _is_value(b))


def _find(lines: list[str], key: str) -> tuple[str, int | None]:
    """What the header says under a key, and the line."""
    for number, line in enumerate(lines, 1):
        found = _KEY.match(line)
        if found and found[1].strip().lower().startswith(key):
            return found[2].strip(), number
    return "", None


def _area(text: str) -> float | None:
    """Catchment area [m2]; None for none or -999."""
    return float(text) * _KM2 if is_number(text) and "," not in text and float(text) > 0 else None
