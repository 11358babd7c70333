"""What must stay in the river and what others take: from river discharge to offered water.

A year is cut into seasons: sets of calendar months in which the same rules hold. Every rule is
reduced to one of two forms, a discharge by season or a share of the inflow, so that what follows
knows nothing of permits.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]


ALL_YEAR = tuple(range(1, 13))


@dataclass(frozen=True)
class InflowShare:
    """Everything up to `above` stays in the river, and `share` of what exceeds it.

    share : 0 to 1
    above : [m3/s]
    most_taken : what may be taken at the most, whatever the inflow [m3/s]
    months : calendar months in which the rule holds
    """

    share: float
    above: float
    most_taken: float = np.inf
    months: tuple[int, ...] = ALL_YEAR

    def kept(self, discharge: Floats) -> Floats:
        """(n,) what stays in the river of an inflow (n,) [m3/s]."""
        low = np.minimum(discharge, self.above)
        return np.maximum(low + self.share * (discharge - low), discharge - self.most_taken)


@dataclass(frozen=True)
class InflowSteps:
    """A discharge stays in the river that goes up in steps with the inflow.

    inflows : from which each step holds, rising, the first 0 [m3/s]
    flows : that stay in the river [m3/s]
    months : calendar months in which the rule holds
    """

    inflows: tuple[float, ...]
    flows: tuple[float, ...]
    months: tuple[int, ...] = ALL_YEAR

    def kept(self, discharge: Floats) -> Floats:
        """(n,) what stays in the river of an inflow (n,) [m3/s]."""
        step = np.searchsorted(self.inflows, discharge, side="right") - 1
        return np.asarray(np.array(self.flows)[np.maximum(step, 0)])


InflowRule = InflowShare | InflowSteps


@dataclass(frozen=True)
class Abstraction:
    """Water that does not reach the turbines.

    discharge : [m3/s]
    months : calendar months in which it is taken
    counts_as_environmental_flow : it is part of what must stay in the river, as a fish pass is
    returns : it is back in the river at the tailwater
    """

    name: str
    discharge: float
    months: tuple[int, ...] = tuple(range(1, 13))
    counts_as_environmental_flow: bool = False
    returns: bool = True


@dataclass(frozen=True)
class WaterRules:
    """All rules of a site, by season.

    season_of_month : (12,) season of each calendar month, January first
    fixed : (s,) largest, or sum, of the rules that state a discharge [m3/s]
    inflow_rules : the rules that depend on the inflow
    in_force : (inflow rules, s) whether each holds in a season
    abstracted : (s,) all abstractions [m3/s]
    counted : (s,) those that count as environmental flow [m3/s]
    unreturned : (s,) those that do not come back above the tailwater [m3/s]
    summed : rules that hold at the same time add up; else the largest of them applies
    """

    season_of_month: Ints
    fixed: Floats
    inflow_rules: tuple[InflowRule, ...]
    in_force: NDArray[np.bool_]
    abstracted: Floats
    counted: Floats
    unreturned: Floats
    summed: bool = False

    @classmethod
    def by_month(
        cls,
        fixed: Sequence[Sequence[float]] = (),
        inflow_rules: Sequence[InflowRule] = (),
        abstractions: Sequence[Abstraction] = (),
        also: Sequence[Sequence[float]] = (),
        summed: bool = False,
    ) -> WaterRules:
        """Merge the months in which the same rules hold into seasons.

        fixed : for each rule that states a discharge its twelve values, January first [m3/s]
        also : twelve values each of whatever else differs by month and so divides seasons
        summed : rules add up, and not the largest applies
        """
        holds = np.array([np.isin(ALL_YEAR, rule.months) for rule in inflow_rules])
        holds = holds.reshape(len(inflow_rules), 12)
        table = np.zeros((12, 4 + len(holds) + len(also)))
        table[:, 4 : 4 + len(holds)] = holds.T
        table[:, 4 + len(holds) :] = np.asarray(also).reshape(len(also), 12).T
        together = np.sum if summed else np.max
        table[:, 0] = together(np.asarray([[0.0] * 12, *fixed]), axis=0)
        for taken in abstractions:
            for month in taken.months:
                table[month - 1, 1] += taken.discharge
                table[month - 1, 2] += taken.discharge * taken.counts_as_environmental_flow
                table[month - 1, 3] += taken.discharge * (not taken.returns)
        rows, season = np.unique(table, axis=0, return_inverse=True)
        in_force = rows[:, 4 : 4 + len(holds)].T > 0
        flow, abstracted, counted, unreturned = rows[:, :4].T
        rules = tuple(inflow_rules)
        return cls(
            season.reshape(12), flow, rules, in_force, abstracted, counted, unreturned, summed
        )

    @property
    def season_count(self) -> int:
        return self.fixed.size

    @property
    def month_of_season(self) -> list[int]:
        """One calendar month of each season, 1 to 12."""
        months = self.season_of_month.tolist()
        return [months.index(season) + 1 for season in range(self.season_count)]

    def environmental_flow(self, discharge: Floats, season: Ints) -> Floats:
        """Discharge that must stay in the river, never more than the inflow [m3/s].

        discharge, season : arrays of one shape; discharge in [m3/s]
        """
        return np.minimum(discharge, self._asked(discharge, season))

    def _asked(self, discharge: Floats, season: Ints) -> Floats:
        """What the rules ask for, which may be more than the inflow [m3/s]."""
        flow = self.fixed[season]
        for rule, in_force in zip(self.inflow_rules, self.in_force, strict=True):
            own = rule.kept(discharge)
            kept = flow + own if self.summed else np.maximum(flow, own)
            flow = kept if in_force.all() else np.where(in_force[season], kept, flow)
        return flow

    def offered(self, discharge: Floats, season: Ints) -> Floats:
        """Water offered to the turbines [m3/s].

        discharge, season : arrays of one shape; discharge in [m3/s]
        """
        release = np.maximum(0.0, self.environmental_flow(discharge, season) - self.counted[season])
        return np.maximum(0.0, discharge - release - self.abstracted[season])

    def reserved_for_river(self, discharge: Floats, season: Ints) -> Floats:
        """What the river keeps, counted abstractions included: min(Q, max(EF, counted)) [m3/s]."""
        flow = self.environmental_flow(discharge, season)
        return np.minimum(discharge, np.maximum(flow, self.counted[season]))

    def smallest_discharge_offering(self, wanted: float, highest: float) -> tuple[float, int]:
        """Smallest river discharge of any season that offers `wanted`.

        wanted : [m3/s]
        highest : largest river discharge that occurs [m3/s]

        Returns the discharge [m3/s] and its season. Where no season offers that much up to
        `highest`, the state in which the most is offered.
        """
        seasons = np.arange(self.season_count)
        low, high = np.zeros(seasons.size), np.full(seasons.size, highest)
        if self.summed or any(isinstance(rule, InflowSteps) for rule in self.inflow_rules):
            low, high = self._first_bracket(wanted, highest)
        most = self.offered(high, seasons)
        if most.max() < wanted:
            return highest, int(most.argmax())
        for _ in range(60):  # between these, offered water never falls with the river's discharge
            middle = 0.5 * (low + high)
            reached = self.offered(middle, seasons) >= wanted
            low, high = np.where(reached, low, middle), np.where(reached, middle, high)
            if np.all(high - low <= 1e-14 * highest):
                break
        high[most < wanted] = np.inf
        return float(high.min()), int(high.argmin())

    def _first_bracket(self, wanted: float, highest: float) -> tuple[Floats, Floats]:
        """(s,) discharges below and at which `wanted` is first offered, where it may fall back.

        Steps fall back, and so do shares that add up to more than the whole. Where a season never
        offers it, both are `highest`.
        """
        edges = self._edges(highest)
        even = np.sort(np.concatenate([[0.0, highest], edges, np.nextafter(edges, 0.0)]))
        low, high = np.full(self.season_count, highest), np.full(self.season_count, highest)
        for season in range(self.season_count):
            tried = np.unique(np.concatenate([even, self._where_counted(even, season)]))
            reached = self.offered(tried, np.full(tried.size, season)) >= wanted
            if reached.any():
                first = int(reached.argmax())
                low[season], high[season] = tried[max(first - 1, 0)], tried[first]
        return low, high

    def _edges(self, highest: float) -> Floats:
        """Discharges up to `highest` at which a rule steps or bends [m3/s]."""
        found: list[float] = []
        for rule in self.inflow_rules:
            if isinstance(rule, InflowSteps):
                found += rule.inflows
            else:
                found.append(rule.above)
                if rule.share < 1:
                    found.append(rule.above + rule.most_taken / (1 - rule.share))
        return np.unique([q for q in found if 0 < q <= highest])

    def _where_counted(self, edges: Floats, season: int) -> Floats:
        """Discharges between rising `edges` [m3/s] at which the rules ask for what counts already.

        From there on more is released; between edges what is asked for is straight.
        """
        over = self._asked(edges, np.full(edges.size, season)) - self.counted[season]
        left, right = over[:-1], over[1:]
        crosses = np.flatnonzero(left * right < 0)
        part = left[crosses] / (left[crosses] - right[crosses])
        return np.asarray(edges[crosses] + part * np.diff(edges)[crosses])
