"""The record condensed into cells against a plain walk through its days."""

from __future__ import annotations

import calendar
import math
from collections import defaultdict
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest
import twin_sites

import hydroyield
from hydroyield.jobs import SiteEstimate

MWH = 1e6  # Wh
PowerOfDay = Callable[[int, float], float]  # (calendar month, discharge [m3/s]) -> [W]


def walk(estimate: SiteEstimate, power: PowerOfDay) -> dict[str, list[float]]:
    """{year used: energy of its months, January first [Wh]}, day by day."""
    powers: dict[tuple[str, int], list[float]] = defaultdict(list)
    hours: dict[tuple[str, int], float] = {}
    start = estimate.scheme.year_start_month
    for date, discharge in zip(estimate.scheme.dates, estimate.scheme.discharge, strict=True):
        if math.isnan(discharge):
            continue
        day = date.item()
        year = day.year + (start > 1 and day.month >= start)
        powers[str(year), day.month].append(power(day.month, float(discharge)))
        hours[str(year), day.month] = 24 * calendar.monthrange(day.year, day.month)[1]
    return {
        year: [
            math.fsum(powers[year, month]) / len(powers[year, month]) * hours[year, month]
            for month in range(1, 13)
        ]
        for year in estimate.years_used
    }


@pytest.fixture(scope="module")
def estimates(tmp_path_factory: pytest.TempPathFactory) -> dict[str, SiteEstimate]:
    """Sites with gaps, whole years left out, rules by month, and calendar years."""
    makers = (
        twin_sites.weir_and_abstractions,
        twin_sites.several_flow_rules,
        twin_sites.calendar_years_and_transfer,
    )
    return {
        make.__name__: hydroyield.estimate(
            hydroyield.read_site(make(tmp_path_factory.mktemp(make.__name__)))
        )
        for make in makers
    }


def test_any_power_of_month_and_discharge(estimates: dict[str, SiteEstimate]) -> None:
    """A function with jumps that knows nothing of plants."""

    def power(season: int, discharge: float) -> float:
        return 1e5 * (discharge > 3) + 1e4 * (1 + season) * math.sin(discharge)

    for estimate in estimates.values():
        cells, season_of_month = estimate.cells, estimate.scheme.rules.season_of_month
        of_cells = np.array(
            [power(int(s), q) for s, q in zip(cells.season, cells.discharge, strict=True)]
        )
        days = walk(estimate, lambda m, q, of=season_of_month: power(int(of[m - 1]), q))
        found = cells.by_month(of_cells)
        assert found == pytest.approx(np.array(list(days.values())), rel=1e-9, abs=1e-3)
        mean = sum(map(sum, days.values())) / len(days)
        assert cells.per_year(of_cells) == pytest.approx(mean, rel=1e-9)


def test_the_power_of_the_plant(estimates: dict[str, SiteEstimate]) -> None:
    """The power that was found for a month and a discharge, given to each of its days."""
    for estimate in estimates.values():
        cells, season_of_month = estimate.cells, estimate.scheme.rules.season_of_month
        known = {
            (int(season), float(discharge)): float(power)
            for season, discharge, power in zip(
                cells.season, cells.discharge, estimate.net_power, strict=True
            )
        }
        days = walk(  # days of years left out have no cell
            estimate, lambda m, q, of=season_of_month, k=known: k.get((int(of[m - 1]), q), 0.0)
        )
        expected = {year: sum(months) / MWH for year, months in days.items()}
        assert estimate.yearly_energy_mwh == pytest.approx(expected, rel=1e-9)
        annual = sum(expected.values()) / len(expected)
        assert estimate.mean_annual_energy_mwh == pytest.approx(annual, rel=1e-9)
        assert estimate.duration_integral_energy_mwh == pytest.approx(annual, rel=1e-9)


def test_a_plant_run_on_every_day_in_order(tmp_path: Path) -> None:
    """Where the head does not depend on the turbines each day is computed on its own, so that the
    plant can be run on all days as they come."""
    estimate = hydroyield.estimate(hydroyield.read_site(twin_sites.one_kaplan(tmp_path)))
    scheme = estimate.scheme
    season = np.zeros(scheme.valid_discharge.size, dtype=np.int64)
    run = scheme.operate(scheme.valid_discharge, season)
    net = iter(scheme.net_power(run.output).tolist())
    days = walk(estimate, lambda month, discharge: next(net))
    expected = {year: sum(months) / MWH for year, months in days.items()}
    assert estimate.yearly_energy_mwh == pytest.approx(expected, rel=1e-9)
