"""Further keys of the plant, each against what follows by hand or a search of every day."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.interpolate import PchipInterpolator
from test_plant_jobs import FALLING, RIVER, UNIT, WEIGHT, check, estimate, ledger

import hydroyield
import hydroyield.errors
from hydroyield.energy.starting import waiting_days
from hydroyield.jobs import SiteEstimate
from hydroyield.quantities import rounded
from hydroyield.report import words
from hydroyield.report.page import page
from hydroyield.report.result import result
from hydroyield.report.understood import understood
from hydroyield.site.notes import filled_in
from hydroyield.site.operation_models import Standstill

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


def test_dates_are_shown_as_they_are_written(tmp_path: Path) -> None:
    site = estimate(tmp_path, operation="{standstill: {dates: [8-1 to 8-19, 12-24]}}").site
    shown = understood(site)["stated"]["operation"]["standstill"]
    assert shown == {"dates": ["08-01 to 08-19", "12-24 to 12-24"]}
    assert Standstill.model_validate(shown) == site.model.operation.standstill


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


# --- starting discharge ---------------------------------------------------------------------------

SLOW = f"\n  {UNIT}, starting_discharge: 50 %}}"  # starts at 1.5 m3/s, runs on down to 0.6
LOW = np.round(RIVER / 2, 3)


@given(
    st.lists(st.tuples(st.booleans(), st.booleans()), min_size=1, max_size=40),
)
@settings(max_examples=80, deadline=None)
def test_waiting_days_against_a_walk_through_them(days: list[tuple[bool, bool]]) -> None:
    running, expected = False, []
    for runs, enough in days:
        expected.append(runs and not (running or enough))
        running = runs and (running or enough)
    runs, enough = (np.array(column) for column in zip(*days, strict=True))
    assert waiting_days(runs, enough).tolist() == expected


def walked(river: np.ndarray, power: dict[float, float], closed: tuple[int, ...] = ()) -> float:
    """Energy of a mean year [MWh], day after day; `power` is that of a running plant [W]."""
    running, total = False, 0.0
    for number, discharge in enumerate(river.tolist()):
        month = (np.datetime64("2000-10-01") + number).astype("datetime64[M]").astype(int) % 12 + 1
        known = not np.isnan(discharge) and month not in closed
        running = known and discharge >= (0.6 if running else 1.5)
        total += 24 * power[discharge] if running else 0.0
    return total / 4e6


def test_a_plant_that_starts_late_day_by_day(tmp_path: Path) -> None:
    free = estimate(tmp_path, LOW)
    power = dict(zip(free.cells.discharge.tolist(), free.net_power.tolist(), strict=True))
    found = estimate(tmp_path, LOW, turbines=SLOW)
    assert found.mean_annual_energy_mwh == pytest.approx(walked(LOW, power), rel=1e-9)
    assert found.mean_annual_energy_mwh < 0.99 * free.mean_annual_energy_mwh
    assert sum(found.monthly_energy_mwh) == pytest.approx(found.mean_annual_energy_mwh)
    assert ledger(found)["below_minimum_or_unused"] < ledger(free)["below_minimum_or_unused"]
    named = check(found, "starting_discharge")
    running, waited = False, 0
    for discharge in LOW:
        waited += not running and 0.6 <= discharge < 1.5
        running = discharge >= (0.6 if running else 1.5)
    assert (named.outcome, named.value) == ("pass", pytest.approx(waited / 4))
    shut = estimate(tmp_path, LOW, turbines=SLOW, operation="{closed: [2, 7]}")
    expected = walked(LOW, power, (2, 7))
    assert shut.mean_annual_energy_mwh == pytest.approx(expected, rel=1e-9)


def test_a_day_without_a_value_leaves_the_plant_standing(tmp_path: Path) -> None:
    """0.9 m3/s from day to day after a single day of 2: it runs on until a day is missing."""
    steady = np.full(RIVER.size, 0.9)
    steady[0] = 2.0
    whole = estimate(tmp_path, steady, turbines=SLOW)
    assert whole.cells.waiting is not None
    assert not whole.cells.waiting.any()
    steady[700] = np.nan
    found = estimate(tmp_path, steady, turbines=SLOW)
    assert found.scheme.waiting is not None
    assert np.flatnonzero(found.scheme.waiting).tolist() == list(range(701, RIVER.size))
    yearly = found.yearly_energy_mwh
    assert yearly["2001"] == pytest.approx(whole.yearly_energy_mwh["2001"])
    assert yearly["2003"] == yearly["2004"] == 0.0


def test_starting_at_the_minimum_changes_nothing(tmp_path: Path) -> None:
    same = estimate(tmp_path, turbines=f"\n  {UNIT}, starting_discharge: 20 %}}")
    assert same.mean_annual_energy_mwh == estimate(tmp_path).mean_annual_energy_mwh
    assert same.cells.waiting is None
    assert check(same, "starting_discharge") is None


def test_a_branch_does_not_change_the_share_at_which_a_unit_starts(tmp_path: Path) -> None:
    """Behind 2.5 m lost at 3 m3/s: q / q_full(net head) >= 0.5 at the discharge of the day."""
    branch = ", waterway: [{loss_coefficient: 0.2777777777777778}]}"
    found = estimate(tmp_path, LOW, turbines=SLOW.removesuffix("}") + branch)
    starts, running = [], False
    for discharge in LOW:
        net = 20 - 2.5 / 9 * min(discharge, 2.8) ** 2
        share = discharge / (3 * np.sqrt(net / 20))
        starts.append(not running and 0.2 <= share < 0.5)
        running = share >= (0.2 if running else 0.5)
    assert found.scheme.waiting is not None
    assert found.scheme.waiting.tolist() == starts


def test_without_days_units_start_at_their_minimum(tmp_path: Path) -> None:
    text = (
        "format: 1\nsite: {name: T}\ndischarge: {duration_table: [[5, 9], [50, 3], [95, 0.4]]}\n"
        "head: {headwater: {level: 30}, tailwater: {level: 10}}\n"
    )
    energy = {}
    for name, unit in (("free", f"\n  {UNIT}}}"), ("slow", SLOW)):
        path = tmp_path / f"{name}.yaml"
        path.write_text(f"{text}turbines: {unit}\n")
        energy[name] = hydroyield.estimate(hydroyield.read_site(path))
    assert energy["slow"].mean_annual_energy_mwh == energy["free"].mean_annual_energy_mwh
    assert check(energy["slow"], "starting_discharge").outcome == "warn"


def test_a_start_below_the_minimum_is_a_fault(tmp_path: Path) -> None:
    fault = r"turbines\[0\].starting_discharge: 10 % is less than the minimum discharge of 20 %"
    with pytest.raises(hydroyield.errors.SiteFileError, match=fault):
        estimate(tmp_path, turbines=f"\n  {UNIT}, starting_discharge: 10 %}}")


# --- what the page says ---------------------------------------------------------------------------


def test_the_page_shows_limits_starts_and_the_way_rules_are_combined(tmp_path: Path) -> None:
    rules = "[{rule: constant, discharge: 0.2}, {rule: mean_share, share: 10 %}]"
    found = estimate(
        tmp_path,
        turbines=f"\n  {UNIT}, {LIMIT}, starting_discharge: 40 %}}",
        environmental_flow=rules,
        environmental_flow_combination="sum",
    )
    shown = page(found, [])
    assert "limited by head: 150 kW at 12.0 m to 420 kW at 19.0 m" in shown
    assert "20 %, starts at 40 %" in shown
    assert "Environmental flow, the sum of" in shown
    largest = estimate(tmp_path, environmental_flow=rules)
    assert "Environmental flow, the largest of" in page(largest, [])
    filled = {note.key for note in filled_in(largest.site)} - {
        note.key for note in filled_in(found.site)
    }
    assert filled == {"environmental_flow_combination"}
