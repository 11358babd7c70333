"""Reading a record: file to text, text to rows, rows to daily means, with a receipt."""

from __future__ import annotations

import hashlib
from collections import Counter
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from hydroyield.checks import Check
from hydroyield.record import findings
from hydroyield.record.cleaning import Cleaned, clean
from hydroyield.record.daily import Daily, daily_means
from hydroyield.record.faults import Source, in_lines
from hydroyield.record.formats import PLAIN, format_of_text
from hydroyield.record.large import read_large
from hydroyield.record.options import RecordOptions, check_options
from hydroyield.record.result import FinerSeries, Receipt, Record
from hydroyield.record.rows import BLANK, USED, Layout, Rows
from hydroyield.record.text import read_document
from hydroyield.record.time_steps import step_checks
from hydroyield.record.units import factor_of, settle_unit

if TYPE_CHECKING:
    import pandas as pd

_NO_OPTIONS = RecordOptions()


def read_record(
    path: Path | str, options: RecordOptions = _NO_OPTIONS, *, shown_as: str | None = None
) -> Record:
    """Read a discharge record.

    path : the file, in a format of a gauging agency or plain delimited text, may be gzipped
    options : what the user says about the file
    shown_as : name of the file in messages; as in `path` when left out

    Raises RecordError with every fault found; nothing ambiguous is guessed.
    """
    file = open_file(path, options, shown_as)
    return record_of(file, daily_means(file.cleaned.rows, file.source))


@dataclass(frozen=True)
class ReadFile:
    """A file that was read, or several joined, before daily means are taken.

    source : its name for messages
    sha256, encoding, file_format : as in the receipt
    cleaned : the rows, in order of time
    flags : {code of quality: rows that carry it}
    checks : findings on the rows
    files : (name, sha256) of each file, where several were joined
    """

    source: Source
    sha256: str
    encoding: str
    file_format: str
    cleaned: Cleaned
    flags: dict[str, int]
    checks: tuple[Check, ...]
    files: tuple[tuple[str, str], ...] = ()


def open_file(path: Path | str, options: RecordOptions, shown_as: str | None = None) -> ReadFile:
    """Read the rows of one file. Raises RecordError with every fault found."""
    source = Source(shown_as or str(path))
    check_options(options, source)
    document = read_document(Path(path), source)
    found = format_of_text(document.head, options, source)
    rows = read_large(document, options, source) if found is PLAIN else None
    if rows is None:
        rows = found.read(document.text, options, source)
    legacy = document.encoding == PLAIN.legacy_encoding
    encoding = found.legacy_encoding if legacy else document.encoding
    return _read_file(rows, source, document.sha256, encoding, found.name)


def _read_file(
    rows: Rows, source: Source, sha256: str, encoding: str, file_format: str
) -> ReadFile:
    cleaned = clean(rows, source)
    flags = {} if rows.flags is None else Counter(rows.flags[rows.flags != ""].tolist())
    checks = findings.of_rows(cleaned, encoding, file_format)
    return ReadFile(source, sha256, encoding, file_format, cleaned, dict(flags), checks)


def _estimated_share(rows: Rows) -> float:
    """Share of the rows with a value whose flag says estimated or affected by ice."""
    if rows.flags is None:
        return 0.0
    used = rows.flags[rows.reasons == USED]
    return float(np.isin(used, sorted(rows.doubtful)).mean()) if used.size else 0.0


def record_of(file: ReadFile, daily: Daily) -> Record:
    """The record of rows that were read."""
    cleaned = file.cleaned
    layout = cleaned.rows.layout
    missing_days = int(np.count_nonzero(np.isnan(daily.means)))
    receipt = Receipt(
        file=file.source.name,
        sha256=file.sha256,
        encoding=file.encoding,
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
        first_line_out_of_order=cleaned.first_line_out_of_order,
        daily=daily.daily,
        step_minutes=daily.step_minutes,
        first=daily.dates[0],
        last=daily.dates[-1],
        days=len(daily.dates) - missing_days,
        missing_days=missing_days,
        partial_days=daily.partial_days,
        checks=(*file.checks, *findings.of_days(daily), *_of_steps(cleaned.rows, daily)),
        file_format=file.file_format,
        station=layout.station,
        series=layout.series,
        catchment_area_m2=layout.catchment_area_m2,
        flags=file.flags,
        estimated_share=_estimated_share(cleaned.rows),
        files=file.files,
    )
    return Record(
        daily.dates,
        daily.means * cleaned.rows.factor,
        receipt,
        doubtful=_doubtful_days(cleaned.rows, daily),
        finer=None if daily.daily else _finer(cleaned.rows, daily),
    )


def _doubtful_days(rows: Rows, daily: Daily) -> NDArray[np.bool_] | None:
    """(n,) days with a row used whose flag says estimated or affected by ice."""
    if rows.flags is None:
        return None
    doubtful = (rows.reasons == USED) & np.isin(rows.flags, sorted(rows.doubtful))
    return np.isin(daily.dates, rows.dates[doubtful])


def _of_steps(rows: Rows, daily: Daily) -> tuple[Check, ...]:
    if daily.daily:
        return ()
    return step_checks(rows.times[rows.reasons == USED], 60 * daily.step_minutes)


def _finer(rows: Rows, daily: Daily) -> FinerSeries:
    used = rows.reasons == USED
    discharge = rows.factor * rows.values[used]  # noqa: PD011  not of pandas
    return FinerSeries(rows.times[used], discharge, 60 * daily.step_minutes)


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
    file = _read_file(rows, source, digest, "none", "none")
    return record_of(file, daily_means(file.cleaned.rows, source))


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
