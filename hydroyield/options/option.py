"""An option that was computed: the numbers by which options are compared."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from hydroyield.energy import Estimate
from hydroyield.energy.standing import hours_by_cause
from hydroyield.options.combination import Combination
from hydroyield.quantities import W_PER_KW, WH_PER_MWH

Floats = NDArray[np.float64]


@dataclass(frozen=True)
class UnitSize:
    """The units of one size in an option.

    discharge : of one unit at full opening [m3/s]
    energy : that they make a year [MWh]
    part_load_energy : the same, each hour times the share by which a unit is not fully open [MWh]
    """

    discharge: float
    energy: float
    part_load_energy: float


@dataclass(frozen=True)
class Option:
    """What an option gives.

    number : 1, 2, ...
    combination : what it is
    type : of the turbines
    machine : name of the machine, the type unless several of that type are tried
    installed_capacity : [kW]
    rated_head : of the largest unit [m]
    energy_by_month : (y, 12) of each year used, January first; a single year with a duration
        table [MWh]
    hours : of the years used [h]
    used_share : of the water offered to the turbines, the share that they take
    standing_hours : without generation, of a mean year [h]
    sizes : of its units
    notes : what speaks against it, in words
    """

    number: int
    combination: Combination
    type: str
    machine: str
    installed_capacity: float
    rated_head: float
    energy_by_month: Floats
    hours: float
    used_share: float
    standing_hours: float
    sizes: tuple[UnitSize, ...]
    notes: tuple[str, ...]

    @property
    def hours_per_year(self) -> float:
        """Mean length of the years used [h]."""
        return self.hours / len(self.energy_by_month)

    @property
    def mean_annual_energy(self) -> float:
        """Net energy, mean over the years used [MWh]."""
        return float(self.energy_by_month.sum(axis=1).mean())

    @property
    def yearly_energy(self) -> Floats:
        """(y,) net energy of each year used [MWh]."""
        return np.asarray(self.energy_by_month.sum(axis=1))

    @property
    def monthly_energy(self) -> Floats:
        """(12,) mean net energy of each calendar month, January first [MWh]."""
        return np.asarray(self.energy_by_month.mean(axis=0))

    @property
    def capacity_factor(self) -> float:
        """Net energy over installed capacity times hours, for the years used."""
        made = float(self.energy_by_month.sum()) * WH_PER_MWH
        return made / (self.installed_capacity * W_PER_KW * self.hours)

    @property
    def full_load_hours(self) -> float:
        """Hours of a year at installed capacity that would make the energy [h]."""
        return self.mean_annual_energy * WH_PER_MWH / (self.installed_capacity * W_PER_KW)

    @property
    def family(self) -> tuple[str, int, str, float | None]:
        """What options of different size have in common: machine, split and pipe."""
        mix = self.combination
        return self.type, mix.machine, mix.split_text, mix.pipe_diameter


def option_of(
    number: int,
    combination: Combination,
    machine: str,
    estimate: Estimate,
    notes: tuple[str, ...],
) -> Option:
    """The numbers of an option, from its estimate."""
    plant, cells, run = estimate.scheme.plant, estimate.cells, estimate.operation
    offered = cells.per_year(run.offered)
    taken = sum(
        float((state.weight * state.operation.turbined).sum())
        for state in estimate.states
        if state.operation is not None
    )
    running = hours_by_cause(estimate)["running"]
    largest = max(plant.groups, key=lambda group: group.rated_discharge)
    return Option(
        number=number,
        combination=combination,
        type=largest.type,
        machine=machine,
        installed_capacity=estimate.installed_capacity_kw,
        rated_head=largest.rated_head,
        energy_by_month=estimate.energy_by_month / WH_PER_MWH,
        hours=float(cells.hours.sum()),
        used_share=taken / offered if offered else 0.0,
        standing_hours=cells.hours_per_year - float(running.sum(axis=1).mean()),
        sizes=_sizes(estimate),
        notes=notes,
    )


def _sizes(estimate: Estimate) -> tuple[UnitSize, ...]:
    """Energy of the units of each size, shared out by the power at their shafts, all in service."""
    scheme, cells, run = estimate.scheme, estimate.cells, estimate.operation
    state = scheme.head_state(cells.discharge, cells.season)
    dispatcher = scheme.dispatcher
    heads = dispatcher.heads(state, run.turbined)
    through = dispatcher.unit_discharges(state, run.turbined)
    water, open_share, discharges = [], [], []
    for (group, line), discharge in zip(dispatcher.units_on_lines, through, strict=True):
        full = np.maximum(group.full_discharge(heads[line]), 1e-300)
        share = np.clip(discharge / full, 0.0, 1.0)
        water.append(discharge * group.efficiency(np.maximum(share, 1e-9), heads[line]))
        open_share.append(share)
        discharges.append(group.rated_discharge)
    made = np.stack(water)
    total = made.sum(axis=0)
    power = np.maximum(estimate.net_power, 0.0)
    of_unit = power * np.divide(made, total, out=np.zeros_like(made), where=total > 0)
    energy = (cells.weight * of_unit).sum(axis=1) / WH_PER_MWH
    tilted = (cells.weight * of_unit * (1 - np.stack(open_share))).sum(axis=1) / WH_PER_MWH
    each = np.array(discharges)
    return tuple(
        UnitSize(float(size), float(energy[each == size].sum()), float(tilted[each == size].sum()))
        for size in np.unique(each)
    )
