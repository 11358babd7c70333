"""Contradictions between blocks of a site file that no plant could have."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from hydroyield.errors import Fault
from hydroyield.hydraulics import Heads
from hydroyield.quantities import W_PER_KW
from hydroyield.site.reading import SiteDescription

Floats = NDArray[np.float64]

WIDE_RANGE = np.concatenate([[0.0], np.geomspace(1e-3, 1e4, 200)])  # m3/s, of any small river


def dry_head_faults(site: SiteDescription, heads: Heads, discharges: Floats) -> list[Fault]:
    """Faults where no discharge leaves any head.

    discharges : (n,) river discharges that are tried, without turbines [m3/s]
    """
    nothing = np.zeros(discharges.size)
    state = heads.at(discharges, nothing, nothing)
    faults = []
    to_tailwater = [group for group in site.model.turbines if group.axis_level is None]
    if to_tailwater and not (state.gross(nothing) > 0).any():
        faults.append(
            site.fault(
                ("head", "tailwater"),
                "the tailwater is at or above the headwater at every discharge; write both in m "
                "above the same datum, the headwater higher",
            )
        )
    for number, group in enumerate(site.model.turbines):
        if group.axis_level is not None and not (state.gross(nothing, group.axis_level) > 0).any():
            faults.append(
                site.fault(
                    ("turbines", number, "axis_level"),
                    f"the axis at {group.axis_level:g} m is at or above the headwater at every "
                    "discharge; write both in m above the same datum, the headwater higher",
                )
            )
    return faults


def capacity_fault(
    site: SiteDescription,
    number: int,
    capacity: float | None,
    discharge: float | None,
    head: float | None,
    specific_weight: float,
) -> list[Fault]:
    """The fault of a unit said to give more than the water holds at its rated point, if so.

    number : of the turbine group, from 0
    capacity, discharge, head : rated [W], [m3/s], [m]; None where not known
    specific_weight : density times gravity [N/m3]
    """
    if capacity is None or discharge is None or head is None:
        return []
    held = specific_weight * discharge * head
    if capacity <= held * (1 + 1e-9):
        return []
    message = (
        f"{capacity / W_PER_KW:.4g} kW is more than the water holds: {discharge:.4g} m3/s falling "
        f"{head:.4g} m hold {held / W_PER_KW:.4g} kW; write the capacity of one unit in kW, or a "
        "larger rated_discharge or rated_head"
    )
    return [site.fault(("turbines", number, "unit_capacity"), message)]


def starting_fault(
    site: SiteDescription, number: int, starting: float | None, minimum: float
) -> list[Fault]:
    """The fault of a unit said to start at less water than it needs to run, if so.

    number : of the turbine group, from 0
    starting, minimum : shares of full discharge; None where it starts at the minimum
    """
    if starting is None or starting >= minimum:
        return []
    message = (
        f"{100 * starting:g} % is less than the minimum discharge of {100 * minimum:g} %; write at "
        "least that, or take the key out"
    )
    return [site.fault(("turbines", number, "starting_discharge"), message)]
