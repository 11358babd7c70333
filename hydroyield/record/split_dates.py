"""Dates that stand in three columns: year, month and day."""

from __future__ import annotations

from dataclasses import replace

from hydroyield.record.faults import Source
from hydroyield.record.options import RecordOptions
from hydroyield.record.shapes import looks_like_date
from hydroyield.record.table import Table

_NAMES = (
    {"year", "yyyy", "yr", "jahr", "annee", "année", "año", "ano", "anno", "jaar", "rok", "år"},
    {"month", "mm", "mo", "monat", "mois", "mes", "mês", "mese", "maand", "miesiąc", "måned"},
    {"day", "dd", "dy", "tag", "jour", "dia", "día", "giorno", "dag", "dzień"},
)
_RANGES = ((1700, 2200), (1, 12), (1, 31))
_SAMPLE = 2000  # rows from the start, by which columns without names are told apart


def with_joined_dates(table: Table, options: RecordOptions, source: Source) -> Table:
    """The table with year, month and day joined to one column, where they stand apart.

    Columns are known by their names. Without names they are the first three, in the order in which
    their whole numbers make dates. Any other table is returned as it is. Raises RecordError where
    day and month could change places.
    """
    if any(looks_like_date(text) for column in table.columns for text in column[:5]):
        return table
    if table.header_line is not None:
        places = _by_name(table)
    else:
        places = _by_number(table, options.date_order, source)
    if places is None:
        return table
    texts = [_joined(*parts) for parts in zip(*(table.columns[k] for k in places), strict=True)]
    kept = [k for k in range(len(table.names)) if k not in places]
    return replace(
        table,
        names=("-".join(table.names[k] for k in places), *(table.names[k] for k in kept)),
        columns=(texts, *(table.columns[k] for k in kept)),
        units=(None, *(table.units[k] for k in kept)),
    )


def _within(number: int | None, part: int) -> bool:
    """Whether a number can be a year (part 0), a month or a day."""
    low, high = _RANGES[part]
    return number is not None and low <= number <= high


def _by_name(table: Table) -> tuple[int, int, int] | None:
    found = []
    for names in _NAMES:
        places = [k for k, name in enumerate(table.names) if name.strip().casefold() in names]
        if len(places) != 1:
            return None
        found.append(places[0])
    return found[0], found[1], found[2]


_ORDERS = {(0, 1, 2): "", (2, 1, 0): "day_first", (2, 0, 1): "month_first"}


def _by_number(table: Table, date_order: str | None, source: Source) -> tuple[int, int, int] | None:
    """The columns of year, month and day among the first three."""
    if len(table.columns) < 4:
        return None
    numbers = [[_whole(text) for text in column[:_SAMPLE]] for column in table.columns[:3]]
    fits = [order for order in _ORDERS if _fits([numbers[k] for k in order])]
    if len(fits) > 1 and date_order is not None:
        fits = [order for order in fits if _ORDERS[order] == date_order]
    if len(fits) > 1:
        raise source.error(
            "day and month stand in columns of their own, and no day is above 12; add "
            "`date_order: day_first` or `date_order: month_first` under discharge.record",
            int(table.lines[0]),
            "date_order",
        )
    return fits[0] if fits else None


def _fits(parts: list[list[int | None]]) -> bool:
    return all(_within(n, part) for part, column in enumerate(parts) for n in column)


def _whole(text: str) -> int | None:
    """A whole number, also one printed as 2.8e+001; None for anything else."""
    try:
        number = float(text)
        return int(number) if number == int(number) else None
    except (ValueError, OverflowError):
        return None


def _joined(year: str, month: str, day: str) -> str:
    """One date as text; what is no date stays as it is printed, for the message."""
    numbers = [_whole(text) for text in (year, month, day)]
    if None in numbers:
        return "-".join(text.strip() for text in (year, month, day)).strip("-")
    return f"{numbers[0]:04d}-{numbers[1]:02d}-{numbers[2]:02d}"
