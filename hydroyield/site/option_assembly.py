"""From the options of a site file to plants, and back to a site file of one of them."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import Any

import numpy as np
from numpy.typing import NDArray

from hydroyield.options.combination import Combination, combinations, splits_of
from hydroyield.options.money import Cost
from hydroyield.powerhouse import machine_types
from hydroyield.quantities import W_PER_KW
from hydroyield.river import quantile
from hydroyield.site.assembly import minimum_share
from hydroyield.site.option_models import Cost as CostBlock
from hydroyield.site.option_models import OptionMachine, Options
from hydroyield.site.plant_models import EfficiencyTable, TurbineGroup
from hydroyield.site.reading import SiteDescription

Floats = NDArray[np.float64]

IMPULSE = ("pelton", "turgo")  # their head ends at the axis


@dataclass(frozen=True)
class Machine:
    """A machine to try, with what the site file knows of it.

    type : kaplan, francis, ...
    name : the type, with a number where several of it are tried
    keys : of a turbine group, without number and size
    pattern : the first turbine group of the type; None where there is none
    """

    type: str
    name: str
    keys: dict[str, Any]
    pattern: TurbineGroup | None


def machines_to_try(site: SiteDescription) -> list[Machine]:
    """The machines of the options; those under turbines where none are listed."""
    options = options_of(site)
    listed = options.types or tuple(
        OptionMachine.model_validate({"type": kind})
        for kind in dict.fromkeys(group.type for group in site.model.turbines)
    )
    found: list[Machine] = []
    for machine in (_machine(site, entry) for entry in listed):
        if machine not in found:  # the same twice is one
            found.append(machine)
    kinds = [machine.type for machine in found]
    return [
        machine
        if kinds.count(machine.type) == 1
        else replace(machine, name=f"{machine.type} #{kinds[: place + 1].count(machine.type)}")
        for place, machine in enumerate(found)
    ]


def options_of(site: SiteDescription) -> Options:
    """What the site file wants to be tried."""
    assert site.model.options is not None  # asked for only where there are some
    return site.model.options


def _machine(site: SiteDescription, wanted: OptionMachine) -> Machine:
    groups = site.model.turbines
    pattern = next((group for group in groups if group.type == wanted.type), None)
    keys: dict[str, Any] = {}
    for key in ("minimum_discharge", "starting_discharge", "efficiency", "jets", "axis_level"):
        value = getattr(wanted, key)
        if value is None and pattern is not None:
            value = getattr(pattern, key)
        if value is not None:
            keys[key] = value
    if wanted.type in IMPULSE and "axis_level" not in keys:
        axes = [group.axis_level for group in groups if group.axis_level is not None]
        keys |= {"axis_level": axes[0]} if axes else {}
    for key in ("waterway", "output_limit"):
        if pattern is not None and getattr(pattern, key):
            keys[key] = getattr(pattern, key)
    return Machine(wanted.type, wanted.type, keys, pattern)


def lacking(machine: Machine) -> str:
    """Why a machine cannot be tried at all; empty where it can."""
    keys = machine.keys
    absent = [key for key in ("efficiency", "minimum_discharge") if key not in keys]
    if machine.type not in machine_types() and absent:
        return (
            f"type {machine.type} has no typical values; write {' and '.join(absent)} of it under "
            "options.types"
        )
    if "output_limit" in keys and _pattern_size(machine) is None:
        return (
            f"the output_limit of the {machine.type} moves with the size of the unit; write "
            "rated_discharge of the unit that it was drawn for under turbines"
        )
    least = minimum_share(machine.type, keys.get("minimum_discharge"), keys.get("jets"))
    if keys.get("starting_discharge", least) < least:
        return (
            f"the {machine.type} would start at less than its minimum of {100 * least:g} %; write "
            "a larger starting_discharge of it under options.types"
        )
    return ""


def _pattern_size(machine: Machine) -> float | None:
    """Rated discharge of the unit that tables were drawn for [m3/s]; None where it is not known."""
    return None if machine.pattern is None else machine.pattern.rated_discharge


def combinations_of(site: SiteDescription, valid_discharge: Floats) -> list[Combination]:
    """Every combination that the options ask for.

    valid_discharge : of the river at the site [m3/s]
    """
    options = options_of(site)
    designs = [
        *options.design_discharges,
        *(multiple * float(valid_discharge.mean()) for multiple in options.mean_flow_multiples),
        *(float(quantile(valid_discharge, percent)) for percent in options.exceedances),
    ]
    splits = splits_of(options.unit_counts, options.splits)
    machines = len(machines_to_try(site))
    return combinations(machines, splits, designs, options.pipe_diameters)


def most_combinations(site: SiteDescription) -> int:
    """How many combinations the options make; fewer where some are the same."""
    options = options_of(site)
    sizes = (options.design_discharges, options.mean_flow_multiples, options.exceedances)
    splits = splits_of(options.unit_counts, options.splits)
    pipes = max(1, len(options.pipe_diameters))
    return len(machines_to_try(site)) * len(splits) * sum(map(len, sizes)) * pipes


def turbines_of(machine: Machine, combination: Combination) -> tuple[TurbineGroup, ...]:
    """The turbine groups of a plant; rated head and capacity are left to be derived."""
    return tuple(
        TurbineGroup.model_validate(
            {
                "count": count,
                "type": machine.type,
                "rated_discharge": discharge,
                **_fitted(machine, discharge),
            }
        )
        for count, discharge in combination.groups
    )


def _fitted(machine: Machine, discharge: float) -> dict[str, Any]:
    """The keys of a machine; what is drawn for one size of unit moves with the size."""
    fitted, drawn_for = dict(machine.keys), _pattern_size(machine)
    if drawn_for is None:
        return fitted
    scale = discharge / drawn_for
    table, limit = fitted.get("efficiency"), fitted.get("output_limit")
    if isinstance(table, EfficiencyTable):
        moved = tuple(scale * q for q in table.discharges)
        fitted["efficiency"] = table.model_copy(update={"discharges": moved})
    if limit is not None:
        fitted["output_limit"] = [[head, scale * watt / W_PER_KW] for head, watt in limit]
    return fitted


def site_with(
    site: SiteDescription, turbines: Sequence[TurbineGroup], pipe_diameter: float | None
) -> SiteDescription:
    """The site with another plant, for which rated head and capacity are derived."""
    changed: dict[str, Any] = {"turbines": tuple(turbines)}
    if pipe_diameter is not None:
        changed["waterway"] = tuple(
            loss
            if loss.pipe is None
            else loss.model_copy(
                update={"pipe": loss.pipe.model_copy(update={"diameter": pipe_diameter})}
            )
            for loss in site.model.waterway
        )
    return replace(site, model=site.model.model_copy(update=changed))


def cost_of(site: SiteDescription, pipe_diameter: float | None = None) -> tuple[Cost, float] | None:
    """Costs and prices, and the metres of pipe [m]; None where the site file has none.

    pipe_diameter : of the one pipe of the waterway [m]; None for that of the site file
    """
    given = site.model.cost
    if given is None:
        return None
    pipes = [loss.pipe for loss in site.model.waterway if loss.pipe is not None]
    metres = sum(pipe.length * pipe.parallel for pipe in pipes)
    spent = sum(
        pipe.length * pipe.parallel * _of_a_metre(given, pipe_diameter or pipe.diameter)
        for pipe in pipes
    )
    return Cost(
        fixed=given.fixed,
        per_kw=given.per_kw,
        per_unit=given.per_unit,
        per_pipe_metre=spent / metres if metres else 0.0,
        energy_price=given.energy_price,
        yearly=given.yearly,
        yearly_share=given.yearly_share,
        life=given.life,
        discount_rate=given.discount_rate,
        grant_share=given.grant_share,
        degradation=site.model.operation.degradation or 0.0,
    ), metres


def _of_a_metre(given: CostBlock, diameter: float) -> float:
    if isinstance(given.per_pipe_metre, tuple):
        diameters, costs = zip(*given.per_pipe_metre, strict=True)
        return float(np.interp(diameter, diameters, costs))
    return given.per_pipe_metre
