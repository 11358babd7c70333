"""Options held against each other: marginal energy, the frontier, and the best by several aims."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from hydroyield.options.option import Option
from hydroyield.quantities import W_PER_KW, WH_PER_MWH

Floats = NDArray[np.float64]
Bools = NDArray[np.bool_]

ROUNDING = 1e-9  # share by which a number may miss a limit that it is meant to meet


def marginal_energy(options: Sequence[Option]) -> list[float | None]:
    """Energy that each further kW brings, against the next smaller option of the same family.

    options : of any families, see `Option.family`

    Returns kWh a year for each kW [kWh/kW]; None for the smallest of a family, and where an option
    has no more capacity than the one before.
    """
    families: dict[object, list[int]] = defaultdict(list)
    for index, option in enumerate(options):
        families[option.family].append(index)
    found: list[float | None] = [None] * len(options)
    for members in families.values():
        rising = sorted(members, key=lambda index: options[index].installed_capacity)
        for before, after in pairwise(rising):
            smaller, larger = options[before], options[after]
            added = larger.installed_capacity - smaller.installed_capacity
            if added > 0:
                gained = larger.mean_annual_energy - smaller.mean_annual_energy
                found[after] = gained * WH_PER_MWH / W_PER_KW / added
    return found


def frontier(cost: Floats, gain: Floats) -> Bools:
    """Which options no other beats, by giving as much for less, or more for as little.

    cost : (n,) what should be small, such as installed capacity
    gain : (n,) what should be large, such as energy

    Options that are equal in both beat each other not. Costs that agree to nine digits are equal:
    the same design discharge gives the same capacity but for rounding.
    """
    cost = np.array([float(f"{each:.9g}") for each in cost])
    order = np.lexsort((-gain, cost))
    best = np.maximum.accumulate(np.concatenate([[-np.inf], gain[order]]))[:-1]
    first_of_cost = np.concatenate([[True], np.diff(cost[order]) > 0])
    top_of_cost = np.maximum.accumulate(np.where(first_of_cost, np.arange(order.size), 0))
    largest = gain[order][top_of_cost]  # of those with the same cost
    before = best[top_of_cost]  # of all that cost less
    found = np.zeros(order.size, dtype=np.bool_)
    found[order] = (gain[order] == largest) & (largest > before)
    return found


@dataclass(frozen=True)
class Limits:
    """What a chosen option must keep.

    minimum_capacity_factor : None without
    maximum_capacity : [kW]; None without
    """

    minimum_capacity_factor: float | None = None
    maximum_capacity: float | None = None

    def allow(self, option: Option) -> bool:
        """Whether an option may be chosen."""
        least, most = self.minimum_capacity_factor, self.maximum_capacity
        return (least is None or option.capacity_factor >= least * (1 - ROUNDING)) and (
            most is None or option.installed_capacity <= most * (1 + ROUNDING)
        )


@dataclass(frozen=True)
class Aim:
    """What an option may be chosen for.

    name : in results, such as "largest_energy"
    words : for people
    worth : of an option, the larger the better; None where it has none
    """

    name: str
    words: str
    worth: Callable[[Option], float | None]


@dataclass(frozen=True)
class Choice:
    """The best option by an aim.

    aim : what it is best by
    option : None where the limits allow none, or none has a worth
    """

    aim: Aim
    option: Option | None


def energy_aims(wanted_capacity_factor: float | None) -> list[Aim]:
    """Aims that need no money.

    wanted_capacity_factor : that a further kW should reach; None without

    The energy less that of all kW at the wanted capacity factor is largest where the next kW just
    reaches it.
    """
    aims = [
        Aim("largest_energy", "the most energy", lambda option: option.mean_annual_energy),
    ]
    if wanted_capacity_factor is not None:
        wanted = wanted_capacity_factor

        def above(option: Option) -> float:
            wanted_energy = wanted * option.installed_capacity * option.hours_per_year
            return option.mean_annual_energy - wanted_energy * W_PER_KW / WH_PER_MWH

        words = (
            "the most energy as long as a further kW reaches a capacity factor of "
            f"{100 * wanted:.0f} %"
        )
        aims.append(Aim("energy_above_wanted_capacity_factor", words, above))
    return aims


def choose(aim: Aim, options: Sequence[Option], limits: Limits) -> Choice:
    """The best of the options that keep the limits; the first of equals."""
    allowed = [option for option in options if limits.allow(option)]
    known = [(worth, option) for option in allowed if (worth := aim.worth(option)) is not None]
    if not known:
        return Choice(aim, None)
    best = max(worth for worth, _ in known)
    return Choice(aim, next(option for worth, option in known if worth == best))
