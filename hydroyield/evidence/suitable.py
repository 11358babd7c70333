"""Which types of machine suit the head and the water of a site."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from hydroyield.energy import Estimate, estimate_energy
from hydroyield.powerhouse import EfficiencyCurve, MachineType, UnitGroup, machine_types
from hydroyield.quantities import W_PER_KW

LITTLE_TIME = 0.3  # of the time, in which a type that can hardly ever run does (our judgement)


@dataclass(frozen=True)
class Suitability:
    """How a type of machine suits a site.

    type : kaplan, francis, ...
    suits : head and water are usual for it
    reason : why, or why not
    net_head : at which it was looked at [m]
    running_share : of the time, in which one unit of the wanted size can run
    energy_mwh : with a typical curve, sizes as in the site file [MWh a year]; None where the head
        is not usual for the type
    source : of the range and the curve
    """

    type: str
    suits: bool
    reason: str
    net_head: float
    running_share: float
    energy_mwh: float | None
    source: str


def suitable_machines(energy: Estimate) -> list[Suitability]:
    """Every type that has typical values, those that suit first, by energy.

    The sizes and counts are those of the site file; only type, curve and minimum change. A head
    that ends at an axis in the site file ends there for every type.
    """
    found = [_suitability(kind, energy) for kind in machine_types().values()]
    return sorted(found, key=lambda fit: (not fit.suits, -(fit.energy_mwh or 0.0)))


def _suitability(kind: MachineType, energy: Estimate) -> Suitability:
    plant, cells = energy.scheme.plant, energy.cells
    heads = [group.rated_head for group in plant.groups]
    low, high = kind.head_range
    unusual = [head for head in heads if not low <= head <= high]
    smallest = min(group.rated_discharge for group in plant.groups)
    enough = energy.operation.offered >= kind.minimum_discharge * smallest
    share = cells.mean(enough.astype(np.float64))
    head = unusual[0] if unusual else heads[0]
    if unusual:
        reason = f"{head:.3g} m of net head lies outside its {low:g} to {high:g} m"
        return Suitability(kind.name, False, reason, head, share, None, kind.source)
    groups = tuple(_as_type(group, kind, energy) for group in plant.groups)
    other = replace(energy.scheme, plant=replace(plant, groups=groups))
    mwh = estimate_energy(other).mean_annual_energy_mwh
    least = 100 * kind.minimum_discharge
    if share < LITTLE_TIME:
        reason = (
            f"the water reaches its minimum of {least:.0f} % only in {share:.0%} of the time; "
            "smaller units would run longer"
        )
        return Suitability(kind.name, False, reason, head, share, mwh, kind.source)
    reason = (
        f"{head:.3g} m lies within {low:g} to {high:g} m; one unit can run in {share:.0%} of the "
        f"time from {least:.0f} % of full discharge on"
    )
    return Suitability(kind.name, True, reason, head, share, mwh, kind.source)


def _as_type(group: UnitGroup, kind: MachineType, energy: Estimate) -> UnitGroup:
    """The same size of another type, its capacity what it gives at rated head and discharge."""
    shares, efficiencies = zip(*kind.curve, strict=True)
    curve = EfficiencyCurve(shares, efficiencies)
    plant = energy.scheme.plant
    weight = plant.specific_weight * plant.electrical.at_terminals
    output = weight * group.rated_discharge * group.rated_head * efficiencies[-1]
    branch = 0.0 if kind.name == "screw" else group.branch
    return replace(
        group,
        type=kind.name,
        curve=curve,
        minimum_share=kind.minimum_discharge,
        unit_capacity=max(output, 0.001 * W_PER_KW),
        branch=branch,
        output_limit=None,
        starting_share=0.0,
    )
