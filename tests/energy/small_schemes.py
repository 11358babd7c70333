"""Small schemes for tests: a short record, fixed or simple levels, and units rated by hand."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field

import numpy as np

from hydroyield.energy import Scheme
from hydroyield.hydraulics import FixedLevel, Heads
from hydroyield.powerhouse import EfficiencyCurve, Electrical, Plant, UnitGroup
from hydroyield.river import WaterRules

DENSITY, GRAVITY = 1000.0, 9.81
WEIGHT = DENSITY * GRAVITY  # N/m3
FLAT = EfficiencyCurve((0.0, 1.0), (0.8, 0.8))
TEN_METRES = Heads(FixedLevel(10.0), FixedLevel(0.0))
NO_RULES = WaterRules.by_month()


def days(first: str, last: str) -> np.ndarray:
    """Every day from the first up to the last."""
    return np.arange(first, np.datetime64(last) + 1, dtype="datetime64[D]")


ONE_YEAR = days("2001-01-01", "2001-12-31")  # 8760 h
TWO_YEARS = days("2001-10-01", "2003-09-30")


def unit(
    count: int = 1,
    *,
    kind: str = "other",
    discharge: float = 5.0,
    head: float = 10.0,
    capacity: float | None = None,
    minimum: float = 0.0,
    curve: EfficiencyCurve = FLAT,
    axis_level: float | None = None,
) -> UnitGroup:
    """Equal units; without a capacity nothing limits their output."""
    limit = 1e9 if capacity is None else capacity
    return UnitGroup(count, kind, discharge, head, limit, minimum, curve, axis_level)


@dataclass(frozen=True)
class Machinery:
    """What stands behind the turbines and stops them, as `Plant` names it."""

    electrical: Electrical = field(default_factory=Electrical)
    minimum_net_head: float = 0.0
    shutdown_above: float | None = None


def scheme(
    discharge: np.ndarray,
    groups: Sequence[UnitGroup],
    dates: np.ndarray = TWO_YEARS,
    *,
    rules: WaterRules = NO_RULES,
    heads: Heads = TEN_METRES,
    machinery: Machinery | None = None,
    year_start_month: int = 10,
) -> Scheme:
    """A scheme on a record of one value for each date [m3/s]."""
    machinery = machinery or Machinery()
    plant = Plant(
        tuple(groups), machinery.electrical, DENSITY, GRAVITY,
        machinery.minimum_net_head, machinery.shutdown_above,
    )  # fmt: skip
    return Scheme(dates, discharge, rules, heads, plant, year_start_month)
