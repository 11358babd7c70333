"""A plant on its waterway: what it gives at a state of the river and a total discharge."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from hydroyield.hydraulics import HeadState
from hydroyield.powerhouse.dispatch import DispatchTable
from hydroyield.powerhouse.grid import HeadLines
from hydroyield.powerhouse.solving import fixed_point
from hydroyield.powerhouse.units import Plant, UnitGroup

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]
Bools = NDArray[np.bool_]


class Dispatcher:
    """A plant on its waterway: tables for every set of units that can run.

    seen : (lines, m) net heads like those that will occur, the highest among them [m]
    """

    def __init__(self, plant: Plant, seen: Floats) -> None:
        self.plant = plant
        self.lines = HeadLines.of(plant.groups)
        self._seen = seen
        self._tables: dict[int, DispatchTable] = {}
        self._every_group = 2 ** len(plant.groups) - 1

    def _table(self, running: int) -> tuple[DispatchTable, list[int]]:
        """Table of the groups in the bit mask `running`, and the lines they use."""
        groups = [g for n, g in enumerate(self.plant.groups) if running >> n & 1]
        lines = HeadLines.of(tuple(groups))
        used = [self.lines.lower_ends.index(end) for end in lines.lower_ends]
        if running not in self._tables:
            part = replace(self.plant, groups=tuple(groups))
            self._tables[running] = DispatchTable(part, lines, self._seen[used])
        return self._tables[running], used

    @property
    def groups_on_lines(self) -> list[tuple[UnitGroup, int]]:
        """Each group with the head line it works on."""
        return list(zip(self.plant.groups, self.lines.line_of_group, strict=True))

    @property
    def units_on_lines(self) -> list[tuple[UnitGroup, int]]:
        """The same for each unit, in the order of the groups."""
        return [pair for pair in self.groups_on_lines for _ in range(pair[0].count)]

    def heads(self, state: HeadState, turbined: Floats) -> Floats:
        """(lines, n) net heads [m], 0 where the losses take all."""
        net = [state.net(turbined, end) for end in self.lines.lower_ends]
        return np.maximum(0.0, np.stack(net))

    def admissible(self, state: HeadState, turbined: Floats, heads: Floats) -> Ints:
        """(n,) bit mask of the groups that head and tailwater allow to run."""
        mask = np.zeros(turbined.shape, dtype=np.int64)
        for number, (group, line) in enumerate(self.groups_on_lines):
            # head found by a root search may miss the limit by its tolerance
            enough = heads[line] >= self.plant.minimum_net_head - 1e-9
            runs = enough & (heads[line] > 0)
            if group.axis_level is not None:
                runs &= state.tailwater(turbined) <= group.axis_level
            mask |= runs.astype(np.int64) << number
        return mask

    def _by_mask(
        self,
        state: HeadState,
        turbined: Floats,
        read: Callable[[DispatchTable, Floats, Floats], Floats],
        otherwise: float,
    ) -> Floats:
        """Read the table of whichever groups can run at each state."""
        heads = self.heads(state, turbined)
        mask = self.admissible(state, turbined, heads)
        result = np.full(turbined.shape, otherwise)
        for running in np.unique(mask):
            if running:
                table, used = self._table(int(running))
                if (mask == running).all():
                    return read(table, heads[used], turbined)
                chosen = np.flatnonzero(mask == running)
                result[chosen] = read(table, heads[used][:, chosen], turbined[chosen])
        return result

    def output(self, state: HeadState, turbined: Floats) -> Floats:
        """(n,) largest output with exactly this total [W]; 0 at a stand, -inf where impossible."""
        output = self._by_mask(state, turbined, DispatchTable.output, -np.inf)
        return np.where(turbined > 0, output, 0.0)

    def fully_open(self, state: HeadState, turbined: Floats) -> Floats:
        """(n,) discharge of all units fully open at the heads of `turbined` [m3/s]."""
        table, used = self._table(self._every_group)
        return table.grid.full_discharge(self.heads(state, turbined)[used])

    def discharge_at_capacity(self, state: HeadState, turbined: Floats, running: Ints) -> Floats:
        """(n,) least total at which all running units give their capacity, inf where they cannot.

        turbined : (n,) for the heads [m3/s]
        running : (n, groups) 1 for the groups that run
        """
        heads = self.heads(state, turbined)
        total = np.zeros(turbined.size)
        for number, (group, line) in enumerate(self.groups_on_lines):
            full = group.full_discharge(heads[line])
            water = self.plant.water_needed(group, group.most_output(heads[line]))
            needed = water / np.maximum(full * heads[line], 1e-300)
            share = group.share_giving(needed)
            runs = running[:, number] == 1
            total[runs] += (
                group.count
                * np.where(full > 0, share, np.inf)[runs]
                * np.maximum(full, 1e-300)[runs]
            )
        return total

    def can_start(self, state: HeadState, turbined: Floats, reach: Floats) -> Bools:
        """(n,) whether a unit that can run at `turbined` has water enough to start.

        turbined : (n,) at which the plant would run [m3/s]
        reach : (n,) the most that it could take [m3/s]
        """
        mask = self.admissible(state, turbined, self.heads(state, turbined))
        heads = self.heads(state, reach)
        found = np.zeros(turbined.shape, dtype=np.bool_)
        for number, (group, line) in enumerate(self.groups_on_lines):
            share = max(group.starting_share, group.minimum_share)
            enough = reach >= share * group.full_discharge(heads[line]) * (1 - 1e-9)
            found |= enough & (mask >> number & 1 == 1)
        return found

    def capacity(self, state: HeadState, turbined: Floats, running: Ints) -> Floats:
        """(n,) the most that the running units may give together at the heads of `turbined` [W].

        turbined : (n,) for the heads [m3/s]
        running : (n, groups) 1 for the groups that run
        """
        if not self.limited_by_head:
            of_groups = [group.count * group.unit_capacity for group in self.plant.groups]
            return np.asarray((running * np.array(of_groups)).sum(axis=1))
        heads = self.heads(state, turbined)
        total = np.zeros(turbined.size)
        for number, (group, line) in enumerate(self.groups_on_lines):
            total += running[:, number] * group.count * group.most_output(heads[line])
        return total

    @property
    def limited_by_head(self) -> bool:
        """Whether what a unit may give changes with the head."""
        return any(group.output_limit is not None for group in self.plant.groups)

    def unit_discharges(self, state: HeadState, turbined: Floats) -> Floats:
        """(units, n) discharge of each unit [m3/s], units in the order of the groups.

        Found to one column of the table, and scaled to add up to `turbined`.
        """
        heads = self.heads(state, turbined)
        mask = self.admissible(state, turbined, heads)
        group_of_unit = np.repeat(
            np.arange(len(self.plant.groups)), [g.count for g in self.plant.groups]
        )
        discharges = np.zeros((group_of_unit.size, turbined.size))
        for running in np.unique(mask[turbined > 0]):
            chosen = np.flatnonzero((mask == running) & (turbined > 0))
            table, used = self._table(int(running))
            own = heads[used][:, chosen]
            units = np.flatnonzero(running >> group_of_unit & 1)
            full = table.grid.full_discharges(own)[
                np.unique(group_of_unit[units], return_inverse=True)[1]
            ]
            found = table.unit_shares(own, turbined[chosen]) * full
            total = found.sum(axis=0)
            scale = np.divide(turbined[chosen], total, out=np.ones_like(total), where=total > 0)
            discharges[np.ix_(units, chosen)] = found * scale
        return discharges

    @property
    def on_two_lines(self) -> bool:
        """Whether some heads end at the tailwater and some at an axis; tables are coarser then."""
        return len(self.lines.free) > 1

    def output_of_best_sharing(self, state: HeadState, turbined: Floats) -> Floats:
        """(n,) output [W] worked out unit by unit for the sharing that the table holds best."""
        heads = self.heads(state, turbined)
        discharges = self.unit_discharges(state, turbined)
        output = np.zeros(turbined.size)
        for (group, line), discharge in zip(self.units_on_lines, discharges, strict=True):
            full = np.maximum(group.full_discharge(heads[line]), 1e-300)
            share = np.clip(discharge / full, group.minimum_share, 1.0)
            water = discharge * heads[line] * group.efficiency(share, heads[line])
            power = self.plant.terminal_output(group, water)
            output += np.minimum(power, group.most_output(heads[line], share))
        return output

    def shaft_power(self, state: HeadState, turbined: Floats, output: Floats) -> Floats:
        """(n,) power at the turbine shafts [W] that gives `output` (n,) at the terminals [W].

        Where the generators' efficiency depends on load, that of each unit in the sharing that the
        table holds best.
        """
        electrical = self.plant.electrical
        if electrical.load_curve is None:
            return output / electrical.at_terminals
        heads = self.heads(state, turbined)
        given, taken = np.zeros(turbined.size), np.zeros(turbined.size)
        discharges = self.unit_discharges(state, turbined)
        for (group, line), discharge in zip(self.units_on_lines, discharges, strict=True):
            full = np.maximum(group.full_discharge(heads[line]), 1e-300)
            share = np.clip(discharge / full, group.minimum_share, 1.0)
            water = discharge * heads[line] * group.efficiency(share, heads[line])
            most = group.most_output(heads[line], share)
            own = np.minimum(self.plant.terminal_output(group, water), most)
            given += own
            taken += electrical.load_curve.shaft(own, group.unit_capacity) / electrical.drive
        full_load = 1 / electrical.at_terminals
        ratio = np.divide(taken, given, out=np.full(given.size, full_load), where=given > 0)
        return np.asarray(output * ratio)

    def settle(self, state: HeadState, limit: Floats) -> Floats:
        """(n,) discharge at or below `limit` with the largest output at the head of the moment."""
        share = self._by_mask(state, limit, DispatchTable.best_share_below, 0.0)

        def at_share(turbined: Floats) -> Floats:
            return share * self._by_mask(state, turbined, _open_discharge, 0.0)

        turbined = at_share(limit)
        if not state.depends_on_turbines:
            return turbined
        return fixed_point(at_share, turbined)


def _open_discharge(table: DispatchTable, heads: Floats, _: Floats) -> Floats:
    return table.grid.full_discharge(heads)
