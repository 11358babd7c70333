"""Germany, Bavaria: preamble `Quelle:;...`, `Zeitbezug:;MEZ`, then `Datum;Mittelwert;...`.

Decimal comma; the header may name one column more than the rows have.
"""

from __future__ import annotations

from hydroyield.record.faults import Source
from hydroyield.record.formats.build import Facts, Raw, make_rows
from hydroyield.record.formats.common import choose_series, fields_of, head, not_discharge, rows_of
from hydroyield.record.options import RecordOptions
from hydroyield.record.rows import Rows
from hydroyield.record.units import unit_in_header

_DISCHARGE = ("abfluss", "abfluß", "durchfluss", "durchfluß")
_OTHER = ("wasserstand", "niederschlag", "wassertemperatur", "schwebstoff")
_NO_MEAN = ("maximum", "minimum", "prüfstatus", "pruefstatus", "status", "")


def recognises(text: str) -> bool:
    """The words of the preamble above a header that begins with the date."""
    lines = head(text, 40)
    keys = {line.split(";")[0].strip().strip('"') for line in lines}
    return bool({"Quelle:", "Zeitbezug:"} & keys) and _start(lines) is not None


def _start(lines: list[str]) -> int | None:
    return next(
        (k for k, line in enumerate(lines) if line.startswith(("Datum;", '"Datum";'))), None
    )


def read(text: str, options: RecordOptions, source: Source) -> Rows:
    """Read a Bavarian file. Raises RecordError."""
    lines = text.split("\n")
    start = _start(lines)
    assert start is not None
    names = fields_of(lines[start], ";")
    numbers, columns = rows_of(lines, start + 1, ";", names, source, fewer=1)
    table = dict(zip(names, columns, strict=False))
    series = [name for name in names[1:] if name in table and name.lower() not in _NO_MEAN]
    means = [name for name in series if name.lower().startswith("mittelwert")] or series
    parameter = _parameter([*lines[:start], *names])
    if parameter in _OTHER:
        raise not_discharge(parameter.capitalize(), source)
    if not means and options.value_column is None:
        raise not_discharge("no column 'Mittelwert'", source, start + 1)
    name = choose_series(list(table)[1:], means, options, source)
    unit, line = _unit(lines[: start + 1], name)
    facts = Facts(
        "semicolon",
        "Datum",
        name,
        decimal_mark="comma",
        missing=("--",),
        unit=unit,
        unit_line=line or start + 1,
        usual_unit="m3/s" if parameter else None,
        station=_value(lines[:start], ("Messstellen-Nr.:", "Messstellen-Name:")),
        series=parameter.capitalize(),
    )
    status = next((n for n in table if n.lower() in _NO_MEAN[2:5]), "")
    return make_rows(
        Raw(table["Datum"], table[name], numbers, table.get(status, ())), facts, options, source
    )


def _parameter(texts: list[str]) -> str:
    """The first parameter that preamble or header name, in lower case; "" where they name none."""
    joined = " ".join(texts).lower()
    found = [(joined.index(word), word) for word in (*_DISCHARGE, *_OTHER) if word in joined]
    return min(found)[1] if found else ""


def _unit(lines: list[str], name: str) -> tuple[str | None, int | None]:
    if (unit := unit_in_header(name)) is not None:
        return unit, len(lines)
    for number, line in enumerate(lines[:-1], 1):
        fields = fields_of(line, ";")
        if fields and fields[0].lower().startswith("einheit") and len(fields) > 1:
            return fields[1], number
        if (unit := next((u for f in fields[1:] if (u := unit_in_header(f))), None)) is not None:
            return unit, number
    return None, None


def _value(lines: list[str], keys: tuple[str, ...]) -> str:
    rows = [fields_of(line, ";") for line in lines]
    return " ".join(row[1] for row in rows if len(row) > 1 and row[0] in keys)
