"""Calendar arithmetic on arrays."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray


def start_of_month(year: NDArray[np.int64], month: NDArray[np.int64]) -> NDArray[np.datetime64]:
    """Months as datetime64[M]; year and month (1 to 12) of the same shape."""
    months: NDArray[np.datetime64] = ((year - 1970) * 12 + month - 1).astype("datetime64[M]")
    return months


def days_in_month(year: NDArray[np.int64], month: NDArray[np.int64]) -> NDArray[np.int64]:
    """Number of days of each month in the Gregorian calendar."""
    start = start_of_month(year, month)
    length = (start + 1).astype("datetime64[D]") - start.astype("datetime64[D]")
    days: NDArray[np.int64] = length.astype(np.int64)
    return days
