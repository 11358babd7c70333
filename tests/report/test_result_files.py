"""result.json and the tables of a run, read back by the standard library."""

from __future__ import annotations

import csv
import json
import math
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import pytest
import twin_sites
from typer.testing import CliRunner

import hydroyield
from hydroyield.cli import app
from hydroyield.jobs import SiteEstimate

STEPS = [
    "gross", "reserved", "shutdown", "no_admissible_head", "above_full_discharge",
    "capacity_limit", "below_minimum_or_unused", "outage", "levels", "waterway", "turbine",
    "drive_and_generator", "transformer", "own_use", "export_limit", "net",
]  # fmt: skip
CURVES = [
    "month", "exceedance_percent", "river_discharge_m3s", "turbine_discharge_m3s", "gross_head_m",
    "net_head_m", "power_kw",
]  # fmt: skip
EXCEEDANCES = ["1", "5", *map(str, range(10, 100, 10)), "95", "99"]
NUMBERS = [
    "installed_capacity_kw", "maximum_net_power_kw", "mean_annual_energy_mwh", "capacity_factor",
    "duration_integral_energy_mwh", "environmental_flow_mean_m3s",
]  # fmt: skip
SITES = [twin_sites.one_kaplan, twin_sites.several_flow_rules, twin_sites.weir_and_abstractions]

Row = dict[str, float]


@dataclass(frozen=True)
class Run:
    """What a run wrote, and the same from Python."""

    result: dict[str, Any]
    curves: list[Row]
    power_duration: list[Row]
    estimate: SiteEstimate


def table(path: Path) -> list[Row]:
    with open(path, newline="") as file:
        return [{key: float(text) for key, text in row.items()} for row in csv.DictReader(file)]


def no_constant(word: str) -> float:
    raise AssertionError(f"{word} in result.json")


@pytest.fixture(scope="module", params=SITES, ids=lambda make: make.__name__)
def run(request: pytest.FixtureRequest, tmp_path_factory: pytest.TempPathFactory) -> Run:
    site = request.param(tmp_path_factory.mktemp("site"))
    out = site.parent / "out"
    said = CliRunner().invoke(app, ["estimate", str(site), "--out", str(out), "--json"])
    assert said.exit_code == 0, said.output
    text = (out / "result.json").read_text("utf-8")
    assert said.stdout == text
    return Run(
        json.loads(text, parse_constant=no_constant),
        table(out / "curves.csv"),
        table(out / "power_duration.csv"),
        hydroyield.estimate(hydroyield.read_site(site)),
    )


# --- result.json ----------------------------------------------------------------------------------


def are_numbers(values: Any) -> bool:
    return all(type(value) is float and math.isfinite(value) for value in values)


def test_numbers(run: Run) -> None:
    assert run.result["format"] == 1
    assert run.result["site"] == {"name": run.estimate.site.name}
    for key in NUMBERS:
        assert are_numbers([run.result[key]]), key
        assert run.result[key] == getattr(run.estimate, key)
    assert run.result["maximum_net_power_kw"] <= run.result["installed_capacity_kw"]


def test_energy_by_month_and_year(run: Run) -> None:
    monthly, yearly = run.result["monthly_energy_mwh"], run.result["yearly_energy_mwh"]
    assert len(monthly) == 12
    assert are_numbers(monthly)
    assert are_numbers(yearly.values())
    assert list(yearly) == run.result["years_used"]
    assert all(year.isdigit() for year in [*yearly, *run.result["years_left_out"]])
    assert all(isinstance(why, str) and why for why in run.result["years_left_out"].values())
    assert not set(yearly) & set(run.result["years_left_out"])
    annual = run.result["mean_annual_energy_mwh"]
    assert sum(monthly) == pytest.approx(annual, rel=1e-12)
    assert sum(yearly.values()) / len(yearly) == pytest.approx(annual, rel=1e-12)
    assert run.result["duration_integral_energy_mwh"] == pytest.approx(annual, rel=1e-9)


def test_record(run: Run) -> None:
    record = run.result["record"]
    assert record["location"] == "site"
    assert record["first"] < record["last"]
    assert type(record["days"]) is type(record["missing_days"]) is int
    assert are_numbers([record["mean_m3s"]])


def test_discharges(run: Run) -> None:
    exceeded = run.result["exceedance_discharge_m3s"]
    assert list(exceeded) == EXCEEDANCES
    characteristic = run.result["characteristic_discharge_m3s"]
    assert list(characteristic) == ["10", "30", "90", "180", "270", "355"]
    for values in (list(exceeded.values()), list(characteristic.values())):
        assert are_numbers(values)
        assert values == sorted(values, reverse=True)


def test_ledger(run: Run) -> None:
    rows = run.result["ledger_mwh"]
    assert [row["step"] for row in rows] == STEPS
    assert all(set(row) == {"step", "energy_mwh"} for row in rows)
    energies = [row["energy_mwh"] for row in rows]
    assert are_numbers(energies)
    assert energies[-1] == pytest.approx(math.fsum(energies[:-1]), abs=1e-12 * energies[0])
    assert energies[-1] == pytest.approx(run.result["mean_annual_energy_mwh"], rel=1e-9)


def test_checks(run: Run) -> None:
    names = [check["name"] for check in run.result["checks"]]
    assert len(names) == len(set(names)) > 5
    for check in run.result["checks"]:
        assert set(check) == {"name", "outcome", "value", "limit", "message"}
        assert check["outcome"] in ("pass", "warn", "fail")
        assert check["message"].endswith(".")
        for number in (check["value"], check["limit"]):
            assert number is None or type(number) in (int, float)


def test_provenance(run: Run) -> None:
    provenance = run.result["provenance"]
    assert provenance["version"] == hydroyield.__version__
    assert "seed" in provenance
    assert len(provenance["sha256"]) == 2  # site file and record
    assert all(len(digest) == 64 for digest in provenance["sha256"].values())


# --- tables ---------------------------------------------------------------------------------------


def by_month(run: Run) -> dict[int, list[Row]]:
    months: dict[int, list[Row]] = {}
    for row in run.curves:
        months.setdefault(int(row["month"]), []).append(row)
    return months


def test_curves_fall(run: Run) -> None:
    assert [key for key in CURVES if key not in run.curves[0]] == []
    for rows in by_month(run).values():
        discharge = [row["river_discharge_m3s"] for row in rows]
        exceedance = [row["exceedance_percent"] for row in rows]
        assert discharge == sorted(set(discharge), reverse=True)
        assert exceedance == sorted(exceedance)
        assert 0 < exceedance[0] < exceedance[-1] < 100


def test_curves_are_physical(run: Run) -> None:
    for row in run.curves:
        assert all(math.isfinite(value) for value in row.values())
        assert 0 <= row["turbine_discharge_m3s"] <= row["river_discharge_m3s"]
        assert 0 <= row["power_kw"] <= run.result["maximum_net_power_kw"] * (1 + 1e-6)
        assert row["net_head_m"] <= row["gross_head_m"]


def test_curves_of_months_only_where_rules_differ(run: Run) -> None:
    months = by_month(run)
    if run.estimate.site.name == "Alder Mill":  # one constant rule
        assert list(months) == [0]
    else:
        assert list(months) == list(range(13))
        assert len({len(rows) for rows in months.values()}) == 1


def test_the_mean_curve_is_weighted_by_days(run: Run) -> None:
    months = by_month(run)  # where there is one set of rules it holds in each of them
    years = run.estimate.cells.years.tolist()  # all begin in October
    leap = sum(year % 4 == 0 for year in years) / len(years)
    days = [31, 28 + leap, 31, 30, 31, 30, 31, 31, 30, 31, 30, 31]
    for number, mean in enumerate(months[0]):
        power = sum(
            d * months.get(m + 1, months[0])[number]["power_kw"] for m, d in enumerate(days)
        ) / sum(days)
        assert mean["power_kw"] == pytest.approx(power, rel=1e-5, abs=1e-5)


def test_area_under_the_power_duration_curve(run: Run) -> None:
    """Straight lines between the points, times the mean hours of the years used."""
    rows = run.power_duration
    assert list(rows[0]) == ["exceedance_percent", "power_kw"]
    exceedance = [row["exceedance_percent"] for row in rows]
    power = [row["power_kw"] for row in rows]
    assert (exceedance[0], exceedance[-1]) == (0.0, 100.0)
    assert exceedance == sorted(exceedance)
    assert power == sorted(power, reverse=True)
    area = sum(
        (exceedance[i + 1] - exceedance[i]) * (power[i + 1] + power[i]) / 200
        for i in range(len(rows) - 1)
    )
    years = [int(year) for year in run.result["years_used"]]
    hours = 8760 + 24 * sum(year % 4 == 0 for year in years) / len(years)
    energy = run.result["mean_annual_energy_mwh"]
    assert area * hours / 1000 == pytest.approx(energy, rel=1e-6)
