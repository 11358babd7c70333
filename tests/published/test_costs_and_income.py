"""Money against published figures."""

from __future__ import annotations

import numpy as np
import pytest

from hydroyield.options.money import (
    Cost,
    capital_recovery_factor,
    economics,
    internal_rate_of_return,
    levelised_cost,
    net_present_value,
)


@pytest.mark.parametrize(
    ("rate", "years", "factor"),
    # Short, Packey & Holt 1995, A Manual for the Economic Evaluation of Energy Efficiency and
    # Renewable Energy Technologies, NREL/TP-462-5173: capital recovery factors
    [(0.05, 20, 0.0802426), (0.07, 30, 0.0805864), (0.10, 20, 0.1174596)],
)
def test_capital_recovery_factors(rate: float, years: int, factor: float) -> None:
    assert capital_recovery_factor(rate, years) == pytest.approx(factor, abs=5e-8)


def test_levelised_cost_of_the_same_manual() -> None:
    """(FCR x TCC + FOC) / AEP: 3 000 000 of capital, 60 000 a year, 5 GWh, 5 % over 30 years."""
    found = levelised_cost(0.05, 3e6, np.full(30, 60e3), np.full(30, 5e6))
    assert found == pytest.approx(0.051031, abs=5e-7)
    cost = Cost(life=30, discount_rate=0.05, fixed=3e6, yearly=60e3)
    whole = economics(cost, 1000, 1, 0, np.full(12, 5e6 / 12))
    assert whole.levelised_cost == pytest.approx(0.051031, abs=5e-7)


def test_a_textbook_investment() -> None:
    """-100, 60, 60: worth 4.132 at 10 %, rate of return 13.066 % (from memory)."""
    assert net_present_value(0.10, [-100, 60, 60]) == pytest.approx(4.132, abs=5e-4)
    assert internal_rate_of_return([-100, 60, 60]) == pytest.approx(0.13066, abs=5e-6)
