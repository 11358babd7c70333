"""The seam between the readers of file formats and everything that follows.

A reader turns the text of a file into `Rows`; cleaning, daily means and the receipt know
nothing of the format.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from hydroyield.checks import Check

USED, BLANK, MARKED, NEGATIVE, DUPLICATE = range(5)
REASONS = {
    BLANK: "blank",
    MARKED: "mark for missing",
    NEGATIVE: "negative",
    DUPLICATE: "duplicate",
}


@dataclass(frozen=True)
class Layout:
    """How a reader understood the file, in words for the receipt.

    delimiter, decimal_mark, date_format : words such as "semicolon", "comma", "DD.MM.YYYY"
    date_column, value_column : names of the columns
    unit : canonical unit of the values in the file
    unit_source : "site file", "column header" or "unit row"
    """

    delimiter: str
    decimal_mark: str
    date_format: str
    date_column: str
    value_column: str
    unit: str
    unit_source: str


@dataclass(frozen=True)
class Rows:
    """The rows of a record in the order of the file.

    dates : the printed dates, datetime64[D], shape (n,)
    seconds : written clock time [s] since midnight of the printed date, 0 to 86400, shape (n,)
    values : as printed [unit of the file], nan where there is none, shape (n,)
    lines : line numbers in the file, shape (n,)
    reasons : USED, or why a row has no value (BLANK, MARKED), shape (n,)
    factor : value of one unit of the file [m3/s]
    layout : how the file was understood
    checks : findings of the reader
    """

    dates: NDArray[np.datetime64]
    seconds: NDArray[np.int64]
    values: NDArray[np.float64]
    lines: NDArray[np.int64]
    reasons: NDArray[np.uint8]
    factor: float
    layout: Layout
    checks: tuple[Check, ...] = ()

    @property
    def times(self) -> NDArray[np.int64]:
        """Written clock times [s] since 1970-01-01 00:00, shape (n,)."""
        days: NDArray[np.int64] = self.dates.astype(np.int64)
        return days * 86400 + self.seconds
