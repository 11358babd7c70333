"""What an option costs and earns, from the user's own costs and prices; none is built in."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]

MONTHS = 12
RATES = (-0.99, 10.0)  # between which an internal rate of return is looked for
RATE_NODES = 400


@dataclass(frozen=True)
class Cost:
    """Costs and prices in one currency.

    fixed : capital of every option
    per_kw : capital of a kW of installed capacity
    per_unit : capital of a unit
    per_pipe_metre : capital of a metre of pipe
    energy_price : (12,) of a kWh, January first; None where none is known
    yearly : cost of a year of operation
    yearly_share : the same as a share of the capital, beside `yearly`
    life : years of operation that are counted
    discount_rate : a year
    grant_share : of the capital, which a grant pays
    degradation : share by which energy falls from year to year
    """

    life: int
    discount_rate: float
    fixed: float = 0.0
    per_kw: float = 0.0
    per_unit: float = 0.0
    per_pipe_metre: float = 0.0
    energy_price: tuple[float, ...] | None = None
    yearly: float = 0.0
    yearly_share: float = 0.0
    grant_share: float = 0.0
    degradation: float = 0.0

    def scaled(self, price: float = 1.0, capital: float = 1.0) -> Cost:
        """The same with prices and capital costs times these factors."""
        prices = self.energy_price
        return replace(
            self,
            fixed=capital * self.fixed,
            per_kw=capital * self.per_kw,
            per_unit=capital * self.per_unit,
            per_pipe_metre=capital * self.per_pipe_metre,
            energy_price=None if prices is None else tuple(price * each for each in prices),
        )

    def capital(self, capacity: float, units: int, pipe_metres: float) -> float:
        """Capital of a plant, without the grant.

        capacity : installed [kW]
        units : their number
        pipe_metres : length of all pipes [m]
        """
        return (
            self.fixed
            + self.per_kw * capacity
            + self.per_unit * units
            + self.per_pipe_metre * pipe_metres
        )


@dataclass(frozen=True)
class Economics:
    """What an option costs and earns.

    capital : without the grant
    grant : its part of the capital
    yearly_cost : of operation
    yearly_income : of the first year; None without a price
    levelised_cost : of a kWh, of the whole capital; None without energy
    net_present_value : of what the owner pays and earns; None without a price
    simple_payback : of the same, years of the first year's surplus; None where there is none
    flows : (life + 1,) what the owner pays and earns, now and at the end of each year; empty
        without a price
    """

    capital: float
    grant: float
    yearly_cost: float
    yearly_income: float | None
    levelised_cost: float | None
    net_present_value: float | None
    simple_payback: float | None
    flows: tuple[float, ...] = ()

    @cached_property
    def internal_rate_of_return(self) -> float | None:
        """Rate a year at which the flows are worth 0; None without a price or such a rate."""
        return internal_rate_of_return(self.flows) if self.flows else None


def economics(
    cost: Cost,
    capacity: float,
    units: int,
    pipe_metres: float,
    monthly_energy: Sequence[float] | Floats,
) -> Economics:
    """Costs and income of an option.

    capacity : installed [kW]
    units : their number
    pipe_metres : length of all pipes [m]
    monthly_energy : (12,) of a mean year, January first [kWh]

    The grant lowers what the owner pays at the start. Raises ValueError where there are not twelve
    months, or no year of operation.
    """
    energy = np.asarray(monthly_energy, dtype=np.float64)
    if energy.shape != (MONTHS,):
        raise ValueError(f"energy of {energy.size} months; {MONTHS} are needed")
    if cost.life < 1:
        raise ValueError("a plant needs a year of operation")
    capital = cost.capital(capacity, units, pipe_metres)
    grant = cost.grant_share * capital
    yearly = cost.yearly + cost.yearly_share * capital
    kept = (1 - cost.degradation) ** np.arange(cost.life)
    known = Economics(
        capital=capital,
        grant=grant,
        yearly_cost=yearly,
        yearly_income=None,
        levelised_cost=levelised_cost(
            cost.discount_rate, capital, np.full(cost.life, yearly), energy.sum() * kept
        ),
        net_present_value=None,
        simple_payback=None,
    )
    if cost.energy_price is None:
        return known
    income = float((energy * np.asarray(cost.energy_price)).sum())
    flows = np.concatenate([[grant - capital], income * kept - yearly])
    surplus = income - yearly
    return replace(
        known,
        yearly_income=income,
        net_present_value=net_present_value(cost.discount_rate, flows),
        simple_payback=(capital - grant) / surplus if surplus > 0 else None,
        flows=tuple(flows.tolist()),
    )


def capital_recovery_factor(rate: float, years: int) -> float:
    """Yearly payment that recovers a capital of 1 with interest.

    rate : a year; 0 gives 1 / years
    """
    return 1 / years if rate == 0 else rate / (1 - (1 + rate) ** -years)


def net_present_value(rate: float, flows: Sequence[float] | Floats) -> float:
    """Value today of flows, the first of them now and each further one a year later.

    rate : a year, above -1
    """
    years = np.arange(len(flows))
    return float((np.asarray(flows) / (1 + rate) ** years).sum())


def levelised_cost(
    rate: float, capital: float, yearly_costs: Floats, yearly_energy: Floats
) -> float | None:
    """Discounted costs over discounted energy; None without energy.

    rate : a year
    yearly_costs, yearly_energy : (years,) at the end of each [, kWh]

    With the same costs and energy each year this is (capital recovery factor x capital + yearly
    costs) / energy (Short, Packey & Holt 1995, NREL/TP-462-5173).
    """
    energy = net_present_value(rate, np.concatenate([[0.0], yearly_energy]))
    costs = net_present_value(rate, np.concatenate([[capital], yearly_costs]))
    return costs / energy if energy > 0 else None


def internal_rate_of_return(flows: Sequence[float] | Floats) -> float | None:
    """The rate at which the net present value is 0; None where there is none.

    Looked for between -99 % and 1000 % a year. Of several, the smallest that is not negative, else
    the largest of the negative ones.
    """
    from scipy.optimize import brentq

    nodes = np.concatenate(
        [np.linspace(RATES[0], 0, RATE_NODES), np.geomspace(1e-4, RATES[1], RATE_NODES)]
    )
    years = np.arange(len(flows))
    values = (np.asarray(flows) / (1 + nodes[:, None]) ** years).sum(axis=1)
    found = [float(node) for node, value in zip(nodes, values, strict=True) if value == 0]
    if len(found) == nodes.size:  # nothing is paid or earned
        return None
    for place in np.flatnonzero(values[:-1] * values[1:] < 0):
        low, high = float(nodes[place]), float(nodes[place + 1])
        found.append(
            float(brentq(lambda rate: net_present_value(float(rate), flows), low, high, xtol=1e-14))
        )
    gains = [rate for rate in found if rate >= 0]
    return min(gains) if gains else max(found, default=None)
