"""The seam between the readers of file formats and everything that follows.

A reader turns the text of a file into `Rows`; cleaning, daily means and the receipt know
nothing of the format.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from hydroyield.checks import Check

USED, BLANK, MARKED, NEGATIVE, DUPLICATE, REPEATED_HOUR = range(6)
REASONS = {
    BLANK: "blank",
    MARKED: "mark for missing",
    NEGATIVE: "negative",
    DUPLICATE: "duplicate",
    REPEATED_HOUR: "hour written twice as clocks went back",
}


@dataclass(frozen=True)
class Layout:
    """How a reader understood the file, in words for the receipt.

    delimiter, decimal_mark, date_format : words such as "semicolon", "comma", "DD.MM.YYYY"
    date_column, value_column : names of the columns
    unit : canonical unit of the values in the file
    unit_source : "site file", "column header", "unit row", or "file" where the format says it
    station, series : what the file says it holds, "" where it says nothing
    catchment_area_m2 : of the gauge, as the file gives it [m2], None without
    """

    delimiter: str
    decimal_mark: str
    date_format: str
    date_column: str
    value_column: str
    unit: str
    unit_source: str
    station: str = ""
    series: str = ""
    catchment_area_m2: float | None = None


@dataclass(frozen=True)
class Rows:
    """The rows of a record in the order of the file.

    dates : the printed dates, datetime64[D], shape (n,)
    seconds : written clock time [s] since midnight of the printed date, 0 to 86400, shape (n,)
    values : as printed [unit of the file], nan where there is none, shape (n,)
    lines : line numbers in the file, shape (n,)
    reasons : USED, or why a row has no value (BLANK, MARKED, REPEATED_HOUR), shape (n,)
    factor : value of one unit of the file [m3/s]
    layout : how the file was understood
    checks : findings of the reader
    flags : codes of quality as printed, "" where there is none, shape (n,); None without
    doubtful : those codes that say estimated or affected by ice
    """

    dates: NDArray[np.datetime64]
    seconds: NDArray[np.int64]
    values: NDArray[np.float64]
    lines: NDArray[np.int64]
    reasons: NDArray[np.uint8]
    factor: float
    layout: Layout
    checks: tuple[Check, ...] = ()
    flags: NDArray[np.str_] | None = None
    doubtful: frozenset[str] = frozenset()

    @cached_property
    def times(self) -> NDArray[np.int64]:
        """Written clock times [s] since 1970-01-01 00:00, shape (n,)."""
        times: NDArray[np.int64] = self.dates.astype(np.int64)
        times *= 86400
        times += self.seconds
        return times

    def select(self, which: slice | NDArray[np.int64] | NDArray[np.bool_]) -> Rows:
        """Some of the rows, or all in another order."""
        return replace(
            self,
            dates=self.dates[which],
            seconds=self.seconds[which],
            values=self.values[which],
            lines=self.lines[which],
            reasons=self.reasons[which],
            flags=None if self.flags is None else self.flags[which],
        )
