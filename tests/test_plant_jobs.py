"""Waterway, machines and outages of a site file, each against what follows by hand."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import numpy as np
import pandas as pd
import pytest
from typer.testing import CliRunner

import hydroyield
import hydroyield.errors
from hydroyield.cli import app
from hydroyield.energy import standing
from hydroyield.evidence.suitable import suitable_machines
from hydroyield.jobs import SiteEstimate

DAYS = 1461  # four hydrological years from October 2000
WEIGHT = 1000 * 9.81


def river() -> np.ndarray:
    draw = np.random.default_rng(12)
    season = 1 + 0.5 * np.cos(2 * np.pi * np.arange(DAYS) / 365.25)
    return np.round(3 * season * np.exp(0.4 * draw.normal(size=DAYS)), 3)


RIVER = river()
CURVE = "[[0.1, 0.8], [0.5, 0.9], [1, 0.85]]"
UNIT = (
    "- {count: 1, type: other, rated_discharge: 3, rated_head: 20, minimum_discharge: 20 %, "
    f"efficiency: {CURVE}"
)


def estimate(
    folder: Path, values: np.ndarray = RIVER, head: str = "", **blocks: str
) -> SiteEstimate:
    dates = pd.date_range("2000-10-01", periods=len(values), freq="D")
    pd.DataFrame({"date": dates, "flow_m3s": values}).to_csv(folder / "q.csv", index=False)
    head = head or "{headwater: {level: 30}, tailwater: {level: 10}}"
    blocks = {"turbines": f"\n  {UNIT}}}"} | blocks
    text = "format: 1\nsite: {name: Test}\ndischarge: {record: {file: q.csv}}\n"
    text += f"head: {head}\n" + "".join(f"{name}: {block}\n" for name, block in blocks.items())
    (folder / "site.yaml").write_text(text)
    return hydroyield.estimate(hydroyield.read_site(folder / "site.yaml"))


def check(found: SiteEstimate, name: str) -> Any:
    return next((check for check in found.checks if check.name == name), None)


def ledger(found: SiteEstimate) -> dict[str, float]:
    rows = dict(found.ledger_mwh)
    assert rows["net"] == pytest.approx(sum(v for k, v in rows.items() if k != "net"), rel=1e-12)
    assert rows["net"] == pytest.approx(found.mean_annual_energy_mwh, rel=1e-9)
    return rows


# --- waterway -------------------------------------------------------------------------------------


def test_a_branch_of_each_unit_against_a_search_of_every_day(tmp_path: Path) -> None:
    """One unit behind 2.5 m lost at 3 m3/s: the best discharge of each day by a fine grid."""
    branch = ", waterway: [{loss_coefficient: 0.2777777777777778}]"
    found = estimate(tmp_path, turbines=f"\n  {UNIT}{branch}}}")
    curve = hydroyield.read_site(tmp_path / "site.yaml").model.turbines[0].efficiency
    from scipy.interpolate import PchipInterpolator

    pchip = PchipInterpolator(*np.array(curve).T)
    grid = np.linspace(0, 1, 20001)[1:]
    full = 3 * (20 / (20 + 2.5)) ** 0.5
    tried = grid * full
    net = 20 - 2.5 / 9 * tried**2
    share = tried / (3 * np.sqrt(net / 20))
    capacity = WEIGHT * 3 * 20 * 0.85
    power = np.minimum(WEIGHT * tried * net * pchip(np.clip(share, 0.1, 1)), capacity)
    power = np.where(share >= 0.2 - 1e-12, power, 0.0)
    best = np.maximum.accumulate(power)
    place = np.searchsorted(tried, RIVER + 1e-12, side="right") - 1
    daily = np.where(place >= 0, best[np.maximum(place, 0)], 0.0)
    assert found.mean_annual_energy_mwh == pytest.approx(daily.sum() * 24 / 4e6, rel=2e-4)
    rows = ledger(found)
    turned = np.minimum(RIVER, full) * (RIVER >= 0.2 * 3)
    lost = WEIGHT * (2.5 / 9 * turned**3).sum() * 24 / 4e6
    assert rows["waterway"] == pytest.approx(-lost, rel=5e-3)


@pytest.mark.parametrize(
    ("one", "more"),
    [
        ("pipe: {length: 200 m, diameter: 1 m, roughness: 0.1 mm}",
         "pipe: {length: 200 m, diameter: 1 m, roughness: 3 mm}"),
        ("pipe: {length: 200 m, diameter: 1 m, roughness: 0.1 mm, parallel: 2}",
         "pipe: {length: 200 m, diameter: 1 m, roughness: 0.1 mm}"),
        ("exit: {area: 3 m2}", "exit: {area: 1 m2}"),
        ("trash_rack: {bar_thickness: 10 mm, clear_spacing: 30 mm, bar_shape: circular, "
         "inclination: 70, area: 2 m2}",
         "trash_rack: {bar_thickness: 10 mm, clear_spacing: 30 mm, bar_shape: circular, "
         "inclination: 70, area: 2 m2, blockage: 60 %}"),
        ("canal: {length: 200 m, bottom_width: 2 m, side_slope: 1, depth: 1 m, manning_n: 0.015}",
         "canal: {length: 200 m, bottom_width: 2 m, side_slope: 1, depth: 1 m, manning_n: 0.03}"),
    ],
)  # fmt: skip
def test_more_loss_never_gives_more_energy(tmp_path: Path, one: str, more: str) -> None:
    free = estimate(tmp_path).mean_annual_energy_mwh
    less = estimate(tmp_path, waterway=f"\n  - {{{one}}}").mean_annual_energy_mwh
    least = estimate(tmp_path, waterway=f"\n  - {{{more}}}").mean_annual_energy_mwh
    assert free > less > least


def test_trash_of_one_month_costs_that_month_alone(tmp_path: Path) -> None:
    shape = "bar_thickness: 10 mm, clear_spacing: 30 mm, bar_shape: circular, inclination: 70"
    rack = f"trash_rack: {{{shape}, area: 1.5 m2, blockage: %s}}"
    clean = estimate(tmp_path, waterway=f"\n  - {{{rack % '10 %'}}}")
    shares = "[" + ", ".join(["10 %"] * 9 + ["70 %"] + ["10 %"] * 2) + "]"
    autumn = estimate(tmp_path, waterway=f"\n  - {{{rack % shares}}}")
    apart = np.array(clean.monthly_energy_mwh) - np.array(autumn.monthly_energy_mwh)
    assert apart[9] > 1.0
    np.testing.assert_allclose(np.delete(apart, 9), 0, atol=1e-9)


def test_losses_that_are_missing_or_stated_twice_are_named(tmp_path: Path) -> None:
    low = "{headwater: {level: 14}, tailwater: {level: 10}}"
    units = f"\n  {UNIT.replace('rated_head: 20', 'rated_head: 4').replace('other', 'kaplan')}}}"
    pipe = "pipe: {length: 20 m, diameter: 2 m, roughness: 0.1 mm, minor_losses: 2}"
    found = estimate(tmp_path, head=low, turbines=units, waterway=f"\n  - {{{pipe}}}")
    assert check(found, "loss_at_outlet").outcome == "warn"
    assert check(found, "loss_at_rack").outcome == "warn"
    assert check(found, "loss_counted_twice").outcome == "pass"
    twice = f"\n  - {{{pipe}}}\n  - {{exit: {{area: 3 m2}}}}\n  - {{loss_coefficient: 0.01}}"
    found = estimate(tmp_path, head=low, turbines=units, waterway=twice)
    assert check(found, "loss_at_outlet") is None  # a bare coefficient may hold it
    message = check(found, "loss_counted_twice").message
    assert "loss_coefficient stands beside pipe and exit" in message
    assert "minor_losses of a pipe may hold its exit" in message
    fast = "pipe: {length: 20 m, diameter: 0.7 m, roughness: 0.1 mm}"
    found = estimate(tmp_path, waterway=f"\n  - {{{fast}}}")
    assert check(found, "pipe_velocity").outcome == "warn"
    assert check(found, "pipe_velocity").value == pytest.approx(3 / (np.pi * 0.7**2 / 4))


# --- outages --------------------------------------------------------------------------------------

TWO = "\n  " + UNIT.replace("count: 1", "count: 2").replace("_discharge: 3", "_discharge: 2") + "}"


def test_a_single_unit_loses_what_it_is_out(tmp_path: Path) -> None:
    always = estimate(tmp_path)
    out = estimate(tmp_path, operation="{forced_outage_rate: 4 %, common_outage_rate: 1 %}")
    left = 0.96 * 0.99
    assert out.mean_annual_energy_mwh == pytest.approx(left * always.mean_annual_energy_mwh)
    rows = ledger(out)
    water = {"gross", "reserved", "above_full_discharge", "below_minimum_or_unused"}
    for step, mwh in ledger(always).items():
        if step in water:
            assert rows[step] == pytest.approx(mwh, abs=1e-6)
    turned = always.operation.turbined
    lost = WEIGHT * always.reference_head_m * always.cells.per_year(turned) / 1e6
    assert rows["outage"] == pytest.approx(-(1 - left) * lost)
    assert out.duration_integral_energy_mwh == pytest.approx(out.mean_annual_energy_mwh)


def test_with_two_units_the_other_takes_over_what_it_can(tmp_path: Path) -> None:
    always = estimate(tmp_path, turbines=TWO)
    single = estimate(tmp_path, turbines=TWO.replace("count: 2", "count: 1"))
    out = estimate(tmp_path, turbines=TWO, operation="{forced_outage_rate: 10 %}")
    both, one = always.mean_annual_energy_mwh, single.mean_annual_energy_mwh
    expected = 0.81 * both + 0.18 * one
    assert out.mean_annual_energy_mwh == pytest.approx(expected, rel=1e-6)
    assert out.mean_annual_energy_mwh > 0.9 * both


def test_closed_months_and_standstill(tmp_path: Path) -> None:
    always = estimate(tmp_path)
    out = estimate(tmp_path, operation="{closed: jul-aug, standstill: {days: 14, months: feb}}")
    monthly, before = out.monthly_energy_mwh, always.monthly_energy_mwh
    assert monthly[6] == monthly[7] == 0.0
    assert 0.5 * before[1] < monthly[1] < 0.52 * before[1]  # 14 of 28, once of 29 days
    assert monthly[8] == pytest.approx(before[8])
    ledger(out)


def test_planned_days_are_placed_where_they_cost_least(tmp_path: Path) -> None:
    placed = estimate(tmp_path, operation="{planned_outage: {days: 12}}")
    energies = []
    for month in range(1, 13):
        named = f"{{planned_outage: {{days: 12, months: {month}}}}}"
        energies.append(estimate(tmp_path, operation=named).mean_annual_energy_mwh)
    assert placed.mean_annual_energy_mwh == pytest.approx(max(energies), rel=1e-9)
    assert check(placed, "planned_outage_months").outcome == "pass"
    dear = int(np.argmin(energies)) + 1
    named = estimate(tmp_path, operation=f"{{planned_outage: {{days: 12, months: {dear}}}}}")
    found = check(named, "planned_outage_months")
    assert found.outcome == "warn"
    spared = max(energies) - min(energies)
    assert found.value == pytest.approx(spared / named.mean_annual_energy_mwh, rel=2e-2)


def test_outages_that_do_not_fit_are_a_fault(tmp_path: Path) -> None:
    fault = r"planned_outage.days: 20 days of each of 2 units do not fit into months of 31 days"
    with pytest.raises(hydroyield.errors.SiteFileError, match=fault):
        estimate(tmp_path, turbines=TWO, operation="{planned_outage: {days: 20, months: 8}}")


def test_a_plant_that_is_always_available_is_named(tmp_path: Path) -> None:
    assert check(estimate(tmp_path), "left_out_outages").outcome == "warn"
    little = estimate(tmp_path, operation="{forced_outage_rate: 0.1 %}")
    assert check(little, "left_out_outages") is None
    assert check(little, "unavailability").outcome == "warn"
    usual = estimate(tmp_path, operation="{forced_outage_rate: 2 %}")
    assert check(usual, "unavailability").value == pytest.approx(0.02)


# --- generators -----------------------------------------------------------------------------------


def test_a_level_load_curve_is_one_efficiency(tmp_path: Path) -> None:
    one = estimate(tmp_path, electrical="{generator_efficiency: 92 %}")
    level = estimate(tmp_path, electrical="{generator_efficiency: [[0.1, 92 %], [1, 92 %]]}")
    assert level.mean_annual_energy_mwh == pytest.approx(one.mean_annual_energy_mwh, rel=1e-6)
    for (step, mwh), (_, other) in zip(level.ledger_mwh, one.ledger_mwh, strict=True):
        assert mwh == pytest.approx(other, abs=2e-4 * one.mean_annual_energy_mwh), step


def test_a_generator_poor_at_part_load_by_hand(tmp_path: Path) -> None:
    """A steady river of 1.2 m3/s: what the shaft gives times the efficiency at its own load."""
    steady = np.full(DAYS, 1.2)
    curve = "[[0.2, 0.8], [0.6, 0.92], [1, 0.94]]"
    found = estimate(tmp_path, steady, electrical=f"{{generator_efficiency: {curve}}}")
    from scipy.interpolate import PchipInterpolator

    turbine = float(PchipInterpolator([0.1, 0.5, 1], [0.8, 0.9, 0.85])(0.4))
    generator = PchipInterpolator([0.2, 0.6, 1], [0.8, 0.92, 0.94])
    shaft = WEIGHT * 1.2 * 20 * turbine
    capacity = WEIGHT * 3 * 20 * 0.85 * 0.94
    output = 0.9 * shaft
    for _ in range(100):
        output = shaft * float(generator(output / capacity))
    assert found.mean_annual_energy_mwh == pytest.approx(output * 24 * DAYS / 4e6, rel=1e-5)
    rows = ledger(found)
    lost = (shaft - output) * 24 * DAYS / 4e6
    assert rows["drive_and_generator"] == pytest.approx(-lost, rel=1e-4)


# --- environmental flow ---------------------------------------------------------------------------


def test_what_each_rule_costs(tmp_path: Path) -> None:
    free = estimate(tmp_path).mean_annual_energy_mwh
    one = "{rule: constant, discharge: 0.5}"
    two = "{rule: constant, discharge: 0.9, months: jun-aug}"
    small = "{rule: constant, discharge: 0.1}"
    only_one = estimate(tmp_path, environmental_flow=f"[{one}]")
    only_two = estimate(tmp_path, environmental_flow=f"[{two}]")
    found = estimate(tmp_path, environmental_flow=f"[{one}, {two}, {small}]")
    energy = found.mean_annual_energy_mwh
    expected = (
        only_two.mean_annual_energy_mwh - energy,  # without the first, small where two is not
        only_one.mean_annual_energy_mwh - energy,
        0.0,
        free - energy,
    )
    assert found.rule_costs[1:] == pytest.approx(expected[1:], abs=1e-6)
    assert 0 < found.rule_costs[0] < expected[0]  # the small rule takes its place in part
    assert only_one.rule_costs == pytest.approx([free - only_one.mean_annual_energy_mwh] * 2)


def test_days_at_the_residual_flow_by_hand(tmp_path: Path) -> None:
    found = estimate(tmp_path, environmental_flow="[{rule: constant, discharge: 0.5}]")
    offered = np.maximum(0, RIVER - 0.5)
    least = (offered >= 0.2 * 3) & (offered <= 3.0 + 1e-12)
    assert found.days_at_residual_flow == pytest.approx(least.sum() / 4)


def test_a_preset_is_shown_as_an_example(tmp_path: Path) -> None:
    found = estimate(tmp_path, environmental_flow="[{rule: preset, name: swiss_q347}]")
    assert "not the law of the day" in check(found, "preset_rule").message


# --- transformer and imports ----------------------------------------------------------------------


def test_losses_of_a_transformer_and_imports_by_hand(tmp_path: Path) -> None:
    """A river of 1.2 m3/s for half of the days, dry on the others: 0.6 kW all year, 2.4 kW x
    (load)^2 while it runs, and 0.8 kW more while it stands."""
    values = np.where(np.arange(DAYS) % 2 == 0, 1.2, 0.0)
    plain = estimate(tmp_path, values)
    stated = (
        "{transformer_no_load_loss: 0.6 kW, transformer_load_loss: 2.4 kW, standing_use: 0.8 kW, "
        "own_use: 1 kW}"
    )
    found = estimate(tmp_path, values, electrical=stated)
    power = float(plain.net_power.max()) / 1000
    load = power / plain.installed_capacity_kw
    running = power - 0.6 - 2.4 * load**2 - 1.0
    share = float((values > 0).mean())
    hours = 24 * DAYS / 4 / 1000
    by_hand = hours * (share * running - (1 - share) * 1.4)
    assert found.mean_annual_energy_mwh == pytest.approx(by_hand, rel=2e-3)
    rows = ledger(found)
    assert rows["imports"] == pytest.approx(-hours * (1 - share) * 1.4, rel=2e-3)
    assert rows["transformer"] == pytest.approx(-hours * share * (0.6 + 2.4 * load**2), rel=2e-3)
    curve = found.power_duration()
    assert curve["power_kw"].min() == pytest.approx(-1.4)
    assert found.duration_integral_energy_mwh == pytest.approx(found.mean_annual_energy_mwh)


def test_a_plant_out_of_service_imports_too(tmp_path: Path) -> None:
    stated = "{standing_use: 2 kW}"
    always = estimate(tmp_path, electrical=stated)
    closed = estimate(tmp_path, electrical=stated, operation="{closed: jul}")
    assert closed.monthly_energy_mwh[6] == pytest.approx(-2 * 24 * 31 / 1000)
    assert ledger(closed)["imports"] < ledger(always)["imports"]


# --- hours ----------------------------------------------------------------------------------------


def test_hours_of_standing_by_cause_counted_day_by_day(tmp_path: Path) -> None:
    head = "{headwater: {level: 30}, tailwater: {table: [[0, 10], [5, 11], [9, 29.5]]}, "
    head += "minimum_net_head: 15 m}"
    found = estimate(tmp_path, head=head, operation="{shutdown_above: 6, forced_outage_rate: 5 %}")
    tail = np.interp(RIVER, [0, 5, 9], [10, 11, 29.5])
    net = 30 - tail
    stopped = RIVER > 6
    low = ~stopped & (net < 15)
    full = 3 * np.sqrt(np.maximum(net, 0) / 20)
    runs = ~stopped & ~low & (0.2 * full <= RIVER)
    per_year = 24 / 4
    hours = standing.hours_by_cause(found)
    counted = {cause: float(h.sum()) / 4 for cause, h in hours.items()}
    assert counted["shutdown"] == pytest.approx(stopped.sum() * per_year)
    assert counted["low_head"] == pytest.approx(low.sum() * per_year)
    assert counted["running"] == pytest.approx(0.95 * runs.sum() * per_year)
    assert counted["outage"] == pytest.approx(0.05 * runs.sum() * per_year)
    dry = ~stopped & ~low & ~runs
    assert counted["too_little_water"] == pytest.approx(dry.sum() * per_year)
    assert sum(counted.values()) == pytest.approx(24 * DAYS / 4)
    table = standing.standing_table(found)
    assert len(table) == 48
    assert table["shutdown_hours"].sum() == pytest.approx(stopped.sum() * 24)


def test_hours_of_each_unit(tmp_path: Path) -> None:
    found = estimate(tmp_path, turbines=TWO)
    first, second = standing.unit_hours(found)
    runs = (RIVER >= 0.2 * 2).sum() * 24 / 4
    assert first == pytest.approx(runs)
    assert 0 < second < first


# --- types of machine -----------------------------------------------------------------------------


def test_types_that_suit_a_head_and_why_others_do_not(tmp_path: Path) -> None:
    head = "{headwater: {level: 40}, tailwater: {level: 10}}"
    units = f"\n  {UNIT.replace('rated_head: 20', 'rated_head: 30')}}}"
    found = estimate(tmp_path, head=head, turbines=units)
    fits = {fit.type: fit for fit in suitable_machines(found)}
    assert {name for name, fit in fits.items() if fit.suits} == {
        "kaplan", "semi_kaplan", "propeller", "francis", "pelton", "crossflow",
    }  # fmt: skip
    assert "outside its 50 to 250 m" in fits["turgo"].reason
    assert "outside its 1 to 10 m" in fits["screw"].reason
    offered = RIVER
    assert fits["francis"].running_share == pytest.approx((offered >= 0.4 * 3).mean(), abs=2e-3)
    francis = "[[.2,.45],[.3,.62],[.4,.73],[.5,.80],[.6,.86],[.7,.90],[.8,.92],[.9,.92],[1,.9]]"
    as_francis = units.replace(CURVE, francis).replace("20 %", "40 %")
    same = estimate(tmp_path, head=head, turbines=as_francis)
    assert fits["francis"].energy_mwh == pytest.approx(same.mean_annual_energy_mwh, rel=1e-9)


def test_the_machines_command(tmp_path: Path) -> None:
    estimate(tmp_path)
    said = CliRunner().invoke(app, ["machines", str(tmp_path / "site.yaml")])
    assert said.exit_code == 0, said.output
    assert "crossflow" in said.output
    said = CliRunner().invoke(app, ["machines", str(tmp_path / "site.yaml"), "--json"])
    found = json.loads(said.stdout)["machines"]
    assert len(found) == 8
    assert [fit["suits"] for fit in found] == sorted((fit["suits"] for fit in found), reverse=True)


# --- jets -----------------------------------------------------------------------------------------


def test_jets_that_close_one_after_another_by_hand(tmp_path: Path) -> None:
    """Of two jets one is closed where each would be less than half open, if that gives more."""
    pelton = UNIT.replace("other", "pelton").replace("20 %", "5 %")
    steady = np.full(DAYS, 1.2)  # 0.4 of full discharge: one jet at 0.8, or both at 0.4
    two = estimate(tmp_path, steady, turbines=f"\n  {pelton}, jets: 2}}")
    from scipy.interpolate import PchipInterpolator

    jet = PchipInterpolator([0.1, 0.5, 1], [0.8, 0.9, 0.85])
    best = max(float(jet(0.4)), float(jet(0.8)))
    by_hand = WEIGHT * 1.2 * 20 * best * 24 * DAYS / 4e6
    assert two.mean_annual_energy_mwh == pytest.approx(by_hand, rel=1e-6)
    one = estimate(tmp_path, steady, turbines=f"\n  {pelton}}}")
    assert two.mean_annual_energy_mwh >= one.mean_annual_energy_mwh
    every = estimate(tmp_path, turbines=f"\n  {pelton}, jets: 3}}").mean_annual_energy_mwh
    assert every > estimate(tmp_path, turbines=f"\n  {pelton}}}").mean_annual_energy_mwh


# --- the gain over an old plant -------------------------------------------------------------------


def test_the_gain_over_an_old_plant(tmp_path: Path) -> None:
    old = estimate(tmp_path, turbines=f"\n  {UNIT.replace('_discharge: 3', '_discharge: 1.5')}}}")
    (tmp_path / "site.yaml").rename(tmp_path / "old.yaml")
    new = estimate(tmp_path, baseline="{site: old.yaml}")
    assert new.gain is not None
    assert new.gain.years == ("2001", "2002", "2003", "2004")
    more = new.mean_annual_energy_mwh - old.mean_annual_energy_mwh
    assert new.gain.gain_mwh == pytest.approx(more)
    paired = estimate(tmp_path, baseline="{yearly_energy: {2002: 900, 2003: 700, 1999: 1}}")
    assert paired.gain is not None
    assert (paired.gain.baseline_mwh, paired.gain.years) == (800.0, ("2002", "2003"))
    both = [paired.yearly_energy_mwh[year] for year in ("2002", "2003")]
    assert paired.gain.energy_mwh == pytest.approx(sum(both) / 2)
    mean = estimate(tmp_path, baseline="{annual_energy: 640}")
    assert check(mean, "baseline_years").outcome == "warn"
    said = CliRunner().invoke(app, ["estimate", str(tmp_path / "site.yaml"), "--json"])
    assert json.loads(said.stdout)["gain"]["baseline_mwh"] == 640


def test_a_baseline_without_a_year_in_common_is_a_fault(tmp_path: Path) -> None:
    with pytest.raises(hydroyield.errors.SiteFileError, match="baseline: none of its years"):
        estimate(tmp_path, baseline="{yearly_energy: {1990: 640}}")


# --- efficiency over heads ------------------------------------------------------------------------

FALLING = "{headwater: {level: 30}, tailwater: {table: [[0, 10], [9, 16], [90, 16]]}}"


def chart(rows: str) -> str:
    table = f"{{heads: [12, 16, 20], discharges: [0.3, 1.5, 3], values: {rows}}}"
    return f"\n  {UNIT.replace(CURVE, table)}}}"


def test_a_level_table_over_heads_is_one_efficiency(tmp_path: Path) -> None:
    level = "[[0.8, 0.8, 0.8], [0.8, 0.8, 0.8], [0.8, 0.8, 0.8]]"
    found = estimate(tmp_path, head=FALLING, turbines=chart(level))
    flat = f"\n  {UNIT.replace(CURVE, '[[0.1, 0.8], [1, 0.8]]')}}}"
    one = estimate(tmp_path, head=FALLING, turbines=flat)
    assert found.mean_annual_energy_mwh == pytest.approx(one.mean_annual_energy_mwh, rel=1e-4)


def test_a_chart_over_heads_against_a_search_of_every_day(tmp_path: Path) -> None:
    values = np.array([[0.60, 0.72, 0.70], [0.70, 0.84, 0.80], [0.74, 0.90, 0.87]])
    found = estimate(tmp_path, head=FALLING, turbines=chart(str(values.tolist())))
    from scipy.interpolate import RegularGridInterpolator

    efficiency = RegularGridInterpolator(([12, 16, 20], [0.3, 1.5, 3]), values)
    capacity = WEIGHT * 3 * 20 * 0.87
    daily = []
    for river in RIVER:
        net = 30 - float(np.interp(river, [0, 9], [10, 16]))
        full = 3 * np.sqrt(net / 20)
        tried = np.linspace(0.2 * full, min(full, max(river, 0.2 * full)), 4000)
        eta = efficiency((np.clip(net, 12, 20), np.clip(tried, 0.3, 3)))
        power = np.minimum(WEIGHT * tried * net * eta, capacity)
        daily.append(power.max() if river >= 0.2 * full else 0.0)
    by_hand = sum(daily) * 24 / 4e6
    assert found.mean_annual_energy_mwh == pytest.approx(by_hand, rel=5e-4)
    ledger(found)
    assert check(found, "head_of_table").outcome == "pass"


def test_a_table_over_heads_needs_its_rows(tmp_path: Path) -> None:
    fault = hydroyield.errors.SiteFileError
    with pytest.raises(fault, match=r"values: has 2 rows; write 3"):
        estimate(tmp_path, turbines=chart("[[0.8, 0.8, 0.8], [0.8, 0.8, 0.8]]"))
    with pytest.raises(
        hydroyield.errors.SiteFileError, match=r"values\[1\]: has 2 values; write 3"
    ):
        estimate(tmp_path, turbines=chart("[[0.8, 0.8, 0.8], [0.8, 0.8], [0.8, 0.8, 0.8]]"))
