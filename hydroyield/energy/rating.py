"""Rated head, discharge and capacity that were left out, derived from the site.

The rated state is the smallest river discharge at which the water offered reaches the sum of the
rated discharges; there the net head is the rated head.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from hydroyield.errors import ComputationError
from hydroyield.hydraulics import Heads
from hydroyield.hydraulics.heads import FREE
from hydroyield.hydraulics.losses import Waterway
from hydroyield.powerhouse import EfficiencyCurve, HillChart, JetCurve, OutputLimit, UnitGroup
from hydroyield.river import WaterRules

Floats = NDArray[np.float64]


class RatingError(ComputationError):
    """A rated value cannot be derived.

    group : number of the turbine group, from 0
    key : of the value, "rated_head" or "unit_capacity"
    """

    def __init__(self, group: int, key: str, message: str) -> None:
        self.group, self.key = group, key
        super().__init__(message)


@dataclass(frozen=True)
class UnitSpecification:
    """Equal units as described; None for what is to be derived.

    The fields are those of `UnitGroup`, in its units, but `branch` holds the losses on the way of
    one unit.
    """

    count: int
    type: str
    rated_discharge: float | None
    rated_head: float | None
    unit_capacity: float | None
    minimum_share: float
    curve: EfficiencyCurve | JetCurve | HillChart
    axis_level: float | None = None
    branch: Waterway = FREE
    output_limit: OutputLimit | None = None
    starting_share: float = 0.0

    def branch_coefficient(self, discharge: float) -> float:
        """k of h = k q^2 on the way of one unit, at its rated discharge [m per (m3/s)^2]."""
        return float(self.branch.coefficient(np.array(discharge)))


@dataclass(frozen=True)
class RatedState:
    """Where rated values are derived.

    river_discharge : [m3/s]
    turbined : sum of the rated discharges [m3/s]
    reached : the river offers that much on some day of the record
    """

    river_discharge: float
    turbined: float
    reached: bool


@dataclass(frozen=True)
class Setting:
    """What rated values depend on beside the units.

    rules : what the river keeps
    heads : levels and losses
    highest_discharge : largest river discharge of the record [m3/s]
    terminal_weight : density x gravity x drive x generator efficiency [N/m3]
    """

    rules: WaterRules
    heads: Heads
    highest_discharge: float
    terminal_weight: float

    def state(self, turbined: float) -> tuple[RatedState, int]:
        """The rated state for a total of rated discharges [m3/s], and its season."""
        river, season = self.rules.smallest_discharge_offering(turbined, self.highest_discharge)
        offered = self.rules.offered(np.array([river]), np.array([season]))[0]
        return RatedState(river, turbined, bool(offered >= turbined * (1 - 1e-9))), season

    def net_head(self, turbined: float, axis_level: float | None) -> float:
        """Net head with all units at rated discharge, at the rated state [m]."""
        state, season = self.state(turbined)
        levels = self.heads.at(
            np.array([state.river_discharge]),
            self.rules.abstracted[[season]],
            self.rules.unreturned[[season]],
            np.array([season]),
        )
        return float(levels.net(np.array([turbined]), axis_level)[0])


def rate_units(
    units: Sequence[UnitSpecification], setting: Setting
) -> tuple[tuple[UnitGroup, ...], RatedState]:
    """Derive what was left out of the rated values.

    Raises RatingError where there is no head at the rated state, or where no discharge gives the
    capacity that is wanted.
    """
    total = _total_discharge(units, setting)
    state, _ = setting.state(total)
    return tuple(_rated(number, unit, total, setting) for number, unit in enumerate(units)), state


def _rated(number: int, unit: UnitSpecification, total: float, setting: Setting) -> UnitGroup:
    head = unit.rated_head
    if head is None:
        head = _head_behind_branch(unit, setting.net_head(total, unit.axis_level), setting)
        if head <= 0:
            raise RatingError(
                number,
                "rated_head",
                "rated_head cannot be derived: no net head is left with all units at rated "
                f"discharge ({total:.4g} m3/s together); write rated_head, or smaller units",
            )
    per_discharge = _output_per_discharge(unit, head, setting)
    discharge = unit.rated_discharge
    if discharge is None:
        assert unit.unit_capacity is not None  # one of the two is always described
        discharge = unit.unit_capacity / per_discharge
    capacity = unit.unit_capacity
    if capacity is None:
        capacity = discharge * per_discharge
    return UnitGroup(
        unit.count, unit.type, discharge, head, capacity,
        unit.minimum_share, unit.curve, unit.axis_level, unit.branch_coefficient(discharge),
        unit.output_limit, unit.starting_share,
    )  # fmt: skip


def _head_behind_branch(unit: UnitSpecification, head: float, setting: Setting) -> float:
    """Net head of one unit at rated discharge [m], from that before its branch."""
    if unit.branch.is_free:
        return head
    behind = head
    for _ in range(60):  # converges where the branch takes less than half of the head
        discharge = unit.rated_discharge
        if discharge is None:
            assert unit.unit_capacity is not None
            discharge = unit.unit_capacity / _output_per_discharge(unit, behind, setting)
        lost = unit.branch_coefficient(discharge) * discharge**2
        behind = 0.5 * (behind + head - lost)
        if behind <= 0:
            return 0.0
    return behind


def _output_per_discharge(unit: UnitSpecification, head: float, setting: Setting) -> float:
    """Output of a fully open unit at the generator terminals per discharge [W per m3/s]."""
    if isinstance(unit.curve, HillChart):
        assert unit.rated_discharge is not None  # the site file is refused without
        efficiency = float(unit.curve(np.array(unit.rated_discharge), np.array(head)))
    else:
        efficiency = float(unit.curve(np.array([1.0]))[0])
    return setting.terminal_weight * head * efficiency


def _total_discharge(units: Sequence[UnitSpecification], setting: Setting) -> float:
    """Sum of the rated discharges, where need be solved together with the head [m3/s]."""
    known = 0.0
    open_units: list[tuple[int, UnitSpecification]] = []
    for number, unit in enumerate(units):
        if unit.rated_discharge is not None:
            known += unit.count * unit.rated_discharge
        elif unit.rated_head is not None:
            assert unit.unit_capacity is not None
            each = unit.unit_capacity / _output_per_discharge(unit, unit.rated_head, setting)
            known += unit.count * each
        else:
            open_units.append((number, unit))
    if not open_units:
        return known
    return _solve_total(known, open_units, setting)


def _solve_total(
    known: float, open_units: Sequence[tuple[int, UnitSpecification]], setting: Setting
) -> float:
    """The smallest total at whose head the open units need just the rest of it."""
    from scipy.optimize import brentq

    def needed(total: float) -> float:
        each = known
        for _, unit in open_units:
            before = setting.net_head(total, unit.axis_level)
            head = _head_behind_branch(unit, before, setting) if before > 0 else 0.0
            if head <= 0:
                return np.inf
            assert unit.unit_capacity is not None
            each += unit.count * unit.unit_capacity / _output_per_discharge(unit, head, setting)
        return each

    def lacking(total: float) -> float:
        """By how much the units need more than `total`, as a bounded share of it."""
        wanted = needed(total)
        return 1.0 if np.isinf(wanted) else (wanted - total) / (wanted + total)

    least = needed(max(known, 1e-6))  # the head is largest at the smallest total
    if np.isfinite(least):
        below = 0.5 * least
        for total in least * np.geomspace(1 - 1e-9, 50, 400):
            if lacking(float(total)) <= 0:
                return float(brentq(lacking, below, total, xtol=1e-12, rtol=1e-13))
            below = total
    raise RatingError(
        open_units[0][0],
        "unit_capacity",
        "no discharge gives this unit_capacity at the net head that is left; write a smaller "
        "unit_capacity, or rated_discharge and rated_head",
    )
