"""Whether the years of a record are alike: trend, break, and how well their mean is known."""

from __future__ import annotations

from dataclasses import dataclass
from math import erfc, exp, sqrt

import numpy as np
from numpy.typing import ArrayLike, NDArray

Floats = NDArray[np.float64]

ROUNDING = 1e-12  # differences below this share of the largest value are no differences


@dataclass(frozen=True)
class Trend:
    """A monotone trend.

    slope : median of the slopes of all pairs, per year, in the unit of the values
    intercept : median of values - slope x year
    z : standard normal statistic of Mann and Kendall
    p_value : of both sides
    """

    slope: float
    intercept: float
    z: float
    p_value: float


def trend(years: ArrayLike, values: ArrayLike) -> Trend:
    """Mann-Kendall test with Sen's slope.

    years : array_like, (n,), rising, not necessarily without gaps
    values : array_like, (n,) of any unit; no nan

    Mann 1945 (Econometrica 13: 245-259) and Kendall 1975 (Rank Correlation Methods), variance
    corrected for ties, continuity corrected; slope by Sen 1968 (J. Am. Stat. Assoc. 63:
    1379-1389). Fewer than three values, or equal ones, show no trend.
    """
    x, y = np.asarray(years, dtype=np.float64), np.asarray(values, dtype=np.float64)
    first, second = np.triu_indices(y.size, 1)
    if not first.size:
        return Trend(0.0, float(y[0]) if y.size else 0.0, 0.0, 1.0)
    rise = y[second] - y[first]
    slope = float(np.median(rise / (x[second] - x[first])))
    intercept = float(np.median(y - slope * x))
    s, n = float(np.sign(rise).sum()), y.size
    _, ties = np.unique(y, return_counts=True)
    variance = (n * (n - 1) * (2 * n + 5) - (ties * (ties - 1) * (2 * ties + 5)).sum()) / 18
    if n < 3 or variance <= 0:
        return Trend(slope, intercept, 0.0, 1.0)
    z = float((s - np.sign(s)) / sqrt(variance))
    return Trend(slope, intercept, z, erfc(abs(z) / sqrt(2)))


@dataclass(frozen=True)
class Break:
    """The likeliest break of a series.

    position : index of the first value after it
    statistic : K of Pettitt
    p_value : approximate
    before, after : means on both sides, in the unit of the values
    """

    position: int
    statistic: float
    p_value: float
    before: float
    after: float


def break_in(values: ArrayLike) -> Break:
    """Pettitt's test for a break (1979, J. R. Stat. Soc. C 28(2): 126-135).

    values : array_like, (n,) in order of time, of any unit; no nan

    K is the largest |U_t|, U_t the sum of sign(x_j - x_i) over i <= t < j, and p about
    2 exp(-6 K^2 / (n^3 + n^2)). Raises ValueError for fewer than two values.
    """
    x = np.asarray(values, dtype=np.float64)
    n = x.size
    if n < 2:
        raise ValueError("a break needs two values or more")
    signs = np.sign(x[None, :] - x[:, None]).sum(axis=1)  # of each value against all
    u = np.cumsum(signs)[:-1]
    position = int(np.abs(u).argmax()) + 1
    k = float(np.abs(u).max())
    p = min(1.0, 2 * exp(-6 * k**2 / (n**3 + n**2)))
    return Break(position, k, p, float(x[:position].mean()), float(x[position:].mean()))


def autocorrelation(values: ArrayLike, lag: int = 1) -> float:
    """Autocorrelation about the mean of all values; 0 where they are equal or too few.

    values : array_like, (n,) in order of time, of any unit; no nan
    lag : how many places apart, 0 or more
    """
    x = np.asarray(values, dtype=np.float64)
    # the mean of equal values may miss them by a last digit, which would look like persistence
    if x.size <= lag or np.ptp(x) <= ROUNDING * np.abs(x).max():
        return 0.0
    apart = x - x.mean()
    return float((apart[lag:] * apart[: x.size - lag]).sum() / (apart**2).sum())


@dataclass(frozen=True)
class MeanError:
    """How well a mean of yearly values is known.

    standard_error : in the unit of the values
    effective_count : independent values that would know the mean as well
    autocorrelation : of consecutive values
    """

    standard_error: float
    effective_count: float
    autocorrelation: float


def standard_error_of_mean(values: ArrayLike, persistence: float | None = None) -> MeanError:
    """Standard error of the mean of yearly values that depend on the year before.

    values : array_like, (n,) in order of time, of any unit; no nan
    persistence : autocorrelation of consecutive values, where it is known better than from these

    The variance of the mean of a first-order autoregressive series is that of independent values
    times 1 + 2 sum over k of (1 - k / n) r^k (Bayley & Hammersley 1946, Suppl. J. R. Stat. Soc.
    8(2): 184-197). A negative estimate of r is taken as none, so that it does not pretend
    certainty. Raises ValueError for fewer than two values.
    """
    x = np.asarray(values, dtype=np.float64)
    n = x.size
    if n < 2:
        raise ValueError("the error of a mean needs two values or more")
    r = autocorrelation(x) if persistence is None else persistence
    k = np.arange(1, n)
    inflation = 1 + 2 * float(((1 - k / n) * max(r, 0.0) ** k).sum())
    error = float(x.std(ddof=1)) * sqrt(inflation / n)
    return MeanError(error, n / inflation, r)
