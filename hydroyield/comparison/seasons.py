"""Dry and wet years and quarters of a river, the same for every option."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from hydroyield.energy.estimate import condensed
from hydroyield.site.reading import SiteDescription
from hydroyield.site.river_assembly import RiverAtSite

MONTHS = 12


@dataclass(frozen=True)
class Seasons:
    """Years and quarters of the river, the same for every option.

    years : names of the years used; empty with a duration table
    dry, median, wet : numbers of the years by the mean discharge of the river, from 0
    driest_quarter, wettest_quarter : calendar months, 1 to 12, by the mean discharge
    """

    years: tuple[str, ...]
    dry: int = 0
    median: int = 0
    wet: int = 0
    driest_quarter: tuple[int, ...] = ()
    wettest_quarter: tuple[int, ...] = ()


def seasons_of(site: SiteDescription, river: RiverAtSite) -> Seasons:
    """Which years and quarters are dry and wet. Raises NoUsableYearError."""
    if river.dates is None:
        return Seasons(())
    discharge = site.model.discharge
    cells, _ = condensed(
        river.dates,
        river.discharge,
        np.zeros(MONTHS, dtype=np.int64),
        discharge.year_start_month,
        discharge.minimum_month_coverage,
    )
    volume = cells.by_month(cells.discharge)
    order = np.argsort(volume.sum(axis=1) / cells.hours.sum(axis=1), kind="stable")
    monthly = volume.sum(axis=0) / cells.hours.sum(axis=0)
    quarters = np.array(
        [monthly[[m, (m + 1) % MONTHS, (m + 2) % MONTHS]].mean() for m in range(12)]
    )
    return Seasons(
        years=tuple(str(year) for year in cells.years),
        dry=int(order[0]),
        median=int(order[(order.size - 1) // 2]),
        wet=int(order[-1]),
        driest_quarter=_quarter(int(quarters.argmin())),
        wettest_quarter=_quarter(int(quarters.argmax())),
    )


def _quarter(first: int) -> tuple[int, ...]:
    return tuple((first + step) % MONTHS + 1 for step in range(3))
