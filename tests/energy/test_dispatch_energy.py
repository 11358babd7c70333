"""Energy of the dispatched plant against a brute-force search over the discharges of its units."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
import twin
import twin_sites
from small_schemes import ONE_YEAR, WEIGHT, scheme, unit

import hydroyield
from hydroyield.energy import Estimate, estimate_energy
from hydroyield.powerhouse import EfficiencyCurve, machine_types

SAMPLE = 24  # cells of each site, at even steps of the hours of a year
SHORT = 1e-3  # of annual energy: the most that the dispatch may fall short of the search
ABOVE = 2e-4  # by how much tables, read between their columns, may lie above it
SEARCHED = [  # several units, all kinds of head and limits
    "two_propellers",
    "three_francis_steep",
    pytest.param("unequal_francis_with_losses", marks=pytest.mark.slow),
    pytest.param("screw_and_kaplan", marks=pytest.mark.slow),
    pytest.param("turbine_tailrace", marks=pytest.mark.slow),
    pytest.param("weir_and_abstractions", marks=pytest.mark.slow),
    pytest.param("two_peltons", marks=pytest.mark.slow),
]


def sampled(estimate: Estimate) -> np.ndarray:
    """Cells at even steps of the hours of a year, the cells in order of discharge."""
    order = np.argsort(estimate.cells.discharge, kind="stable")
    passed = np.cumsum(estimate.cells.weight[order])
    steps = (np.arange(SAMPLE) + 0.5) / SAMPLE * passed[-1]
    return order[np.searchsorted(passed, steps)]


def searched_output(plant: twin.Plant, month: int, discharge: float) -> float:
    """The most [W] that any discharges of the units give."""
    if twin.stopped_by_river(plant, discharge):
        return 0.0
    water = twin.share_water(plant, month, discharge)
    heads = twin.heads_of_day(plant, discharge, water)
    output, _ = twin.brute_force_output(
        plant.units, lambda u, total: heads(u.axis, total)[1], water.offered
    )
    return output


@pytest.mark.parametrize("name", SEARCHED)
def test_energy_is_that_of_the_best_discharges(name: str, tmp_path: Path) -> None:
    path = twin_sites.SITES[name](tmp_path)
    estimate = hydroyield.estimate(hydroyield.read_site(path))
    plant = twin.load(path)
    month_of_season = {s: m + 1 for m, s in enumerate(estimate.scheme.rules.season_of_month)}
    chosen = sampled(estimate)
    best = [
        searched_output(plant, month_of_season[estimate.cells.season[c]], discharge)
        for c, discharge in zip(chosen, estimate.cells.discharge[chosen].tolist(), strict=True)
    ]
    found = estimate.operation.output[chosen].sum()  # each stands for as many hours
    assert (1 - SHORT) * sum(best) <= found <= (1 + ABOVE) * sum(best)
    running = np.count_nonzero(best)
    assert running > SAMPLE / 4


# --- unequal sharing, worked by hand --------------------------------------------------------------

RISING = EfficiencyCurve((0.0, 1.0), (0.0, 0.9))  # 0.9 x opening, so that output grows as q^2


def constant_year(discharge: float, *groups: object) -> Estimate:
    flow = np.full(ONE_YEAR.size, discharge)
    return estimate_energy(scheme(flow, groups, ONE_YEAR, year_start_month=1))


def test_two_equal_units_share_unequally_where_that_gives_more() -> None:
    """6 m3/s for two units of 5, at least 1 each, head 10 m. Output of one is 0.9 rho g H q^2 / 5:
    (5, 1) gives 26 / 5, (3, 3) gives 18 / 5 and (5, stands) 25 / 5."""
    estimate = constant_year(6.0, unit(2, minimum=0.2, curve=RISING))
    best, alone, equal = (0.9 * WEIGHT * 10 * squares / 5 for squares in (26, 25, 18))
    assert estimate.operation.output[0] == pytest.approx(best, rel=1e-4)
    assert estimate.operation.output[0] > alone > equal
    assert estimate.operation.turbined[0] == pytest.approx(6.0)
    assert estimate.mean_annual_energy_mwh == pytest.approx(best * 8760 / 1e6, rel=1e-4)


def test_water_is_left_where_it_would_cost_more_than_it_gives() -> None:
    """Of 5.5 m3/s a unit of 5 takes 5: with two running one must give up 0.5 to the other's
    least 1, and (4.5, 1) gives 21.25 / 5 against 25 / 5."""
    estimate = constant_year(5.5, unit(2, minimum=0.2, curve=RISING))
    assert estimate.operation.output[0] == pytest.approx(0.9 * WEIGHT * 10 * 5, rel=1e-4)
    assert estimate.operation.turbined[0] == pytest.approx(5.0, rel=1e-3)


def test_equal_units_share_equally_where_that_gives_more() -> None:
    """Output q (1 - q / 10) at 10 m bends down: 6 m3/s are best taken as (3, 3)."""
    falling = EfficiencyCurve((0.0, 1.0), (1.0, 0.5))
    estimate = constant_year(6.0, unit(2, curve=falling))
    assert estimate.operation.output[0] == pytest.approx(WEIGHT * 10 * 2 * 3 * 0.7, rel=1e-4)


@pytest.mark.parametrize(("kind", "short"), [("francis", 3e-4), ("propeller", 2e-3)])
def test_equal_units_gain_by_sharing_unequally(kind: str, short: float) -> None:
    """Two units with a typical steep curve, from 40 % of full discharge, on a straight duration
    curve from 0 to 14 m3/s. The twin finds the best of each day; the best that 1 or 2 units make
    by opening alike, at any total up to the water there is, falls short of it."""
    curve = EfficiencyCurve(*zip(*machine_types()[kind].curve, strict=True))
    flow = np.random.default_rng(3).permutation(np.linspace(0.01, 14, ONE_YEAR.size))
    units = unit(2, kind=kind, minimum=0.4, curve=curve)
    estimate = estimate_energy(scheme(flow, [units], ONE_YEAR, year_start_month=1))
    output = estimate.operation.output  # cells stand in order of discharge

    opening = np.linspace(0.4, 1, 601)
    one = WEIGHT * 10 * 5 * opening * curve(opening)
    totals = np.concatenate([5 * opening, 10 * opening])
    order = np.argsort(totals)
    best_alike = np.maximum.accumulate(np.concatenate([one, 2 * one])[order])
    place = np.searchsorted(totals[order], estimate.cells.discharge * (1 + 1e-9), side="right")
    alike = np.where(place > 0, best_alike[place - 1], 0.0)
    assert estimate.cells.per_year(alike) < (1 - short) * estimate.cells.per_year(output)

    twins = [twin.Unit(0, kind, 5.0, 10.0, 0.4, 1e9, WEIGHT, curve)] * 2
    chosen = np.arange(0, flow.size, 9)
    best = [
        twin.brute_force_output(twins, lambda u, total: 10.0 + 0 * total, float(q))[0]
        for q in estimate.cells.discharge[chosen]
    ]
    assert (1 - SHORT) * sum(best) <= output[chosen].sum() <= (1 + ABOVE) * sum(best)
