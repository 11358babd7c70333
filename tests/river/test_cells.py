"""Cells: the condensed record gives the day-by-day run to rounding."""

from __future__ import annotations

import calendar
import datetime
import math
from dataclasses import dataclass

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from hydroyield.river.cells import Cells, condense
from hydroyield.river.reserve import WaterRules
from hydroyield.river.years import Calendar, count_months, usable_years

SUMMER = WaterRules.by_month([[0.4] * 5 + [1.3] * 3 + [0.4] * 4])
MONTHLY = WaterRules.by_month([[0.1 * month for month in range(1, 13)]])
ALL_YEAR = WaterRules.by_month([[0.5] * 12])


@dataclass(frozen=True)
class Record:
    """A daily series and how its year is cut."""

    dates: np.ndarray
    discharge: np.ndarray
    start_month: int
    rules: WaterRules
    coverage: float = 0.9

    def cells(self) -> Cells:
        cal = Calendar.of(self.dates, self.start_month)
        months = count_months(cal, ~np.isnan(self.discharge))
        used, _ = usable_years(months, self.coverage, self.start_month)
        return condense(self.discharge, cal, months, used, self.rules.season_of_month)


def rate(discharge: float, season: int) -> float:
    """Some power that jumps, depends on the season and is not linear."""
    return (1 + season) * math.sqrt(discharge) * 1e3 if discharge > 2 + season else 0.0


def invented(first: str, count: int, seed: int, start_month: int, rules: WaterRules) -> Record:
    """Few digits, single missing days, and a run of three of them now and then."""
    rng = np.random.default_rng(seed)
    discharge = np.round(rng.gamma(1.5, 3.0, count), 1)
    discharge[rng.random(count) < 0.02] = np.nan
    return Record(np.datetime64(first) + np.arange(count), discharge, start_month, rules)


def day_by_day(record: Record) -> dict[int, list[float]]:
    """Energy of each used year and month: mean rate of the days with a value x hours."""
    seen: dict[tuple[int, int], list[float]] = {}
    for day, flow in zip(record.dates.astype(object), record.discharge, strict=True):
        if math.isnan(flow):
            continue
        shift = record.start_month > 1 and day.month >= record.start_month
        season = int(record.rules.season_of_month[day.month - 1])
        seen.setdefault((day.year + shift, day.month), []).append(rate(flow, season))
    energy: dict[int, list[float]] = {}
    for year in sorted({year for year, _ in seen}):
        twelve = []
        for month in range(1, 13):
            own = year - (record.start_month > 1 and month >= record.start_month)
            length = calendar.monthrange(own, month)[1]
            rates = seen.get((year, month), [])
            if len(rates) < record.coverage * length:
                break
            twelve.append(math.fsum(rates) / len(rates) * length * 24)
        else:
            energy[year] = twelve
    return energy


def rates(cells: Cells) -> np.ndarray:
    pairs = zip(cells.discharge.tolist(), cells.season.tolist(), strict=True)
    return np.array([rate(flow, season) for flow, season in pairs])


@pytest.mark.parametrize("rules", [ALL_YEAR, SUMMER, MONTHLY])
@pytest.mark.parametrize("start_month", [1, 4, 10])
def test_cells_give_the_day_by_day_run(start_month: int, rules: WaterRules) -> None:
    record = invented("1994-06-11", 3200, 8, start_month, rules)
    expected = day_by_day(record)
    cells = record.cells()
    assert cells.years.tolist() == list(expected)
    assert len(expected) >= 3
    found = cells.by_month(rates(cells))
    np.testing.assert_allclose(found, list(expected.values()), rtol=1e-12)
    yearly = np.mean([math.fsum(twelve) for twelve in expected.values()])
    assert cells.per_year(rates(cells)) == pytest.approx(yearly, rel=1e-12)
    assert cells.mean(rates(cells)) == pytest.approx(yearly / cells.hours_per_year, rel=1e-12)


@given(
    start=st.dates(datetime.date(1950, 1, 1), datetime.date(2010, 1, 1)),
    seed=st.integers(0, 2**32 - 1),
    start_month=st.integers(1, 12),
    rules=st.sampled_from([ALL_YEAR, SUMMER, MONTHLY]),
)
@settings(max_examples=12, deadline=None)
def test_cells_on_any_record(
    start: datetime.date, seed: int, start_month: int, rules: WaterRules
) -> None:
    record = invented(start.isoformat(), 1100, seed, start_month, rules)
    expected = day_by_day(record)
    cells = record.cells()
    assert cells.years.tolist() == list(expected)
    if not expected:
        return
    np.testing.assert_allclose(
        cells.by_month(rates(cells)), list(expected.values()), rtol=1e-9, atol=1e-9
    )
    assert cells.weight.sum() == pytest.approx(cells.hours_per_year, rel=1e-12)


def test_weights_are_hours() -> None:
    """A complete year of two discharges: each cell stands for the hours of its days."""
    dates = np.arange("2003-01-01", "2004-01-01", dtype="datetime64[D]")
    discharge = np.where(np.arange(365) < 100, 2.0, 5.0)
    cells = Record(dates, discharge, 1, ALL_YEAR).cells()
    assert cells.discharge.tolist() == [2.0, 5.0]
    assert cells.weight.tolist() == pytest.approx([2400, 6360])
    assert cells.hours_per_year == 8760
    assert cells.mean(cells.discharge) == pytest.approx((100 * 2 + 265 * 5) / 365)


def test_a_missing_day_counts_as_the_mean_of_its_month() -> None:
    dates = np.arange("2003-01-01", "2004-01-01", dtype="datetime64[D]")
    discharge = np.full(365, 5.0)
    discharge[:31] = 2.0  # January
    discharge[10] = np.nan
    cells = Record(dates, discharge, 1, ALL_YEAR).cells()
    assert cells.weight.tolist() == pytest.approx([31 * 24, 334 * 24])
    assert cells.valid_days[0, 0] == 30


def test_cells_are_distinct_pairs_of_season_and_discharge() -> None:
    record = invented("1990-01-01", 1461, 5, 1, SUMMER)
    cells = record.cells()
    pairs = list(zip(cells.season.tolist(), cells.discharge.tolist(), strict=True))
    assert len(set(pairs)) == len(pairs)
    in_used = np.isin(record.dates.astype("datetime64[Y]").astype(int) + 1970, cells.years)
    chosen = in_used & ~np.isnan(record.discharge)
    month = record.dates.astype("datetime64[M]").astype(int) % 12
    days = zip(
        SUMMER.season_of_month[month[chosen]].tolist(), record.discharge[chosen].tolist(),
        strict=True,
    )  # fmt: skip
    found = [pairs[cell] for cell in cells.cell_of_day]
    assert found == list(days)


def test_the_mean_year_does_not_depend_on_its_first_month() -> None:
    """Where each month is the same in every year, wherever the year is cut."""
    dates = np.arange("1991-01-01", "1999-01-01", dtype="datetime64[D]")
    discharge = 3.0 + (dates.astype("datetime64[M]").astype(int) % 12).astype(float)
    means = []
    for start_month in (1, 7):
        cells = Record(dates, discharge, start_month, ALL_YEAR).cells()
        by_month = cells.by_month(cells.discharge) / cells.hours
        means.append(by_month.mean(axis=0))
    np.testing.assert_allclose(means[0], np.arange(3.0, 15.0), rtol=1e-13)
    np.testing.assert_allclose(means[1], means[0], rtol=1e-13)
