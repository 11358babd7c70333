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
from dataclasses import dataclass
from functools import partial

import numpy as np
from numpy.typing import NDArray

from hydroyield.hydraulics import HeadState
from hydroyield.powerhouse.dispatcher import Dispatcher
from hydroyield.powerhouse.grid import COLUMNS_PER_UNIT
from hydroyield.powerhouse.solving import fixed_point, last_not_below

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]
Bools = NDArray[np.bool_]

SEARCH_STATES = 144  # states of the river at which the coarse search is done
SEARCH_STEPS = 64  # discharges tried at each
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
    shaft : at the turbine shafts [W]
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
    shaft: Floats
    stopped: Bools
    no_head: Bools
    at_capacity: Bools


def operate(
    dispatcher: Dispatcher,
    state: HeadState,
    offered: Floats,
    stopped: Bools,
    waiting: Bools | None = None,
) -> Operation:
    """Find how the plant runs.

    state : levels at n states of the river, in rising order of discharge where possible
    offered : (n,) water offered to the turbines [m3/s]
    stopped : (n,) the river discharge stops the plant
    waiting : (n,) the plant stands and waits for more water to start; None where it never does
    """
    fully_open = _full_opening(dispatcher, state, offered)
    reach = np.minimum(offered, fully_open)
    turbined, output = _first_candidates(dispatcher, state, reach)
    if state.depends_on_turbines:
        for candidate in (_admissible_limit, _coarse_search):
            turbined, output = candidate(dispatcher, state, reach, turbined, output)
    turbined, output, at_capacity = _least_at_capacity(dispatcher, state, reach, turbined, output)
    left = np.flatnonzero((output > 0) & ~at_capacity & (turbined < reach * (1 - 1e-9)))
    if left.size:
        part = state[left]
        turbined[left], output[left] = _refine(
            dispatcher, part, reach[left], turbined[left], output[left]
        )
    left = np.flatnonzero((output > 0) & ~at_capacity)
    if left.size:
        turbined[left] = _least_of_equals(dispatcher, state[left], turbined[left], output[left])
    if dispatcher.on_two_lines:
        output = dispatcher.output_of_best_sharing(state, turbined)
    runs = (output > 0) & ~stopped
    runs = runs if waiting is None else runs & ~waiting
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
        shaft=dispatcher.shaft_power(state, turbined, output),
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

        def open_at(turbined: Floats) -> Floats:
            return dispatcher.fully_open(part, turbined)

        found = fixed_point(open_at, fully_open[short])
        missed = np.flatnonzero(np.abs(open_at(found) - found) > 1e-9 * (found + 1e-9))
        if missed.size:  # where losses take most of the head, secants may wander
            steep = part[missed]

            def spare(turbined: Floats) -> Floats:
                return dispatcher.fully_open(steep, turbined) - turbined

            limit = offered[short[missed]]
            found[missed] = last_not_below(spare, np.zeros(missed.size), limit)
        fully_open[short] = found
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


def _better_at(
    dispatcher: Dispatcher, state: HeadState, turbined: Floats, output: Floats, limit: Floats
) -> tuple[Floats, Floats]:
    """Keep the better of what is known, `limit` itself, and the best discharge below it."""
    exact = dispatcher.output(state, limit)
    better = exact > output
    turbined, output = np.where(better, limit, turbined), np.where(better, exact, output)
    return _better(dispatcher, state, turbined, output, limit)


def _spare_head(
    dispatcher: Dispatcher,
) -> list[Callable[[HeadState, Floats], Floats]]:
    """What must not be negative: net head above the minimum, and axes above the tailwater."""
    least = max(dispatcher.plant.minimum_net_head, 1e-9)

    def of_head(end: float | None, state: HeadState, tried: Floats) -> Floats:
        return state.net(tried, end) - least

    def of_axis(axis: float, state: HeadState, tried: Floats) -> Floats:
        return axis - state.tailwater(tried)

    ends = dispatcher.lines.lower_ends
    axes = [end for end in ends if end is not None]
    return [*(partial(of_head, end) for end in ends), *(partial(of_axis, end) for end in axes)]


def _admissible_limit(
    dispatcher: Dispatcher, state: HeadState, reach: Floats, turbined: Floats, output: Floats
) -> tuple[Floats, Floats]:
    """Try the largest discharge that keeps the minimum head, or an axis above the tailwater."""
    standing = np.zeros(reach.size)
    for spare in _spare_head(dispatcher):
        cut = np.flatnonzero((spare(state, standing) >= 0) & (spare(state, reach) < 0))
        if cut.size:
            part = state[cut]
            limit = last_not_below(partial(spare, part), np.zeros(cut.size), reach[cut])
            known = turbined[cut], output[cut]
            turbined[cut], output[cut] = _better_at(dispatcher, part, *known, limit)
    return turbined, output


def _coarse_search(
    dispatcher: Dispatcher, state: HeadState, reach: Floats, turbined: Floats, output: Floats
) -> tuple[Floats, Floats]:
    """Search a grid of discharges at some states; where less than all is best, try it around."""
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
            known = turbined[wanted], output[wanted]
            turbined[wanted], output[wanted] = _better_at(dispatcher, state[wanted], *known, limit)
    return turbined, output


def _refine(
    dispatcher: Dispatcher, state: HeadState, reach: Floats, turbined: Floats, output: Floats
) -> tuple[Floats, Floats]:
    """Search around what is known on a finer and finer grid."""
    width = reach / SEARCH_STEPS
    for _ in range(REFINEMENTS):
        centre = turbined
        for step in (-0.6, -0.3, 0.3, 0.6):
            tried = np.clip(centre + step * width, 0.0, reach)
            found = dispatcher.output(state, tried)
            better = found > output
            turbined = np.where(better, tried, turbined)
            output = np.where(better, found, output)
        width = width / 3
    return turbined, output


def _least_of_equals(
    dispatcher: Dispatcher, state: HeadState, turbined: Floats, output: Floats
) -> Floats:
    """Where less water gives as much, as with a unit at its capacity, the least that does."""
    enough = output * (1 - EQUAL_OUTPUT)
    less = dispatcher.output(state, turbined * (1 - LITTLE_LESS))
    flat = np.flatnonzero((less >= enough) & (output > 0))
    if flat.size:
        part, wanted, high = state[flat], enough[flat], turbined[flat]

        def short(tried: Floats) -> Floats:
            return np.where(dispatcher.output(part, tried) < wanted, 0.0, -1.0)

        low = last_not_below(short, np.zeros(flat.size), high, rounds=12)
        turbined = turbined.copy()
        turbined[flat] = low + (high - low) * 2.0**-12
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
    capacity = dispatcher.capacity(state, reach, bits)
    full = (dispatcher.discharge_at_capacity(state, reach, bits) <= reach) & (capacity > 0)
    if not dispatcher.limited_by_head:
        full &= capacity >= output * (1 - 1e-9)  # more may run at a smaller discharge
    chosen = np.flatnonzero(full)
    if chosen.size:
        part, running = state[chosen], bits[chosen]

        def short(tried: Floats) -> Floats:
            return dispatcher.discharge_at_capacity(part, tried, running) - tried

        found = last_not_below(short, np.zeros(chosen.size), reach[chosen])
        given = dispatcher.capacity(part, found, running)
        kept = given >= output[chosen] * (1 - 1e-9)  # where heads limit it is known only now
        full[chosen] = kept
        turbined, output = turbined.copy(), output.copy()
        turbined[chosen[kept]], output[chosen[kept]] = found[kept], given[kept]
    return turbined, output, full


def _some_at_capacity(
    dispatcher: Dispatcher, state: HeadState, turbined: Floats, chosen: Ints
) -> Bools:
    """Whether a unit is at its capacity, to one column of the table, at the chosen states."""
    part, total = state[chosen], turbined[chosen]
    discharges = dispatcher.unit_discharges(part, total)
    heads = dispatcher.heads(part, total)
    found = np.zeros(chosen.size, dtype=np.bool_)
    for (group, line), discharge in zip(dispatcher.units_on_lines, discharges, strict=True):
        full = np.maximum(group.full_discharge(heads[line]), 1e-300)
        share = np.minimum(1.0, discharge / full + 1 / COLUMNS_PER_UNIT)
        power = dispatcher.plant.terminal_output(
            group, full * heads[line] * share * group.efficiency(share, heads[line])
        )
        found |= (discharge > 0) & (power >= group.most_output(heads[line], share))
    return found


def _no_head(dispatcher: Dispatcher, state: HeadState) -> Bools:
    """Whether head or tailwater forbid every unit even at its least discharge."""
    standing = np.zeros(state.size)
    heads = dispatcher.heads(state, standing)
    least = np.min(
        [
            group.minimum_share * group.full_discharge(heads[line])
            for group, line in dispatcher.groups_on_lines
        ],
        axis=0,
    )
    return np.asarray(dispatcher.admissible(state, least, dispatcher.heads(state, least)) == 0)


def _mean_heads(
    dispatcher: Dispatcher, state: HeadState, turbined: Floats
) -> tuple[Floats, Floats]:
    """Gross and net head; where groups end at different levels, weighted by their discharge."""
    ends = dispatcher.lines.lower_ends
    if len(ends) == 1:
        gross = state.gross(turbined, ends[0])
        return gross, gross - state.loss(turbined)
    discharges = dispatcher.unit_discharges(state, turbined)
    line_of_unit = np.array([line for _, line in dispatcher.units_on_lines])
    gross = np.zeros(turbined.size)
    for line, end in enumerate(ends):
        through = discharges[line_of_unit == line].sum(axis=0)
        standing = 1.0 if line == 0 else 0.0  # a plant that stands shows the first of its heads
        share = np.divide(
            through, turbined, out=np.full(turbined.size, standing), where=turbined > 0
        )
        gross += share * state.gross(turbined, end)
    return gross, gross - state.loss(turbined)
