"""Comparisons as a user meets them: rows against `estimate`, known answers, files."""

from __future__ import annotations

import json
import os
import signal
import subprocess
import sys
import time
from pathlib import Path

import numpy as np
import pandas as pd
import pytest
from option_sites import PIPE, river, write_site

import hydroyield
from hydroyield import jobs
from hydroyield.errors import RecordError, SiteFileError
from hydroyield.options.money import Cost, economics
from hydroyield.report.comparison_words import answer, real_differences
from hydroyield.site.assembly import read_site


def by_number(path: Path) -> dict[int, float]:
    """Energy of each option [MWh]."""
    return {o.number: o.mean_annual_energy for o in jobs.compare(read_site(path)).options}


# --- every row is an estimate ---------------------------------------------------------------------

SOME = """
splits: [[0.33, 0.67]]
types: [francis, {type: turgo, jets: 2}]
mean_flow_multiples: [1.2]
exceedances: [35]
pipe_diameters: [1.4 m]
"""
MANY = """
unit_counts: [1, 2]
splits: [[0.33, 0.67]]
types: [francis, {type: crossflow, minimum_discharge: 12 %}, {type: turgo, jets: 2}]
design_discharges: [3 m3/s]
mean_flow_multiples: [1.2]
exceedances: [35]
pipe_diameters: [1.4 m, 1.8 m]
"""


@pytest.mark.parametrize(
    ("options", "number", "operation"),
    [
        (SOME, 2 * 2, "operation: {shutdown_above: 20 m3/s}"),
        pytest.param(
            MANY,
            3 * 3 * 3 * 2,
            "operation: {planned_outage: {days: 5}, forced_outage_rate: 2 %}",
            marks=pytest.mark.slow,
        ),
    ],
)
def test_every_option_is_the_estimate_of_its_own_site_file(
    tmp_path: Path, options: str, number: int, operation: str
) -> None:
    path = write_site(
        tmp_path, river(2), options, kind="francis", curve="typical", minimum="35 %", kept="0.4",
        more=PIPE + operation,
    )  # fmt: skip
    site = read_site(path)
    found = jobs.compare(site)
    assert len(found.options) == number
    for option in found.options:
        folder = tmp_path / f"option_{option.number}"
        folder.mkdir()
        for name, content in jobs.write_option(site, option.number).items():
            (folder / name).write_bytes(content)
        alone = hydroyield.estimate(hydroyield.read_site(folder / "site.yaml"))
        assert alone.mean_annual_energy_mwh == pytest.approx(option.mean_annual_energy, rel=1e-9)
        assert alone.installed_capacity_kw == pytest.approx(option.installed_capacity, rel=1e-9)
        assert alone.capacity_factor == pytest.approx(option.capacity_factor, rel=1e-9)
        assert sum(g.count for g in alone.scheme.plant.groups) == option.combination.unit_count
        assert alone.site.model.options is None


def test_a_written_option_keeps_the_words_of_the_user(tmp_path: Path) -> None:
    path = write_site(tmp_path, river(1), SOME, more=PIPE)
    text = jobs.write_option(read_site(path), 1)["site.yaml"].decode()
    assert "# the mill's own gauge" in text
    assert "pipe: {length: 120 m, diameter: 1.4, roughness: 0.1 mm}}  # old" in text
    assert "# what to try" in text
    assert "options:" not in text
    assert "an offer of last year" not in text  # it spoke of other turbines


def test_limits_by_head_and_starts_move_with_the_size_of_the_unit(tmp_path: Path) -> None:
    """A limit drawn for 4 m3/s, on units of 2 m3/s: half of each power, at the same heads."""
    keys = (
        "starting_discharge: 40 %\n    output_limit: [[3.0 m, 60 kW], [4 m, 100 kW]]\n    "
        "minimum_discharge"
    )
    path = write_site(tmp_path, river(2), "unit_counts: [2]\ndesign_discharges: [4]", minimum="0.2")
    path.write_text(path.read_text().replace("minimum_discharge", keys))
    site = read_site(path)
    (option,) = jobs.compare(site).options
    written = tmp_path / "written.yaml"
    written.write_bytes(jobs.write_option(site, 1)["site.yaml"])
    text = written.read_text()
    assert "output_limit: [[3.0, 30.0], [4.0, 50.0]]" in text
    assert "starting_discharge: 0.4" in text
    alone = hydroyield.estimate(read_site(written))
    assert alone.mean_annual_energy_mwh == pytest.approx(option.mean_annual_energy, rel=1e-9)
    (group,) = alone.scheme.plant.groups
    assert group.most_output(np.array([3.0, 4.0])) == pytest.approx([30e3, 50e3])


def test_jets_may_start_at_less_than_the_minimum_of_one(tmp_path: Path) -> None:
    """Two jets run down to half of the 10 % of a single one, as under turbines."""
    options = (
        "unit_counts: [1]\ndesign_discharges: [3]\n"
        "types: [{type: pelton, jets: 2, axis_level: 100.5, starting_discharge: 7 %}]"
    )
    found = jobs.compare(read_site(write_site(tmp_path, river(1), options)))
    assert [option.type for option in found.options] == ["pelton"]


def test_a_limit_of_unknown_size_and_a_start_below_the_minimum_are_refused(tmp_path: Path) -> None:
    options = (
        "unit_counts: [1]\ntypes: [{type: kaplan, minimum_discharge: 30 %}]\nexceedances: [30]"
    )
    path = write_site(tmp_path, river(1), options, minimum="0.1")
    start = path.read_text().replace("minimum_discharge: 0.1", "starting_discharge: 0.2")
    path.write_text(start)
    with pytest.raises(SiteFileError, match="start at less than its minimum of 30 %"):
        jobs.compare(read_site(path))
    limit = start.replace("starting_discharge: 0.2", "output_limit: [[3 m, 60 kW], [4 m, 90 kW]]")
    path.write_text(limit.replace("rated_discharge: 4", "unit_capacity: 90 kW"))
    with pytest.raises(SiteFileError, match="write rated_discharge of the unit"):
        jobs.compare(read_site(path))


def test_a_site_file_in_braces_can_be_written_too(tmp_path: Path) -> None:
    (tmp_path / "daily.csv").write_text("date,discharge\n2001-10-01,3\n", "utf-8")
    path = tmp_path / "site.yaml"
    path.write_text(
        json.dumps(
            {
                "format": 1,
                "site": {"name": "Braces"},
                "discharge": {"duration_table": [[5, 9], [50, 3], [95, 1]]},
                "head": {"headwater": {"level": 104}, "tailwater": {"level": 100}},
                "turbines": [{"count": 1, "type": "kaplan", "rated_discharge": 3}],
                "options": {"unit_counts": [2], "exceedances": [50]},
            }
        )
    )
    site = read_site(path)
    (option,) = jobs.compare(site).options
    written = tmp_path / "written.yaml"
    written.write_bytes(jobs.write_option(site, 1)["site.yaml"])
    alone = hydroyield.estimate(read_site(written))
    assert alone.mean_annual_energy_mwh == pytest.approx(option.mean_annual_energy, rel=1e-9)


def test_two_processes_give_what_one_gives(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    options = "unit_counts: [1, 2]\nexceedances: [20, 40, 60]"
    path = write_site(tmp_path, river(1), options)
    alone = by_number(path)
    monkeypatch.setattr("hydroyield.comparison.trials.WORTH_SHARING", 2)
    assert by_number(path) == alone


# --- cases with a known answer --------------------------------------------------------------------


def test_constant_flow_and_no_minimum_need_one_unit(tmp_path: Path) -> None:
    """4 m3/s all year through 4 m of head at 0.8 x 0.95: as much from one unit as from four."""
    path = write_site(tmp_path, np.full(365, 4.0), "unit_counts: [1, 2, 4]\ndesign_discharges: [4]")
    found = jobs.compare(read_site(path))
    gravity = found.trial.estimate(found.options[0].combination).scheme.plant.gravity
    expected = 1000 * gravity * 4 * 4 * 0.8 * 0.95 * 8760 / 1e6
    for option in found.options:
        assert option.mean_annual_energy == pytest.approx(expected, rel=1e-6)
        assert option.capacity_factor == pytest.approx(1, rel=1e-6)
        assert option.standing_hours == pytest.approx(0, abs=1e-6)


def test_flat_efficiency_without_minimum_makes_the_count_indifferent(tmp_path: Path) -> None:
    path = write_site(tmp_path, river(), "unit_counts: [1, 2, 3]\ndesign_discharges: [5]")
    first, *others = by_number(path).values()
    assert others == pytest.approx([first] * len(others), rel=2e-4)


def test_two_seasons_and_a_high_minimum_pay_for_the_second_unit(tmp_path: Path) -> None:
    """Half of the year 8 m3/s, half 4: one unit of 8 with a minimum of 75 % stands for half of the
    year, two units of 4 run all year, one of them in the low half."""
    flow = np.where(np.arange(365) < 182, 8.0, 4.0)
    options = "unit_counts: [1, 2]\ndesign_discharges: [8]"
    path = write_site(tmp_path, flow, options, kind="propeller", minimum="75 %")
    one, two = by_number(path).values()
    assert two / one == pytest.approx((182 * 8 + 183 * 4) / (182 * 8), rel=1e-6)


def test_a_plant_of_two_is_never_worse_than_with_one_locked_out(tmp_path: Path) -> None:
    options = "splits: [[0.4, 0.6]]\ntypes: [francis, propeller]\ndesign_discharges: [3, 6]"
    path = write_site(tmp_path, river(), options, curve="typical", minimum="10 %")
    found = jobs.compare(read_site(path))
    for option in found.options:
        full = found.trial.estimate(option.combination)
        for counts in ((1, 0), (0, 1)):
            part = full.scheme.with_units(counts)
            run = part.operate(full.cells.discharge, full.cells.season)
            locked = full.cells.per_year(part.net_power(run.output)) / 1e6
            assert option.mean_annual_energy >= locked * (1 - 1e-4)


def test_dry_and_wet_years_and_quarters(tmp_path: Path) -> None:
    """Three years at 3, 1 and 2 m3/s, a third more from February to April."""
    days = np.arange(np.datetime64("2001-10-01"), np.datetime64("2004-10-01"))
    level = np.repeat([3.0, 1.0, 2.0], [365, 365, 366])
    month = days.astype("datetime64[M]").astype(int) % 12 + 1
    path = write_site(
        tmp_path,
        np.where(np.isin(month, (2, 3, 4)), 1.3 * level, level),
        "unit_counts: [1]\ndesign_discharges: [9]",
    )
    found = jobs.compare(read_site(path))
    years = found.seasons.years
    order = [years[i] for i in (found.seasons.dry, found.seasons.median, found.seasons.wet)]
    assert order == ["2003", "2004", "2002"]
    assert found.seasons.wettest_quarter == (2, 3, 4)
    (option,) = found.options
    yearly = option.yearly_energy
    assert yearly[1] < yearly[2] < yearly[0]
    assert option.used_share == pytest.approx(1, abs=1e-9)


def test_money_of_an_option_by_hand(tmp_path: Path) -> None:
    cost = (
        "cost: {fixed: 1000, per_kw: 10, per_unit: 50, per_pipe_metre: [[1 m, 2], [2 m, 4]], "
        "energy_price: 0.1, yearly: 20, life: 10, discount_rate: 3 %}"
    )
    options = "unit_counts: [2]\ndesign_discharges: [4]\npipe_diameters: [1.5 m]"
    path = write_site(tmp_path, np.full(365, 4.0), options, more=PIPE + cost)
    found = jobs.compare(read_site(path))
    (option,), (money,) = found.options, found.economics
    capital = 1000 + 10 * option.installed_capacity + 2 * 50 + 120 * 3
    assert money.capital == pytest.approx(capital)
    flat = Cost(life=10, discount_rate=0.03, fixed=capital, energy_price=(0.1,) * 12, yearly=20)
    energy = np.full(12, option.mean_annual_energy * 1000 / 12)
    assert money.net_present_value == pytest.approx(
        economics(flat, 0, 0, 0, energy).net_present_value
    )
    aims = [choice.aim.name for choice in found.choices]
    assert aims == ["largest_energy", "lowest_levelised_cost", "highest_net_present_value"]
    assert len(found.other_prices) == 9


def test_without_costs_nothing_speaks_of_money(tmp_path: Path) -> None:
    path = write_site(tmp_path, river(1), "unit_counts: [1]\nexceedances: [20, 40]")
    found = jobs.compare(read_site(path))
    assert found.economics == ()
    assert [choice.aim.name for choice in found.choices] == ["largest_energy"]


def test_limits_of_the_site_file_are_kept(tmp_path: Path) -> None:
    """Capacity in kW: 4 m x 9.81 x 0.8 x 0.95 is 29.8 kW for each m3/s, so that 100 kW are 3.35."""
    options = "unit_counts: [1]\ndesign_discharges: [2, 3, 5, 8]\nmaximum_capacity: 100 kW"
    found = jobs.compare(read_site(write_site(tmp_path, river(3), options)))
    assert found.within_limits == (True, True, False, False)
    (choice,) = found.choices
    assert choice.option is not None
    assert choice.option.combination.design_discharge == 3
    sizing = found.sizings["largest_energy"]
    assert sizing.best == pytest.approx(100 / (4 * 9.81 * 0.8 * 0.95), rel=2e-3)
    assert sizing.at_limit
    assert sizing.high <= 100 / (4 * 9.81 * 0.8 * 0.95) * 1.001
    assert "of the 2 that keep the limits" in answer(found)
    assert real_differences(found).startswith("Among the options that keep the limits: option 2")


def test_a_wanted_capacity_factor_with_an_option_that_never_runs(tmp_path: Path) -> None:
    """At 400 m3/s a unit of 100 % minimum stands all year: less than nothing."""
    options = "unit_counts: [1]\ndesign_discharges: [2, 400]\nwanted_capacity_factor: 25 %"
    found = jobs.compare(read_site(write_site(tmp_path, river(2), options, minimum="1")))
    assert found.options[1].mean_annual_energy == 0
    worth = found.choices[1].aim.worth(found.options[1])
    capacity = found.options[1].installed_capacity
    hours = found.options[1].hours_per_year
    assert worth == pytest.approx(-0.25 * capacity * hours / 1000)


def test_two_machines_of_a_type_are_told_apart_by_name(tmp_path: Path) -> None:
    options = (
        "unit_counts: [1]\ndesign_discharges: [3]\ntypes: [kaplan, kaplan, "
        "{type: kaplan, efficiency: [[0.0, 0.801], [1.0, 0.801]]}]"
    )
    found = jobs.compare(read_site(write_site(tmp_path, river(2), options)))
    assert [option.machine for option in found.options] == ["kaplan #1", "kaplan #2"]
    assert found.differences is not None
    assert not found.differences.against[0].real


# --- what cannot be -------------------------------------------------------------------------------


def test_combinations_that_are_no_plants_are_listed(tmp_path: Path) -> None:
    """A loss of 0.2 Q^2 takes the head of 4 m at 4.47 m3/s; `other` has no typical values."""
    path = write_site(
        tmp_path, river(1), "unit_counts: [1]\ntypes: [kaplan, other]\ndesign_discharges: [2, 6]",
        more="waterway: [{loss_coefficient: 0.2}]",
    )  # fmt: skip
    found = jobs.compare(read_site(path))
    assert [option.number for option in found.options] == [1]
    assert {each.number: each.reason.split(";")[0] for each in found.refused} == {
        2: "rated_head cannot be derived: no net head is left with all units at rated discharge "
        "(6 m3/s together)",
        3: "type other has no typical values",
        4: "type other has no typical values",
    }


def test_what_is_no_plant_is_not_written(tmp_path: Path) -> None:
    path = write_site(
        tmp_path, river(1), "unit_counts: [1]\ndesign_discharges: [2, 6]",
        more="waterway: [{loss_coefficient: 0.2}]",
    )  # fmt: skip
    site = read_site(path)
    assert "site.yaml" in jobs.write_option(site, 1)
    with pytest.raises(SiteFileError, match="option 2 is no plant: rated_head cannot be derived"):
        jobs.write_option(site, 2)


def test_an_old_plant_in_site_yaml_is_not_written_over(tmp_path: Path) -> None:
    options = "unit_counts: [1]\ndesign_discharges: [3]"
    write_site(tmp_path, river(1), options).rename(tmp_path / "site.yaml")
    path = write_site(tmp_path, river(1), options, more="baseline: {site: site.yaml}")
    files = jobs.write_option(read_site(path), 1)
    assert list(files) == ["option_1.yaml", "daily.csv", "site.yaml"]
    assert files["site.yaml"] == (tmp_path / "site.yaml").read_bytes()
    assert b"rated_discharge: 3.0" in files["option_1.yaml"]


@pytest.mark.parametrize(
    ("options", "message"),
    [
        ("unit_counts: [1]", "the sizes are missing"),
        ("exceedances: [20]", "how many units is missing"),
        ("splits: [[0.4, 0.4]]\nexceedances: [20]", "adds up to 0.8"),
        ("unit_counts: [1]\nexceedances: [20]\npipe_diameters: [1 m]", "has no pipe"),
        ("unit_counts: [13]\nexceedances: [20]", "from 1 to 12"),
        ("unit_counts: [1]\nexceedances: [20]\ntypes: [{type: kaplan, jets: 2}]", "have jets"),
        (
            "unit_counts: [1]\nexceedances: [" + ", ".join(["20"] * 5001) + "]",
            "makes 5001 options",
        ),
    ],
)
def test_faults_in_the_options(tmp_path: Path, options: str, message: str) -> None:
    with pytest.raises(SiteFileError, match=message):
        read_site(write_site(tmp_path, river(1), options))


def test_faults_of_the_whole(tmp_path: Path) -> None:
    options = "unit_counts: [1]\ntypes: [other]\nexceedances: [20]"
    path = write_site(tmp_path, river(1), options)
    with pytest.raises(SiteFileError, match="none of the 1 combinations is a plant"):
        jobs.compare(read_site(path))
    with pytest.raises(SiteFileError, match="there is no option 2; write one from 1 to 1"):
        jobs.write_option(read_site(path), 2)
    with pytest.raises(SiteFileError, match="option 1 is no plant"):
        jobs.write_option(read_site(path), 1)
    path.write_text(path.read_text().split("# what to try")[0])
    with pytest.raises(SiteFileError, match="no options to compare; write a block such as"):
        jobs.compare(read_site(path))


def test_a_record_that_is_too_short(tmp_path: Path) -> None:
    path = write_site(tmp_path, river(1)[:100], "unit_counts: [1]\nexceedances: [20]")
    with pytest.raises(RecordError, match="no hydrological year"):
        jobs.compare(read_site(path))


# --- the command ----------------------------------------------------------------------------------


def run(*arguments: object) -> subprocess.CompletedProcess[str]:
    command = [sys.executable, "-m", "hydroyield", *map(str, arguments)]
    return subprocess.run(command, capture_output=True, text=True, check=False)


COLUMNS = [
    "option", "unit_count", "split", "type", "unit_discharge_m3s", "design_discharge_m3s",
    "installed_capacity_kw", "mean_annual_energy_mwh", "capacity_factor",
]  # fmt: skip


@pytest.mark.slow
def test_the_command_writes_tables_page_and_option(tmp_path: Path) -> None:
    path = write_site(
        tmp_path, river(), "unit_counts: [1, 2]\nexceedances: [20, 40]\nsplits: [[0.33, 0.67]]"
    )
    out, one = tmp_path / "out", tmp_path / "one"
    done = run("compare", path, "--out", out)
    assert (done.returncode, done.stderr) == (0, "")
    assert "6 options computed" in done.stdout
    table = pd.read_csv(out / "options.csv")
    assert set(COLUMNS) <= set(table.columns)
    assert table["option"].tolist() == [1, 2, 3, 4, 5, 6]
    assert table["split"].astype(str).tolist()[-1] == "0.33+0.67"
    page = (out / "report.html").read_text("utf-8")
    assert "rated_discharge" in page
    assert page.count("<img ") == 4
    assert run("compare", path, "--write", 4, "--out", one).returncode == 0
    alone = json.loads(run("estimate", one / "site.yaml", "--json").stdout)
    row = table[table["option"] == 4].iloc[0]
    for key in ("mean_annual_energy_mwh", "capacity_factor", "installed_capacity_kw"):
        assert alone[key] == pytest.approx(row[key], rel=1e-6)
    as_json = json.loads(run("compare", path, "--json").stdout)
    assert [row["option"] for row in as_json["options"]] == table["option"].tolist()
    assert run("compare", path).returncode == 2
    assert run("compare", path, "--out", tmp_path).returncode == 2


@pytest.mark.slow
@pytest.mark.skipif(not Path("/proc").exists(), reason="looks at the children of a process")
def test_an_interruption_leaves_nothing_behind(tmp_path: Path) -> None:
    """The signal comes when a worker has started, which is before 200 options are done."""
    sizes = ", ".join(f"{0.2 + 0.05 * n:.2f}" for n in range(100))
    path = write_site(tmp_path, river(), f"unit_counts: [3, 4]\nmean_flow_multiples: [{sizes}]")
    command = [sys.executable, "-m", "hydroyield", "compare", path, "--out", tmp_path / "out"]
    before = set(tmp_path.iterdir())
    running = subprocess.Popen(
        command, stdout=subprocess.PIPE, stderr=subprocess.PIPE, text=True, start_new_session=True
    )
    children = Path(f"/proc/{running.pid}/task/{running.pid}/children")
    end = time.monotonic() + 60
    while children.exists() and not children.read_text().strip() and time.monotonic() < end:
        time.sleep(0.05)
    os.killpg(running.pid, signal.SIGINT)
    said, complained = running.communicate(timeout=60)
    assert (running.returncode, said) == (130, "")
    assert complained.endswith("interrupted; nothing was written\n")
    assert "Traceback" not in complained
    assert set(tmp_path.iterdir()) == before
