"""Head lost on the way from headwater to tailwater, as h = k Q^2.

Each loss gives its coefficient k; only that of a pipe changes with discharge, and only that of a
trash rack with the season.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]

LAMINAR = 2320.0  # Reynolds number up to which flow in a pipe is laminar
TABLE = np.geomspace(1e-5, 1e4, 40_000)  # m3/s, discharges at which a pipe is worked out
KIRSCHMER = {  # shape coefficients of bars (Kirschmer 1926, from memory)
    "rectangular": 2.42,
    "rounded_upstream": 1.83,
    "rounded_both": 1.67,
    "circular": 1.79,
    "teardrop": 0.76,
}


def friction_factor(reynolds: Floats, relative_roughness: float) -> Floats:
    """Darcy friction factor of pipes.

    reynolds : Reynolds number, above 0
    relative_roughness : roughness / diameter

    64 / Re in laminar flow, else the formula of Colebrook (1939, J. Inst. Civ. Eng. 11: 133-156),
    solved by Newton's method from the start of Haaland (1983, J. Fluids Eng. 105(1): 89-90).

    >>> round(float(friction_factor(np.array([1e5]), 1e-4)[0]), 6)
    0.018514
    """
    re = np.maximum(reynolds, LAMINAR)
    rough = relative_roughness / 3.7
    x = -1.8 * np.log10(6.9 / re + rough**1.11)  # 1 / sqrt(f)
    for _ in range(4):
        inner = rough + 2.51 / re * x
        slope = 1 + 2 / np.log(10) * 2.51 / re / inner
        x = x - (x + 2 * np.log10(inner)) / slope
    return np.where(reynolds < LAMINAR, 64 / np.maximum(reynolds, 1e-300), x**-2)


@dataclass(frozen=True)
class Pipe:
    """Pipes of one size beside each other, by Darcy and Weisbach.

    length, diameter : [m]
    roughness : [m]
    minor_losses : sum of the coefficients of bends, valves and the like
    parallel : number of pipes that share the discharge
    viscosity : kinematic [m2/s]
    gravity : [m/s2]
    """

    length: float
    diameter: float
    roughness: float
    minor_losses: float
    parallel: int
    viscosity: float
    gravity: float

    @property
    def area(self) -> float:
        """Of all pipes together [m2]."""
        return float(self.parallel * np.pi * self.diameter**2 / 4)

    def coefficient(self, discharge: Floats) -> Floats:
        """(n,) k of h = k Q^2 [m per (m3/s)^2] at the discharge of all pipes, (n,) [m3/s]."""
        velocity = np.maximum(discharge, TABLE[0]) / self.area
        reynolds = velocity * self.diameter / self.viscosity
        friction = friction_factor(reynolds, self.roughness / self.diameter)
        losses = friction * self.length / self.diameter + self.minor_losses
        return np.asarray(losses / (2 * self.gravity * self.area**2))


def rack_coefficient(
    bar_thickness: float,
    clear_spacing: float,
    shape: str,
    inclination: float,
    area: float,
    blockage: float,
    gravity: float,
) -> float:
    """k of h = k Q^2 of a trash rack [m per (m3/s)^2].

    bar_thickness, clear_spacing : [m]
    shape : of the bars, a key of `KIRSCHMER`
    inclination : of the bars to the horizontal [degrees]
    area : wetted, normal to the flow, without the bars taken off [m2]
    blockage : share of the area that trash has closed
    gravity : [m/s2]

    h = K (t / b)^(4/3) v^2 / 2g sin a (Kirschmer 1926, Mitt. Hydraul. Inst. TH Muenchen 1: 21-41,
    from memory), with v in the area that is not blocked.

    >>> round(rack_coefficient(0.012, 0.070, "rectangular", 60, 1.0, 0.0, 9.81), 5)
    0.01017
    """
    form = KIRSCHMER[shape] * (bar_thickness / clear_spacing) ** (4 / 3)
    return float(
        form * np.sin(np.radians(inclination)) / (2 * gravity * (area * (1 - blockage)) ** 2)
    )


def exit_coefficient(area: float, gravity: float) -> float:
    """k of h = k Q^2 of the velocity head that is lost at an outlet [m per (m3/s)^2].

    area : of the outlet [m2]
    gravity : [m/s2]
    """
    return 1 / (2 * gravity * area**2)


def canal_coefficient(
    length: float, bottom_width: float, side_slope: float, depth: float, manning_n: float
) -> float:
    """k of h = k Q^2 of a canal that is held at a depth [m per (m3/s)^2].

    length, bottom_width, depth : [m]
    side_slope : horizontal to vertical
    manning_n : [s/m^(1/3)]

    The slope of uniform flow by Manning's formula, times the length.
    """
    area = (bottom_width + side_slope * depth) * depth
    radius = area / (bottom_width + 2 * depth * (1 + side_slope**2) ** 0.5)
    slope = (manning_n / (area * radius ** (2 / 3))) ** 2  # at 1 m3/s
    return float(length * slope)


@dataclass(frozen=True)
class Waterway:
    """All losses that one discharge meets.

    fixed : sum of the coefficients that never change [m per (m3/s)^2]
    pipes : those whose coefficient changes with discharge
    racks_by_month : (12,) sum of the coefficients of trash racks [m per (m3/s)^2]
    """

    fixed: float = 0.0
    pipes: tuple[Pipe, ...] = ()
    racks_by_month: tuple[float, ...] = (0.0,) * 12

    @property
    def is_free(self) -> bool:
        """Whether nothing is lost."""
        return self.fixed == 0 and not self.pipes and not any(self.racks_by_month)

    @cached_property
    def _of_pipes(self) -> Floats:
        return np.asarray(sum(pipe.coefficient(TABLE) for pipe in self.pipes))

    def coefficient(self, discharge: Floats) -> Floats | float:
        """k of h = k Q^2 without racks [m per (m3/s)^2], at (n,) [m3/s].

        Pipes are read from a table that is finer than their friction factor is known.
        """
        if not self.pipes:
            return self.fixed
        place = np.log(np.maximum(discharge, TABLE[0]))
        return np.asarray(self.fixed + np.interp(place, np.log(TABLE), self._of_pipes))


def racks_of_seasons(waterway: Waterway, month_of_season: Sequence[int]) -> tuple[float, ...]:
    """Coefficient of the trash racks in each season, by one of its months; () without racks."""
    if not any(waterway.racks_by_month):
        return ()
    return tuple(waterway.racks_by_month[month - 1] for month in month_of_season)
