"""Choosing the columns of dates and of values."""

from __future__ import annotations

import difflib
from collections.abc import Iterable
from dataclasses import dataclass

from hydroyield.record.delimiter import most
from hydroyield.record.faults import Source
from hydroyield.record.options import RecordOptions
from hydroyield.record.shapes import looks_like_clock, looks_like_date
from hydroyield.record.table import Table, is_date_name
from hydroyield.record.units import unit_in_header

_SAMPLE = 200  # rows, spread over the file, on which a column is judged
_DISCHARGE_NAMES = frozenset(
    {
        "discharge", "flow", "streamflow", "q", "abfluss", "durchfluss", "debit", "débit",
        "caudal", "portata", "vazao", "vazão", "afvoer", "vattenföring", "vannføring", "odtok",
        "průtok", "przepływ",
    }
)  # fmt: skip
_VALUE_NAMES = frozenset(
    {
        "value", "wert", "mittelwert", "tagesmittelwert", "valeur", "valor", "waarde",
    }
)  # fmt: skip


@dataclass(frozen=True)
class Chosen:
    """Which columns of the table hold what.

    date, value : positions of the columns
    clock : position of a column of clock times beside the dates, or None
    """

    date: int
    value: int
    clock: int | None


def choose_columns(table: Table, options: RecordOptions, source: Source) -> Chosen:
    """Find the columns; what is not plain is asked for. Raises RecordError."""
    samples = [column[:: max(1, len(column) // _SAMPLE)] for column in table.columns]
    dated = [most(looks_like_date, sample) for sample in samples]
    date = _date_column(table, options.date_column, dated, samples, source)
    clock = None if _has_clock(samples[date]) else _clock_column(table, date, samples)
    if options.value_column is not None:
        return Chosen(date, _named(table, "value_column", options.value_column, source), clock)
    others = [
        k
        for k, name in enumerate(table.names)
        if k not in (date, clock) and not dated[k] and not _is_void(name, table.columns[k])
    ]
    return Chosen(date, _value_column(table, others, source), clock)


def _named(table: Table, key: str, name: str, source: Source) -> int:
    places = [k for k, known in enumerate(table.names) if known == name.strip()]
    if len(places) == 1:
        return places[0]
    if places:
        raise source.error(
            f"{len(places)} columns are named '{name}'; give them different names",
            table.header_line,
            key,
        )
    close = difflib.get_close_matches(name, table.names, n=1, cutoff=0.5)
    hint = f"; did you mean '{close[0]}'?" if close else ""
    raise source.error(
        f"there is no column '{name}'; the columns are {_listed(table.names)}{hint}",
        table.header_line,
        key,
    )


def _date_column(
    table: Table, name: str | None, dated: list[bool], samples: list[list[str]], source: Source
) -> int:
    if name is not None:
        return _named(table, "date_column", name, source)
    usual = [k for k, known in enumerate(table.names) if is_date_name(known)]
    readable = [k for k in usual if dated[k]] or [k for k, is_date in enumerate(dated) if is_date]
    detailed = [k for k in readable if _has_clock(samples[k])]
    if len(readable) == 1 or (readable and usual):
        return (detailed or readable)[0]
    if not readable and len(usual) == 1:
        return usual[0]
    what = "several columns hold dates" if readable else "no column holds dates that are read here"
    raise source.error(
        f"{what}; add `date_column:` with one of {_listed(table.names)} under discharge.record, "
        "and write dates as 2020-01-31 or 31.01.2020",
        table.header_line or int(table.lines[0]),
        "date_column",
    )


def _value_column(table: Table, others: list[int], source: Source) -> int:
    if len(others) == 1:
        return others[0]
    for wanted in (_is_discharge, _has_unit, _is_value):
        found = [k for k in others if wanted(table.names[k])]
        if len(found) == 1:
            return found[0]
        if found:
            break
    if not others:
        raise source.error("there is no column beside the dates", table.header_line)
    raise source.error(
        f"which column holds the discharge? Add `value_column:` with one of "
        f"{_listed(table.names[k] for k in others)} under discharge.record{_comma_hint(table)}",
        table.header_line or int(table.lines[0]),
        "value_column",
    )


def _comma_hint(table: Table) -> str:
    if table.delimiter != "comma" or table.header_line is not None:
        return ""
    return (
        "; where the comma is also the decimal mark, export the record with semicolons between "
        "the columns"
    )


def _words(name: str) -> list[str]:
    return "".join(c if c.isalpha() else " " for c in name.casefold()).split()


def _is_discharge(name: str) -> bool:
    return not _DISCHARGE_NAMES.isdisjoint(_words(name))


def _is_value(name: str) -> bool:
    return not _VALUE_NAMES.isdisjoint(_words(name))


def _has_unit(name: str) -> bool:
    return unit_in_header(name) is not None


def _is_void(name: str, column: list[str]) -> bool:
    return name.startswith("column ") and not any(map(str.strip, column))


def _has_clock(sample: list[str]) -> bool:
    return most(lambda text: ":" in text, sample)


def _clock_column(table: Table, date: int, samples: list[list[str]]) -> int | None:
    """A column of clock times right after the dates or named as a time."""
    for k, sample in enumerate(samples):
        beside = k == date + 1 or is_date_name(table.names[k])
        if k != date and beside and most(looks_like_clock, sample):
            return k
    return None


def _listed(names: Iterable[str]) -> str:
    return ", ".join(f"'{name}'" for name in names)
