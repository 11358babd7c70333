"""Units out of service: the chance of every state of the plant, month by month.

Planned days take one unit after another out, on days spread evenly over the months named, or in
windows of the year, which count as days of their months. Forced
outages strike every unit that is not planned out with the same chance, each by itself (binomial
states); what units share, such as the intake or the line, takes out all of them at once.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from itertools import product
from math import comb

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]
Counts = tuple[int, ...]

SHORTEST = (31, 28, 31, 30, 31, 30, 31, 31, 30, 31, 30, 31)  # d, of each month
NEGLIGIBLE = 1e-12  # chance of a state that is not computed


@dataclass(frozen=True)
class Spread:
    """Days a year, spread evenly over some calendar months.

    days : [d]
    months : 1 to 12
    """

    days: float
    months: tuple[int, ...]

    def chance(self, days_of_month: Floats) -> Floats:
        """(y, 12) chance that a day is one of them.

        days_of_month : (y, 12) length of each month, January first [d]
        """
        named = np.isin(np.arange(1, 13), self.months)
        spread = (days_of_month * named).sum(axis=1, keepdims=True)
        return np.asarray(np.where(named, self.days / np.maximum(spread, 1e-9), 0.0))

    @property
    def by_month(self) -> Floats:
        """(12,) days in each month of a year of 365 days, January first [d]."""
        shortest = np.array([SHORTEST], dtype=np.float64)
        return np.asarray((self.chance(shortest) * shortest)[0])


@dataclass(frozen=True)
class Dated:
    """Windows of the year, the same every year; they count as days of their months.

    windows : (first month, first day), (last month, last day) of each, both included, over the turn
        of the year where the last lies before the first
    turns : units that take turns, each out of service for an equal part of the windows
    """

    windows: tuple[tuple[tuple[int, int], tuple[int, int]], ...]
    turns: int = 1

    def chance(self, days_of_month: Floats) -> Floats:
        """(y, 12) chance that a day is one of them and that it is a given unit's turn.

        days_of_month : (y, 12) length of each month, January first [d]
        """
        found = np.zeros(days_of_month.shape)
        for month, first, last in self._parts():
            end = np.minimum(days_of_month[:, month - 1], last)
            found[:, month - 1] += np.maximum(0.0, end - first + 1)
        return found / days_of_month / self.turns

    def _parts(self) -> Iterator[tuple[int, int, float]]:
        """(month, first day, last day) of the windows cut at the turns of months."""
        for (month, day), (last_month, last_day) in self.windows:
            while month != last_month or day > last_day:
                yield month, day, np.inf
                month, day = month % 12 + 1, 1
            yield month, day, last_day

    @property
    def by_month(self) -> Floats:
        """(12,) days of one unit in each month of a year of 365 days, January first [d]."""
        shortest = np.array([SHORTEST], dtype=np.float64)
        return np.asarray((self.chance(shortest) * shortest)[0])

    @property
    def days(self) -> float:
        """Days of one unit in a year of 365 days [d]."""
        return float(self.by_month.sum())

    @property
    def months(self) -> tuple[int, ...]:
        """Calendar months that they touch."""
        return tuple(int(month) + 1 for month in np.flatnonzero(self.by_month > 0))


@dataclass(frozen=True)
class Outages:
    """When units are out of service.

    planned : days of each unit; None without
    standstill : days on which the whole plant stands, as for ice or flushing; None without
    forced_rate : chance that a unit not planned out is down
    common_rate : chance that what all units share is down
    closed : calendar months in which the plant does not run
    """

    planned: Spread | Dated | None = None
    standstill: Spread | Dated | None = None
    forced_rate: float = 0.0
    common_rate: float = 0.0
    closed: tuple[int, ...] = ()

    @property
    def is_none(self) -> bool:
        """Whether every unit is always available."""
        rates = self.forced_rate or self.common_rate
        return not (self.planned or self.standstill or rates or self.closed)

    def states(self, counts: Counts, days_of_month: Floats) -> list[tuple[Counts, Floats]]:
        """Every state of the plant with its chance; the first is that with all units.

        counts : units of each group
        days_of_month : (y, 12) length of each month, January first [d]

        Returns (units available of each group, chance (y, 12)); the chances of a month add up to 1.
        """
        whole = np.zeros(days_of_month.shape)
        planned = whole if self.planned is None else self.planned.chance(days_of_month)
        standing = whole if self.standstill is None else self.standstill.chance(days_of_month)
        running = (1 - self.common_rate) * (1 - standing)
        running = np.where(np.isin(np.arange(1, 13), self.closed), 0.0, running)
        chances = dict.fromkeys(product(*(range(n, -1, -1) for n in counts)), whole)
        for left, chance in self._planned_states(counts, planned):
            for state in product(*(range(n, -1, -1) for n in left)):
                forced = _binomial(left, state, self.forced_rate)
                chances[state] = chances[state] + chance * forced * running
        nothing = (0,) * len(counts)
        chances[nothing] = chances[nothing] + 1 - running
        return [
            (state, chance)
            for state, chance in chances.items()
            if state == counts or chance.max() > NEGLIGIBLE
        ]

    def _planned_states(self, counts: Counts, one: Floats) -> Iterator[tuple[Counts, Floats]]:
        """Units not planned out, and the chance of that; `one` is that of a single unit."""
        yield counts, 1 - sum(counts) * one
        for group, count in enumerate(counts):
            left = (*counts[:group], count - 1, *counts[group + 1 :])
            yield left, count * one


def _binomial(units: Counts, up: Counts, rate: float) -> float:
    """Chance that so many of each group's units are up."""
    chance = 1.0
    for total, left in zip(units, up, strict=True):
        chance *= comb(total, left) * (1 - rate) ** left * rate ** (total - left)
    return chance
