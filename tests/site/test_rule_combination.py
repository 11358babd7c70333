"""Rules for the environmental flow together: the largest, their sum, or the first that holds."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
import twin_sites

import hydroyield
from hydroyield.report.words import TOGETHER
from hydroyield.site import read_site_text
from hydroyield.site.assembly import rule_months, water_rules

RULES = """\
environmental_flow_combination: {way}
environmental_flow:
  - {{rule: inflow_share, share: 40 %, above: 1 m3/s, months: [1, 2]}}
  - {{rule: constant, discharge: 0.9, months: jan-mar}}
  - {{rule: steps, steps: [[0, 0.2], [3, 1.6]], months: [2, 4]}}
  - {{rule: constant, discharge: 0.3}}
"""
SITE = """\
format: 1
site: {name: Larkbeck Weir}
discharge: {record: {file: daily.csv}}
head: {headwater: {level: 101.2}, tailwater: {level: 97.9}}
turbines:
  - {count: 1, type: francis, rated_discharge: 6.2}
"""
RIVER = np.array([0.1, 0.8, 2.0, 3.0, 9.0])


def asked(discharge: float, month: int) -> list[float]:
    """What each rule that holds keeps, in their order, by hand."""
    found = []
    if month in (1, 2):
        found.append(min(discharge, 1.0) + 0.4 * max(0.0, discharge - 1.0))
    if month in (1, 2, 3):
        found.append(0.9)
    if month in (2, 4):
        found.append(1.6 if discharge >= 3 else 0.2)
    return [*found, 0.3]


@pytest.mark.parametrize("way", ["largest", "sum", "priority"])
def test_against_each_month_by_hand(way: str) -> None:
    together = {"largest": max, "sum": sum, "priority": lambda values: values[0]}[way]
    rules = water_rules(read_site_text(SITE + RULES.format(way=way)).model, RIVER)
    for month in range(1, 13):
        season = np.full(RIVER.size, rules.season_of_month[month - 1])
        expected = [min(q, together(asked(q, month))) for q in RIVER]
        assert rules.environmental_flow(RIVER, season) == pytest.approx(expected)


def test_by_priority_a_rule_counts_where_none_before_it_holds() -> None:
    model = read_site_text(SITE + RULES.format(way="priority")).model
    assert rule_months(model) == [(1, 2), (3,), (4,), (5, 6, 7, 8, 9, 10, 11, 12)]


def test_the_largest_applies_if_nothing_is_said() -> None:
    model = read_site_text(SITE).model
    assert model.environmental_flow_combination == "largest"
    assert set(TOGETHER) == {"largest", "sum", "priority"}


def test_a_rule_that_never_has_its_turn_is_named(tmp_path: Path) -> None:
    path = twin_sites.first_of_rules(tmp_path)
    text = path.read_text()
    named = {check.name for check in hydroyield.estimate(hydroyield.read_site(path)).checks}
    assert "rule_never_holds" not in named
    first = "  - {rule: constant, discharge: 0.2}\n  - {rule: inflow_share,"
    path.write_text(text.replace("  - {rule: inflow_share,", first, 1))
    found = hydroyield.estimate(hydroyield.read_site(path))
    late = [check.message for check in found.checks if check.name == "rule_never_holds"]
    assert [message.split(" never")[0] for message in late] == [
        f"environmental_flow[{number}]" for number in (1, 2, 3, 4)
    ]
    # the rule by priority keeps less than those behind it: without it there is less energy
    assert found.rule_costs[0] < 0
    assert found.rule_costs[1:4] == pytest.approx((0, 0, 0))
