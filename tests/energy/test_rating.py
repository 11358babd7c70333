"""Rated head, discharge and capacity that were left out, against cases worked by hand."""

from __future__ import annotations

import math
from pathlib import Path

import pytest
from small_schemes import WEIGHT
from twin_sites import write_record, write_site

import hydroyield
from hydroyield.energy.rating import RatingError, Setting, UnitSpecification, rate_units
from hydroyield.errors import SiteFileError
from hydroyield.hydraulics import FixedLevel, Heads, LevelTable
from hydroyield.hydraulics.losses import Waterway
from hydroyield.powerhouse import EfficiencyCurve, UnitGroup
from hydroyield.river import Abstraction, InflowShare, WaterRules

CURVE = EfficiencyCurve((0.5, 1.0), (0.9, 0.8))  # 0.8 at full opening
TERMINAL = WEIGHT * 0.95  # N/m3, with a generator of 0.95


def setting(
    heads: Heads | None = None, rules: WaterRules | None = None, highest: float = 100.0
) -> Setting:
    """10 m between fixed levels and no rules, if nothing else is given."""
    given = heads or Heads(FixedLevel(10.0), FixedLevel(0.0))
    return Setting(rules or WaterRules.by_month(), given, highest, TERMINAL)


def specified(
    count: int = 1,
    *,
    discharge: float | None = None,
    head: float | None = None,
    capacity: float | None = None,
    axis_level: float | None = None,
) -> UnitSpecification:
    return UnitSpecification(count, "other", discharge, head, capacity, 0.2, CURVE, axis_level)


def only(units: list[UnitSpecification], at: Setting) -> UnitGroup:
    (group, *_), _ = rate_units(units, at)
    return group


# --- rated head -----------------------------------------------------------------------------------


def test_head_with_all_units_open_at_the_smallest_river_that_feeds_them() -> None:
    """2 x 5 m3/s and 2 left in the river: 12 m3/s; tailwater 0.12 m, loss 0.001 x 10^2 = 0.1 m."""
    heads = Heads(FixedLevel(10.0), LevelTable((0.0, 100.0), (0.0, 1.0)), waterway=Waterway(0.001))
    rules = WaterRules.by_month([[2.0] * 12])
    groups, state = rate_units([specified(2, discharge=5.0)], setting(heads, rules))
    assert state.river_discharge == pytest.approx(12.0, rel=1e-12)
    assert state.turbined == 10.0
    assert state.reached
    assert groups[0].rated_head == pytest.approx(10 - 0.12 - 0.1, rel=1e-12)


def test_head_of_the_month_that_feeds_the_units_first() -> None:
    """1 m3/s is kept in July and 3 in other months: 5 + 1 = 6 m3/s, tailwater 0.06 m."""
    heads = Heads(FixedLevel(10.0), LevelTable((0.0, 100.0), (0.0, 1.0)))
    rules = WaterRules.by_month([[3.0] * 6 + [1.0] + [3.0] * 5])
    assert only([specified(discharge=5.0)], setting(heads, rules)).rated_head == pytest.approx(9.94)


def test_head_where_a_share_of_the_inflow_stays() -> None:
    """1 m3/s and half of what exceeds it stay: 5 = (Q - 1) / 2 at 11 m3/s, tailwater 0.11 m."""
    heads = Heads(FixedLevel(10.0), LevelTable((0.0, 100.0), (0.0, 1.0)))
    rules = WaterRules.by_month(inflow_rules=[InflowShare(0.5, 1.0)])
    assert only([specified(discharge=5.0)], setting(heads, rules)).rated_head == pytest.approx(9.89)


def test_head_where_an_abstraction_does_not_return() -> None:
    """5 + 2 taken = 7 m3/s in the river; the tailwater sees 5: 0.05 m."""
    heads = Heads(FixedLevel(10.0), LevelTable((0.0, 100.0), (0.0, 1.0)))
    rules = WaterRules.by_month(abstractions=[Abstraction("town", 2.0, returns=False)])
    assert only([specified(discharge=5.0)], setting(heads, rules)).rated_head == pytest.approx(9.95)


def test_head_down_to_the_axis() -> None:
    """The axis stands 1.5 m over the tailwater: 8.5 m."""
    group = only([specified(discharge=2.0, axis_level=1.5)], setting())
    assert group.rated_head == pytest.approx(8.5, rel=1e-12)


def test_discharges_of_all_groups_count_for_the_losses() -> None:
    """2 + 3 m3/s: loss 0.02 x 5^2 = 0.5 m for either group."""
    heads = Heads(FixedLevel(10.0), FixedLevel(0.0), waterway=Waterway(0.02))
    groups, _ = rate_units([specified(discharge=2.0), specified(discharge=3.0)], setting(heads))
    assert [group.rated_head for group in groups] == pytest.approx([9.5, 9.5])


def test_units_that_the_river_never_feeds_are_rated_at_the_most_it_offers() -> None:
    """At most 8 m3/s, of which 2 stay, for units of 10: the head is that of a river of 8 m3/s
    with the units fully open."""
    heads = Heads(FixedLevel(10.0), LevelTable((0.0, 100.0), (0.0, 1.0)), waterway=Waterway(0.001))
    at = setting(heads, WaterRules.by_month([[2.0] * 12]), highest=8.0)
    groups, state = rate_units([specified(2, discharge=5.0)], at)
    assert (state.river_discharge, state.reached) == (8.0, False)
    assert groups[0].rated_head == pytest.approx(10 - 0.08 - 0.1, rel=1e-12)


def test_no_head_left_is_refused() -> None:
    """0.4 x 5^2 = 10 m of loss."""
    heads = Heads(FixedLevel(10.0), FixedLevel(0.0), waterway=Waterway(0.4))
    with pytest.raises(RatingError, match="no net head is left with all units") as refused:
        rate_units([specified(discharge=5.0)], setting(heads))
    assert refused.value.group == 0


# --- capacity and discharge -----------------------------------------------------------------------


def test_capacity_is_the_output_at_rated_head_and_discharge() -> None:
    """9810 x 0.95 x 5 x 8 x 0.8 W, whatever head the site has."""
    group = only([specified(discharge=5.0, head=8.0)], setting())
    assert group.unit_capacity == pytest.approx(9810 * 0.95 * 5 * 8 * 0.8, rel=1e-12)


def test_given_values_are_kept() -> None:
    group = only([specified(3, discharge=5.0, head=8.0, capacity=1e5)], setting())
    assert (group.rated_discharge, group.rated_head, group.unit_capacity) == (5.0, 8.0, 1e5)


def test_discharge_from_capacity_at_a_given_head() -> None:
    group = only([specified(head=8.0, capacity=9810 * 0.95 * 5 * 8 * 0.8)], setting())
    assert group.rated_discharge == pytest.approx(5.0, rel=1e-12)


def at_output(water: float) -> float:
    """Capacity [W] of a unit whose q x H is `water` [m4/s]."""
    return TERMINAL * 0.8 * water


STEEP = Heads(FixedLevel(10.0), FixedLevel(0.0), waterway=Waterway(0.5))


def test_discharge_and_head_solved_together() -> None:
    """q (10 - q^2 / 2) = 16 at q = 2, where H = 8, and again at q = 3.12, which is more water."""
    group = only([specified(capacity=at_output(16.0))], setting(STEEP))
    assert group.rated_discharge == pytest.approx(2.0, rel=1e-9)
    assert group.rated_head == pytest.approx(8.0, rel=1e-9)


def test_two_units_solved_together() -> None:
    """2 units of 1 m3/s: loss 0.5 x 2^2 = 2 m, so q H = 8 for each."""
    group = only([specified(2, capacity=at_output(8.0))], setting(STEEP))
    assert (group.rated_discharge, group.rated_head) == pytest.approx((1.0, 8.0), rel=1e-9)


def test_solved_beside_a_group_that_is_known() -> None:
    """1 m3/s is known; with 1 m3/s more the loss is 2 m, so q H = 8."""
    groups, _ = rate_units(
        [specified(discharge=1.0), specified(capacity=at_output(8.0))], setting(STEEP)
    )
    assert [group.rated_discharge for group in groups] == pytest.approx([1.0, 1.0], rel=1e-9)
    assert [group.rated_head for group in groups] == pytest.approx([8.0, 8.0], rel=1e-9)


MOST = math.sqrt(20 / 3) * (10 - 10 / 3)  # of q (10 - q^2 / 2), where 10 = 3 q^2 / 2


def test_capacity_just_within_reach() -> None:
    group = only([specified(capacity=at_output(0.999 * MOST))], setting(STEEP))
    assert group.rated_discharge * group.rated_head == pytest.approx(0.999 * MOST, rel=1e-9)
    assert group.rated_discharge < math.sqrt(20 / 3)


def test_capacity_out_of_reach_is_refused() -> None:
    with pytest.raises(RatingError, match="no discharge gives this unit_capacity") as refused:
        rate_units(
            [specified(discharge=0.1), specified(capacity=at_output(1.001 * MOST))], setting(STEEP)
        )
    assert refused.value.group == 1


# --- as the user sees it --------------------------------------------------------------------------

SITE = """\
format: 1
site: {{name: Steep Mill}}
discharge: {{record: {{file: flow.csv, unit: m3/s}}}}
head: {{headwater: {{level: 10}}, tailwater: {{level: 0}}}}
waterway:
  - {{loss_coefficient: 0.5}}
turbines:
  - count: 1
    type: kaplan
    {given}
"""


def site(folder: Path, given: str) -> Path:
    """A site with a record of two years around 2 m3/s."""
    write_record(folder / "flow.csv", 5, "2001-10-01", "2003-09-30", 2.0, blank_share=0.0)
    return write_site(folder, SITE.format(given=given))


def test_fault_names_the_line_of_the_capacity(tmp_path: Path) -> None:
    """At most 9810 x 17.2 x 0.905 W = 153 kW for a typical kaplan."""
    path = site(tmp_path, "unit_capacity: 160 kW")
    with pytest.raises(SiteFileError, match="no discharge gives this unit_capacity") as refused:
        hydroyield.estimate(hydroyield.read_site(path))
    (fault,) = refused.value.faults
    assert (fault.line, fault.key) == (10, "turbines[0].unit_capacity")


def test_fault_names_the_unit_that_takes_all_head(tmp_path: Path) -> None:
    path = site(tmp_path, "rated_discharge: 4.5 m3/s")
    with pytest.raises(SiteFileError, match="rated_head cannot be derived") as refused:
        hydroyield.estimate(hydroyield.read_site(path))
    assert refused.value.faults[0].key == "turbines[0].rated_head"


@pytest.mark.parametrize(("discharge", "outcome"), [("1.5", "pass"), ("60", "warn")])
def test_units_larger_than_the_river_are_computed_with_a_warning(
    tmp_path: Path, discharge: str, outcome: str
) -> None:
    path = site(tmp_path, f"rated_discharge: {discharge}")
    path.write_text(path.read_text().replace("coefficient: 0.5", "coefficient: 0.0001"))
    estimate = hydroyield.estimate(hydroyield.read_site(path))
    (found,) = [check for check in estimate.checks if check.name == "rated_discharge_reached"]
    assert found.outcome == outcome
    assert estimate.mean_annual_energy_mwh > 0
