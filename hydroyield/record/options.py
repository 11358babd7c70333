"""What the user may say about a record file."""

from __future__ import annotations

from dataclasses import dataclass

from hydroyield.record.faults import Source

DATE_ORDERS = ("day_first", "month_first")
DECIMAL_MARKS = ("point", "comma")


@dataclass(frozen=True)
class RecordOptions:
    """What the site file may say about the record; everything is optional.

    unit : unit of the values, such as "m3/s", "l/s", "cfs" or "mm/d"
    date_column : name of the column of dates
    value_column : name of the column of discharges, or of the series where a file has several
    missing : extra marks for "no value", compared as text and as a number
    date_order : "day_first" or "month_first"
    decimal_mark : "point" or "comma"
    gauge_area_m2 : catchment area of the gauge [m2], needed for depths such as mm/d
    file_format : name of the format, such as "usgs-rdb" or "plain"; found by looking when left out
    """

    unit: str | None = None
    date_column: str | None = None
    value_column: str | None = None
    missing: tuple[str, ...] = ()
    date_order: str | None = None
    decimal_mark: str | None = None
    gauge_area_m2: float | None = None
    file_format: str | None = None


def check_options(options: RecordOptions, source: Source) -> None:
    """Refuse words that mean nothing here. Raises RecordError."""
    _one_of("date_order", options.date_order, DATE_ORDERS, source)
    _one_of("decimal_mark", options.decimal_mark, DECIMAL_MARKS, source)


def _one_of(key: str, value: str | None, words: tuple[str, ...], source: Source) -> None:
    if value is not None and value not in words:
        raise source.error(f"'{value}' is not read here; write {' or '.join(words)}", key=key)
