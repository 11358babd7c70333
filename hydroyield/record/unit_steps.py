"""A lasting jump of the whole level of a record, as when the unit of its values changes."""

from __future__ import annotations

from dataclasses import dataclass
from math import exp, log

import numpy as np
from numpy.typing import NDArray

from hydroyield.quantities import DISCHARGE, unit_factor

Floats = NDArray[np.float64]

LOW = 0.1  # quantile by which levels are compared; floods do not reach it
NEAR, FAR = 20, 365  # values on both sides
NEAR_TOLERANCE, FAR_TOLERANCE = log(2.0), log(3.0)  # how far the levels may be off the factor
DAY_TOLERANCE = log(8.0)  # and one day and the next, which may hold a flood
FEWEST = 180  # values on either side

_PAIRS = (("m3/s", "l/s"), ("m3/s", "cfs"), ("cfs", "l/s"), ("m3/s", "Ml/d"))
FACTORS = {
    f"{one} to {other}": unit_factor(one, DISCHARGE) / unit_factor(other, DISCHARGE)
    for pair in _PAIRS
    for one, other in (pair, pair[::-1])
}


@dataclass(frozen=True)
class UnitStep:
    """A part of a record that stands at another level.

    factor : by which it is too high; below 1 where it is too low
    units : a change of unit with that factor, in words
    factor_of_day : (n,) factor of each day, 1 on the days taken as right
    """

    factor: float
    units: str
    factor_of_day: Floats


def unit_step(discharge: Floats) -> UnitStep | None:
    """The part of a daily series that seems to be in another unit, if there is one.

    discharge : (n,) nan where missing [m3/s]

    A jump counts where the low discharges of twenty days on both sides differ by a factor between
    units of discharge, and those of a year and the day itself roughly do. The level that holds
    for most days is taken as right.
    """
    place = np.flatnonzero(np.nan_to_num(discharge) > 0)
    logs = np.log(discharge[place])
    jumps = _jumps(logs)
    if not jumps:
        return None
    level = np.zeros(logs.size)
    for at, rise in jumps:
        back = abs(level[at] + rise) <= NEAR_TOLERANCE  # to the first level, by the same factor
        level[at:] = 0.0 if back else level[at] + log(FACTORS[_nearest(rise)])
    levels, count = np.unique(level.round(6), return_counts=True)
    level = level - levels[count.argmax()]
    level[np.abs(level) < 1e-5] = 0.0
    if not level.any():
        return None
    factor_of_day = np.ones(discharge.size)
    factor_of_day[place] = np.exp(level)
    odd = level[np.flatnonzero(level)[0]]
    return UnitStep(exp(odd), _nearest(odd), factor_of_day)


def _jumps(logs: Floats) -> list[tuple[int, float]]:
    """Positions at which the level jumps by a factor between units, and the rise there."""
    smallest = min(abs(log(factor)) for factor in FACTORS.values())
    steep = np.flatnonzero(np.abs(np.diff(logs)) > smallest - DAY_TOLERANCE) + 1
    found: list[tuple[int, float]] = []
    for at in steep.tolist():
        rise = _rise(logs, at, NEAR)
        if not _is_unit_change(logs, at, rise):
            continue
        if found and at - found[-1][0] < NEAR:  # the same jump seen again, or seen better
            if _step_apart(logs, at, rise) < _step_apart(logs, *found[-1]):
                found[-1] = at, rise
        else:
            found.append((at, rise))
    return found


def _is_unit_change(logs: Floats, at: int, rise: float) -> bool:
    if min(at, logs.size - at) < FEWEST or _apart(rise) > NEAR_TOLERANCE:
        return False
    far = abs(_rise(logs, at, FAR) - log(FACTORS[_nearest(rise)]))
    return far <= FAR_TOLERANCE and _step_apart(logs, at, rise) <= DAY_TOLERANCE


def _rise(logs: Floats, at: int, size: int) -> float:
    """Rise of the low discharges from so many values before a position to as many from it on."""
    before, after = logs[max(0, at - size) : at], logs[at : at + size]
    return float(np.quantile(after, LOW) - np.quantile(before, LOW))


def _step_apart(logs: Floats, at: int, rise: float) -> float:
    """How far the rise from one value to the next is from the factor nearest to a rise."""
    return abs(float(logs[at] - logs[at - 1]) - log(FACTORS[_nearest(rise)]))


def _apart(rise: float) -> float:
    """How far a rise is from the nearest factor."""
    return abs(rise - log(FACTORS[_nearest(rise)]))


def _nearest(rise: float) -> str:
    """The change of unit nearest to a rise of the logarithm."""
    return min(FACTORS, key=lambda name: abs(rise - log(FACTORS[name])))
