"""How a plant runs at given states of the river: the discharge that gives the largest output.

For each state a few candidates of the total turbine discharge are evaluated exactly, and the best
is kept, so that an output is never larger than what the plant can reach:

- all the water that is offered, or full opening, whichever is less;
- the best discharge below that at the head of the moment, where a total cannot be passed exactly
  or a smaller one gives more;
- where the head falls with the turbine discharge, the best of a coarse search along that fall, and
  the largest discharge that keeps the minimum head;
- where the capacity limits, the least discharge that reaches it.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from hydroyield.hydraulics import HeadState
from hydroyield.powerhouse.dispatch import COLUMNS_PER_UNIT, DispatchTable, HeadLines
from hydroyield.powerhouse.units import Plant

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]
Bools = NDArray[np.bool_]

SEARCH_STATES = 384  # states of the river at which the coarse search is done
SEARCH_STEPS = 96  # discharges tried at each
REFINEMENTS = 4  # of the grid around the best of these
EQUAL_OUTPUT = 1e-5  # outputs closer than this share count as equal; the tables are no finer
LITTLE_LESS = 1e-3  # share of the discharge by which it is lowered to see whether output falls


@dataclass(frozen=True)
class Operation:
    """How the plant runs at n states of the river; all arrays (n,).

    offered : water offered to the turbines [m3/s]
    turbined : turbine discharge [m3/s]
    fully_open : discharge at which all units would be fully open [m3/s]
    gross_head, net_head : at the turbine discharge [m]; where heads of groups differ, weighted by
        their discharge
    output : at the generator terminals [W]
    stopped : by the river discharge
    no_head : no state is admissible for head
    at_capacity : a unit is at its capacity
    """

    offered: Floats
    turbined: Floats
    fully_open: Floats
    gross_head: Floats
    net_head: Floats
    output: Floats
    stopped: Bools
    no_head: Bools
    at_capacity: Bools


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

    def heads(self, state: HeadState, turbined: Floats) -> Floats:
        """(lines, n) net heads [m], 0 where the losses take all."""
        net = [state.net(turbined, end) for end in self.lines.lower_ends]
        return np.maximum(0.0, np.stack(net))

    def admissible(self, state: HeadState, turbined: Floats, heads: Floats) -> Ints:
        """(n,) bit mask of the groups that head and tailwater allow to run."""
        mask = np.zeros(turbined.shape, dtype=np.int64)
        for number, (group, line) in enumerate(
            zip(self.plant.groups, self.lines.line_of_group, strict=True)
        ):
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
                chosen = mask == running
                result[chosen] = read(table, heads[np.ix_(used, np.flatnonzero(chosen))], turbined[chosen])
        return result

    def output(self, state: HeadState, turbined: Floats) -> Floats:
        """(n,) largest output with exactly this total [W]; 0 at a stand, -inf where impossible."""
        output = self._by_mask(state, turbined, DispatchTable.output, -np.inf)
        return np.where(turbined > 0, output, 0.0)

    def fully_open(self, state: HeadState, turbined: Floats) -> Floats:
        """(n,) discharge of all units fully open at the heads of `turbined` [m3/s]."""
        table, used = self._table(self._every_group)
        return table.full_discharge(self.heads(state, turbined)[used])

    def discharge_at_capacity(self, state: HeadState, turbined: Floats, running: Ints) -> Floats:
        """(n,) least total at which all running units give their capacity, inf where they cannot.

        turbined : (n,) for the heads [m3/s]
        running : (n, groups) 1 for the groups that run
        """
        heads = self.heads(state, turbined)
        total = np.zeros(turbined.size)
        for number, (group, line) in enumerate(
            zip(self.plant.groups, self.lines.line_of_group, strict=True)
        ):
            full = group.full_discharge(heads[line])
            open_power = self.plant.terminal_weight * full * heads[line]
            share = group.share_giving(group.unit_capacity / np.maximum(open_power, 1e-300))
            runs = running[:, number] == 1
            total[runs] += group.count * np.where(full > 0, share, np.inf)[runs] * np.maximum(full, 1e-300)[runs]
        return total

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
            own = heads[np.ix_(used, chosen)]
            units = np.flatnonzero(running >> group_of_unit & 1)
            full = table.full_discharges(own)[np.unique(group_of_unit[units], return_inverse=True)[1]]
            found = table.unit_shares(own, turbined[chosen]) * full
            total = found.sum(axis=0)
            scale = np.divide(turbined[chosen], total, out=np.ones_like(total), where=total > 0)
            discharges[np.ix_(units, chosen)] = found * scale
        return discharges

    def settle(self, state: HeadState, limit: Floats) -> Floats:
        """(n,) discharge at or below `limit` with the largest output at the head of the moment."""
        share = self._by_mask(state, limit, DispatchTable.best_share_below, 0.0)

        def at_share(turbined: Floats) -> Floats:
            return share * self._by_mask(state, turbined, _open_discharge, 0.0)

        turbined = at_share(limit)
        if not state.depends_on_turbines:
            return turbined
        return _fixed_point(at_share, turbined)


def _open_discharge(table: DispatchTable, heads: Floats, _: Floats) -> Floats:
    return table.full_discharge(heads)


def _fixed_point(function: Callable[[Floats], Floats], start: Floats, rounds: int = 12) -> Floats:
    """Solve x = function(x) for a falling function by secants (Steffensen's method)."""
    x = start
    for _ in range(rounds):
        once = function(x)
        twice = function(once)
        bend = twice - 2 * once + x
        step = np.divide((once - x) ** 2, bend, out=np.zeros_like(x), where=np.abs(bend) > 1e-300)
        new = np.where(np.abs(bend) > 1e-14 * (np.abs(x) + 1e-12), x - step, twice)
        new = np.maximum(0.0, new)
        if np.all(np.abs(new - x) <= 1e-10 * (np.abs(x) + 1e-12)):
            return new
        x = new
    return x


def _last_not_below(
    function: Callable[[Floats], Floats], low: Floats, high: Floats, rounds: int = 48
) -> Floats:
    """Bisect for the largest x in [low, high] with function(x) >= 0; function(low) must hold."""
    for _ in range(rounds):
        middle = 0.5 * (low + high)
        holds = function(middle) >= 0
        low, high = np.where(holds, middle, low), np.where(holds, high, middle)
    return low


def operate(dispatcher: Dispatcher, state: HeadState, offered: Floats, stopped: Bools) -> Operation:
    """Find how the plant runs.

    state : levels at n states of the river, in rising order of discharge where possible
    offered : (n,) water offered to the turbines [m3/s]
    stopped : (n,) the river discharge stops the plant
    """
    fully_open = _full_opening(dispatcher, state, offered)
    reach = np.minimum(offered, fully_open)
    turbined, output = _first_candidates(dispatcher, state, reach)
    if state.depends_on_turbines:
        for candidate in (_admissible_limit, _coarse_search):
            turbined, output = candidate(dispatcher, state, reach, turbined, output)
    turbined, output = _refine(dispatcher, state, reach, turbined, output)
    turbined = _least_of_equals(dispatcher, state, turbined, output)
    turbined, output, at_capacity = _least_at_capacity(
        dispatcher, state, reach, turbined, output
    )
    runs = (output > 0) & ~stopped
    turbined, output = np.where(runs, turbined, 0.0), np.where(runs, output, 0.0)
    at_capacity &= runs
    idle = np.flatnonzero(runs & ~at_capacity & (turbined < reach * (1 - 1e-6)))
    if idle.size:
        at_capacity[idle] = _some_at_capacity(dispatcher, state, turbined, idle)
    gross, net = _mean_heads(dispatcher, state, turbined)
    return Operation(
        offered=offered,
        turbined=turbined,
        fully_open=fully_open,
        gross_head=gross,
        net_head=net,
        output=output,
        stopped=stopped,
        no_head=_no_head(dispatcher, state),
        at_capacity=at_capacity,
    )


def _full_opening(dispatcher: Dispatcher, state: HeadState, offered: Floats) -> Floats:
    """Discharge at which all units would be fully open; where no more is offered, a bound on it."""
    fully_open = dispatcher.fully_open(state, offered)
    if not state.depends_on_turbines:
        return fully_open
    short = np.flatnonzero(fully_open < offered)
    if short.size:
        part = state[short]

        def spare(turbined: Floats) -> Floats:
            return dispatcher.fully_open(part, turbined) - turbined

        fully_open[short] = _last_not_below(spare, np.zeros(short.size), offered[short])
    return fully_open


def _first_candidates(
    dispatcher: Dispatcher, state: HeadState, reach: Floats
) -> tuple[Floats, Floats]:
    """All that can be passed, or the best discharge below it at the head of the moment."""
    output = dispatcher.output(state, reach)
    return _better(
        dispatcher, state, np.where(np.isfinite(output), reach, 0.0), np.maximum(output, 0.0), reach
    )


def _better(
    dispatcher: Dispatcher, state: HeadState, turbined: Floats, output: Floats, limit: Floats
) -> tuple[Floats, Floats]:
    """Keep the better of what is known and the best discharge at or below `limit`."""
    settled = np.minimum(dispatcher.settle(state, limit), limit)
    found = dispatcher.output(state, settled)
    better = found > output * (1 + 1e-12)
    return np.where(better, settled, turbined), np.where(better, found, output)


def _admissible_limit(
    dispatcher: Dispatcher, state: HeadState, reach: Floats, turbined: Floats, output: Floats
) -> tuple[Floats, Floats]:
    """Try the largest discharge that keeps the minimum head, line by line."""
    least = max(dispatcher.plant.minimum_net_head, 1e-9)
    for end in dispatcher.lines.lower_ends:
        standing = np.zeros(reach.size)
        cut = np.flatnonzero((state.net(standing, end) >= least) & (state.net(reach, end) < least))
        if cut.size:
            part = state[cut]

            def spare(
                tried: Floats, part: HeadState = part, end: float | None = end
            ) -> Floats:
                return part.net(tried, end) - least

            limit = _last_not_below(spare, np.zeros(cut.size), reach[cut])
            exact = dispatcher.output(part, limit)
            better = exact > output[cut]
            now = np.where(better, limit, turbined[cut]), np.where(better, exact, output[cut])
            turbined[cut], output[cut] = _better(dispatcher, part, *now, limit)
    return turbined, output


def _coarse_search(
    dispatcher: Dispatcher, state: HeadState, reach: Floats, turbined: Floats, output: Floats
) -> tuple[Floats, Floats]:
    """Search a grid of discharges at some states; where less than all is best, try it everywhere."""
    count = reach.size
    nodes = np.unique(np.linspace(0, count - 1, min(count, SEARCH_STATES)).astype(np.int64))
    part_of_reach = np.linspace(0, 1, SEARCH_STEPS + 1)[1:]
    many = np.repeat(nodes, SEARCH_STEPS)
    grid = dispatcher.output(state[many], reach[many] * np.tile(part_of_reach, nodes.size))
    grid = grid.reshape(nodes.size, SEARCH_STEPS)
    best = part_of_reach[grid.argmax(axis=1)]
    worth = grid.max(axis=1) > output[nodes] * (1 + 1e-6)
    if not worth.any():
        return turbined, output
    after = np.minimum(np.searchsorted(nodes, np.arange(count)), nodes.size - 1)
    for node in (np.maximum(after - 1, 0), after):
        wanted = np.flatnonzero(worth[node])
        if wanted.size:
            limit = best[node[wanted]] * reach[wanted]
            part = state[wanted]
            exact = dispatcher.output(part, limit)
            better = exact > output[wanted]
            now = np.where(better, limit, turbined[wanted]), np.where(better, exact, output[wanted])
            turbined[wanted], output[wanted] = _better(dispatcher, part, *now, limit)
    return turbined, output


def _refine(
    dispatcher: Dispatcher, state: HeadState, reach: Floats, turbined: Floats, output: Floats
) -> tuple[Floats, Floats]:
    """Where the best is less than all that can be passed, search around it on a finer and finer grid."""
    inner = np.flatnonzero((output > 0) & (turbined < reach * (1 - 1e-9)))
    if not inner.size:
        return turbined, output
    part, most = state[inner], reach[inner]
    best, most_output = turbined[inner], output[inner]
    width = most / SEARCH_STEPS
    for _ in range(REFINEMENTS):
        centre = best
        for step in (-0.75, -0.5, -0.25, 0.25, 0.5, 0.75):
            tried = np.clip(centre + step * width, 0.0, most)
            found = dispatcher.output(part, tried)
            better = found > most_output
            best = np.where(better, tried, best)
            most_output = np.where(better, found, most_output)
        width = width / 4
    turbined, output = turbined.copy(), output.copy()
    turbined[inner], output[inner] = best, most_output
    return turbined, output


def _least_of_equals(
    dispatcher: Dispatcher, state: HeadState, turbined: Floats, output: Floats
) -> Floats:
    """Where a little less water gives as much, as with a unit at its capacity, the least that does."""
    enough = output * (1 - EQUAL_OUTPUT)
    less = dispatcher.output(state, turbined * (1 - LITTLE_LESS))
    flat = np.flatnonzero((less >= enough) & (output > 0))
    if flat.size:
        part, wanted, high = state[flat], enough[flat], turbined[flat]

        def short(tried: Floats) -> Floats:
            return np.where(dispatcher.output(part, tried) < wanted, 0.0, -1.0)

        low = _last_not_below(short, np.zeros(flat.size), high, rounds=20)
        turbined = turbined.copy()
        turbined[flat] = low + (high - low) * 2.0**-20
    return turbined


def _least_at_capacity(
    dispatcher: Dispatcher, state: HeadState, reach: Floats, turbined: Floats, output: Floats
) -> tuple[Floats, Floats, Bools]:
    """Where all units that can run reach their capacity, the least discharge that does.

    Every unit then runs at the least discharge that gives its capacity, so that the total is found
    without a table.
    """
    mask = dispatcher.admissible(state, reach, dispatcher.heads(state, reach))
    bits = (mask[:, None] >> np.arange(len(dispatcher.plant.groups))) & 1
    capacity = bits @ np.array([g.count * g.unit_capacity for g in dispatcher.plant.groups])
    full = (dispatcher.discharge_at_capacity(state, reach, bits) <= reach) & (capacity > 0)
    chosen = np.flatnonzero(full)
    if chosen.size:
        part, running = state[chosen], bits[chosen]

        def short(tried: Floats) -> Floats:
            return dispatcher.discharge_at_capacity(part, tried, running) - tried

        low = np.zeros(chosen.size)
        turbined, output = turbined.copy(), output.copy()
        turbined[chosen] = _last_not_below(short, low, reach[chosen])
        output[chosen] = capacity[chosen]
    return turbined, output, full


def _some_at_capacity(
    dispatcher: Dispatcher, state: HeadState, turbined: Floats, chosen: Ints
) -> Bools:
    """Whether a unit is at its capacity, to one column of the table, at the chosen states."""
    part, total = state[chosen], turbined[chosen]
    discharges = dispatcher.unit_discharges(part, total)
    heads = dispatcher.heads(part, total)
    plant, lines = dispatcher.plant, dispatcher.lines
    groups = [(g, line) for g, line in zip(plant.groups, lines.line_of_group, strict=True)]
    units = [pair for pair in groups for _ in range(pair[0].count)]
    found = np.zeros(chosen.size, dtype=np.bool_)
    for (group, line), discharge in zip(units, discharges, strict=True):
        full = np.maximum(group.full_discharge(heads[line]), 1e-300)
        share = np.minimum(1.0, discharge / full + 1 / COLUMNS_PER_UNIT)
        power = plant.terminal_weight * full * heads[line]
        found |= (discharge > 0) & (power * share * group.curve(share) >= group.unit_capacity)
    return found


def _no_head(dispatcher: Dispatcher, state: HeadState) -> Bools:
    """Whether head or tailwater forbid every unit even at its least discharge."""
    standing = np.zeros(state.size)
    heads = dispatcher.heads(state, standing)
    least = np.min(
        [
            group.minimum_share * group.full_discharge(heads[line])
            for group, line in zip(
                dispatcher.plant.groups, dispatcher.lines.line_of_group, strict=True
            )
        ],
        axis=0,
    )
    return dispatcher.admissible(state, least, dispatcher.heads(state, least)) == 0


def _mean_heads(
    dispatcher: Dispatcher, state: HeadState, turbined: Floats
) -> tuple[Floats, Floats]:
    """Gross and net head; where groups end at different levels, weighted by their discharge."""
    ends = dispatcher.lines.lower_ends
    if len(ends) == 1:
        gross = state.gross(turbined, ends[0])
        return gross, gross - state.loss(turbined)
    discharges = dispatcher.unit_discharges(state, turbined)
    line_of_unit = np.repeat(
        dispatcher.lines.line_of_group, [group.count for group in dispatcher.plant.groups]
    )
    gross = np.zeros(turbined.size)
    for line, end in enumerate(ends):
        through = discharges[line_of_unit == line].sum(axis=0)
        standing = 1.0 if line == 0 else 0.0  # a plant that stands shows the first of its heads
        share = np.divide(
            through, turbined, out=np.full(turbined.size, standing), where=turbined > 0
        )
        gross += share * state.gross(turbined, end)
    return gross, gross - state.loss(turbined)
