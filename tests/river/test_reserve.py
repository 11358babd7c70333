"""What stays in the river and what is offered, against the same rules written for one day."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from hydroyield.river.duration import quantile
from hydroyield.river.presets import PRESETS, czech_residual_flow, swiss_residual_flow
from hydroyield.river.reserve import Abstraction, InflowShare, InflowSteps, WaterRules

flows = st.floats(0, 60, allow_subnormal=False)
months = st.sets(st.integers(1, 12), min_size=1).map(lambda chosen: tuple(sorted(chosen)))
tables = st.lists(st.sampled_from([0.0, 0.3, 1.7, 8.0]), min_size=12, max_size=12)
shares = st.builds(
    InflowShare,
    st.floats(0, 1),
    st.floats(0, 20, allow_subnormal=False),
    st.sampled_from([np.inf, 0.5, 7.0]),
    months,
)
abstractions = st.builds(
    Abstraction,
    st.just("mill"),
    st.floats(0, 4, allow_subnormal=False),
    months,
    st.booleans(),
    st.booleans(),
)


@dataclass(frozen=True)
class Case:
    """Rules as a permit states them."""

    fixed: list[list[float]]
    shares: list[InflowShare]
    abstractions: list[Abstraction]
    summed: bool = False

    @property
    def rules(self) -> WaterRules:
        return WaterRules.by_month(self.fixed, self.shares, self.abstractions, summed=self.summed)

    def environmental_flow(self, flow: float, month: int) -> float:
        asked = [0.0]
        for twelve in self.fixed:
            asked.append(twelve[month - 1])
        for rule in self.shares:
            if month not in rule.months:
                continue
            exceeding = max(0.0, flow - rule.above)
            kept = flow - exceeding + rule.share * exceeding
            asked.append(max(kept, flow - rule.most_taken))
        return min(flow, sum(asked) if self.summed else max(asked))

    def taken(self, month: int, counted_only: bool = False) -> float:
        return sum(
            a.discharge
            for a in self.abstractions
            if month in a.months and (a.counts_as_environmental_flow or not counted_only)
        )

    def offered(self, flow: float, month: int) -> float:
        release = max(0.0, self.environmental_flow(flow, month) - self.taken(month, True))
        return max(0.0, flow - release - self.taken(month))


cases = st.builds(
    Case,
    st.lists(tables, max_size=3),
    st.lists(shares, max_size=2),
    st.lists(abstractions, max_size=3),
)
added = st.builds(replace, cases, summed=st.just(True))


def season_of(rules: WaterRules, month: int) -> np.ndarray:
    return rules.season_of_month[[month - 1]]


@given(case=cases | added, flow=flows, month=st.integers(1, 12))
@settings(max_examples=80, deadline=None)
def test_against_one_day_at_a_time(case: Case, flow: float, month: int) -> None:
    rules = case.rules
    discharge, season = np.array([flow]), season_of(rules, month)
    environmental = case.environmental_flow(flow, month)
    kept = min(flow, max(environmental, case.taken(month, True)))
    assert rules.environmental_flow(discharge, season)[0] == pytest.approx(environmental, abs=1e-12)
    assert rules.offered(discharge, season)[0] == pytest.approx(
        case.offered(flow, month), abs=1e-12
    )
    assert rules.reserved_for_river(discharge, season)[0] == pytest.approx(kept, abs=1e-12)


@given(case=cases)
@settings(max_examples=30, deadline=None)
def test_offered_water_lies_between_nothing_and_the_inflow(case: Case) -> None:
    rules = case.rules
    river = np.linspace(0, 60, 121)
    for season in range(rules.season_count):
        offered = rules.offered(river, np.full(river.size, season))
        assert (offered >= 0).all()
        assert (offered <= river).all()
        assert (np.diff(offered) >= -1e-12).all()
        assert (np.diff(offered) <= np.diff(river) + 1e-12).all()


@given(case=added)
@settings(max_examples=30, deadline=None)
def test_rules_that_add_up_offer_no_more_than_the_largest(case: Case) -> None:
    river, month = np.linspace(0, 60, 121), np.arange(1, 13).repeat(121)
    river = np.tile(river, 12)
    most = replace(case, summed=False).rules
    offered = case.rules.offered(river, case.rules.season_of_month[month - 1])
    assert (offered >= 0).all()
    assert (offered <= most.offered(river, most.season_of_month[month - 1]) + 1e-12).all()


@given(case=cases | added)
@settings(max_examples=30, deadline=None)
def test_water_is_either_offered_taken_or_left(case: Case) -> None:
    """Where there is enough for everyone, river = offered + release + abstractions."""
    rules = case.rules
    river = np.linspace(0, 60, 61)
    for season in range(rules.season_count):
        chosen = np.full(river.size, season)
        counted, abstracted = rules.counted[season], rules.abstracted[season]
        release = np.maximum(0, rules.environmental_flow(river, chosen) - counted)
        enough = river >= release + abstracted
        balance = rules.offered(river, chosen) + release + abstracted
        np.testing.assert_allclose(balance[enough], river[enough], atol=1e-12)
        assert (rules.offered(river, chosen)[~enough] == 0).all()


def test_the_five_rules_of_permits() -> None:
    """Each reduces to twelve discharges or a share of the inflow; numbers by hand."""
    record = np.arange(1.0, 100.0)  # 1 to 99: the value exceeded in 95 % of the time is 5
    constant = [3.0] * 12
    monthly = [2.0] * 3 + [8.0] * 3 + [2.0] * 6
    exceedance = [float(quantile(record, 95))] * 12
    mean_share = [0.1 * float(record.mean())] * 12  # 5.0
    rules = WaterRules.by_month(
        [constant, monthly, exceedance, mean_share], [InflowShare(0.5, 4.0)]
    )
    assert rules.season_count == 2
    january, may = rules.season_of_month[[0, 4]]
    expected = {  # river discharge: environmental flow in January and in May
        0.0: (0.0, 0.0),
        3.0: (3.0, 3.0),
        5.5: (5.0, 5.5),  # the share keeps 4 + 0.75
        6.0: (5.0, 6.0),  # the share keeps 4 + 1
        10.0: (7.0, 8.0),  # the share keeps 4 + 3
        20.0: (12.0, 12.0),  # the share keeps 4 + 8
    }
    river = np.array(list(expected))
    found = [rules.environmental_flow(river, np.full(6, season)) for season in (january, may)]
    np.testing.assert_allclose(np.transpose(found), list(expected.values()), atol=1e-12)


def test_a_counted_fish_pass_takes_the_place_of_the_release() -> None:
    fish_pass = Abstraction("fish pass", 0.5, (3, 4), counts_as_environmental_flow=True)
    mill = Abstraction("mill", 0.2, (4,))
    rules = WaterRules.by_month([[0.8] * 12], abstractions=[fish_pass, mill])
    river = np.full(12, 2.0)
    offered = rules.offered(river, rules.season_of_month)
    # without, 2 - 0.8; the fish pass is part of the 0.8; the mill comes on top
    assert offered.tolist() == pytest.approx([1.2, 1.2, 1.2, 1.0] + [1.2] * 8)
    generous = Abstraction("fish pass", 1.0, (1,), counts_as_environmental_flow=True)
    rules = WaterRules.by_month([[0.8] * 12], abstractions=[generous])
    offered = rules.offered(river, rules.season_of_month)
    assert offered[:2].tolist() == pytest.approx([1.0, 1.2])
    kept = rules.reserved_for_river(river, rules.season_of_month)
    assert kept[:2].tolist() == pytest.approx([1.0, 0.8])


@given(case=cases | added)
@settings(max_examples=30, deadline=None)
def test_seasons_hold_what_their_months_state(case: Case) -> None:
    rules = case.rules
    for month in range(1, 13):
        season = rules.season_of_month[month - 1]
        together = sum if case.summed else max
        fixed = together([0.0, *(twelve[month - 1] for twelve in case.fixed)])
        lost = sum(a.discharge for a in case.abstractions if month in a.months and not a.returns)
        assert rules.fixed[season] == pytest.approx(fixed)
        assert rules.abstracted[season] == pytest.approx(case.taken(month))
        assert rules.counted[season] == pytest.approx(case.taken(month, True))
        assert rules.unreturned[season] == pytest.approx(lost)


def test_months_with_the_same_rules_are_one_season() -> None:
    summer = [0.0] * 4 + [2.0] * 5 + [0.0] * 3
    rules = WaterRules.by_month([summer])
    assert rules.season_count == 2
    assert len(set(rules.season_of_month[4:9].tolist())) == 1
    assert WaterRules.by_month().season_count == 1


@given(case=cases, wanted=st.floats(0.05, 25))
@settings(max_examples=40, deadline=None)
def test_smallest_discharge_offering_against_a_scan(case: Case, wanted: float) -> None:
    rules, highest, step = case.rules, 50.0, 0.01
    river = np.linspace(0, highest, round(highest / step) + 1)
    seasons = range(rules.season_count)
    offered = [rules.offered(river, np.full(river.size, season)) for season in seasons]
    found, season = rules.smallest_discharge_offering(wanted, highest)
    reached = [river[np.argmax(w >= wanted)] for w in offered if w[-1] >= wanted]
    if not reached:
        assert found == highest
        assert offered[season][-1] == max(w[-1] for w in offered)
        return
    assert min(reached) - step <= found <= min(reached) + 1e-9
    assert rules.offered(np.array([found]), np.array([season]))[0] >= wanted


def test_steps_against_the_inflow_by_hand() -> None:
    steps = InflowSteps((0.0, 2.0, 5.0), (0.5, 1.0, 2.5), months=(5, 6))
    rules = WaterRules.by_month([[0.7] * 12], [steps])
    river = np.array([0.3, 1.9, 2.0, 4.9, 5.0, 9.0])
    may = np.full(6, rules.season_of_month[4])
    january = np.full(6, rules.season_of_month[0])
    assert rules.environmental_flow(river, may).tolist() == [0.3, 0.7, 1.0, 1.0, 2.5, 2.5]
    assert rules.environmental_flow(river, january).tolist() == [0.3, 0.7, 0.7, 0.7, 0.7, 0.7]


def test_a_hands_off_flow_with_a_largest_take_by_hand() -> None:
    """Half of what exceeds 2 m3/s may be taken, and never more than 3."""
    rules = WaterRules.by_month(inflow_rules=[InflowShare(0.5, 2.0, most_taken=3.0)])
    river = np.array([1.0, 2.0, 4.0, 8.0, 20.0])
    assert rules.offered(river, np.zeros(5, int)).tolist() == [0.0, 0.0, 1.0, 3.0, 3.0]


@pytest.mark.parametrize("wanted", [0.9, 1.2, 2.0, 3.4, 3.6])
def test_first_discharge_that_offers_enough_where_steps_fall_back(wanted: float) -> None:
    """At 5 m3/s the step takes back what was offered just below it; a fine grid finds the first."""
    rules = WaterRules.by_month(inflow_rules=[InflowSteps((0.0, 2.0, 5.0), (0.5, 1.0, 3.5))])
    found, _ = rules.smallest_discharge_offering(wanted, 9.0)
    grid = np.linspace(0, 9, 900_001)
    offered = rules.offered(grid, np.zeros(grid.size, int))
    assert found == pytest.approx(grid[(offered >= wanted - 1e-9).argmax()], abs=2e-5)


@pytest.mark.parametrize("wanted", [0.2, 0.9, 1.6, 1.85, 1.95])
@pytest.mark.parametrize("counted", [0.0, 1.4])
def test_first_discharge_that_offers_enough_where_shares_add_up(
    wanted: float, counted: float
) -> None:
    """Shares of 0.5 and 0.7 keep more than the whole of what comes above 5 m3/s, so that less is
    offered the more comes; a fine grid finds the first."""
    shares = [InflowShare(0.5, 1.0), InflowShare(0.7, 0.0, most_taken=5.0)]
    taken = [Abstraction("fish pass", counted, counts_as_environmental_flow=True)]
    rules = WaterRules.by_month([[0.1] * 12], shares, taken, summed=True)
    found, season = rules.smallest_discharge_offering(wanted, 12.0)
    grid = np.linspace(0, 12, 1_200_001)
    offered = rules.offered(grid, np.zeros(grid.size, int))
    if offered.max() < wanted:
        assert rules.offered(np.array([found]), np.array([season]))[0] < wanted
    else:
        assert found == pytest.approx(grid[(offered >= wanted - 1e-9).argmax()], abs=3e-5)


# --- published rules ------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("q347", "kept"),
    [
        (40, 50), (60, 50), (100, 82), (160, 130), (300, 191.6), (500, 280), (1000, 435),
        (2500, 900), (5000, 1432.5), (10_000, 2500), (20_000, 4000), (60_000, 10_000),
        (90_000, 10_000),
    ],
)  # fmt: skip
def test_residual_flow_of_the_swiss_act(q347: float, kept: float) -> None:
    """GSchG, SR 814.20, Art. 31(1), in l/s: the printed values, and between them the printed
    increments (8 per 10, 4.4 per 10, 31 per 100, 21.3 per 100, 150 per 1000), by hand."""
    assert swiss_residual_flow(q347 / 1000) == pytest.approx(kept / 1000)


@pytest.mark.parametrize(
    ("q330", "q355", "q364", "kept"),
    [
        (0.06, 0.04, 0.03, 0.06), (0.30, 0.20, 0.10, 0.25), (4.0, 3.0, 2.0, 3.0),
        (9.0, 7.0, 5.0, 6.0),
    ],
)  # fmt: skip
def test_residual_flow_of_the_czech_guideline(
    q330: float, q355: float, q364: float, kept: float
) -> None:
    """Guideline of 1998 by Q355d: below 0.05 m3/s Q330d; to 0.5 the mean of both; to 5.0 Q355d;
    above the mean of Q355d and Q364d."""
    assert czech_residual_flow(q330, q355, q364) == pytest.approx(kept)


def test_french_and_tennant_shares_of_the_mean() -> None:
    """L.214-18: 20 m3/s keep 2.0, 100 keep 5.0. Tennant 1976: fair is 10 % in October to March and
    30 % in April to September."""
    assert PRESETS["french_tenth"].flows(np.full(10, 20.0)) == pytest.approx([2.0] * 12)
    assert PRESETS["french_tenth"].flows(np.full(10, 100.0)) == pytest.approx([5.0] * 12)
    fair = PRESETS["tennant_fair"].flows(np.full(10, 8.0))
    assert fair == pytest.approx([0.8] * 3 + [2.4] * 6 + [0.8] * 3)


def test_presets_count_days_of_a_year_of_365() -> None:
    """Q347 is exceeded on 347 of 365 days, 95.07 % of the time."""
    record = np.arange(1.0, 100.0) / 10
    q347 = float(quantile(record, 100 * 347 / 365))
    assert PRESETS["swiss_q347"].flows(record) == pytest.approx([swiss_residual_flow(q347)] * 12)
