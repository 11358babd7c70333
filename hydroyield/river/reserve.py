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


@dataclass(frozen=True)
class InflowShare:
    """Everything up to `above` stays in the river, and `share` of what exceeds it.

    share : 0 to 1
    above : [m3/s]
    """

    share: float
    above: float


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
    fixed : (s,) largest of the rules that state a discharge [m3/s]
    shares : the rules that state a share of the inflow
    abstracted : (s,) all abstractions [m3/s]
    counted : (s,) those that count as environmental flow [m3/s]
    unreturned : (s,) those that do not come back above the tailwater [m3/s]
    """

    season_of_month: Ints
    fixed: Floats
    shares: tuple[InflowShare, ...]
    abstracted: Floats
    counted: Floats
    unreturned: Floats

    @classmethod
    def by_month(
        cls,
        fixed: Sequence[Sequence[float]] = (),
        shares: Sequence[InflowShare] = (),
        abstractions: Sequence[Abstraction] = (),
        also: Sequence[Sequence[float]] = (),
    ) -> WaterRules:
        """Merge the months in which the same rules hold into seasons.

        fixed : for each rule that states a discharge its twelve values, January first [m3/s]
        also : twelve values each of whatever else differs by month and so divides seasons
        """
        table = np.zeros((12, 4 + len(also)))
        table[:, 4:] = np.asarray(also).reshape(len(also), 12).T
        table[:, 0] = np.max(np.asarray([[0.0] * 12, *fixed]), axis=0)
        for taken in abstractions:
            for month in taken.months:
                table[month - 1, 1] += taken.discharge
                table[month - 1, 2] += taken.discharge * taken.counts_as_environmental_flow
                table[month - 1, 3] += taken.discharge * (not taken.returns)
        rows, season = np.unique(table, axis=0, return_inverse=True)
        return cls(season.reshape(12), rows[:, 0], tuple(shares), *rows[:, 1:4].T)

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
        flow = self.fixed[season]
        for rule in self.shares:
            kept = np.minimum(discharge, rule.above)
            flow = np.maximum(flow, kept + rule.share * (discharge - kept))
        return np.minimum(discharge, flow)

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
        most = self.offered(high, seasons)
        if most.max() < wanted:
            return highest, int(most.argmax())
        for _ in range(60):  # offered water never falls with the river's discharge
            middle = 0.5 * (low + high)
            reached = self.offered(middle, seasons) >= wanted
            low, high = np.where(reached, low, middle), np.where(reached, middle, high)
            if np.all(high - low <= 1e-14 * highest):
                break
        high[most < wanted] = np.inf
        return float(high.min()), int(high.argmin())
