"""Further keys of the plant, each against what follows by hand or a search of every day."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from scipy.interpolate import PchipInterpolator
from test_plant_jobs import FALLING, RIVER, UNIT, WEIGHT, check, estimate, ledger

import hydroyield.errors
from hydroyield.jobs import SiteEstimate
from hydroyield.quantities import rounded
from hydroyield.report import words
from hydroyield.report.page import page
from hydroyield.report.result import result

PCHIP = PchipInterpolator([0.1, 0.5, 1], [0.8, 0.9, 0.85])  # of UNIT

# --- output limit by head -------------------------------------------------------------------------

LIMIT = "output_limit: [[12 m, 150 kW], [18 m, 390 kW], [19 m, 420 kW]]"


def limited_day(river: float, lost: float) -> float:
    """The best output [W] of a day by a fine grid; `lost` is k of the branch."""
    gross = 30 - float(np.interp(river, [0, 9], [10, 16]))
    full = 3 * np.sqrt(gross / (20 + lost * 9))
    tried = np.linspace(0, min(full, river), 4001)[1:]
    net = gross - lost * tried**2
    share = tried / (3 * np.sqrt(net / 20))
    most = np.minimum(WEIGHT * 3 * 20 * 0.85, 1000 * np.interp(net, [12, 18, 19], [150, 390, 420]))
    power = np.minimum(WEIGHT * tried * net * PCHIP(np.clip(share, 0.1, 1)), most)
    return float(np.where(share >= 0.2 - 1e-9, power, 0.0).max())


@pytest.mark.parametrize("lost", [0.0, 0.1])
def test_a_limit_by_head_against_a_search_of_every_day(tmp_path: Path, lost: float) -> None:
    branch = f", waterway: [{{loss_coefficient: {lost}}}]" if lost else ""
    found = estimate(tmp_path, head=FALLING, turbines=f"\n  {UNIT}, {LIMIT}{branch}}}")
    free = estimate(tmp_path, head=FALLING, turbines=f"\n  {UNIT}{branch}}}")
    by_hand = sum(limited_day(q, lost) for q in RIVER) * 24 / 4e6
    assert found.mean_annual_energy_mwh == pytest.approx(by_hand, rel=3e-4)
    assert found.mean_annual_energy_mwh < 0.99 * free.mean_annual_energy_mwh
    assert ledger(found)["capacity_limit"] < ledger(free)["capacity_limit"] - 1


def test_a_limit_above_the_capacity_changes_nothing(tmp_path: Path) -> None:
    free = estimate(tmp_path, head=FALLING)
    wide = "output_limit: [[1 m, 900 kW], [30 m, 900 kW]]"
    found = estimate(tmp_path, head=FALLING, turbines=f"\n  {UNIT}, {wide}}}")
    assert found.mean_annual_energy_mwh == pytest.approx(free.mean_annual_energy_mwh, rel=1e-5)
    assert check(found, "output_limit_at_rated_head").outcome == "pass"


def test_a_capacity_that_the_limit_forbids_at_rated_head_is_named(tmp_path: Path) -> None:
    found = estimate(tmp_path, turbines=f"\n  {UNIT}, {LIMIT}}}")
    named = check(found, "output_limit_at_rated_head")
    assert named.outcome == "warn"
    assert named.value == pytest.approx(420)
    assert named.limit == pytest.approx(WEIGHT * 3 * 20 * 0.85 / 1000)


def test_a_limit_needs_rising_heads(tmp_path: Path) -> None:
    with pytest.raises(hydroyield.errors.SiteFileError, match="sort the rows by rising net head"):
        estimate(tmp_path, turbines=f"\n  {UNIT}, output_limit: [[3 m, 9 kW], [2 m, 8 kW]]}}")


# --- outages by dates -----------------------------------------------------------------------------


def test_a_window_takes_its_days_of_the_month(tmp_path: Path) -> None:
    always = estimate(tmp_path)
    out = estimate(tmp_path, operation="{planned_outage: {dates: [08-10 to 08-19]}}")
    left = np.array(out.monthly_energy_mwh) / np.array(always.monthly_energy_mwh)
    assert left == pytest.approx([1.0] * 7 + [21 / 31] + [1.0] * 4)
    ledger(out)
    assert check(out, "planned_outage_months").message.startswith(
        "The planned days fall into August and take"
    )
    same = estimate(tmp_path, operation="{planned_outage: {days: 10, months: aug}}")
    for name in ("planned_outage_months", "unavailability"):
        assert check(out, name).value == pytest.approx(check(same, name).value)


def test_a_standstill_over_the_turn_of_the_year(tmp_path: Path) -> None:
    always = estimate(tmp_path)
    out = estimate(tmp_path, operation="{standstill: {dates: 12-22 to 01-05}}")
    left = np.array(out.monthly_energy_mwh) / np.array(always.monthly_energy_mwh)
    assert left == pytest.approx([26 / 31] + [1.0] * 10 + [21 / 31])
    assert words.outages(out) == "all stand 15 days from 22 December to 5 January"


def test_the_page_says_when_units_take_turns(tmp_path: Path) -> None:
    two = f"\n  {UNIT.replace('count: 1', 'count: 2')}}}"
    dates = "{planned_outage: {dates: [08-10 to 08-19, 3-1 to 3-2]}}"
    found = words.outages(estimate(tmp_path, turbines=two, operation=dates))
    assert found == (
        "one unit after another out of service from 10 August to 19 August and from 1 March to "
        "2 March"
    )


@pytest.mark.parametrize(
    ("block", "fault"),
    [
        ("planned_outage: {dates: [08-10 until 08-19]}", "is no window of dates; write 08-10 to"),
        ("planned_outage: {dates: [02-30 to 03-02]}", "02-30 is no day of the year"),
        ("planned_outage: {dates: [08-10 to 08-19, 08-19 to 08-20]}", "shares days with a window"),
        ("planned_outage: {dates: [08-10 to 08-19], months: 8}", "'months' is read with days"),
        ("planned_outage: {dates: [08-10 to 08-19], days: 8}", "'dates' and 'days' exclude"),
        ("planned_outage: {dates: []}", "the list is empty; write"),
        ("planned_outage: {months: 8}", "needs one of days, dates"),
        ("standstill: {days: 8}", "standstill.months: is missing"),
        ("standstill: {dates: {from: 1}}", "stands where dates belong"),
    ],
)
def test_dates_that_cannot_be_read(tmp_path: Path, block: str, fault: str) -> None:
    with pytest.raises(hydroyield.errors.SiteFileError, match=fault):
        estimate(tmp_path, operation=f"{{{block}}}")


# --- beside the headline --------------------------------------------------------------------------


def as_result(found: SiteEstimate) -> dict[str, Any]:
    return json.loads(json.dumps(result(found)))


def test_an_ageing_plant_year_by_year(tmp_path: Path) -> None:
    """Each year 2 % less than the year before: counted up for 31 years."""
    new = estimate(tmp_path)
    found = estimate(tmp_path, operation="{degradation: 2 %}")
    energy = found.mean_annual_energy_mwh
    assert energy == new.mean_annual_energy_mwh
    years = [energy]
    while len(years) < 31:
        years.append(years[-1] * 0.98)
    stated = as_result(found)["ageing"]
    assert stated["degradation_share"] == 0.02
    assert stated["aged_energy_mwh"] == pytest.approx(
        {"10": years[10], "20": years[20], "30": years[30]}
    )
    assert stated["mean_aged_energy_mwh"] == pytest.approx(sum(years[:30]) / 30)
    assert as_result(new)["ageing"] is None
    assert words.ageing(new) == ""
    said = words.ageing(found)
    assert said.startswith("with 2 % less each year, ")
    assert f"{rounded(years[10])}, {rounded(years[20])}, {rounded(years[30])} MWh after" in said
    assert said in page(found, [])


def test_metered_energy_is_what_the_generators_give(tmp_path: Path) -> None:
    chain = "generator_efficiency: 90 %, transformer_efficiency: 98 %, own_use: 3 kW"
    chain += ", standing_use: 1 kW"
    blocks = {"operation": "{forced_outage_rate: 5 %}"}
    at_grid = estimate(tmp_path, electrical=f"{{{chain}}}", **blocks)
    found = estimate(tmp_path, electrical=f"{{{chain}, metered_at: generator}}", **blocks)
    assert found.mean_annual_energy_mwh == at_grid.mean_annual_energy_mwh
    metered = as_result(found)["metered_energy_mwh"]
    given = sum(
        float((state.weight * state.operation.output).sum())
        for state in found.states
        if state.operation is not None
    )
    assert metered == pytest.approx(given / 1e6, rel=1e-12)
    assert metered > 1.02 * found.mean_annual_energy_mwh
    assert as_result(at_grid)["metered_energy_mwh"] is None
    assert words.metered(found) in page(found, [])
    assert check(found, "metered_above_export_limit") is None


def test_metered_energy_above_the_export_limit_is_named(tmp_path: Path) -> None:
    found = estimate(tmp_path, electrical="{export_limit: 300 kW, metered_at: generator}")
    named = check(found, "metered_above_export_limit")
    assert named.value == pytest.approx(-ledger(found)["export_limit"])
    at_grid = estimate(tmp_path, electrical="{export_limit: 300 kW}")
    assert check(at_grid, "metered_above_export_limit") is None
