"""Reading a record: file to text, text to rows, rows to daily means, with a receipt."""

from __future__ import annotations

import hashlib
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from hydroyield.record import findings
from hydroyield.record.cleaning import clean
from hydroyield.record.daily import daily_means
from hydroyield.record.faults import Source, in_lines
from hydroyield.record.options import RecordOptions, check_options
from hydroyield.record.plain import read_plain
from hydroyield.record.result import Receipt, Record
from hydroyield.record.rows import BLANK, USED, Layout, Rows
from hydroyield.record.text import read_document
from hydroyield.record.units import factor_of, settle_unit

if TYPE_CHECKING:
    import pandas as pd

_NO_OPTIONS = RecordOptions()


def read_record(
    path: Path | str, options: RecordOptions = _NO_OPTIONS, *, shown_as: str | None = None
) -> Record:
    """Read a discharge record.

    path : the file, plain text with a column of dates and one of values, may be gzipped
    options : what the user says about the file
    shown_as : name of the file in messages; as in `path` when left out

    Raises RecordError with every fault found; nothing ambiguous is guessed.
    """
    source = Source(shown_as or str(path))
    check_options(options, source)
    document = read_document(Path(path), source)
    rows = read_plain(document.text, options, source)
    return _record(rows, source, document.sha256, document.encoding)


def _record(rows: Rows, source: Source, sha256: str, encoding: str) -> Record:
    cleaned = clean(rows, source)
    daily = daily_means(cleaned.rows, source)
    layout = rows.layout
    missing_days = int(np.count_nonzero(np.isnan(daily.means)))
    receipt = Receipt(
        file=source.name,
        sha256=sha256,
        encoding=encoding,
        delimiter=layout.delimiter,
        decimal_mark=layout.decimal_mark,
        date_format=layout.date_format,
        date_column=layout.date_column,
        value_column=layout.value_column,
        unit=layout.unit,
        unit_source=layout.unit_source,
        rows_read=cleaned.rows_read,
        rows_used=cleaned.rows_read - sum(kind.count for kind in cleaned.dropped),
        dropped=cleaned.dropped,
        in_order=cleaned.first_line_out_of_order is None,
        first_line_out_of_order=cleaned.first_line_out_of_order,
        daily=daily.daily,
        step_minutes=daily.step_minutes,
        first=daily.dates[0],
        last=daily.dates[-1],
        days=len(daily.dates) - missing_days,
        missing_days=missing_days,
        partial_days=daily.partial_days,
        checks=findings.find(cleaned, daily, encoding),
    )
    return Record(daily.dates, daily.means * rows.factor, receipt)


def record_from_series(series: pd.Series[float], unit: str, gauge_area_m2: float | None) -> Record:
    """The record that a pandas series over dates holds; see Record.from_series."""
    source = Source("series")
    options = RecordOptions(unit=unit, gauge_area_m2=gauge_area_m2)
    canonical, _ = settle_unit(options, "series", None, None, None, source)
    factor = factor_of(canonical, gauge_area_m2, source)
    dates, seconds = _index_times(series, source)
    values = _values(series, source)
    layout = Layout("none", "point", "datetime", "index", str(series.name), canonical, "argument")
    reasons = np.where(np.isnan(values), np.uint8(BLANK), np.uint8(USED))
    lines = np.arange(1, len(values) + 1)
    rows = Rows(dates, seconds, values, lines, reasons, factor, layout)
    digest = hashlib.sha256(rows.times.tobytes() + values.tobytes()).hexdigest()
    return _record(rows, source, digest, "none")


def _index_times(
    series: pd.Series[float], source: Source
) -> tuple[NDArray[np.datetime64], NDArray[np.int64]]:
    import pandas as pd

    index = series.index
    if not isinstance(index, pd.DatetimeIndex) or not len(index):
        raise source.error("the series needs values over dates; give it a DatetimeIndex")
    if index.hasnans:
        raise source.error("the index has rows without a date; drop them")
    stamps = index.tz_localize(None).to_numpy().astype("datetime64[s]")
    dates = stamps.astype("datetime64[D]")
    return dates, (stamps - dates).astype(np.int64)


def _values(series: pd.Series[float], source: Source) -> NDArray[np.float64]:
    try:
        values = np.asarray(series.to_numpy(na_value=np.nan), dtype=np.float64)
    except (TypeError, ValueError):
        raise source.error("the series holds text; give numbers, nan where missing") from None
    infinite = np.flatnonzero(np.isinf(values)) + 1
    if infinite.size:
        raise source.error(f"infinite value in {in_lines(infinite)}; give numbers or nan")
    return values
