"""The record as the rest of the package sees it, and the receipt of how it was read."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from hydroyield.checks import Check

if TYPE_CHECKING:
    import pandas as pd


@dataclass(frozen=True)
class Dropped:
    """Rows of one kind that gave no value.

    reason : "blank", "mark for missing", "negative", "duplicate" or "hour written twice as clocks
        went back"
    count : how many
    lines : the first few line numbers
    """

    reason: str
    count: int
    lines: tuple[int, ...]


@dataclass(frozen=True)
class Receipt:
    """How a record was read: enough to see whether it was understood.

    file : name as given
    sha256 : of the bytes of the file
    encoding, delimiter, decimal_mark, date_format : as found, in words
    date_column, value_column : names of the columns
    unit, unit_source : unit in the file, and "site file", "column header", "unit row" or "file"
        where the format says it
    rows_read, rows_used : rows with a date; those whose value is in the record
    dropped : the others, one entry for each reason that occurs; rows_used and the counts add up
        to rows_read
    first_line_out_of_order : line of the first row that is earlier than the one above, or None
    daily : whether the record gives one value a day
    step_minutes : usual step between rows [min]
    first, last : first and last day with a value, datetime64[D]
    days, missing_days : days with a value, and days without between first and last [d]
    partial_days : days of a record finer than daily that have values but too few to count
    checks : findings
    file_format : name of the format, "plain" for delimited text of no agency
    station, series : what the file says it holds, "" where it says nothing
    catchment_area_m2 : of the gauge, as the file gives it [m2], None without
    flags : {code of quality as printed: rows that carry it}
    estimated_share : share of the rows used whose code says estimated or affected by ice
    files : (name, sha256) of each file, where the record was joined from several
    """

    file: str
    sha256: str
    encoding: str
    delimiter: str
    decimal_mark: str
    date_format: str
    date_column: str
    value_column: str
    unit: str
    unit_source: str
    rows_read: int
    rows_used: int
    dropped: tuple[Dropped, ...]
    first_line_out_of_order: int | None
    daily: bool
    step_minutes: float
    first: np.datetime64
    last: np.datetime64
    days: int
    missing_days: int
    partial_days: int
    checks: tuple[Check, ...]
    file_format: str = "plain"
    station: str = ""
    series: str = ""
    catchment_area_m2: float | None = None
    flags: dict[str, int] = field(default_factory=dict)
    estimated_share: float = 0.0
    files: tuple[tuple[str, str], ...] = ()

    @property
    def in_order(self) -> bool:
        """Whether the rows stood in order of time."""
        return self.first_line_out_of_order is None


@dataclass(frozen=True)
class FinerSeries:
    """The values of a record that is finer than daily, each time once.

    times : written clock time [s] since 1970-01-01, rising, shape (m,)
    discharge : [m3/s], shape (m,)
    step_seconds : usual step [s]
    """

    times: NDArray[np.int64]
    discharge: NDArray[np.float64]
    step_seconds: float


@dataclass(frozen=True)
class Record:
    """Daily mean discharge at a gauge.

    dates : every calendar day from the first to the last with a value, datetime64[D], shape (n,)
    discharge : daily means [m3/s], nan where missing, shape (n,)
    receipt : how the record was read
    filled : days whose value was estimated from a reference, shape (n,); None where none was
    doubtful : days whose quality code says estimated or affected by ice, shape (n,); None where
        the file has no codes
    finer : the values as recorded, where they are finer than daily
    """

    dates: NDArray[np.datetime64]
    discharge: NDArray[np.float64]
    receipt: Receipt
    filled: NDArray[np.bool_] | None = None
    doubtful: NDArray[np.bool_] | None = None
    finer: FinerSeries | None = None

    @property
    def missing_by_month(self) -> tuple[int, ...]:
        """Days without a value between first and last, by calendar month, January first [d]."""
        month = self.dates.astype("datetime64[M]").astype(np.int64) % 12
        return tuple(np.bincount(month[np.isnan(self.discharge)], minlength=12).tolist())

    def series(self) -> pd.Series[float]:
        """The record as a pandas series [m3/s] over its dates, nan where missing."""
        import pandas as pd

        index = pd.DatetimeIndex(self.dates.astype("datetime64[ns]"), freq="D", name="date")
        return pd.Series(self.discharge, index=index, name="discharge_m3s")

    @classmethod
    def from_series(
        cls, series: pd.Series[float], unit: str = "m3/s", gauge_area_m2: float | None = None
    ) -> Record:
        """Make a record from a pandas series over dates, daily or finer.

        series : values [unit], index a DatetimeIndex; written clock time counts, as in a file
        unit : any unit that a record file may have
        gauge_area_m2 : catchment area [m2], needed for depths such as "mm/d"

        Raises RecordError; rows are counted from 1 in the place of lines.
        """
        from hydroyield.record.reading import record_from_series

        return record_from_series(series, unit, gauge_area_m2)
