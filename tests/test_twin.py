"""The naive twin against cases that can be worked out by hand or by an even plainer search.

The twin is what other tests hold the package against, so it is held to account here on its own.
"""

from __future__ import annotations

import datetime
import math
from pathlib import Path

import numpy as np
import pytest
import twin
import yaml

PLAIN_UNIT = {
    "type": "other",
    "rated_discharge": 5.0,
    "rated_head": 10.0,
    "minimum_discharge": 0.0,
    "efficiency": [[0.0, 0.85], [1.0, 0.85]],
}
HEAD = {"headwater": {"level": 20.0}, "tailwater": {"level": 10.0}}


def write(
    folder: Path, values: list[float | str], first: str = "2001-10-01", **blocks: object
) -> Path:
    """A site of one plain unit at 10 m; `blocks` replace or add parts of the site file."""
    site = {
        "format": 1,
        "site": {"name": "Test"},
        "discharge": {"record": {"file": "q.csv", "unit": "m3/s"}},
        "head": HEAD,
        "turbines": [PLAIN_UNIT],
    } | blocks
    start = datetime.date.fromisoformat(first)
    rows = [f"{start + datetime.timedelta(days=i)},{v}" for i, v in enumerate(values)]
    (folder / "q.csv").write_text("date,discharge\n" + "\n".join(rows) + "\n")
    path = folder / "site.yaml"
    path.write_text(yaml.safe_dump(site))
    return path


def unit(**changes: object) -> twin.Unit:
    points = changes.pop("points", [[0.2, 0.7], [0.7, 0.9], [1.0, 0.8]])
    given = {
        "group": 0,
        "kind": "kaplan",
        "rated_discharge": 5.0,
        "rated_head": 4.0,
        "minimum": 0.2,
        "capacity": 1e9,
        "factor": 9810.0,
        "efficiency": twin.efficiency_curve(points),
    }
    return twin.Unit(**(given | changes))


def test_constant_flow_plant(tmp_path: Path) -> None:
    """Analytic: 4 m3/s, 1 of it reserved, 10 m, 0.85 for 365 days."""
    rules = [{"rule": "constant", "discharge": 1.0}]
    result = twin.estimate(write(tmp_path, [4.0] * 365, environmental_flow=rules))
    expected = 9810 * 3 * 10 * 0.85 * 8760 / 1e6
    assert result["mean_annual_energy_mwh"] == pytest.approx(expected, rel=1e-9)
    assert result["yearly_energy_mwh"] == pytest.approx({"2002": expected}, rel=1e-9)
    assert result["installed_capacity_kw"] == pytest.approx(416.925)
    assert result["capacity_factor"] == pytest.approx(0.6)
    assert result["monthly_energy_mwh"][1] == pytest.approx(expected * 28 / 365)
    assert result["environmental_flow_mean_m3s"] == 1.0
    ledger = {row["step"]: row["energy_mwh"] for row in result["ledger_mwh"]}
    assert ledger["gross"] == pytest.approx(9810 * 4 * 10 * 8760 / 1e6)
    assert ledger["reserved"] == pytest.approx(-ledger["gross"] / 4)
    assert ledger["turbine"] == pytest.approx(-0.15 * 0.75 * ledger["gross"])
    assert ledger["net"] == pytest.approx(expected, rel=1e-12)


@pytest.mark.parametrize(("minimum", "mean_turbined"), [(0.0, 3.75), (0.2, 3.70)])
def test_exact_integral_of_a_straight_duration_curve(
    tmp_path: Path, minimum: float, mean_turbined: float
) -> None:
    """Derived: Q(p) = 10 (1 - p), full discharge Qd 5: Qd - Qd^2/2Qmax - Qmin^2/2Qmax."""
    values = [10 * (k + 0.5) / 100 for k in range(100)]  # 1 and 5 m3/s lie between two days
    turbines = [PLAIN_UNIT | {"minimum_discharge": minimum}]
    plant = twin.load(write(tmp_path, values, turbines=turbines))
    turbined = 0.0
    for day, discharge in plant.days.items():
        rows = twin.rows_of_day(
            plant, discharge, twin.share_water(plant, day.month, discharge), None
        )
        turbined += sum(rows.values()) / (9810 * 10 * 0.85)
    assert turbined / 100 == pytest.approx(mean_turbined, rel=1e-6)
    assert turbined / 100 * 9.81 * 10 * 0.85 * 8.76 == pytest.approx(
        2739.2 * mean_turbined / 3.75, rel=1e-5
    )


def test_months_are_weighted_by_their_hours_not_their_days(tmp_path: Path) -> None:
    """Analytic: blanks in a month do not lower its mean; other months are untouched."""
    values: list[float | str] = [2.0] * 365
    values[:3] = ["", "", ""]  # October keeps 28 of 31 days, over 90 %
    result = twin.estimate(write(tmp_path, values))
    assert result["mean_annual_energy_mwh"] == pytest.approx(9.81 * 2 * 10 * 0.85 * 8.76)
    values[3] = ""
    with pytest.raises(ValueError, match="2001-10"):
        twin.estimate(write(tmp_path, values))


def test_year_is_named_by_the_calendar_year_in_which_it_ends(tmp_path: Path) -> None:
    path = write(tmp_path, [1.0] * 800, first="1999-06-01")
    result = twin.estimate(path)
    assert result["years_used"] == ["2000"]
    assert list(result["years_left_out"]) == ["1999", "2001"]
    site = yaml.safe_load(path.read_text())
    site["discharge"]["year_start_month"] = 1
    path.write_text(yaml.safe_dump(site))
    assert twin.estimate(path)["years_used"] == ["2000"]


def test_weibull_positions() -> None:
    """Published example: short series, non-exceedance 0.3 gives 3.0."""
    days = {
        datetime.date(2000, 1, k + 1): q for k, q in enumerate([1.0, 2, 3, 5, 8, 13, 21, 34, 55])
    }
    assert twin.Plant({}, days, 1000.0, 9.81).exceeded(70) == pytest.approx(3.0)


def test_water_and_gravity() -> None:
    """Published: IAPWS SR6-08 at 10 degC; IEC 60041 at 45 degrees and sea level."""
    assert twin.water_density({"water_temperature": 10}) == pytest.approx(999.7019, abs=5e-5)
    assert twin.water_density({}) == 1000.0
    assert twin.local_gravity({"latitude": 45.0}) == pytest.approx(9.80622, abs=5e-6)
    assert twin.local_gravity({"altitude": 900}) == 9.81


def test_normal_depth_of_a_published_section() -> None:
    """Manning: the depth found passes the discharge that was asked for."""
    channel = {"bottom_width": 9.0, "side_slope": 1.5, "slope": 0.002, "manning_n": 0.035}
    depth = float(twin.normal_depth(channel, 20.0))
    area = depth * (9 + 1.5 * depth)
    radius = area / (9 + 2 * depth * math.sqrt(3.25))
    assert area * radius ** (2 / 3) * math.sqrt(0.002) / 0.035 == pytest.approx(20.0)
    many = np.array([0.01, 0.3, 20.0])
    assert twin.channel_depth(channel, many) == pytest.approx(
        twin.normal_depth(channel, many), abs=1e-7
    )


def test_rated_values_with_losses_solve_their_equations(tmp_path: Path) -> None:
    """Analytic: 10 m less k Q^2 at the sum of both units; capacity = rho g q H eta."""
    turbine = PLAIN_UNIT | {"count": 2, "unit_capacity": 300.0}
    del turbine["rated_discharge"], turbine["rated_head"]
    losses = [{"loss_coefficient": 0.01}]
    plant = twin.load(write(tmp_path, [1.0, 20.0] * 200, turbines=[turbine], waterway=losses))
    first = plant.units[0]
    assert first.rated_head == pytest.approx(10 - 0.01 * (2 * first.rated_discharge) ** 2)
    assert 9.81 * first.rated_discharge * first.rated_head * 0.85 == pytest.approx(300.0)


def test_rules_and_abstractions(tmp_path: Path) -> None:
    """By hand: 40 % of what exceeds 1 stays; a counted fish pass lowers the release by its own."""
    blocks = {
        "environmental_flow": [
            {"rule": "inflow_share", "share": 0.4, "above": 1.0},
            {"rule": "constant", "discharge": 1.5},
        ],
        "abstractions": [
            {"discharge": 0.3, "months": [3], "counts_as_environmental_flow": True},
            {"discharge": 0.2, "returns": False},
        ],
    }
    plant = twin.load(write(tmp_path, [1.0] * 365, **blocks))
    march = twin.share_water(plant, 3, 6.0)
    assert march.offered == pytest.approx(6 - (3.0 - 0.3) - 0.5)
    assert march.lost == pytest.approx(0.2)
    assert twin.share_water(plant, 4, 6.0).offered == pytest.approx(6 - 3.0 - 0.2)
    assert twin.share_water(plant, 4, 2.0).offered == pytest.approx(0.3)
    assert twin.share_water(plant, 4, 1.2).offered == 0.0


def test_weir_head_sees_what_the_turbines_leave(tmp_path: Path) -> None:
    """By hand: 11 m3/s less 4 turbined less 1 abstracted over 10 m x 1.8 is (6/18)^(2/3) m."""
    weir = {"crest": 20.0, "length": 10.0, "coefficient": 1.8}
    assert float(twin.headwater_level({"weir": weir}, 11.0, 1.0, 4.0)) == pytest.approx(
        20 + (6 / 18) ** (2 / 3)
    )


def test_the_first_rule_or_the_sum_of_rules(tmp_path: Path) -> None:
    """By hand: 40 % of what exceeds 1 stays, then 1.5; together never more than the inflow."""
    rules = [
        {"rule": "inflow_share", "share": 0.4, "above": 1.0, "months": [3]},
        {"rule": "constant", "discharge": 1.5},
    ]
    kept = {}
    for way in ("sum", "priority"):
        blocks = {"environmental_flow": rules, "environmental_flow_combination": way}
        plant = twin.load(write(tmp_path, [1.0] * 365, **blocks))
        for month, discharge in ((3, 6.0), (3, 2.0), (4, 6.0)):
            kept[way, month, discharge] = twin.environmental_flow(plant, month, discharge)
    assert kept == pytest.approx({
        ("sum", 3, 6.0): 4.5, ("sum", 3, 2.0): 2.0, ("sum", 4, 6.0): 1.5,
        ("priority", 3, 6.0): 3.0, ("priority", 3, 2.0): 1.4, ("priority", 4, 6.0): 1.5,
    })  # fmt: skip


def test_a_unit_behind_its_branch_solves_its_equations() -> None:
    """Full discharge q = qr sqrt(h / hr) with h = H - k q^2; a share of it at its own head."""
    one = unit(rated_discharge=2.0, rated_head=9.0, branch=0.25)
    full = float(twin.full_discharge(one, 7.0))
    assert full == pytest.approx(2.0 * math.sqrt((7.0 - 0.25 * full**2) / 9.0))
    least = full * twin.opening_of_share(0.3, 0.25, 2.0, 9.0)
    assert least == pytest.approx(0.3 * 2.0 * math.sqrt((7.0 - 0.25 * least**2) / 9.0))
    assert float(one.behind_branch(7.0, full)) == pytest.approx(7.0 - 0.25 * full**2)


def test_jets_close_where_fewer_give_more() -> None:
    """By hand: at half of full discharge one of two jets is full, 0.8 against 0.6 of both."""
    curve = twin.efficiency_curve([[0.25, 0.2], [0.5, 0.6], [1.0, 0.8]])
    two = twin.efficiency_of_jets(curve, 2)
    assert two(np.array([0.5, 0.25, 1.0])) == pytest.approx([0.8, 0.6, 0.8])
    assert float(two(0.75)) == pytest.approx(float(curve(0.75)))


def test_a_chart_is_straight_between_its_corners() -> None:
    """By hand: the middle of four corners, and the nearest of them outside."""
    table = {"heads": [2.0, 4.0], "discharges": [1.0, 3.0], "values": [[0.6, 0.8], [0.7, 0.9]]}
    chart = twin.efficiency_chart(table)
    assert chart(np.array([2.0, 0.5, 9.0]), np.array([3.0, 1.0, 9.0])) == pytest.approx(
        [0.75, 0.6, 0.9]
    )


def test_a_limit_by_head_caps_the_output() -> None:
    one = unit(limit=((2.0, 10e3), (4.0, 30e3)), capacity=25e3)
    assert one.most(np.array([1.0, 3.0, 3.9])) == pytest.approx([10e3, 20e3, 25e3])
    assert float(twin.unit_output(one, 1.0, 3.0)) == pytest.approx(20e3)


def test_a_plant_starts_at_more_than_it_needs_to_run_on(tmp_path: Path) -> None:
    """By hand: 4 m3/s at full, from 2 on it runs, from 3 on it starts; a gap stops it."""
    values: list[float | str] = [2.5, 3.1, 2.5, 1.9, 2.5, 3.0, 2.0, "", 2.0, 3.5]
    start = {"rated_discharge": 4.0, "minimum_discharge": 0.5, "starting_discharge": 0.75}
    path = write(tmp_path, values * 37, turbines=[PLAIN_UNIT | start])
    plant = twin.load(path)
    first = min(plant.days)
    waits = [(first + datetime.timedelta(days=k)) in plant.waiting for k in range(10)]
    assert waits == [True, False, False, False, True, False, False, False, True, False]
    assert (first + datetime.timedelta(days=10)) not in plant.waiting  # runs on from the day before


def test_windows_of_dates_are_days_of_their_months() -> None:
    windows = ["08-10 to 08-19", "12-24 to 01-06"]
    shares = [
        twin.share_in_windows(windows, datetime.date(2001, month, 3)) for month in (1, 8, 9, 12)
    ]
    assert shares == pytest.approx([6 / 31, 10 / 31, 0, 8 / 31])


def test_outages_are_the_expectation_over_the_units(tmp_path: Path) -> None:
    """Binomial: both units needed all year, each up 0.9 of the time."""
    turbines = [PLAIN_UNIT | {"count": 2}]
    blocks = {"turbines": turbines, "operation": {"forced_outage_rate": 0.1}}
    result = twin.estimate(write(tmp_path, [10.0] * 365, **blocks))
    assert result["capacity_factor"] == pytest.approx(0.9)
    blocks["operation"] = {"planned_outage": {"days": 5, "months": [8]}}
    result = twin.estimate(write(tmp_path, [10.0] * 365, **blocks))
    assert result["capacity_factor"] == pytest.approx(1 - 5 / 365)


def plainest_search(units: list[twin.Unit], head: twin.Head, offered: float, steps: int) -> float:
    """The best of every combination of openings on a grid that fits into the offered water.

    As head depends on the total, each combination finds its own total by repetition.
    """
    openings = [np.concatenate([[0.0], np.linspace(u.minimum, 1.0, steps)]) for u in units]
    mesh = np.meshgrid(*openings, indexing="ij")
    total = np.zeros(mesh[0].shape)
    for _ in range(60):
        nets = [head(u, total) for u in units]
        passed = [x * twin.full_discharge(u, h) for u, x, h in zip(units, mesh, nets, strict=True)]
        total = 0.5 * total + 0.5 * sum(passed)
    output = sum(twin.unit_output(u, x, h) for u, x, h in zip(units, mesh, nets, strict=True))
    return float(np.where(total <= offered * (1 + 1e-9), output, 0.0).max())


STEEP = [[0.35, 0.60], [0.5, 0.76], [0.7, 0.90], [0.78, 0.93], [0.9, 0.85], [1.0, 0.74]]
MACHINES = {
    "two alike": [unit(points=STEEP, minimum=0.35)] * 2,
    "two unlike": [unit(), unit(group=1, rated_discharge=2.0, points=STEEP, minimum=0.35)],
    "two propellers": [unit(points=twin.typical_curve("propeller"), minimum=0.75)] * 2,
    "limited": [unit(capacity=120e3), unit(group=1, kind="screw", rated_discharge=2.0)],
}


@pytest.mark.parametrize("name", MACHINES)
@pytest.mark.parametrize("offered", [1.0, 2.1, 4.6, 5.9, 7.7, 12.0])
def test_dispatch_is_never_behind_and_hardly_ahead_of_the_plainest_search(
    name: str, offered: float
) -> None:
    """The plainest search misses the best by at most its step: 1/160 of an opening."""
    units = MACHINES[name]

    def head(_: twin.Unit, total: np.ndarray) -> np.ndarray:
        return np.maximum(4.4 - 0.008 * np.asarray(total) ** 2, 0.0)

    output, split = twin.brute_force_output(units, head, offered)
    naive = plainest_search(units, head, offered, 161)
    assert output >= naive * (1 - 1e-9)
    assert output <= naive * 1.015 + 1.0
    assert sum(split) <= offered * (1 + 1e-9)
    net = float(head(units[0], np.array(sum(split))))
    again = 0.0
    for one, discharge in zip(units, split, strict=True):
        opening = discharge / float(twin.full_discharge(one, net))
        assert opening == 0 or one.minimum * (1 - 1e-6) <= opening <= 1 + 1e-6
        again += float(twin.unit_output(one, opening, net)) if opening > 0 else 0.0
    assert again == pytest.approx(output, rel=1e-9)


def test_a_unit_at_its_capacity_takes_no_more_water_than_it_needs() -> None:
    """Analytic: constant efficiency 0.8 at 4 m reaches 100 kW at 100 / (9.81 x 4 x 0.8) m3/s."""
    units = [unit(points=[[0.0, 0.8], [1.0, 0.8]], capacity=100e3)] * 2
    output, split = twin.brute_force_output(units, lambda _, t: np.full(np.shape(t), 4.0), 9.0)
    assert output == pytest.approx(200e3, rel=1e-9)
    assert sum(split) == pytest.approx(2 * 100 / (9.81 * 4 * 0.8), rel=1e-5)


def test_equality_at_the_minimum_runs() -> None:
    units = [unit()]
    output, split = twin.brute_force_output(units, lambda _, t: np.full(np.shape(t), 4.0), 1.0)
    assert output == pytest.approx(9810 * 4 * 0.7)
    assert split == pytest.approx([1.0])
    assert twin.brute_force_output(units, lambda _, t: np.full(np.shape(t), 4.0), 0.999)[0] == 0


def test_what_it_does_not_know_it_refuses(tmp_path: Path) -> None:
    siphon = [{"siphon": {"length": 100}}]
    with pytest.raises(ValueError, match="waterway"):
        twin.estimate(write(tmp_path, [4.0] * 365, waterway=siphon))


def test_a_key_that_it_does_not_know_is_refused(tmp_path: Path) -> None:
    preset = [{"rule": "preset", "name": "swiss_q347"}]
    with pytest.raises(ValueError, match=r"environmental_flow: \['name'\] are not known"):
        twin.estimate(write(tmp_path, [4.0] * 365, environmental_flow=preset))


def test_a_drowned_weir_solves_villemontes_formula() -> None:
    for unit, behind in ((0.3, 0.2), (1.2, 0.9), (0.05, 0.4)):
        depth = float(twin.drowned_depth(unit, behind))
        assert depth**1.5 * (1 - (behind / depth) ** 1.5) ** 0.385 == pytest.approx(unit)
    assert float(twin.drowned_depth(0.3, -1.0)) == pytest.approx(0.3 ** (2 / 3))


def test_a_rating_is_found_again() -> None:
    levels = np.array([100.4, 100.7, 101.1, 101.8])
    gaugings = tuple(zip(6.5 * (levels - 99.9) ** 1.7, levels, strict=True))
    assert twin.fitted_rating(gaugings) == pytest.approx((99.9, 6.5, 1.7), rel=1e-4)


def test_a_plant_that_stands_takes_what_it_needs(tmp_path: Path) -> None:
    """Closed in October: 31 days of 2 + 1 kW; at 2 m3/s the rest of the year less the losses."""
    chain = {
        "generator_efficiency": 1.0, "standing_use": 2.0, "transformer_no_load_loss": 1.0,
        "transformer_load_loss": 5.0,
    }  # fmt: skip
    path = write(
        tmp_path, [2.0] * 365, turbines=[PLAIN_UNIT], electrical=chain, operation={"closed": [10]}
    )
    result = twin.estimate(path)
    power = 9.81 * 2 * 10 * 0.85
    load = power / result["installed_capacity_kw"]
    days = 365 - 31
    expected = 24e-3 * (days * (power - 1 - 5 * load**2) - 31 * 3)
    assert result["mean_annual_energy_mwh"] == pytest.approx(expected)
