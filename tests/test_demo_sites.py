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
from hydroyield.record import RecordOptions, read_record
from hydroyield.site import read_site_file

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
    record = site.record_path.read_text(encoding="utf-8")
    assert record.startswith("#")
    assert "invented" in record.split("date,")[0]
    assert "invented" in (folder / "README.md").read_text(encoding="utf-8")
    assert "invented" in (folder / "site.yaml").read_text(encoding="utf-8")


# What each README says of its checks: those that are not passed.
LOOK_AT = {
    "quernholm_weir": {"left_out_outages"},
    "skarrig_burn": {"left_out_outages"},
    "osterby_mill": {
        "years_used", "tailwater_table_range", "left_out_environmental_flow", "left_out_transfer",
        "left_out_waterway", "left_out_transformer_efficiency", "left_out_own_use",
        "left_out_outages", "typical_curve", "sources",
    },
}  # fmt: skip


@folders
def test_the_checks_are_those_that_the_story_promises(folder: Path) -> None:
    found = hydroyield.estimate(hydroyield.read_site(folder / "site.yaml"))
    assert {check.name for check in found.warnings()} == LOOK_AT[folder.name]
    assert 0.3 < found.capacity_factor < 0.85


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


@demos
def test_a_record_is_read_with_every_day_and_gap(demo: Any) -> None:
    site = read_site_file(DEMO_SITES / demo.folder / "site.yaml")
    record = read_record(site.record_path, RecordOptions(unit=site.model.discharge.record.unit))
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


@demos
def test_the_stores_of_a_catchment_take_all_of_its_runoff(demo: Any) -> None:
    assert sum(share for share, _ in demo.catchment.stores) == pytest.approx(1.0, abs=1e-12)


@pytest.mark.parametrize(
    ("value", "text"),
    [(0.87349, "0.873"), (9.996, "10.0"), (12.345, "12.3"), (123.4, "123"), (1234.0, "1230")],
)
def test_discharge_is_written_with_three_digits(value: float, text: str) -> None:
    assert make_records.three_digits(value) == text
