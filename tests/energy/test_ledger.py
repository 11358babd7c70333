"""The ledger against cases worked by hand: one year of constant flow, one loss at a time.

All cases start from 4 m3/s falling 10 m onto one unit of 5 m3/s at efficiency 0.8; whatever a case
does not name is free of loss. Rows are in MWh of 8760 h.
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
import pytest
from small_schemes import ONE_YEAR, TEN_METRES, WEIGHT, Machinery, scheme, unit

from hydroyield.energy import estimate_energy
from hydroyield.energy.ledger import STEPS
from hydroyield.hydraulics import FixedLevel, Heads, LevelTable, Weir
from hydroyield.hydraulics.losses import Waterway
from hydroyield.powerhouse import EfficiencyCurve, Electrical, UnitGroup
from hydroyield.river import Abstraction, WaterRules

MWH = 8760 / 1e6  # of 1 W through the year
HEAD = 10.0


def water(discharge: float, head: float = HEAD) -> float:
    """Energy [MWh] of a year of discharge [m3/s] falling through a head [m]."""
    return WEIGHT * discharge * head * MWH


def rows(
    discharge: float = 4.0,
    groups: Sequence[UnitGroup] = (unit(),),
    *,
    rules: WaterRules | None = None,
    heads: Heads = TEN_METRES,
    machinery: Machinery | None = None,
) -> dict[str, float]:
    """Rows that are not zero, gross and net left out; they must add up."""
    estimate = estimate_energy(
        scheme(
            np.full(ONE_YEAR.size, discharge),
            groups,
            ONE_YEAR,
            rules=rules or WaterRules.by_month(),
            heads=heads,
            machinery=machinery,
            year_start_month=1,
        )
    )
    found = dict(estimate.ledger_mwh)
    assert tuple(found) == STEPS
    gross, net = found.pop("gross"), found.pop("net")
    assert gross == pytest.approx(WEIGHT * discharge * estimate.reference_head_m * MWH, rel=1e-12)
    assert net == pytest.approx(gross + sum(found.values()), abs=1e-12 * gross)
    assert net == pytest.approx(estimate.mean_annual_energy_mwh, abs=1e-9 * gross)
    return {step: value for step, value in found.items() if abs(value) > 1e-9 * gross}


def same(found: dict[str, float], expected: dict[str, float], rel: float = 1e-6) -> None:
    assert found == pytest.approx(expected, rel=rel)


# --- water that is not turbined -------------------------------------------------------------------


def test_turbine_alone() -> None:
    """A fifth of the water's energy stays in the turbine."""
    same(rows(), {"turbine": -0.2 * water(4)})


def test_reserved_by_the_environmental_flow() -> None:
    found = rows(rules=WaterRules.by_month([[1.0] * 12]))
    same(found, {"reserved": -water(1), "turbine": -0.2 * water(3)})


def test_reserved_by_an_abstraction() -> None:
    found = rows(rules=WaterRules.by_month(abstractions=[Abstraction("farm", 0.5)]))
    same(found, {"reserved": -water(0.5), "turbine": -0.2 * water(3.5)})


def test_reserved_in_one_month() -> None:
    """4 m3/s stay in June, 30 days of 365."""
    rules = WaterRules.by_month([[0.0] * 5 + [4.0] + [0.0] * 6])
    share = 30 / 365
    found = rows(rules=rules)
    same(found, {"reserved": -water(4) * share, "turbine": -0.2 * water(4) * (1 - share)})


def test_shutdown() -> None:
    """3 of 4 m3/s are offered while the river is above 3.9."""
    found = rows(rules=WaterRules.by_month([[1.0] * 12]), machinery=Machinery(shutdown_above=3.9))
    same(found, {"reserved": -water(1), "shutdown": -water(3)})


def test_a_river_at_the_limit_is_not_shut_down() -> None:
    same(rows(machinery=Machinery(shutdown_above=4.0)), {"turbine": -0.2 * water(4)})


def test_no_admissible_head() -> None:
    found = rows(machinery=Machinery(minimum_net_head=10.5))
    same(found, {"no_admissible_head": -water(4)})


def test_shutdown_goes_before_the_head() -> None:
    found = rows(machinery=Machinery(minimum_net_head=10.5, shutdown_above=3.0))
    same(found, {"shutdown": -water(4)})


def test_tailwater_above_the_axis() -> None:
    """The tailwater stands 1 m over the axis; its own level counts for the reference head."""
    heads = Heads(FixedLevel(11.0), FixedLevel(1.0))
    found = rows(groups=[unit(axis_level=0.0)], heads=heads)
    same(found, {"no_admissible_head": -water(4)})


def test_above_full_discharge() -> None:
    same(rows(8.0), {"above_full_discharge": -water(3), "turbine": -0.2 * water(5)})


def test_capacity_limit() -> None:
    """The capacity needs 2.5 m3/s; of the other 1.5 nothing can be made."""
    capacity = 0.8 * WEIGHT * 2.5 * HEAD
    found = rows(groups=[unit(capacity=capacity)])
    same(found, {"capacity_limit": -water(1.5), "turbine": -0.2 * water(2.5)})


def test_capacity_limit_and_more_than_full_discharge() -> None:
    """8 m3/s are offered, 5 would be full opening, and the capacity needs 2.5."""
    capacity = 0.8 * WEIGHT * 2.5 * HEAD
    found = rows(8.0, [unit(capacity=capacity)])
    same(
        found,
        {
            "above_full_discharge": -water(3),
            "capacity_limit": -water(2.5),
            "turbine": -0.2 * water(2.5),
        },
    )


def test_below_the_minimum() -> None:
    """4 m3/s are less than 0.9 of 5."""
    same(rows(groups=[unit(minimum=0.9)]), {"below_minimum_or_unused": -water(4)})


def test_a_minimum_met_exactly_runs() -> None:
    same(rows(groups=[unit(minimum=0.8)]), {"turbine": -0.2 * water(4)})


def test_between_one_unit_and_two() -> None:
    """One unit takes 5 of 6 m3/s; two would need 7.5."""
    found = rows(6.0, [unit(2, minimum=0.75)])
    same(found, {"below_minimum_or_unused": -water(1), "turbine": -0.2 * water(5)})


def test_no_outage_without_outages() -> None:
    assert "outage" not in rows()


# --- head -----------------------------------------------------------------------------------------


def test_levels_lost_in_a_tailrace() -> None:
    """The tailrace rises 0.1 m for each m3/s; 4 m3/s cost 0.4 of the 10 m that stand still."""
    rising = Heads(FixedLevel(10.0), LevelTable((0.0, 10.0), (0.0, 1.0)), follows_turbine=True)
    found = rows(heads=rising)
    same(found, {"levels": -water(4, 0.4), "turbine": -0.2 * water(4, 9.6)})


def test_levels_gained_over_a_weir() -> None:
    """The reference head ends at the crest; 1 m3/s left in the river stands 1 m over it, as
    C L = 1 m^1.5/s."""
    heads = Heads(Weir(10.0, 1.0, 1.0), FixedLevel(0.0))
    found = rows(heads=heads, rules=WaterRules.by_month([[1.0] * 12]))
    same(found, {"reserved": -water(1), "levels": water(3, 1), "turbine": -0.2 * water(3, 11)})


def test_levels_lost_above_the_axis() -> None:
    """The axis stands 0.5 m over the tailwater, to which the reference head reaches."""
    found = rows(groups=[unit(axis_level=0.5)])
    same(found, {"levels": -water(4, 0.5), "turbine": -0.2 * water(4, 9.5)})


def test_waterway() -> None:
    """0.05 x 4^2 = 0.8 m."""
    heads = Heads(FixedLevel(10.0), FixedLevel(0.0), waterway=Waterway(0.05))
    found = rows(heads=heads)
    same(found, {"waterway": -water(4, 0.8), "turbine": -0.2 * water(4, 9.2)})


# --- machines -------------------------------------------------------------------------------------


def test_turbine_at_part_load() -> None:
    """4 of 5 m3/s on a line from 0.5 at no flow to 1.0 at full: 0.9. Output then bends with
    discharge, and is read between the columns of a table."""
    found = rows(groups=[unit(curve=EfficiencyCurve((0.0, 1.0), (0.5, 1.0)))])
    same(found, {"turbine": -0.1 * water(4)}, rel=1e-4)


SHAFT = 0.8 * water(4)


def test_drive_and_generator() -> None:
    """0.9 x 0.95 of the shaft's energy comes out."""
    found = rows(machinery=Machinery(Electrical(drive=0.9, generator=0.95)))
    same(found, {"turbine": -0.2 * water(4), "drive_and_generator": -(1 - 0.9 * 0.95) * SHAFT})


def test_transformer() -> None:
    found = rows(machinery=Machinery(Electrical(transformer=0.98)))
    same(found, {"turbine": -0.2 * water(4), "transformer": -0.02 * SHAFT})


def test_own_use() -> None:
    """5 kW through the year: 43.8 MWh."""
    found = rows(machinery=Machinery(Electrical(own_use=5000.0)))
    same(found, {"turbine": -0.2 * water(4), "own_use": -43.8})


def test_own_use_of_a_standing_plant_is_not_counted() -> None:
    machinery = Machinery(Electrical(own_use=5000.0), shutdown_above=3.0)
    same(rows(machinery=machinery), {"shutdown": -water(4)})


def test_own_use_takes_no_more_than_there_is() -> None:
    """1 MW of own use: all of the output, and not more."""
    found = rows(machinery=Machinery(Electrical(own_use=1e6)))
    same(found, {"turbine": -0.2 * water(4), "own_use": -SHAFT})


def test_export_limit() -> None:
    """Of 313.92 kW at the terminals 300 leave: 13.92 kW x 8760 h."""
    found = rows(machinery=Machinery(Electrical(export_limit=300e3)))
    same(found, {"turbine": -0.2 * water(4), "export_limit": -13.92 * 8.76})


def test_all_at_once() -> None:
    """9 m3/s: 1 stays, 3 exceed full opening; the rest goes down step by step."""
    electrical = Electrical(0.9, 0.95, 0.98, own_use=2000.0, export_limit=250e3)
    found = rows(9.0, rules=WaterRules.by_month([[1.0] * 12]), machinery=Machinery(electrical))
    shaft = 0.8 * water(5)
    output = shaft * 0.9 * 0.95
    after_own_use = output * 0.98 - 2 * 8.76
    same(
        found,
        {
            "reserved": -water(1),
            "above_full_discharge": -water(3),
            "turbine": -0.2 * water(5),
            "drive_and_generator": output - shaft,
            "transformer": -0.02 * output,
            "own_use": -2 * 8.76,
            "export_limit": 250 * 8.76 - after_own_use,
        },
    )
