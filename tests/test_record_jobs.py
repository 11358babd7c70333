"""What the estimate makes of its record: doubts, references, transfers, duration tables; and the
record alone."""

from __future__ import annotations

import csv
import json
import re
from pathlib import Path
from typing import Any

import numpy as np
import pandas as pd
import pytest
from typer.testing import CliRunner, Result

import hydroyield
from hydroyield.cli import app
from hydroyield.errors import RecordError, SiteFileError
from hydroyield.jobs import SiteEstimate

PLANT = """
head: {headwater: {level: 20}, tailwater: {level: 10}}
turbines:
  - {count: 1, type: other, rated_discharge: 3, rated_head: 10, minimum_discharge: 10 %,
     efficiency: [[0.1, 0.85], [1, 0.85]]}
"""
GROSS = 1000 * 9.81 * 10 * 0.85  # W per m3/s of this plant


def river(days: int = 3653, seed: int = 4) -> np.ndarray:
    """Ten invented years around 2 m3/s, with a wet and a dry season."""
    draw = np.random.default_rng(seed)
    season = 1 + 0.6 * np.cos(2 * np.pi * np.arange(days) / 365.25)
    return np.round(2 * season * np.exp(0.3 * draw.normal(size=days)), 4)


def write(folder: Path, name: str, values: np.ndarray, start: str = "2000-10-01") -> None:
    dates = pd.date_range(start, periods=len(values), freq="D")
    pd.DataFrame({"date": dates, "flow_m3s": values}).to_csv(folder / name, index=False)


def site(folder: Path, discharge: str, more: str = "") -> Path:
    path = folder / "site.yaml"
    path.write_text(f"format: 1\nsite: {{name: Test}}\ndischarge: {discharge}{PLANT}{more}")
    return path


def estimate(path: Path) -> SiteEstimate:
    return hydroyield.estimate(hydroyield.read_site(path))


def run(*arguments: str | Path) -> Result:
    return CliRunner().invoke(app, [str(argument) for argument in arguments])


def result_of(path: Path) -> dict[str, Any]:
    said = run("estimate", path, "--json")
    assert said.exit_code == 0, said.output
    found: dict[str, Any] = json.loads(said.stdout)
    return found


def check(found: SiteEstimate, name: str) -> Any:
    return next(check for check in found.checks if check.name == name)


def energy_of(values: np.ndarray) -> float:
    """Energy of days by hand: linear in what is turbined, 0.3 to 3 m3/s [MWh a day]."""
    turned = np.where(values >= 0.3, np.minimum(values, 3.0), 0.0)
    return float(turned.mean() * GROSS * 24 / 1e6)


# --- doubts ---------------------------------------------------------------------------------------


def test_a_doubt_says_what_it_would_change(tmp_path: Path) -> None:
    values = river()
    spoilt = values.copy()
    spoilt[700:760] = 2.9  # a stuck sensor in the second year
    write(tmp_path, "q.csv", spoilt)
    found = estimate(site(tmp_path, "{record: {file: q.csv}, minimum_month_coverage: 1 %}"))
    (rerun,) = [run for run in found.reruns if run.name == "record_stuck_values"]
    assert rerun.treatment == "the 59 days left out"
    # by hand, day by day: each month its mean over the days left, times its days
    series = pd.Series(spoilt, pd.date_range("2000-10-01", periods=3653)).copy()
    series.iloc[701:760] = np.nan
    turned = series.where(series.isna() | (series >= 0.3), 0.0).clip(upper=3.0)
    turned = turned[:3652]  # the ten years
    months = turned.groupby(turned.index.to_period("M"))
    by_hand = (months.mean() * months.size() * GROSS * 24 / 1e6).sum() / 10
    assert rerun.energy_mwh == pytest.approx(by_hand, rel=1e-6)
    assert 1 + rerun.change == pytest.approx(by_hand / found.mean_annual_energy_mwh, rel=1e-6)
    assert rerun.text in check(found, "record_stuck_values").message
    readings = result_of(tmp_path / "site.yaml")["record"]["other_readings"]
    assert readings[0]["energy_mwh"] == rerun.energy_mwh


def test_a_change_of_unit_is_computed_in_the_first_unit(tmp_path: Path) -> None:
    values = river()
    odd = np.where(np.arange(3653) < 2500, values, 1000 * values)
    write(tmp_path, "q.csv", odd)
    found = estimate(site(tmp_path, "{record: {file: q.csv}}"))
    (rerun,) = [run for run in found.reruns if run.name == "record_unit_step"]
    write(tmp_path, "q.csv", values)
    assert rerun.energy_mwh == pytest.approx(
        estimate(tmp_path / "site.yaml").mean_annual_energy_mwh, rel=1e-6
    )


def test_a_break_is_computed_with_the_late_years_alone(tmp_path: Path) -> None:
    values = np.tile(river(365 * 4 + 1), 6)
    drier = np.where(np.arange(values.size) < 12 * 365.25, values, 0.5 * values)
    write(tmp_path, "q.csv", drier, "1996-10-01")
    found = estimate(site(tmp_path, "{record: {file: q.csv}}"))
    (rerun,) = [run for run in found.reruns if run.name == "record_break"]
    late = [mwh for year, mwh in found.yearly_energy_mwh.items() if int(year) >= 2009]
    assert rerun.energy_mwh == pytest.approx(np.mean(late), rel=1e-6)
    assert "from 2009 on" in check(found, "record_break").message
    assert check(found, "record_trend").outcome == "warn"


def test_no_doubt_no_second_run(tmp_path: Path) -> None:
    write(tmp_path, "q.csv", river())
    found = estimate(site(tmp_path, "{record: {file: q.csv}}"))
    assert found.reruns == ()
    assert check(found, "record_stuck_values").outcome == "pass"


def test_all_days_against_the_years_used(tmp_path: Path) -> None:
    values = river(3653 + 180)  # the last, wet half of a year is left out
    write(tmp_path, "q.csv", values)
    found = estimate(site(tmp_path, "{record: {file: q.csv}}"))
    expected = energy_of(values) * 365.25 / found.mean_annual_energy_mwh
    assert 1 + check(found, "all_valid_days").value == pytest.approx(expected, rel=1e-6)


def test_energy_from_the_steps_of_a_finer_record(tmp_path: Path) -> None:
    """A river that is high for half of each day, by hand: 5 and 1 m3/s, 3 and 1 of them turned,
    joined by straight lines over an hour; daily means of about 3 m3/s turn all of it."""
    hours = pd.date_range("2001-10-01", "2003-10-01", freq="h")
    flow = np.where((hours.hour >= 6) & (hours.hour < 18), 5.0, 1.0)
    pd.DataFrame({"time": hours, "flow_m3s": flow}).to_csv(tmp_path / "q.csv", index=False)
    found = estimate(site(tmp_path, "{record: {file: q.csv}}"))
    finer = np.interp(np.arange(0, 24, 0.001), np.arange(25), np.append(flow[:24], 1.0))
    by_values = np.interp(
        np.arange(0, 24, 0.001), np.arange(25), np.append(np.minimum(flow[:24], 3.0), 1.0)
    )
    apart = by_values.mean() / min(3.0, finer.mean()) - 1
    native = check(found, "native_step")
    assert native.outcome == "warn"
    assert native.value == pytest.approx(apart, rel=2e-3)


# --- from gauge to site ---------------------------------------------------------------------------


def test_transfers_carry_their_uncertainty_as_a_number(tmp_path: Path) -> None:
    write(tmp_path, "q.csv", river())
    by_mean = "{method: mean_ratio, gauge_mean: 2, site_mean: 1.5, uncertainty: 8 %}"
    path = site(tmp_path, f"{{record: {{file: q.csv}}, transfer: {by_mean}}}")
    found = result_of(path)
    assert found["record"]["transfer"] == {
        "method": "mean_ratio", "transfer_factor": 0.75, "uncertainty_share": 0.08,
        "uncertainty_basis": "stated",
    }  # fmt: skip
    assert found["record"]["mean_m3s"] == pytest.approx(0.75 * river().mean())


def test_spot_gaugings_make_the_factor_or_check_it(tmp_path: Path) -> None:
    values = river()
    write(tmp_path, "q.csv", values)
    days = [100, 400, 900, 1300, 1800, 2500, 3000]
    ratios = [0.62, 0.58, 0.6, 0.61, 0.59, 0.6, 0.6]
    dates = pd.date_range("2000-10-01", periods=3653)
    pairs = ", ".join(
        f"[{dates[d].date()}, {r * values[d]:.6f}]" for d, r in zip(days, ratios, strict=True)
    )
    areas = "gauge_area: 100 km2, site_area: 70 km2"
    by_gauging = estimate(
        site(
            tmp_path,
            f"{{record: {{file: q.csv}}, spot_gaugings: [{pairs}], "
            f"transfer: {{method: spot_gaugings, {areas}}}}}",
        )
    )
    expected = float(np.exp(np.log(ratios).mean()))
    assert by_gauging.river.transfer.factor == pytest.approx(expected, rel=1e-5)
    assert check(by_gauging, "spot_gaugings_agree").outcome == "warn"  # 0.6 against 0.7
    by_area = estimate(
        site(
            tmp_path,
            f"{{record: {{file: q.csv}}, spot_gaugings: [{pairs}], "
            f"transfer: {{method: area_ratio, {areas}}}}}",
        )
    )
    assert by_area.river.transfer.factor == pytest.approx(0.7)
    assert check(by_area, "spot_gaugings_agree").outcome == "warn"


def test_gaugings_outside_the_record_are_a_fault_with_their_line(tmp_path: Path) -> None:
    write(tmp_path, "q.csv", river())
    path = site(tmp_path, "\n  record: {file: q.csv}\n  spot_gaugings: [[1980-01-01, 2]]\n")
    with pytest.raises(SiteFileError, match=r"site.yaml:5: discharge.spot_gaugings: none of the 1"):
        estimate(path)


# --- several files, and a reference ---------------------------------------------------------------


def test_several_files_of_one_gauge_are_one_record(tmp_path: Path) -> None:
    values = river()
    write(tmp_path, "all.csv", values)
    write(tmp_path, "late.csv", values[2000:], "2006-03-24")
    write(tmp_path, "early.csv", values[:2000])
    whole = estimate(site(tmp_path, "{record: {file: all.csv}}"))
    path = site(tmp_path, "{record: {file: [late.csv, early.csv]}}")
    assert estimate(path).yearly_energy_mwh == whole.yearly_energy_mwh
    digests = result_of(path)["provenance"]["sha256"]
    assert len(digests) == 3
    said = run("record", tmp_path / "late.csv", tmp_path / "early.csv", "--json")
    assert json.loads(said.stdout)["record"]["days"] == 3653


def test_a_missing_file_is_named_with_the_line_of_its_key(tmp_path: Path) -> None:
    write(tmp_path, "q.csv", river())
    path = site(tmp_path, "\n  record: {file: q.csv}\n  reference: {file: long.csv}\n")
    with pytest.raises(
        RecordError, match=r"site.yaml:5: discharge.reference.file: there is no file"
    ):
        estimate(path)
    (tmp_path / "long.csv").write_text("date,a,b\n2001-01-01,1,2\n2001-01-02,1,2\n")
    with pytest.raises(RecordError) as caught:
        estimate(path)
    assert "under discharge.reference" in str(caught.value)
    assert "discharge.record" not in str(caught.value)


def lengthened(folder: Path) -> Path:
    """Four of ten years measured, the rest from a river with twice the discharge."""
    values = river()
    write(folder, "long.csv", 2 * values)
    write(folder, "short.csv", values[2192:], "2006-10-02")
    return site(folder, "{record: {file: short.csv}, reference: {file: long.csv}}")


@pytest.mark.slow
def test_a_reference_lengthens_the_record_and_what_it_filled_is_marked(tmp_path: Path) -> None:
    path = lengthened(tmp_path)
    out = tmp_path / "out"
    said = run("estimate", path, "--out", out)
    assert said.exit_code == 0, said.output
    share = 2192 / 3653  # two rivers that rise and fall alike fill every day exactly
    assert f"{100 * share:.1f} % of the days used filled from a reference" in said.output
    found = json.loads((out / "result.json").read_text())
    assert found["record"]["filled_share"] == pytest.approx(2192 / 3652)
    assert found["record"]["yearly_filled_days"] == {
        "2001": 365, "2002": 365, "2003": 365, "2004": 366, "2005": 365, "2006": 365, "2007": 1,
    }  # fmt: skip
    assert found["record"]["measured"]["days"] == 1461
    assert found["record"]["reference"]["correlation"] == pytest.approx(1.0)
    write(tmp_path, "q.csv", river())
    whole = estimate(site(tmp_path, "{record: {file: q.csv}}"))
    assert found["mean_annual_energy_mwh"] == pytest.approx(whole.mean_annual_energy_mwh, rel=1e-6)
    page = (out / "report.html").read_text()
    assert "of the days used filled from a reference" in page
    assert "2000/01 (365 d filled)" in page
    with open(out / "river" / "daily.csv", newline="") as file:
        marks = [row["filled"] for row in csv.DictReader(file)]
    assert marks == ["1"] * 2192 + ["0"] * 1461
    with open(out / "river" / "years.csv", newline="") as file:
        assert next(csv.DictReader(file))["filled_days"] == "365"


def test_two_rivers_that_share_no_day_are_refused(tmp_path: Path) -> None:
    write(tmp_path, "short.csv", river(800), "2015-10-01")
    write(tmp_path, "long.csv", river(2000))
    path = site(tmp_path, "\n  record: {file: short.csv}\n  reference: {file: long.csv}\n")
    with pytest.raises(SiteFileError, match=r"site.yaml:5: discharge.reference: .*only 0 days"):
        estimate(path)


# --- a duration table -----------------------------------------------------------------------------


def test_exact_integral_of_a_straight_duration_curve(tmp_path: Path) -> None:
    """Q(p) = 10 (1 - p), full discharge 5, no minimum, 10 m, 0.85: mean turbined 3.75 m3/s, 2739.2
    MWh of 8760 h, capacity factor 0.75; with a minimum of 1 m3/s 3.70 m3/s (derived by hand)."""
    for minimum, mean in (("0.01 %", 3.75), ("20 %", 3.70)):
        plant = PLANT.replace("rated_discharge: 3", "rated_discharge: 5")
        path = tmp_path / "site.yaml"
        path.write_text(
            "format: 1\nsite: {name: T}\ndischarge: {duration_table: [[0, 10], [100, 0]]}"
            + plant.replace("10 %", minimum)
        )
        found = estimate(path)
        by_hand = mean * GROSS * 8766 / 1e6
        assert found.mean_annual_energy_mwh == pytest.approx(by_hand, rel=2e-4)
        assert found.duration_integral_energy_mwh == pytest.approx(
            found.mean_annual_energy_mwh, rel=1e-9
        )


def test_what_a_table_cannot_know_is_absent_with_the_reason(tmp_path: Path) -> None:
    path = site(tmp_path, "{duration_table: [[5, 8], [30, 3], [60, 1.5], [95, 0.4]]}")
    out = tmp_path / "out"
    said = run("estimate", path, "--out", out)
    assert said.exit_code == 0, said.output
    found = json.loads((out / "result.json").read_text())
    for key in ("monthly_energy_mwh", "yearly_energy_mwh", "river"):
        assert found[key] is None
        assert "duration table" in found["absent"][key]
    assert found["years_used"] == []
    assert found["exceedance_discharge_m3s"]["60"] == pytest.approx(1.5, rel=1e-3)
    assert found["exceedance_discharge_m3s"]["1"] == 8.0  # held beyond the first point
    tails = next(c for c in found["checks"] if c["name"] == "duration_table_tails")
    assert (tails["outcome"], tails["value"]) == ("pass", pytest.approx(0.1))
    page = (out / "report.html").read_text()
    assert "duration table" in page
    assert not (out / "figures" / "energy_by_year.svg").exists()
    assert not (out / "river").exists()


def test_a_table_follows_its_transfer_and_its_rules(tmp_path: Path) -> None:
    table = "duration_table: [[0, 10], [100, 0]]"
    half = "transfer: {method: area_ratio, gauge_area: 2 km2, site_area: 1 km2}"
    more = "environmental_flow: [{rule: exceedance, percent: 80}]\n"
    found = estimate(site(tmp_path, f"{{{table}, {half}}}", more))
    assert found.exceedance_discharge_m3s["50"] == pytest.approx(2.5, rel=1e-6)
    # min(Q, Q80 = 1): 1 in 80 % of the time, half of it on average in the rest
    assert found.environmental_flow_mean_m3s == pytest.approx(0.9, rel=1e-3)


def test_seasons_of_a_table_are_flagged(tmp_path: Path) -> None:
    monthly = "environmental_flow: [{rule: monthly, discharge: [1,1,1,1,1,1,2,2,1,1,1,1]}]\n"
    found = estimate(site(tmp_path, "{duration_table: [[1, 9], [99, 1]]}", monthly))
    assert check(found, "duration_table_seasons").outcome == "warn"


# --- the record alone -----------------------------------------------------------------------------


def test_the_record_command(tmp_path: Path) -> None:
    values = river()
    values[100:140] = np.nan
    write(tmp_path, "q.csv", values)
    out = tmp_path / "out"
    said = run("record", tmp_path / "q.csv", "--out", out)
    assert said.exit_code == 0, said.output
    assert "January 23, February 17" in said.output
    found = json.loads((out / "result.json").read_text())
    assert found["record"]["location"] == "gauge"
    assert found["record"]["days"] == 3653 - 40
    assert found["record"]["rows_dropped"] == {"blank": 40}
    assert found["record"]["first_lines_dropped"]["blank"][0] == 102
    assert found["record"]["monthly_missing_days"] == [23, 17, *[0] * 10]
    assert found["record"]["complete_years"] == [str(year) for year in range(2002, 2011)]
    assert found["record"]["mean_m3s"] == pytest.approx(np.nanmean(values))
    assert found["exceedance_discharge_m3s"]["50"] == pytest.approx(np.nanmedian(values), rel=1e-3)
    figures = {path.stem for path in (out / "figures").iterdir()}
    assert figures == {
        "record_days", "record_gaps", "annual_duration", "monthly_discharge", "mass_curve",
    }  # fmt: skip
    page = (out / "report.html").read_text()
    assert "Discharge record at a gauge" in page
    assert len(re.findall(r"<figure ", page)) == 5
    assert "http://" not in page
    assert "https://" not in page
    tables = {path.name for path in (out / "river").iterdir()}
    assert tables == {
        "annual_duration.csv", "daily.csv", "mass_curve.csv", "monthly_duration.csv", "years.csv",
        "yearly_duration.csv",
    }  # fmt: skip


def test_faults_name_options_where_there_is_no_site_file(tmp_path: Path) -> None:
    path = tmp_path / "q.csv"
    path.write_text("date,flow\n03/04/2001,2.5\n04/04/2001,2.5\n")
    said = CliRunner().invoke(app, ["record", str(path)], standalone_mode=False)
    assert isinstance(said.exception, RecordError)
    text = str(said.exception)
    assert "--date-order" in text
    assert "--unit" in text
    assert "discharge.record" not in text
    fine = run("record", path, "--unit", "m3/s", "--date-order", "day_first", "--json")
    assert json.loads(fine.stdout)["record"]["first"] == "2001-04-03"


def test_options_that_cannot_be_read_are_refused(tmp_path: Path) -> None:
    write(tmp_path, "q.csv", river(40))
    said = run("record", tmp_path / "q.csv", "--gauge-area", "12 parsecs")
    assert said.exit_code == 2
    said = run("record", tmp_path / "q.csv", "--gauge-area", "0")
    assert said.exit_code == 2
    assert run("record", tmp_path / "q.csv", "--gauge-area", "40 km2").exit_code == 0


@pytest.mark.slow
@pytest.mark.parametrize("days", [1, 400])
def test_a_short_record_has_a_page_too(tmp_path: Path, days: int) -> None:
    write(tmp_path, "q.csv", river(days))
    said = run("record", tmp_path / "q.csv", "--out", tmp_path / "out", "--quiet")
    assert said.exit_code == 0, said.output
    assert (tmp_path / "out" / "report.html").exists()
