"""Checks of the machines: sizes, heads and efficiencies against what is usual for the type."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from hydroyield.checks import Check, warn_unless
from hydroyield.energy import Estimate
from hydroyield.powerhouse import HillChart, UnitGroup, machine_types
from hydroyield.powerhouse.types import SMALL_MACHINE
from hydroyield.quantities import HOURS_PER_DAY, W_PER_KW
from hydroyield.site.assembly import Assembled
from hydroyield.site.reading import SiteDescription

HEAD_BAND = (0.75, 1.15)  # of rated head, where a curve for one head still holds (common practice)
LARGEST_SHARE_OUTSIDE = 0.1  # of the energy, made outside that band
LITTLE_LESS = 1e-3  # share of the capacity, by which a drawn limit may miss it
OVERSIZED_GENERATOR = 1.1  # of what the turbine gives at its rated point


def machine_checks(
    site: SiteDescription, assembled: Assembled, estimate: Estimate
) -> Iterator[Check]:
    """Checks of every turbine group, and of the rated state."""
    for number, group in enumerate(estimate.scheme.plant.groups):
        label = f"turbines[{number}] ({group.count} x {group.type})"
        typical = site.model.turbines[number].efficiency in (None, "typical")
        yield _generator(label, group, estimate)
        if group.output_limit is not None:
            yield _limit_at_rated_head(label, group)
        yield from _against_type(label, group, typical)
        if isinstance(group.curve, HillChart):
            yield _head_of_chart(label, group.curve, estimate)
        else:
            yield _head_band(label, group, estimate)
    if estimate.scheme.waits_to_start:
        yield _waiting(estimate)
    yield _rated_state(assembled)


def _generator(label: str, group: UnitGroup, estimate: Estimate) -> Check:
    plant = estimate.scheme.plant
    water = group.rated_discharge * group.rated_head * group.best_relative_output
    gives = plant.specific_weight * plant.electrical.at_terminals * water
    ratio = group.unit_capacity / gives
    return warn_unless(
        "generator_size",
        ratio <= OVERSIZED_GENERATOR,
        ratio,
        OVERSIZED_GENERATOR,
        f"{label}: the capacity is {ratio:.2f} times what the turbine gives at its rated point.",
        f"{label}: a capacity of {group.unit_capacity / W_PER_KW:.4g} kW is {ratio:.2f} times what "
        f"the turbine gives at its rated point ({gives / W_PER_KW:.4g} kW); the capacity factor is "
        "then low by choice. Compare rated head, rated discharge and unit capacity.",
    )


def _limit_at_rated_head(label: str, group: UnitGroup) -> Check:
    """A capacity that the limit by head forbids at rated head makes the capacity factor low."""
    most = float(group.most_output(np.array(group.rated_head))) / W_PER_KW
    capacity = group.unit_capacity / W_PER_KW
    return warn_unless(
        "output_limit_at_rated_head",
        most >= capacity * (1 - LITTLE_LESS),
        most,
        capacity,
        f"{label}: the output limit allows the capacity at rated head.",
        f"{label}: the output limit allows only {most:.4g} kW of the capacity of {capacity:.4g} kW "
        "at rated head; the capacity factor counts the latter. Compare output_limit and "
        "unit_capacity.",
    )


def _against_type(label: str, group: UnitGroup, typical: bool) -> Iterator[Check]:
    kind = machine_types().get(group.type)
    if kind is None:
        return
    low, high = kind.head_range
    yield warn_unless(
        "head_of_type",
        low <= group.rated_head <= high,
        group.rated_head,
        low if group.rated_head < low else high,
        f"{label}: {group.rated_head:.3g} m is a usual head for the type.",
        f"{label}: a rated head of {group.rated_head:.3g} m lies outside {low:g} to {high:g} m, "
        f"the advisory range of the type ({kind.source}). Ask a maker, or compare other types.",
    )
    yield warn_unless(
        "efficiency_of_type",
        group.curve.best <= kind.best_efficiency,
        group.curve.best,
        kind.best_efficiency,
        f"{label}: a best efficiency of {group.curve.best:.3g} is within reach of the type.",
        f"{label}: a best efficiency of {group.curve.best:.3g} is above {kind.best_efficiency:g}, "
        f"the best of the type ({kind.source}). Ask for the maker's guarantee.",
    )
    if typical:
        yield warn_unless(
            "typical_curve",
            False,
            group.unit_capacity / W_PER_KW,
            SMALL_MACHINE / W_PER_KW,
            "",
            f"{label}: the efficiency curve is a typical one (common practice, within 0.02 to "
            "0.03). "
            + (
                "Machines under about 100 kW reach 3 to 8 points less. "
                if group.unit_capacity < SMALL_MACHINE
                else ""
            )
            + "Replace it by the maker's guarantee.",
        )


def _head_band(label: str, group: UnitGroup, estimate: Estimate) -> Check:
    """Share of the plant's energy made at heads for which the curve is not drawn."""
    run = estimate.operation
    low, high = (part * group.rated_head for part in HEAD_BAND)
    outside = (run.net_head < low) | (run.net_head > high)
    made = estimate.cells.per_year(estimate.net_power)
    share = estimate.cells.per_year(estimate.net_power * outside) / made if made else 0.0
    return warn_unless(
        "head_near_rated",
        share <= LARGEST_SHARE_OUTSIDE,
        share,
        LARGEST_SHARE_OUTSIDE,
        f"{label}: {share:.0%} of the energy is made outside {HEAD_BAND[0]:g} to {HEAD_BAND[1]:g} "
        "of the rated head.",
        f"{label}: {share:.0%} of the energy is made outside {HEAD_BAND[0]:g} to {HEAD_BAND[1]:g} "
        "of the rated head, where a curve for one head is a guess (common practice). Ask the maker "
        "for curves at several heads, or look at the rated head.",
    )


def _head_of_chart(label: str, chart: HillChart, estimate: Estimate) -> Check:
    """Share of the plant's energy made at heads that the efficiency table does not hold."""
    run = estimate.operation
    outside = (run.net_head < chart.heads[0]) | (run.net_head > chart.heads[-1])
    made = estimate.cells.per_year(estimate.net_power)
    share = estimate.cells.per_year(estimate.net_power * outside) / made if made else 0.0
    words = (
        f"{label}: {share:.0%} of the energy is made outside {chart.heads[0]:g} to "
        f"{chart.heads[-1]:g} m, the heads of its efficiency table"
    )
    return warn_unless(
        "head_of_table",
        share <= LARGEST_SHARE_OUTSIDE,
        share,
        LARGEST_SHARE_OUTSIDE,
        f"{words}.",
        f"{words}, where the nearest row is held. Ask the maker for more heads.",
    )


def _waiting(estimate: Estimate) -> Check:
    """What the starting discharge costs in days, or that it cannot be known."""
    waiting = estimate.cells.waiting
    days = None if waiting is None else estimate.cells.weight[waiting].sum() / HOURS_PER_DAY
    return warn_unless(
        "starting_discharge",
        days is not None,
        None if days is None else float(days),
        None,
        f"The plant stands on {days or 0:.3g} days a year on which it could run on but waits for "
        "its starting discharge.",
        "starting_discharge is left aside: a duration table does not say which day follows which, "
        "so that units start at their minimum. Use a record to see what it costs.",
    )


def _rated_state(assembled: Assembled) -> Check:
    state = assembled.rated_state
    return warn_unless(
        "rated_discharge_reached",
        state.reached,
        state.turbined,
        state.river_discharge,
        f"All units together can run at rated discharge ({state.turbined:.3g} m3/s) from a river "
        f"discharge of {state.river_discharge:.3g} m3/s.",
        f"The water offered never reaches the rated discharge of all units together "
        f"({state.turbined:.3g} m3/s); the largest discharge of the record is "
        f"{state.river_discharge:.3g} m3/s. Look at the unit of the record and the size of units.",
    )
