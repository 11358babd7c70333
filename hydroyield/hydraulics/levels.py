"""Water levels against discharge. Each form is called with discharge [m3/s] and gives level [m]."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Protocol

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]

DROWNED_STEPS = 40  # halvings, finer than any level is surveyed


class Level(Protocol):
    """Water level as a function of discharge."""

    def __call__(self, discharge: Floats) -> Floats:
        """Level [m] at `discharge` [m3/s]; arrays of one shape."""
        ...


@dataclass(frozen=True)
class FixedLevel:
    """A level that does not change.

    level : [m]
    """

    level: float

    def __call__(self, discharge: Floats) -> Floats:
        return np.full(np.shape(discharge), self.level)


@dataclass(frozen=True)
class LevelTable:
    """Surveyed levels, linear between the points.

    discharges : rising [m3/s]
    levels : [m]

    Below the first point the level is constant; above the last the last segment goes on.
    """

    discharges: tuple[float, ...]
    levels: tuple[float, ...]

    def __call__(self, discharge: Floats) -> Floats:
        (q0, q1), (z0, z1) = self.discharges[-2:], self.levels[-2:]
        beyond = np.maximum(0.0, discharge - q1) * ((z1 - z0) / (q1 - q0))
        return np.asarray(np.interp(discharge, self.discharges, self.levels) + beyond)


@dataclass(frozen=True)
class StageDischarge:
    """A rating Q = C (h - a)^b, the form of ISO 18320.

    zero_level : a, level of zero discharge [m]
    coefficient : C [m3/s at 1 m]
    exponent : b
    """

    zero_level: float
    coefficient: float
    exponent: float

    def __call__(self, discharge: Floats) -> Floats:
        depth = (np.maximum(0.0, discharge) / self.coefficient) ** (1 / self.exponent)
        return np.asarray(self.zero_level + depth)


@dataclass(frozen=True)
class Weir:
    """A free overfall Q = C L h^1.5; h is the head over the crest, approach velocity neglected.

    crest : [m]
    length : L [m]
    coefficient : C [m^0.5/s]; 1.84 for a sharp crest, 3.33 in feet (USBR Water Measurement
        Manual, ch. 7, from memory)
    drowned : whether a tailwater above the crest holds the headwater up
    """

    crest: float
    length: float
    coefficient: float
    drowned: bool = False

    def drowned_level(self, discharge: Floats, downstream: Floats) -> Floats:
        """Headwater level [m] over the weir, both (n,).

        discharge : over the weir [m3/s]
        downstream : level below it [m]

        Q = C L h1^1.5 (1 - (h2 / h1)^1.5)^0.385 (Villemonte 1947, Eng. News-Rec. 139: 866-869),
        solved by bisection between the free level and that raised by the tailwater.
        """
        free = self(discharge) - self.crest
        behind = np.maximum(0.0, downstream - self.crest)
        low, high = np.maximum(free, behind), free + behind
        unit = np.maximum(0.0, discharge) / (self.coefficient * self.length)
        for _ in range(DROWNED_STEPS):
            middle = 0.5 * (low + high)
            ratio = behind / np.maximum(middle, 1e-12)
            passed = middle**1.5 * np.maximum(0.0, 1 - ratio**1.5) ** 0.385
            low, high = np.where(passed < unit, middle, low), np.where(passed < unit, high, middle)
        return np.asarray(self.crest + high)

    def __call__(self, discharge: Floats) -> Floats:
        unit_discharge = np.maximum(0.0, discharge) / (self.coefficient * self.length)
        return np.asarray(self.crest + np.cbrt(unit_discharge) ** 2)


@dataclass(frozen=True)
class NormalDepth:
    """Uniform flow in a trapezoidal channel by Manning's formula Q = A R^(2/3) S^(1/2) / n.

    bed_level : [m]
    bottom_width : [m]
    side_slope : horizontal to vertical
    slope : of the bed
    manning_n : [s/m^(1/3)]; typical values in Chow (1959), Open-Channel Hydraulics, Table 5-6
    """

    bed_level: float
    bottom_width: float
    side_slope: float
    slope: float
    manning_n: float
    _conveyance: float = field(init=False, repr=False)

    def __post_init__(self) -> None:
        object.__setattr__(self, "_conveyance", self.slope**0.5 / self.manning_n)

    def discharge(self, depth: Floats) -> Floats:
        """Discharge [m3/s] at `depth` [m]."""
        area, perimeter = self._section(depth)
        return np.asarray(self._conveyance * area ** (5 / 3) / perimeter ** (2 / 3))

    def __call__(self, discharge: Floats) -> Floats:
        return self.bed_level + self.depth(discharge)

    def depth(self, discharge: Floats) -> Floats:
        """Normal depth [m] at `discharge` [m3/s]; 0 without flow.

        Newton's method on ln Q against ln depth. That slope lies between 1 (a deep slot) and
        8/3 (a triangle), so the iteration converges from any depth.
        """
        flow = np.maximum(1e-12, np.asarray(discharge, dtype=np.float64))
        depth = (flow / self._conveyance / max(self.bottom_width, 1.0)) ** 0.6
        for _ in range(40):
            error = np.log(self.discharge(depth) / flow)
            depth = depth * np.exp(-error / self._log_slope(depth))
            if np.all(np.abs(error) < 1e-11):
                break
        return np.where(np.asarray(discharge) > 0, depth, 0.0)

    def _section(self, depth: Floats) -> tuple[Floats, Floats]:
        area = (self.bottom_width + self.side_slope * depth) * depth
        return area, self.bottom_width + 2 * depth * (1 + self.side_slope**2) ** 0.5

    def _log_slope(self, depth: Floats) -> Floats:
        area, perimeter = self._section(depth)
        top_width = self.bottom_width + 2 * self.side_slope * depth
        wetting = 2 * (1 + self.side_slope**2) ** 0.5
        slope = 5 / 3 * top_width / area - 2 / 3 * wetting / perimeter
        return np.asarray(depth * slope)


def range_covered(level: object) -> tuple[float, float] | None:
    """Smallest and largest discharge [m3/s] that a surveyed level covers; None for a formula."""
    if isinstance(level, LevelTable):
        return level.discharges[0], level.discharges[-1]
    found = getattr(level, "discharges", None)  # of a fitted rating
    return found if isinstance(found, tuple) else None
