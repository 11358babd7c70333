"""Outages: where planned days cost least, and what is left out."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace

import numpy as np

from hydroyield.checks import Check, warn_unless
from hydroyield.energy import Estimate
from hydroyield.energy.estimate import cost_of_planned_days, with_outages
from hydroyield.powerhouse import Dated, Spread
from hydroyield.powerhouse.outages import SHORTEST
from hydroyield.quantities import WH_PER_MWH
from hydroyield.river.years import MONTH_NAMES
from hydroyield.site.reading import SiteDescription

USUAL_UNAVAILABILITY = 0.01  # of the energy; less is seldom reached (common practice)
DEAR = 0.002  # of the annual energy that other months would spare


def with_placed_outage(site: SiteDescription, energy: Estimate) -> Estimate:
    """The estimate with its planned days in the months that cost least, where none are named."""
    stated, planned = site.model.operation.planned_outage, energy.scheme.outages.planned
    if stated is None or stated.months is not None or not isinstance(planned, Spread):
        return energy
    months = cheapest_months(energy, planned)
    return with_outages(
        energy, replace(energy.scheme.outages, planned=replace(planned, months=months))
    )


def cheapest_months(energy: Estimate, planned: Spread | Dated) -> tuple[int, ...]:
    """Months in which the planned days of all units fit and cost least, rising."""
    room, needed = 0.0, planned.days * sum(energy.states[0].counts)
    chosen = []
    for month in np.argsort(cost_of_planned_days(energy), kind="stable").tolist():
        chosen.append(month + 1)
        room += SHORTEST[month]
        if room >= needed:
            break
    return tuple(sorted(chosen))


def outage_checks(site: SiteDescription, energy: Estimate) -> Iterator[Check]:
    """Whether outages are stated at all, and whether the months of planned days are dear."""
    outages = energy.scheme.outages
    if not outages.is_none:
        yield _unavailability(energy)
    if outages.planned is not None and outages.planned.days > 0:
        yield _months(site, energy, outages.planned)


def _unavailability(energy: Estimate) -> Check:
    full = float(energy.cells.by_month(energy.net_power).sum())
    lost = 1 - float(energy.energy_by_month.sum()) / full if full else 0.0
    return warn_unless(
        "unavailability",
        lost >= USUAL_UNAVAILABILITY or not full,
        lost,
        USUAL_UNAVAILABILITY,
        f"Outages take {100 * lost:.1f} % of the energy.",
        f"Outages take only {100 * lost:.2f} % of the energy; real plants lose a few per cent "
        "(common practice). State planned_outage, forced_outage_rate and common_outage_rate.",
    )


def _months(site: SiteDescription, energy: Estimate, planned: Spread | Dated) -> Check:
    cost = cost_of_planned_days(energy) * sum(energy.states[0].counts)
    best = cheapest_months(energy, planned)
    by_month = (planned.by_month, Spread(planned.days, best).by_month)
    named, least = (float((cost * days).sum()) for days in by_month)
    spared = (named - least) / WH_PER_MWH
    stated = site.model.operation.planned_outage
    placed = stated is not None and stated.months is None and stated.dates is None
    remedy = "Move them." if isinstance(planned, Dated) else "Move them, or leave `months:` out."
    share = spared / energy.mean_annual_energy_mwh if energy.mean_annual_energy_mwh else 0.0
    words = (
        f"The planned days fall into {_names(planned.months)}"
        f"{', where they cost least,' if placed else ''} and take {named / WH_PER_MWH:.3g} MWh a "
        "year"
    )
    return warn_unless(
        "planned_outage_months",
        share <= DEAR,
        share,
        DEAR,
        f"{words}.",
        f"{words}; in {_names(best)} they would take {least / WH_PER_MWH:.3g} MWh. {remedy}",
    )


def _names(months: tuple[int, ...]) -> str:
    return ", ".join(MONTH_NAMES[month - 1] for month in months)
