"""A described site in numbers: its river, its rules, its levels and its plant."""

from __future__ import annotations

from dataclasses import dataclass, replace
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from hydroyield.energy.starting import waiting_days
from hydroyield.hydraulics import Heads, HeadState
from hydroyield.powerhouse import Dispatcher, HeadLines, Operation, Outages, Plant, operate
from hydroyield.river import Calendar, WaterRules, distinct_states, quantile

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]
Bools = NDArray[np.bool_]

ALWAYS = Outages()


@dataclass(frozen=True)
class Scheme:
    """All that energy depends on.

    dates : (n,) every day of the record, datetime64[D]; None where only the duration curve of the
        river is known
    discharge : (n,) river discharge at the site, nan where missing [m3/s]; without dates the
        values at even steps of the duration curve
    rules : what stays in the river or is taken by others
    heads : levels and losses
    plant : the machines
    year_start_month : first month of the hydrological year
    minimum_month_coverage : share of the days of a month that need a value
    outages : when units are out of service
    filled : (n,) days whose discharge was estimated from a reference; None where none was
    """

    dates: NDArray[np.datetime64] | None
    discharge: Floats
    rules: WaterRules
    heads: Heads
    plant: Plant
    year_start_month: int = 10
    minimum_month_coverage: float = 0.9
    filled: NDArray[np.bool_] | None = None
    outages: Outages = ALWAYS

    def with_units(self, counts: tuple[int, ...]) -> Scheme:
        """The same scheme with so many units of each group in service, at least one in all."""
        if counts == tuple(group.count for group in self.plant.groups):
            return self
        groups = tuple(
            replace(group, count=count)
            for group, count in zip(self.plant.groups, counts, strict=True)
            if count
        )
        return replace(self, plant=replace(self.plant, groups=groups))

    @cached_property
    def valid_discharge(self) -> Floats:
        """Discharge of the days with a value [m3/s]."""
        return self.discharge[~np.isnan(self.discharge)]

    def head_state(self, discharge: Floats, season: Ints) -> HeadState:
        """Levels at states of the river, both (n,)."""
        return self.heads.at(
            discharge, self.rules.abstracted[season], self.rules.unreturned[season], season
        )

    @cached_property
    def dispatcher(self) -> Dispatcher:
        """The plant with its tables, laid for the heads that occur on the record."""
        season = np.arange(self.rules.season_count)
        reach = np.concatenate(
            [
                np.linspace(0, self.valid_discharge.max(), 200),
                quantile(self.valid_discharge, np.linspace(0, 100, 400)),
            ]
        )
        river, season = np.tile(reach, season.size), np.repeat(season, reach.size)
        state = self.head_state(river, season)
        standing = np.zeros(state.size)
        running = np.minimum(self.rules.offered(river, season), self.plant.rated_discharge)
        plant = self.plant.before_branches()
        lines = HeadLines.of(plant.groups)
        seen = [
            np.concatenate([state.net(turbined, end) for turbined in (standing, running)])
            for end in lines.lower_ends
        ]
        return Dispatcher(plant, np.maximum(0.0, np.stack(seen)))

    @property
    def waits_to_start(self) -> bool:
        """Whether a plant that stands needs more water to start than to run on."""
        return any(group.starting_share > group.minimum_share for group in self.plant.groups)

    @cached_property
    def waiting(self) -> Bools | None:
        """(n,) days on which the plant, all units in service, stands and waits for water to start.

        None where it never does, or where days are not known. A day without a value, one on which
        it cannot run and one of a month in which it is closed leave it standing.
        """
        if self.dates is None or not self.waits_to_start:
            return None
        month = Calendar.of(self.dates, self.year_start_month).month
        known = ~np.isnan(self.discharge) & ~np.isin(month, self.outages.closed)
        river, season, place = distinct_states(
            self.discharge[known], self.rules.season_of_month[month[known] - 1]
        )
        run = self.operate(river, season)
        reach = np.minimum(run.offered, run.fully_open)
        state = self.head_state(river, season)
        enough = self.dispatcher.can_start(state, run.turbined, reach)
        runs, starts = np.zeros((2, known.size), dtype=np.bool_)
        runs[known], starts[known] = (run.turbined > 0)[place], enough[place]
        return waiting_days(runs, starts)

    def operate(self, discharge: Floats, season: Ints, waiting: Bools | None = None) -> Operation:
        """How the plant runs at river discharges [m3/s] and seasons, both (n,).

        waiting : (n,) it stands and waits for water to start; None where it does not
        """
        limit = self.plant.shutdown_above
        stopped = np.zeros(discharge.shape, bool) if limit is None else discharge > limit
        offered = self.rules.offered(discharge, season)
        state = self.head_state(discharge, season)
        run = operate(self.dispatcher, state, offered, stopped, waiting)
        lost = self._lost_in_branches(state, run.turbined)
        return run if lost is None else replace(run, net_head=run.net_head - lost)

    def _lost_in_branches(self, state: HeadState, turbined: Floats) -> Floats | None:
        """(n,) head lost on the ways of single units, weighted by their discharge [m]."""
        branches = [group.branch for group in self.plant.groups for _ in range(group.count)]
        if not any(branches):
            return None
        through = self.dispatcher.unit_discharges(state, turbined)
        lost = (np.array(branches)[:, None] * through**3).sum(axis=0)
        heads = np.zeros(turbined.size)
        return np.asarray(np.divide(lost, turbined, out=heads, where=turbined > 0))

    def net_power(self, output: Floats) -> Floats:
        """Power delivered after transformer, own use and export limit [W].

        What a standing plant takes from the grid is negative.
        """
        electrical, runs = self.plant.electrical, output > 0
        after_own_use = electrical.behind_transformer(output) - electrical.own_use * runs
        limit = np.inf if electrical.export_limit is None else electrical.export_limit
        delivered = np.minimum(np.maximum(0.0, after_own_use), limit)
        return np.where(runs, delivered, -electrical.imported)
