"""Outages of a described plant in numbers."""

from __future__ import annotations

from hydroyield.errors import SiteFileError
from hydroyield.powerhouse import Dated, Outages, Spread
from hydroyield.powerhouse.outages import SHORTEST
from hydroyield.site.faults import KeyPath
from hydroyield.site.operation_models import PlannedOutage, Standstill
from hydroyield.site.reading import SiteDescription

EVERY_MONTH = tuple(range(1, 13))


def outages_of(site: SiteDescription) -> Outages:
    """When units are out of service; planned days without months are spread over the year.

    Raises SiteFileError where days do not fit into their months.
    """
    operation, units = site.model.operation, sum(group.count for group in site.model.turbines)
    planned, standstill = operation.planned_outage, operation.standstill
    found = Outages(
        planned=None if planned is None else _days(planned, units),
        standstill=None if standstill is None else _days(standstill, 1),
        forced_rate=operation.forced_outage_rate or 0.0,
        common_rate=operation.common_outage_rate or 0.0,
        closed=operation.closed or (),
    )
    if isinstance(found.planned, Spread):
        _refuse_too_many(site, "planned_outage", found.planned, units)
    if isinstance(found.standstill, Spread):
        _refuse_too_many(site, "standstill", found.standstill, 1)
    return found


def _days(stated: PlannedOutage | Standstill, turns: int) -> Spread | Dated:
    if stated.dates is not None:
        return Dated(stated.dates, turns)
    assert stated.days is not None  # one of the two is given
    return Spread(stated.days, stated.months or EVERY_MONTH)


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
