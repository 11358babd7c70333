"""Whole estimates against the naive twin, which searches every day on its own and knows no cells.

Tolerances: the project promises annual energy within 0.1 %; single years hold less water to
average over. Statistics of the river need no search and agree to rounding.
"""

from __future__ import annotations

import datetime
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest
import twin
import twin_sites
import yaml

import hydroyield
from hydroyield.jobs import SiteEstimate

DEMO = Path(__file__).parents[2] / "demo_sites" / "quernholm_weir"
DEMO_YEARS = (datetime.date(2007, 10, 1), datetime.date(2010, 9, 30))


def _bare(text: str) -> float | str:
    """ "130 kW" -> 130.0, "18 %" -> 0.18; other text stays."""
    head, _, unit = text.partition(" ")
    if unit not in ("m", "m3/s", "kW", "km2", "degC", "%"):
        return text
    return float(head) / 100 if unit == "%" else float(head)


def _bare_numbers(content: Any) -> Any:
    if isinstance(content, dict):
        return {key: _bare_numbers(value) for key, value in content.items() if key != "source"}
    if isinstance(content, list):
        return [_bare_numbers(value) for value in content]
    return _bare(content) if isinstance(content, str) else content


def part_of_the_demo(folder: Path) -> Path:
    """Three years of a demo, in the bare numbers that the twin reads."""
    site = _bare_numbers(yaml.safe_load((DEMO / "site.yaml").read_text("utf-8")))
    name = site["discharge"]["record"]["file"]
    lines = (DEMO / name).read_text("utf-8").splitlines()
    rows = [line for line in lines if line[:1].isdigit()]
    first, last = DEMO_YEARS
    kept = [row for row in rows if first.isoformat() <= row[:10] <= last.isoformat()]
    (folder / name).write_text("\n".join(["date,discharge", *kept]) + "\n")
    path = folder / "site.yaml"
    path.write_text(yaml.safe_dump(site))
    return path


FAST = ("one_kaplan",)
SITES = [
    pytest.param(make, id=name, marks=() if name in FAST else pytest.mark.slow)
    for name, make in twin_sites.SITES.items()
]
SITES.append(pytest.param(part_of_the_demo, id="three_years_of_a_demo", marks=pytest.mark.slow))
# The water above the capacity of a unit is lost in whichever way the dispatch chooses among
# sharings of (nearly) equal output: it passes the turbines at a poor efficiency and another head,
# or it is not turbined. The rows between them then trade with each other at an unchanged net.
TRADING = {
    "capacity_limit",
    "below_minimum_or_unused",
    "levels",
    "waterway",
    "turbine",
    "drive_and_generator",
}

Pair = tuple[SiteEstimate, dict[str, Any]]


@pytest.fixture(scope="module", params=SITES)
def pair(request: pytest.FixtureRequest, tmp_path_factory: pytest.TempPathFactory) -> Pair:
    make: Callable[[Path], Path] = request.param
    path = make(tmp_path_factory.mktemp(make.__name__))
    return hydroyield.estimate(hydroyield.read_site(path)), twin.estimate(path)


def test_annual_energy(pair: Pair) -> None:
    estimate, expected = pair
    assert estimate.mean_annual_energy_mwh == pytest.approx(
        expected["mean_annual_energy_mwh"], rel=1e-3
    )
    assert estimate.capacity_factor == pytest.approx(expected["capacity_factor"], rel=1e-3)
    assert estimate.installed_capacity_kw == pytest.approx(
        expected["installed_capacity_kw"], rel=1e-9
    )


def test_years_and_months(pair: Pair) -> None:
    estimate, expected = pair
    assert estimate.years_used == expected["years_used"]
    assert list(estimate.years_left_out) == list(expected["years_left_out"])
    assert estimate.yearly_energy_mwh == pytest.approx(expected["yearly_energy_mwh"], rel=3e-3)
    assert estimate.monthly_energy_mwh == pytest.approx(expected["monthly_energy_mwh"], rel=3e-3)


def test_statistics_of_the_river(pair: Pair) -> None:
    estimate, expected = pair
    for name in ("exceedance_discharge_m3s", "characteristic_discharge_m3s"):
        assert getattr(estimate, name) == pytest.approx(expected[name], rel=1e-9)
    assert estimate.environmental_flow_mean_m3s == pytest.approx(
        expected["environmental_flow_mean_m3s"], rel=1e-9
    )
    assert estimate.reference_head_m == pytest.approx(expected["reference_head_m"], rel=1e-9)
    assert estimate.record.days == expected["record"]["days"]
    assert str(estimate.record.first) == expected["record"]["first"]
    assert str(estimate.record.last) == expected["record"]["last"]


def test_rated_values(pair: Pair) -> None:
    """Each group rates as the twin's units do; derived values included."""
    estimate, expected = pair
    units = [group for group in estimate.scheme.plant.groups for _ in range(group.count)]
    for unit, wanted in zip(units, expected["units"], strict=True):
        assert unit.rated_head == pytest.approx(wanted["rated_head_m"], rel=1e-9)
        assert unit.rated_discharge == pytest.approx(wanted["rated_discharge_m3s"], rel=1e-9)
        assert unit.unit_capacity == pytest.approx(wanted["unit_capacity_kw"] * 1e3, rel=1e-9)


def test_ledger(pair: Pair) -> None:
    """Rows within 0.1 % of gross; those that may trade within 0.2 %, and their sum within 0.1 %."""
    estimate, expected = pair
    wanted = {row["step"]: row["energy_mwh"] for row in expected["ledger_mwh"]}
    off = {step: (found - wanted[step]) / wanted["gross"] for step, found in estimate.ledger_mwh}
    assert list(off) == list(wanted)
    assert {step: share for step, share in off.items() if abs(share) > 2e-3} == {}
    others = {step: share for step, share in off.items() if step not in TRADING}
    assert {step: share for step, share in others.items() if abs(share) > 1e-3} == {}
    assert abs(sum(off[step] for step in TRADING)) < 1e-3
