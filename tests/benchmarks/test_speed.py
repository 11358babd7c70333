"""Speed as ratios, so that machines can be compared: what an estimate costs, against one
`np.interp` over the same forty years of daily values.

    python -m pytest tests/benchmarks --benchmark-enable    one table, ratios in brackets
    python tests/benchmarks/test_speed.py                   the ratios alone

In a usual test run each is called once, to see that it works.
"""

from __future__ import annotations

import timeit
from collections.abc import Callable
from dataclasses import replace
from functools import cache
from typing import Any

import numpy as np
import pandas as pd
import pytest

from hydroyield.jobs import SiteEstimate, estimate
from hydroyield.record import Record
from hydroyield.report.result import result
from hydroyield.site.assembly import assemble
from hydroyield.site.reading import SiteDescription, read_site_text
from hydroyield.site.river_assembly import river_at_site

SITE = """\
format: 1
site: {name: Two Units}
discharge: {record: {file: daily.csv, unit: m3/s}}
environmental_flow:
  - {rule: constant, discharge: 0.8}
head:
  headwater: {level: 101.2}
  tailwater: {table: [[2, 97.9], [20, 98.35], [60, 99.5], [100, 100.2]]}
turbines:
  - {count: 2, type: kaplan, rated_discharge: 6.2, rated_head: 2.8, unit_capacity: 125}
electrical: {drive_efficiency: 0.98, generator_efficiency: 0.94, own_use: 1.5}
"""
YEARS = 40
CURVE_POINTS = 400


@cache
def series() -> pd.Series:
    """Forty years of invented daily values in three digits, as a gauge reports."""
    dates = pd.date_range("1980-10-01", f"{1980 + YEARS}-09-30", freq="D")
    noise = np.random.default_rng(1).normal(size=dates.size)
    weather = np.convolve(noise, 0.93 ** np.arange(60), mode="same")
    weather /= weather.std()
    season = 0.5 * np.cos(2 * np.pi * dates.day_of_year / 365.25)
    values = 13.0 * np.exp(0.8 * weather + season - 0.32)
    return pd.Series([float(f"{value:.3g}") for value in values], index=dates)


@cache
def site() -> SiteDescription:
    return read_site_text(SITE)


@cache
def known() -> SiteEstimate:
    """The estimate to start from: its cells, its curve."""
    return estimate(site(), Record.from_series(series()))


def interpolation() -> Callable[[], Any]:
    """The yardstick: power of each day read from a curve."""
    values = series().to_numpy()
    grid = np.linspace(0.0, values.max(), CURVE_POINTS)
    power = np.sqrt(grid)
    return lambda: np.interp(values, grid, power)


def energy_from_cells() -> Callable[[], Any]:
    """Energy by year and month of a plant that is known, on the condensed record."""
    scheme, cells = known().scheme, known().cells
    _ = scheme.dispatcher  # its tables are made once for each plant

    def energy() -> Any:
        run = scheme.operate(cells.discharge, cells.season)
        return cells.by_month(scheme.net_power(run.output))

    return energy


def energy_of_a_new_plant() -> Callable[[], Any]:
    """The same with the tables of the plant, as for each option of a comparison."""
    cells = known().cells

    def energy() -> Any:
        scheme = replace(known().scheme)
        run = scheme.operate(cells.discharge, cells.season)
        return cells.by_month(scheme.net_power(run.output))

    return energy


def series_to_result() -> Callable[[], Any]:
    """A series in memory to everything that result.json holds."""
    described, flow = site(), series()
    return lambda: result(estimate(described, Record.from_series(flow)))


SUBJECTS = [interpolation, energy_from_cells, energy_of_a_new_plant, series_to_result]


@pytest.mark.benchmark(group="forty years of daily values")
@pytest.mark.parametrize("subject", SUBJECTS, ids=lambda subject: subject.__name__)
def test_speed(benchmark: Any, subject: Callable[[], Callable[[], Any]]) -> None:
    assert benchmark(subject()) is not None


def test_what_is_timed_is_the_whole_energy() -> None:
    """The functions that are timed give the energy of the whole estimate."""
    for subject in (energy_from_cells, energy_of_a_new_plant):
        assert subject()() == pytest.approx(known().energy_by_month, rel=1e-12)
    whole = series_to_result()()
    assert whole["mean_annual_energy_mwh"] == known().mean_annual_energy_mwh
    assert (len(whole["yearly_energy_mwh"]), known().scheme.discharge.size) == (YEARS, 14_610)
    assert (
        assemble(site(), river_at_site(site(), Record.from_series(series()), None)).scheme.plant
        == known().scheme.plant
    )


def fastest(call: Callable[[], Any], seconds: float = 1.0) -> float:
    """Shortest time [s] of one call in about so many seconds of trying."""
    once = max(min(timeit.repeat(call, number=1, repeat=3)), 1e-6)
    number = max(1, int(0.02 / once))
    return min(timeit.repeat(call, number=number, repeat=int(seconds / once / number) + 3)) / number


def main() -> None:
    """Print each subject's time, and its ratio to the yardstick of the same run."""
    times = {subject.__name__: fastest(subject()) for subject in SUBJECTS}
    for name, time in times.items():
        print(f"{name:<24}{1e3 * time:>9.3f} ms{time / times['interpolation']:>8.1f}")


if __name__ == "__main__":
    main()
