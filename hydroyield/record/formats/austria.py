"""Austria: a nested header, `Einheit`, `Werte:` and rows such as `01.01.2011 00:00:00 ; 0,574`."""

from __future__ import annotations

import re

from hydroyield.record.faults import Source
from hydroyield.record.formats.build import Facts, Raw, make_rows
from hydroyield.record.formats.common import choose_series, head, rows_of
from hydroyield.record.options import RecordOptions
from hydroyield.record.rows import Rows

_ENTRY = re.compile(r"\s*([^:;]+?)\s*[:;][:;\s]*(.*?)[\s;]*")
_VALUES = re.compile(r"\s*Werte\s*:[\s;]*")


def recognises(text: str) -> bool:
    """A line `Werte:` alone, below lines of header."""
    lines = head(text, 200)
    return any(map(_VALUES.fullmatch, lines[1:]))


def read(text: str, options: RecordOptions, source: Source) -> Rows:
    """Read an Austrian file. Raises RecordError."""
    lines = text.split("\n")
    start = next(k for k, line in enumerate(lines) if _VALUES.fullmatch(line))
    unit, line = _entry(lines[:start], "Einheit")
    choose_series(["Werte"], ["Werte"], options, source)
    facts = Facts(
        "semicolon",
        "date",
        "Werte",
        decimal_mark="comma",
        missing=("Lücke", "Luecke"),
        unit=unit or None,
        unit_line=line,
        station=_entry(lines[:start], "HZB")[0],
        series=_entry(lines[:start], "Exportzeitreihe")[0],
    )
    numbers, columns = rows_of(lines, start + 1, ";", ("date", "Werte"), source)
    return make_rows(Raw(columns[0], columns[1], numbers), facts, options, source)


def _entry(lines: list[str], key: str) -> tuple[str, int | None]:
    """What the header says under the first key that begins with a word, and the line."""
    for number, line in enumerate(lines, 1):
        found = _ENTRY.fullmatch(line)
        if found and found[1].startswith(key):
            return found[2].strip(), number
    return "", None
