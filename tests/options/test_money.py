"""Costs and income: a plain loop as second way, numpy-financial, and what must hold."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import numpy_financial as npf
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from hydroyield.options.money import (
    Cost,
    capital_recovery_factor,
    economics,
    internal_rate_of_return,
    levelised_cost,
    net_present_value,
)

MILL = Cost(
    life=30,
    discount_rate=0.05,
    fixed=150_000,
    per_kw=2_000,
    per_unit=30_000,
    per_pipe_metre=400,
    energy_price=(0.13,) * 3 + (0.09,) * 6 + (0.13,) * 3,
    yearly=5_000,
    yearly_share=0.01,
    grant_share=0.3,
    degradation=0.004,
)
ENERGY = [90e3, 85e3, 80e3, 60e3, 40e3, 30e3, 20e3, 20e3, 30e3, 50e3, 70e3, 85e3]  # kWh


def test_capital_by_hand() -> None:
    """150 000 + 2000 x 120 + 30 000 x 2 + 400 x 50 = 470 000."""
    found = economics(MILL, 120, 2, 50, ENERGY)
    assert found.capital == 470_000
    assert found.grant == pytest.approx(141_000)
    assert found.yearly_cost == pytest.approx(5_000 + 4_700)


def test_against_a_loop_over_years_and_months() -> None:
    found = economics(MILL, 120, 2, 50, ENERGY)
    capital, value, costs, kwh = 470_000.0, -470_000.0 * 0.7, 470_000.0, 0.0
    for year in range(1, 31):
        shrunk = 0.996 ** (year - 1)
        income = 0.0
        for month, energy in enumerate(ENERGY, 1):
            income += shrunk * energy * (0.09 if 4 <= month <= 9 else 0.13)
        discount = 1.05**year
        value += (income - 5_000 - 0.01 * capital) / discount
        costs += (5_000 + 0.01 * capital) / discount
        kwh += shrunk * sum(ENERGY) / discount
    assert found.net_present_value == pytest.approx(value)
    assert found.levelised_cost == pytest.approx(costs / kwh)


@pytest.mark.parametrize("rate", [0.01, 0.05, 0.12])
@pytest.mark.parametrize("years", [1, 20, 40])
def test_annuity_against_numpy_financial(rate: float, years: int) -> None:
    assert capital_recovery_factor(rate, years) == pytest.approx(-npf.pmt(rate, years, 1.0))


FLOWS = st.tuples(st.floats(1.0, 1e6), st.lists(st.floats(0.1, 1e6), min_size=1, max_size=40)).map(
    lambda flows: [-flows[0], *flows[1]]
)


@settings(max_examples=60, deadline=None)
@given(FLOWS, st.floats(-0.2, 0.5))
def test_present_value_against_numpy_financial(flows: list[float], rate: float) -> None:
    assert net_present_value(rate, flows) == pytest.approx(npf.npv(rate, flows), rel=1e-9, abs=1e-6)


@settings(max_examples=60, deadline=None)
@given(FLOWS)
def test_the_rate_of_return_makes_the_value_nothing(flows: list[float]) -> None:
    rate = internal_rate_of_return(flows)
    if rate is None:  # then even at the ends of the range it has one sign
        assert net_present_value(-0.99, flows) * net_present_value(10.0, flows) > 0
    else:
        assert net_present_value(rate, flows) == pytest.approx(0, abs=1e-6 * max(map(abs, flows)))


@pytest.mark.parametrize("income", [9_000, 14_000, 60_000])
def test_rate_of_return_against_numpy_financial(income: float) -> None:
    flows = [-100_000.0, *[income] * 15]
    assert internal_rate_of_return(flows) == pytest.approx(npf.irr(flows), abs=1e-9)


def test_no_rate_where_nothing_is_ever_earned() -> None:
    assert internal_rate_of_return([-100.0, -1.0, -1.0]) is None
    assert internal_rate_of_return([0.0, 0.0]) is None


@settings(max_examples=40, deadline=None)
@given(st.floats(0, 0.2), st.integers(1, 60), st.floats(0, 0.02))
def test_at_its_levelised_cost_energy_is_worth_what_it_costs(
    rate: float, life: int, degradation: float
) -> None:
    """The price at which the owner without a grant neither wins nor loses."""
    cost = replace(MILL, discount_rate=rate, life=life, degradation=degradation, grant_share=0.0)
    price = economics(cost, 120, 2, 50, ENERGY).levelised_cost
    assert price is not None
    at_cost = economics(replace(cost, energy_price=(price,) * 12), 120, 2, 50, ENERGY)
    assert at_cost.net_present_value == pytest.approx(0, abs=1e-6 * at_cost.capital)


def test_payback_by_hand() -> None:
    """70 of 100 paid by the owner, 10 a year left: 7 years; no surplus, no payback."""
    cost = Cost(
        life=20, discount_rate=0.0, fixed=100, energy_price=(1.0,) * 12, yearly=2, grant_share=0.3
    )
    found = economics(cost, 1, 1, 0, [1.0] * 12)
    assert found.simple_payback == pytest.approx(7)
    assert economics(replace(cost, yearly=12), 1, 1, 0, [1.0] * 12).simple_payback is None


def test_without_a_price_there_is_no_income() -> None:
    found = economics(replace(MILL, energy_price=None), 120, 2, 50, ENERGY)
    assert found.levelised_cost is not None
    assert (found.yearly_income, found.net_present_value) == (None, None)
    assert (found.internal_rate_of_return, found.simple_payback) == (None, None)


def test_no_energy_has_no_levelised_cost() -> None:
    assert levelised_cost(0.05, 100.0, np.ones(5), np.zeros(5)) is None


def test_other_prices_and_capital_costs() -> None:
    scaled = MILL.scaled(price=1.2, capital=0.8)
    assert scaled.capital(120, 2, 50) == pytest.approx(0.8 * 470_000)
    assert scaled.energy_price is not None
    assert scaled.energy_price[0] == pytest.approx(0.156)
    assert scaled.yearly == MILL.yearly


def test_faults() -> None:
    with pytest.raises(ValueError, match="energy of 11 months; 12 are needed"):
        economics(MILL, 120, 2, 50, ENERGY[:11])
    with pytest.raises(ValueError, match="a year of operation"):
        economics(replace(MILL, life=0), 120, 2, 50, ENERGY)
