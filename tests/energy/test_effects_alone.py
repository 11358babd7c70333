"""Energy integrated by hand, with one effect at a time (derived).

The duration curve is straight: Q(p) = 10 (1 - p) m3/s. One unit of full discharge 5 m3/s and
efficiency 0.85 at every opening works under 10 m, without a minimum; a year has 8766 h. The unit is
a screw, whose full discharge does not change with head, so that every integral is a polynomial.
`mean` is the mean over the year of discharge x head, in m4/s: 37.5 without any effect.
"""

from __future__ import annotations

import json
import math
from pathlib import Path
from typing import Any

import pytest

import hydroyield

WEIGHT = 1000 * 9.81
KW = WEIGHT * 0.85 / 1000  # of 1 m4/s
YEAR = 8766 / 1000  # MWh a year of 1 kW
CLOSE = 2e-4  # steps of the duration curve


def energy(folder: Path, turbine: dict[str, Any] | None = None, **blocks: Any) -> float:
    """Mean annual energy [MWh] of the plant with some keys changed."""
    unit = {
        "count": 1, "type": "screw", "rated_discharge": 5, "minimum_discharge": 1e-9,
        "efficiency": [[0, 0.85], [1, 0.85]],
    } | (turbine or {})  # fmt: skip
    site = {
        "format": 1,
        "site": {"name": "Straight"},
        "discharge": {"duration_table": [[0, 10], [100, 0]]},
        "head": {"headwater": {"level": 110}, "tailwater": {"level": 100}},
        "turbines": [unit],
        "electrical": {"generator_efficiency": 1},
    } | blocks
    path = folder / "site.yaml"
    path.write_text(json.dumps(site), "utf-8")
    return hydroyield.estimate(hydroyield.read_site(path)).mean_annual_energy_mwh


def offered(above: float, share: float = 1.0, most: float = 10.0) -> float:
    """Mean of min(share (Q - above), 5) over the days on which Q exceeds `above` [m3/s].

    most : of what is offered [m3/s]
    """
    full = min(5.0, most)
    bend = above + full / share
    if bend >= 10:
        return share * (10 - above) ** 2 / 2 / 10
    return (full**2 / share / 2 + full * (10 - bend)) / 10


def rule(**keys: Any) -> dict[str, Any]:
    return {"environmental_flow": [keys]}


def levels(**keys: Any) -> dict[str, Any]:
    return {"head": {"headwater": {"level": 110}, "tailwater": {"level": 100}} | keys}


def quadratic(k: float) -> float:
    """Mean of q (10 - k q^2) with q = min(Q, 5)."""
    return (10 * 12.5 - k * 5**4 / 4 + 5 * 5 * (10 - 25 * k)) / 10


RISING = {"tailwater": {"table": [[0, 100], [10, 102]]}}  # head is 10 - 0.2 Q
EXIT = 1 / (2 * 9.81 * 1.6**2)
RACK = 2.42 * (0.01 / 0.02) ** (4 / 3) * math.sin(math.radians(70)) / (2 * 9.81 * 4.0**2)
CAP = 250 / (KW * 10)  # m3/s that give 250 kW

EFFECTS: dict[str, tuple[dict[str, Any], float]] = {
    "nothing": ({}, 37.5),
    "a constant rule": (rule(rule="constant", discharge=1), 10 * offered(1)),
    "a share of the mean": (rule(rule="mean_share", share=0.2), 10 * offered(1)),
    "an exceedance": (rule(rule="exceedance", percent=90), 10 * offered(1)),
    "a monthly rule": (rule(rule="monthly", discharge=[1] * 12), 10 * offered(1)),
    "a share of the inflow": (rule(rule="inflow_share", share=0.2, above=0), 10 * offered(0, 0.8)),
    "hands off": (rule(rule="inflow_share", share=0.5, above=2), 10 * offered(2, 0.5)),
    "a most that is taken": (
        rule(rule="inflow_share", share=0.5, above=2, maximum_take=3),
        10 * offered(2, 0.5, 3),
    ),
    "steps": (  # 0.5 m3/s stay up to 3 m3/s, from there on 2
        rule(rule="steps", steps=[[0, 0.5], [3, 2]]),
        10 * (2.5**2 / 2 + (5**2 - 1) / 2 + 5 * 3) / 10,
    ),
    "the largest of two rules": (
        {"environmental_flow": [{"rule": "constant", "discharge": d} for d in (1, 0.4)]},
        10 * offered(1),
    ),
    "the sum of two rules": (
        {
            "environmental_flow": [{"rule": "constant", "discharge": d} for d in (1, 0.4)],
            "environmental_flow_combination": "sum",
        },
        10 * offered(1.4),
    ),
    "the first of two rules": (
        {
            "environmental_flow": [{"rule": "constant", "discharge": d} for d in (0.4, 1)],
            "environmental_flow_combination": "priority",
        },
        10 * offered(0.4),
    ),
    "an abstraction": ({"abstractions": [{"name": "a", "discharge": 0.5}]}, 10 * offered(0.5)),
    "an abstraction that counts": (
        rule(rule="constant", discharge=1)
        | {
            "abstractions": [
                {"name": "a", "discharge": 0.6, "counts_as_environmental_flow": True}
            ]
        },
        10 * offered(1),
    ),
    "a flood": ({"operation": {"shutdown_above": 8}}, 10 * (12.5 + 5 * 3) / 10),
    "a minimum": ({"turbine": {"minimum_discharge": 0.2}}, 10 * 3.7),
    "a rising tailwater": (
        levels(**RISING),
        (10 * 12.5 - 0.2 * 125 / 3 + 5 * (50 - 0.2 * 37.5)) / 10,
    ),
    "a least head": (  # of 9 m, up to Q = 5
        levels(**RISING, minimum_net_head=9),
        (10 * 12.5 - 0.2 * 125 / 3) / 10,
    ),
    "a loss coefficient": ({"waterway": [{"loss_coefficient": 0.04}]}, quadratic(0.04)),
    "an exit": ({"waterway": [{"exit": {"area": 1.6}}]}, quadratic(EXIT)),
    "a branch": (
        {"turbine": {"type": "kaplan", "waterway": [{"loss_coefficient": 0.04}]}},
        quadratic(0.04),
    ),
    "a limited capacity": ({"turbine": {"unit_capacity": 250}}, 10 * (CAP - CAP**2 / 20)),
    "a limit by head": (
        {"turbine": {"output_limit": [[1, 250], [20, 250]]}},
        10 * (CAP - CAP**2 / 20),
    ),
    "an export limit": ({"electrical": {"generator_efficiency": 1, "export_limit": 250}},
                        10 * (CAP - CAP**2 / 20)),
    "a curve that rises": (  # from 0.65 to 0.85
        {"turbine": {"efficiency": [[0, 0.65], [1, 0.85]]}},
        10 * (0.65 * 12.5 + 0.2 * 25 / 3 + 0.85 * 25) / 0.85 / 10,
    ),
    "a chart without slope": (
        {
            "turbine": {
                "rated_head": 10,
                "efficiency": {
                    "heads": [5, 15], "discharges": [0.1, 2.5, 5], "values": [[0.85] * 3] * 2,
                },
            }
        },
        37.5,
    ),
    "a drive": ({"electrical": {"generator_efficiency": 1, "drive_efficiency": 0.96}}, 36.0),
    "a generator": ({"electrical": {"generator_efficiency": 0.94}}, 37.5 * 0.94),
    "a transformer": (
        {"electrical": {"generator_efficiency": 1, "transformer_efficiency": 0.98}}, 37.5 * 0.98,
    ),
    "own use": (  # while it runs, which pays where it gives more than that
        {"electrical": {"generator_efficiency": 1, "own_use": "20 kW"}},
        37.5 - 20 / KW + (20 / KW / 10) ** 2 / 2,
    ),
    "a transformer that is always on": (
        {
            "electrical": {
                "generator_efficiency": 1,
                "transformer_no_load_loss": "3 kW",
                "transformer_load_loss": "12 kW",
            }
        },
        # load losses follow the square of the load: its mean is (5/3 + 5) / 10
        37.5 - (3 + 12 * (5 / 3 + 5) / 10) / KW,
    ),
    "forced outages": ({"operation": {"forced_outage_rate": 0.03}}, 37.5 * 0.97),
    "outages of what is shared": ({"operation": {"common_outage_rate": 0.02}}, 37.5 * 0.98),
    "degradation, which is told apart": ({"operation": {"degradation": 0.01}}, 37.5),
    "units of half the size": ({"turbine": {"count": 2, "rated_discharge": 2.5}}, 37.5),
}  # fmt: skip


@pytest.mark.parametrize("name", EFFECTS)
def test_an_effect_alone(name: str, tmp_path: Path) -> None:
    blocks, mean = EFFECTS[name]
    assert energy(tmp_path, **blocks) == pytest.approx(mean * KW * YEAR, rel=CLOSE)


def test_effects_are_seen() -> None:
    """A formula that gives the plain value could not tell whether its effect was switched on."""
    unseen = {name for name, (_, mean) in EFFECTS.items() if abs(mean / 37.5 - 1) < 10 * CLOSE}
    assert unseen == {
        "nothing", "a chart without slope", "units of half the size",
        "degradation, which is told apart",
    }  # fmt: skip


def test_a_rack_alone(tmp_path: Path) -> None:
    """Kirschmer: 2.42 (bar / gap)^(4/3) sin(angle) v^2 / 2g, v through the clear area."""
    rack = {
        "bar_thickness": "10 mm", "clear_spacing": "20 mm", "bar_shape": "rectangular",
        "inclination": 70, "area": "4 m2",
    }  # fmt: skip
    found = energy(tmp_path, waterway=[{"trash_rack": rack}])
    assert found == pytest.approx(quadratic(RACK) * KW * YEAR, rel=CLOSE)
