"""The demo sites: complete, readable, said to be invented, and made by the script beside them."""

from __future__ import annotations

import datetime
import importlib.util
import math
import sys
from dataclasses import replace
from pathlib import Path
from types import ModuleType
from typing import Any

import numpy as np
import pytest

import hydroyield
from hydroyield import jobs
from hydroyield.record import read_record
from hydroyield.site import read_site_file
from hydroyield.site.river_assembly import record_options

DEMO_SITES = Path(__file__).parents[1] / "demo_sites"
FOLDERS = sorted(
    path for path in DEMO_SITES.iterdir() if path.is_dir() and path.name[0] not in "._"
)


def _script() -> ModuleType:
    spec = importlib.util.spec_from_file_location("make_records", DEMO_SITES / "make_records.py")
    assert spec is not None
    assert spec.loader is not None
    module = importlib.util.module_from_spec(spec)
    sys.modules[spec.name] = module  # dataclasses look their module up
    spec.loader.exec_module(module)
    return module


make_records = _script()
demos = pytest.mark.parametrize("demo", make_records.DEMOS, ids=lambda demo: demo.folder)
folders = pytest.mark.parametrize("folder", FOLDERS, ids=lambda folder: folder.name)


@demos
def test_the_script_makes_the_committed_bytes(demo: Any) -> None:
    assert make_records.record_text(demo).encode("ascii") == demo.path.read_bytes()


def test_every_folder_has_a_record_that_the_script_makes() -> None:
    assert {demo.folder for demo in make_records.DEMOS} == {folder.name for folder in FOLDERS}


@folders
def test_a_demo_is_complete_and_says_that_it_is_invented(folder: Path) -> None:
    site = read_site_file(folder / "site.yaml")
    record = site.record_paths[0].read_text(encoding="utf-8")
    assert record.startswith("#")
    assert "invented" in record.split("date,")[0]
    assert "invented" in (folder / "README.md").read_text(encoding="utf-8")
    assert "invented" in (folder / "site.yaml").read_text(encoding="utf-8")


# What each README says of its checks: those that are not passed.
LOOK_AT = {
    "quernholm_weir": {"left_out_outages"},
    "skarrig_burn": {"left_out_outages"},
    "tamsel_fork": {"left_out_outages"},
    "osterby_mill": {
        "years_used", "all_valid_days", "record_ended", "tailwater_table_range",
        "left_out_environmental_flow", "left_out_transfer",
        "left_out_waterway", "left_out_transformer_efficiency", "left_out_own_use",
        "left_out_outages", "typical_curve", "sources",
    },
}  # fmt: skip


@folders
def test_the_checks_are_those_that_the_story_promises(folder: Path) -> None:
    found = hydroyield.estimate(hydroyield.read_site(folder / "site.yaml"))
    assert {check.name for check in found.warnings()} == LOOK_AT[folder.name]
    assert 0.3 < found.capacity_factor < 0.65


def test_the_head_at_the_burn_hardly_changes_and_sharing_costs_more_than_hands_off() -> None:
    """What the README of Skarrig Burn says, held against the numbers."""
    folder = DEMO_SITES / "skarrig_burn"
    site = hydroyield.read_site(folder / "site.yaml")
    found = hydroyield.estimate(site)
    runs = found.operation.turbined > 0
    assert np.ptp(found.operation.gross_head[runs]) == 0
    hands_off, sharing = site.model.environmental_flow

    def energy(*rules: Any) -> float:
        model = site.model.model_copy(update={"environmental_flow": rules})
        return hydroyield.estimate(replace(site, model=model)).mean_annual_energy_mwh

    free = energy()
    assert free - energy(sharing) > 1.5 * (free - energy(hands_off))


# --- what the READMEs say, held against the numbers ---------------------------------------------

DECEMBER_TO_FEBRUARY, MAY_TO_JULY, JUNE_TO_AUGUST = (11, 0, 1), (4, 5, 6), (5, 6, 7)


def _estimate(folder: str, **changes: Any) -> Any:
    """The estimate of a demo, with blocks of its site file exchanged."""
    site = hydroyield.read_site(DEMO_SITES / folder / "site.yaml")
    return hydroyield.estimate(replace(site, model=site.model.model_copy(update=changes)))


def _turbine(folder: str, **changes: Any) -> tuple[Any, ...]:
    (group,) = hydroyield.read_site(DEMO_SITES / folder / "site.yaml").model.turbines
    return (group.model_copy(update=changes),)


def _months(found: Any, months: tuple[int, ...]) -> float:
    """Share of the year's energy in some months, January 0."""
    return sum(found.monthly_energy_mwh[month] for month in months) / found.mean_annual_energy_mwh


def _row(found: Any, step: str) -> float:
    """A row of the ledger as a share of the gross energy."""
    rows = dict(found.ledger_mwh)
    return rows[step] / rows["gross"]


@pytest.mark.parametrize(
    ("folder", "capacity_kw", "head_m"),
    [("quernholm_weir", 260, 2.8), ("skarrig_burn", 300, 120), ("tamsel_fork", 298.3, 134)],
)
def test_a_demo_is_of_the_size_that_its_story_tells(
    folder: str, capacity_kw: float, head_m: float
) -> None:
    # capacities as the site files state them (400 hp are 298.3 kW), heads from the levels by hand:
    # 782 ft are 238.4 m, less 118.0 m; 4271 ft - 3831 ft are 134.1 m
    found = _estimate(folder)
    assert found.installed_capacity_kw == pytest.approx(capacity_kw, rel=1e-3)
    assert found.reference_head_m == pytest.approx(head_m, rel=0.01)


def test_quernholm_lives_on_its_winter_and_its_export_limit_costs_nothing() -> None:
    found = _estimate("quernholm_weir")
    assert _months(found, DECEMBER_TO_FEBRUARY) > 2.2 * _months(found, JUNE_TO_AUGUST)
    assert list(found.years_left_out) == ["2002"]
    years = found.yearly_energy_mwh.values()
    assert 1.7 < max(years) / min(years) < 2.5
    assert abs(_row(found, "export_limit")) < 0.001
    for step in ("reserved", "above_full_discharge", "levels"):
        assert _row(found, step) < -0.04


@pytest.mark.slow
def test_the_options_of_quernholm_are_what_their_story_tells() -> None:
    path = DEMO_SITES / "quernholm_weir" / "site.yaml"
    found = jobs.compare(hydroyield.read_site(path))
    assert len(found.options) == 40
    assert not found.refused
    of = {
        (option.type, option.combination.split_text, option.combination.design_discharge): option
        for option in found.options
    }
    marginal = {o.number: m for o, m in zip(found.options, found.marginal, strict=True)}
    quarter = 8766 / 4
    for kaplans in ("0.5+0.5", "0.33+0.67"):
        assert marginal[of["kaplan", kaplans, 14].number] < quarter
        assert marginal[of["kaplan", kaplans, 16].number] < quarter / 6
    equal, unequal = of["kaplan", "0.5+0.5", 12], of["kaplan", "0.33+0.67", 12]
    assert 1 < unequal.mean_annual_energy / equal.mean_annual_energy < 1.03
    assert unequal.standing_hours < equal.standing_hours
    propellers = of["propeller", "0.5+0.5", 12].mean_annual_energy
    assert 0.70 < propellers / equal.mean_annual_energy < 0.80
    best = {choice.aim.name: choice.option.number for choice in found.choices if choice.option}
    assert best["lowest_levelised_cost"] != best["highest_net_present_value"]


def test_quernholm_with_the_level_of_a_dry_summer_promises_too_much() -> None:
    folder = "quernholm_weir"
    head = hydroyield.read_site(DEMO_SITES / folder / "site.yaml").model.head
    dry = head.tailwater.model_copy(update={"level": 71.35, "table": None})
    found = _estimate(folder, head=head.model_copy(update={"tailwater": dry}))
    assert found.mean_annual_energy_mwh > 1.05 * _estimate(folder).mean_annual_energy_mwh


def test_skarrig_values_the_height_between_wheel_and_tailwater_as_lost_head() -> None:
    # by hand: the axis lies 1.6 m above the sill, of 120.4 m
    found = _estimate("skarrig_burn")
    turbined = 1 + sum(
        _row(found, step)
        for step in ("reserved", "above_full_discharge", "below_minimum_or_unused")
    )
    assert _row(found, "levels") == pytest.approx(-turbined * 1.6 / 120.4, rel=0.01)
    assert len(found.years_used) == 23


def test_osterby_stands_on_six_years_and_derived_values_and_an_open_permit() -> None:
    found = _estimate("osterby_mill")
    assert len(found.years_used) == 6
    assert list(found.years_left_out) == ["2008", "2011", "2016"]
    assert 30 < found.installed_capacity_kw < 70
    assert found.reference_head_m == pytest.approx(2.2, abs=0.1)
    assert found.cells.discharge.max() > 7  # floods leave the table of levels
    assert _row(found, "reserved") > -0.12  # the fish pass alone
    permit = type(
        hydroyield.read_site(DEMO_SITES / "quernholm_weir" / "site.yaml").model.environmental_flow[
            0
        ]
    )(rule="exceedance", percent=95)
    stated = _estimate("osterby_mill", environmental_flow=(permit,))
    assert stated.mean_annual_energy_mwh < 0.85 * found.mean_annual_energy_mwh
    assert "left_out_environmental_flow" not in {check.name for check in stated.warnings()}


def test_tamsel_lives_on_snow_melt() -> None:
    found = _estimate("tamsel_fork")
    assert 0.45 < _months(found, MAY_TO_JULY) < 0.55
    assert _months(found, DECEMBER_TO_FEBRUARY) < 0.05
    assert list(found.years_left_out) == ["2011"]
    assert "June 21 of 30" in found.years_left_out["2011"]  # by hand: 30 less the 11th to the 19th
    runs = found.operation.turbined > 0
    assert np.ptp(found.operation.gross_head[runs]) == 0


def test_tamsel_gets_less_from_its_second_unit_and_nothing_from_its_first_rule() -> None:
    full = _estimate("tamsel_fork").mean_annual_energy_mwh
    single = _estimate("tamsel_fork", turbines=_turbine("tamsel_fork", count=1))
    assert 0.4 < full / single.mean_annual_energy_mwh - 1 < 0.6
    constant, share = hydroyield.read_site(
        DEMO_SITES / "tamsel_fork" / "site.yaml"
    ).model.environmental_flow
    # everything up to 50 l/s is never less than 35 l/s of the inflow
    without_first = _estimate("tamsel_fork", environmental_flow=(share,))
    assert without_first.mean_annual_energy_mwh == pytest.approx(full, rel=1e-12)
    without_second = _estimate("tamsel_fork", environmental_flow=(constant,))
    assert 1.15 < without_second.mean_annual_energy_mwh / full < 1.25


@demos
def test_a_record_is_read_with_every_day_and_gap(demo: Any) -> None:
    site = read_site_file(DEMO_SITES / demo.folder / "site.yaml")
    record = read_record(site.record_paths[0], record_options(site))
    missing = sum((gap.last - gap.first).days + 1 for gap in demo.gaps)
    assert record.dates.size == (demo.last - demo.first).days + 1
    assert record.receipt.missing_days == missing
    assert record.receipt.days == record.dates.size - missing
    assert [check.name for check in record.receipt.checks if check.outcome != "pass"] == []


def test_quernholm_has_the_days_counted_by_hand() -> None:
    # 28 years with 7 leap days: 2000, 2004, ..., 2020 are six, and 1996; gaps 3 + 49 + 2 + 2 + 3
    record = read_record(DEMO_SITES / "quernholm_weir" / "ashwen_daily.csv")
    assert record.receipt.days + record.receipt.missing_days == 28 * 365 + 7
    assert record.receipt.missing_days == 59
    assert np.nanmean(record.discharge) == pytest.approx(11.4, abs=0.05)  # as its README says
    second = np.nanargmax(np.where(record.dates < np.datetime64("2006"), record.discharge, np.nan))
    assert record.dates[second] == np.datetime64("2001-12-23")


def test_quernholm_loses_its_head_in_large_floods() -> None:
    site = read_site_file(DEMO_SITES / "quernholm_weir" / "site.yaml").model
    record = read_record(DEMO_SITES / "quernholm_weir" / "ashwen_daily.csv")
    table, headwater = site.head.tailwater.table, site.head.headwater.level
    assert table is not None
    assert headwater is not None
    discharges, levels = zip(*table, strict=True)
    at_site = np.sort(record.discharge[~np.isnan(record.discharge)] * 441 / 486)
    head = headwater - np.interp(at_site, discharges, levels)
    assert head[0] == pytest.approx(3.1, abs=0.1)
    assert 2.5 < np.median(head) < 3
    assert head[-1] < 0
    # by hand, as its README says: 74.35 m lies 0.53 m above 73.82 m, on a segment of 0.76 m for
    # 60 m3/s that starts at 120 m3/s
    assert np.interp(headwater, levels, discharges) == pytest.approx(161.8, abs=0.1)


# --- the script -----------------------------------------------------------------------------------


def test_a_reservoir_empties_exponentially_and_loses_nothing() -> None:
    # analytic: outflow of day k is (1 - e^(-1/T)) e^(-k/T), a geometric series that sums to 1
    pulse = np.zeros(400)
    pulse[0] = 1.0
    outflow = make_records.drained(pulse, 7.0)
    assert outflow[10] == pytest.approx((1 - math.exp(-1 / 7)) * math.exp(-10 / 7), rel=1e-12)
    assert outflow.sum() == pytest.approx(1.0, rel=1e-12)


def test_moist_soil_lets_all_rain_go_and_dry_soil_lets_some() -> None:
    days = make_records.days_between(datetime.date(2001, 1, 1), datetime.date(2001, 1, 3))
    rain = np.array([10.0, 0.0, 10.0])
    # without evaporation nothing is ever lacking
    assert make_records.runoff(days, rain, (0.0,) * 12, 100.0).tolist() == rain.tolist()
    # by hand: 10 mm lacking after day 1, 19 after day 2; moist 0.81, held back 10 (1 - 0.81^2)
    released = make_records.runoff(days, rain, (10.0,) * 12, 100.0)
    assert released == pytest.approx([10.0, 0.0, 10 * 0.81**2], rel=1e-12)


def test_snow_lies_until_it_is_warm_and_none_of_it_is_lost() -> None:
    # by hand, 4 mm of a degree: 10 and 5 mm fall as snow; 1.5 degrees melt 6 mm beside 2 mm of
    # rain; 3 degrees could melt 12 mm, but 9 mm are left; then there is rain alone
    falling = np.array([10.0, 5.0, 2.0, 0.0, 3.0])
    water = make_records.melted(falling, np.array([-4.0, -0.1, 1.5, 3.0, 5.0]), 4.0)
    assert water == pytest.approx([0.0, 0.0, 8.0, 9.0, 3.0], abs=1e-12)
    assert water.sum() == pytest.approx(falling.sum(), rel=1e-12)


def test_temperatures_of_a_month_hold_on_its_15th_and_are_linear_between() -> None:
    monthly = tuple(float(month) for month in range(1, 13))
    assert make_records.mean_of_day(monthly, datetime.date(2001, 4, 15)) == 4.0
    assert make_records.mean_of_day(monthly, datetime.date(2001, 4, 30)) == 4.5
    # by hand: half way, and two thirds of the way, from December (12) to January (1)
    assert make_records.mean_of_day(monthly, datetime.date(2001, 12, 30)) == 6.5
    assert make_records.mean_of_day(monthly, datetime.date(2002, 1, 5)) == pytest.approx(
        12 - 11 * 20 / 30
    )


@demos
def test_the_stores_of_a_catchment_take_all_of_its_runoff(demo: Any) -> None:
    assert sum(share for share, _ in demo.catchment.stores) == pytest.approx(1.0, abs=1e-12)


@pytest.mark.parametrize(
    ("value", "text"),
    [(0.87349, "0.873"), (9.996, "10.0"), (12.345, "12.3"), (123.4, "123"), (1234.0, "1230")],
)
def test_discharge_is_written_with_three_digits(value: float, text: str) -> None:
    assert make_records.three_digits(value) == text
