"""Outages of a described plant in numbers."""

from __future__ import annotations

from hydroyield.errors import SiteFileError
from hydroyield.powerhouse import Outages, Spread
from hydroyield.site.faults import KeyPath
from hydroyield.site.reading import SiteDescription

SHORTEST = (31, 28, 31, 30, 31, 30, 31, 31, 30, 31, 30, 31)  # d, of each month
EVERY_MONTH = tuple(range(1, 13))


def outages_of(site: SiteDescription) -> Outages:
    """When units are out of service; planned days without months are spread over the year.

    Raises SiteFileError where days do not fit into their months.
    """
    operation, units = site.model.operation, sum(group.count for group in site.model.turbines)
    planned, standstill = operation.planned_outage, operation.standstill
    found = Outages(
        planned=None if planned is None else Spread(planned.days, planned.months or EVERY_MONTH),
        standstill=None if standstill is None else Spread(standstill.days, standstill.months),
        forced_rate=operation.forced_outage_rate or 0.0,
        common_rate=operation.common_outage_rate or 0.0,
        closed=operation.closed or (),
    )
    if found.planned is not None:
        _refuse_too_many(site, "planned_outage", found.planned, units)
    if found.standstill is not None:
        _refuse_too_many(site, "standstill", found.standstill, 1)
    return found


def _refuse_too_many(site: SiteDescription, key: str, spread: Spread, units: int) -> None:
    room = sum(SHORTEST[month - 1] for month in spread.months)
    if spread.days * units <= room:
        return
    each = (
        f"{spread.days:g} days of each of {units} units" if units > 1 else f"{spread.days:g} days"
    )
    path: KeyPath = ("operation", key, "days")
    message = f"{each} do not fit into months of {room} days; write fewer days, or more months"
    raise SiteFileError([site.fault(path, message)])
