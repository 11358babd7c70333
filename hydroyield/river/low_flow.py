"""Low flow: the driest week of each year, how rarely it is undercut, and the base flow."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from hydroyield.river.years import Calendar

Floats = NDArray[np.float64]

WEEK = 7  # d
COMPLETE = 0.95  # share of the windows of a year that need all their days
BLOCK = 5  # d, of the base-flow method
SYMMETRIC = 1e-3  # skew below which the first term of its series will do
TURNING = 0.9  # factor of the base-flow method


def seven_day_minima(
    dates: NDArray[np.datetime64], discharge: Floats, start_month: int = 4, days: int = WEEK
) -> dict[int, float]:
    """Smallest mean of consecutive days in each year [m3/s].

    dates : (n,) every day, datetime64[D]
    discharge : (n,) nan where missing [m3/s]
    start_month : first month of the year; years are named by the calendar year in which they end
    days : length of the window [d], which belongs to the year of its last day

    A year counts where 95 % of its windows have a value on every day.
    """
    if discharge.size < days:
        return {}
    means = np.lib.stride_tricks.sliding_window_view(discharge, days).mean(axis=1)
    year = Calendar.of(dates[days - 1 :], start_month).year
    minima = {}
    for name in np.unique(year).tolist():
        of_year = means[year == name]
        known = of_year[~np.isnan(of_year)]
        if known.size >= COMPLETE * _length(name, start_month):
            minima[name] = float(known.min())
    return minima


def _length(year: int, start_month: int) -> int:
    """Days of a year that starts with a month and is named by the year in which it ends."""
    begins = np.datetime64(f"{year - (start_month > 1)}-{start_month:02d}", "M")
    return int(((begins + 12).astype("datetime64[D]") - begins.astype("datetime64[D]")).astype(int))


@dataclass(frozen=True)
class LowFlow:
    """A low flow and how rarely it is undercut.

    value : [m3/s]
    return_period : mean number of years between two years that undercut it
    method : in words
    years : number of years it rests on
    """

    value: float
    return_period: float
    method: str
    years: int


def low_flow(minima: ArrayLike, return_period: float = 10.0) -> LowFlow:
    """Low flow that is undercut once in so many years.

    minima : array_like, (n,) one of each year, nan where it is not known [m3/s]
    return_period : in years, above 1

    A Pearson type III distribution is fitted to the logarithms by their moments, as US agencies
    do for the 7Q10 (Riggs 1972, USGS Techniques of Water-Resources Investigations, book 4,
    chapter B1); years without flow are accounted for by conditional probability.
    Raises ValueError without a known minimum, and for a return period of a year or less.
    """
    x = np.asarray(minima, dtype=np.float64)
    x = x[~np.isnan(x)]
    if not x.size or not return_period > 1:
        raise ValueError("a low flow needs a yearly minimum and a return period above one year")
    flowing, probability = x[x > 0], 1 / return_period
    dry = 1 - flowing.size / x.size
    method = "log-Pearson III by moments of the logarithms"
    if dry:
        method += f", {x.size - flowing.size} years without flow by conditional probability"
    if probability <= dry or not flowing.size:
        return LowFlow(0.0, return_period, method, x.size)
    value = _log_pearson(np.log(flowing), (probability - dry) / (1 - dry))
    return LowFlow(value, return_period, method, x.size)


def _log_pearson(logs: Floats, probability: float) -> float:
    """Value not exceeded with a probability, from logarithms (n,)."""
    n = logs.size
    deviation = float(logs.std(ddof=1)) if n > 1 else 0.0
    if deviation <= 1e-12:
        return float(np.exp(logs.mean()))
    skew = 0.0
    if n > 2:
        skew = float(n / (n - 1) / (n - 2) * (((logs - logs.mean()) / deviation) ** 3).sum())
    return float(np.exp(logs.mean() + _frequency_factor(skew, probability) * deviation))


def _frequency_factor(skew: float, probability: float) -> float:
    """Quantile of the Pearson type III distribution with mean 0 and deviation 1."""
    from scipy.special import gammaincinv, ndtri

    if abs(skew) < SYMMETRIC:
        normal = float(ndtri(probability))
        return normal + (normal**2 - 1) * skew / 6
    shape = 4 / skew**2  # of the gamma distribution that it is, moved and turned round
    tail = probability if skew > 0 else 1 - probability
    return float(np.sign(skew) * (gammaincinv(shape, tail) - shape) / np.sqrt(shape))


def base_flow_index(discharge: Floats) -> float:
    """Share of the discharge that is base flow; nan where two turning points are not found.

    discharge : (n,) daily, nan where missing [m3/s]

    Smoothed minima of five-day blocks: a minimum is a turning point where 0.9 times it is not
    above either neighbour; straight lines between them are the base flow, never above the discharge
    (Institute of Hydrology 1980, Low Flow Studies; Gustard, Bullock & Dixon 1992, IH Report 108).
    Blocks with a missing day give no minimum.
    """
    count = discharge.size // BLOCK
    blocks = discharge[: count * BLOCK].reshape(count, BLOCK)
    whole = np.flatnonzero(~np.isnan(blocks).any(axis=1))
    if whole.size < 3:
        return float("nan")
    minima = blocks[whole].min(axis=1)
    place = whole * BLOCK + blocks[whole].argmin(axis=1)
    inner = (TURNING * minima[1:-1] <= minima[:-2]) & (TURNING * minima[1:-1] <= minima[2:])
    turning = np.flatnonzero(inner) + 1
    if turning.size < 2:
        return float("nan")
    days = np.arange(place[turning[0]], place[turning[-1]] + 1)
    flow = discharge[days]
    base = np.minimum(np.interp(days, place[turning], minima[turning]), flow)
    known = ~np.isnan(flow)
    total = float(flow[known].sum())
    return float(base[known].sum()) / total if total > 0 else float("nan")
