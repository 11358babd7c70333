"""Switzerland: lines of preamble, then `...;Zeitstempel;...;Wert;Freigabestatus`."""

from __future__ import annotations

from hydroyield.record.faults import Source
from hydroyield.record.formats.build import Facts, Raw, make_rows
from hydroyield.record.formats.common import (
    choose_series,
    fields_of,
    head,
    listed,
    not_discharge,
    rows_of,
)
from hydroyield.record.options import RecordOptions
from hydroyield.record.rows import Rows
from hydroyield.record.units import unit_in_header

_NEEDED = {"Zeitstempel", "Wert", "Freigabestatus"}
_DISCHARGE = ("abfluss", "débit", "debit", "deflusso", "portata", "discharge", "q")


def recognises(text: str) -> bool:
    """The names of the columns in one of the first lines."""
    return _start(head(text, 40)) is not None


def _start(lines: list[str]) -> int | None:
    return next((k for k, line in enumerate(lines) if set(fields_of(line, ";")) >= _NEEDED), None)


def read(text: str, options: RecordOptions, source: Source) -> Rows:
    """Read a Swiss file. Raises RecordError."""
    lines = text.split("\n")
    start = _start(lines[:40])
    assert start is not None
    names = fields_of(lines[start], ";")
    numbers, columns = rows_of(lines, start + 1, ";", names, source)
    table = dict(zip(names, columns, strict=False))
    about = ("Stationsnummer", "Parameter", "Zeitreihe")
    known = [table[name] for name in about if name in table]
    series = (
        [" ".join(parts) for parts in zip(*known, strict=True)] if known else [""] * len(numbers)
    )
    parameters = dict(zip(series, table.get("Parameter", [""] * len(numbers)), strict=True))
    best = [name for name, parameter in parameters.items() if _is_discharge(parameter)]
    if numbers and not best and options.value_column is None:
        raise not_discharge(listed(parameters.values()), source, numbers[0])
    name = choose_series(parameters, best, options, source, "Wert") if numbers else ""
    which = [k for k, found in enumerate(series) if found == name]
    unit, line = _unit(lines[:start], names, table, which)
    facts = Facts(
        "semicolon",
        "Zeitstempel",
        "Wert",
        decimal_mark=None,
        unit=unit,
        unit_line=line if line else start + 1,
        station=table["Stationsnummer"][which[0]] if "Stationsnummer" in table and which else "",
        series=name,
        is_doubtful=lambda code: "geschätzt" in code.lower(),
    )
    raw = Raw(
        [table["Zeitstempel"][k] for k in which],
        [table["Wert"][k] for k in which],
        [numbers[k] for k in which],
        [table["Freigabestatus"][k] for k in which],
    )
    return make_rows(raw, facts, options, source)


def _is_discharge(parameter: str) -> bool:
    words = parameter.lower().split()
    return not words or any(word.startswith(_DISCHARGE[:-1]) or word == "q" for word in words)


def _unit(
    preamble: list[str], names: list[str], table: dict[str, list[str]], which: list[int]
) -> tuple[str | None, int | None]:
    """The unit in its own column, in the preamble or in a name, and the line."""
    column = next((name for name in table if "einheit" in name.lower()), None)
    if column is not None and which and table[column][which[0]]:
        return table[column][which[0]], None
    for number, line in enumerate(preamble, 1):
        for field in fields_of(line, ";"):
            if (unit := unit_in_header(field)) is not None:
                return unit, number
    return next((u for name in names if (u := unit_in_header(name))), None), None
