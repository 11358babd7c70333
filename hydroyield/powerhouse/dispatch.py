"""Best sharing of a total discharge among units, as tables over head and discharge.

Units share a waterway, so at a given total discharge the head at the units is known. At that head
the best sharing is a max-plus sum over the units' power: the best of a and b together at k steps is
the largest a(i) + b(k - i). Units of one group are not assumed to share equally; where efficiency
rises steeply with discharge it is often better to run one unit full and another low.

The rows and columns of a table are those of a `Grid`.
"""

from __future__ import annotations

from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from hydroyield.powerhouse.grid import Grid, HeadLines
from hydroyield.powerhouse.units import Plant

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]

ROWS_AT_ONCE = 64  # of tables that are combined, which then stay close to the processor
LEAST_BAND = 0.02  # share by which the least discharge of a plant may miss its column


class DispatchTable:
    """Largest output of a set of units against the heads of its lines and the total discharge.

    output : called with heads (lines, n) [m] and total discharge (n,) [m3/s]
    """

    def __init__(self, plant: Plant, lines: HeadLines, seen: Floats) -> None:
        """Tabulate `plant` for heads like those `seen` (lines, m) [m], the highest among them."""
        self.plant, self.lines = plant, lines
        self.grid = Grid(plant, lines, seen)
        self._units = [self._unit_output(n) for n in range(len(plant.groups))]
        self._stages = self._combine()
        self._values = self._stages[-1]
        self._jumps = self._find_jumps()
        self._width = self._values.shape[1]

    @property
    def columns(self) -> int:
        """Steps from no water to the open plant, of units that scale alike with head."""
        return int(self.grid.columns[0])

    # --- the table ------------------------------------------------------------------------------

    def _unit_output(self, number: int) -> Floats:
        """(rows, steps + 1) output of one unit of a group over the scale of its row; -inf where
        it cannot run at that discharge, 0 at a stand."""
        group, steps = self.plant.groups[number], self.grid.unit_steps[number]
        head = self.grid.row_heads[self.lines.line_of_group[number]]
        column = np.arange(steps.max() + 1)
        share = column / self.grid.exact_steps(number)[:, None]
        share = np.where(column == steps[:, None], 1.0, share)
        first = np.rint(group.minimum_share * steps)[:, None]
        runs = (column >= first) & (column <= steps[:, None])
        share = np.clip(share, group.minimum_share, 1.0)
        # rows at no head borrow the shape of a small head, so that all rows have one scale
        head = np.maximum(head, 1e-6)
        scale = self.grid.scale(np.maximum(self.grid.row_heads, 1e-6))[:, None]
        open_water = (group.full_discharge(head) * head)[:, None]
        if self.grid.one_shape and steps.min() == steps.max():
            relative = np.broadcast_to(share[:1] * group.efficiency(share[:1], 1.0), share.shape)
        else:
            relative = share * group.efficiency(share, head[:, None])
        output = self.plant.terminal_output(group, open_water * relative)
        output = np.minimum(output, group.most_output(head[:, None], share)) / scale
        output = np.where(runs, output, -np.inf)
        output[:, 0] = np.maximum(0.0, output[:, 0])
        return output

    def _combine(self) -> list[Floats]:
        """Tables of the first, the first two, ... units in the order of the groups."""
        stages: list[Floats] = []
        for group, unit in zip(self.plant.groups, self._units, strict=True):
            for _ in range(group.count):
                stages.append(max_plus(stages[-1], unit) if stages else unit)
        return stages

    def _find_jumps(self) -> NDArray[np.int8]:
        """(rows, columns) 1 where output jumps up to the next column, -1 where it jumps down.

        From column to column one unit takes a step more, and output changes by what that unit
        gains. A larger change means that a unit starts with the next column, or that the sharing
        so far ended with this one; there is nothing in between.
        """
        gains = [np.diff(np.where(np.isfinite(unit), unit, np.nan)) for unit in self._units]
        most = np.max([np.where(np.isnan(g), -np.inf, g).max(axis=1) for g in gains], axis=0)
        least = np.min([np.where(np.isnan(g), np.inf, g).min(axis=1) for g in gains], axis=0)
        slack = 1e-9 * np.where(np.isfinite(most), np.abs(most), 0.0)
        with np.errstate(invalid="ignore"):  # from one impossible total to the next
            change = np.diff(self._values, append=-np.inf)
        up = change > (most + slack)[:, None]
        down = np.isfinite(change) & (change < (least - slack)[:, None])
        return np.asarray(up.astype(np.int8) - down.astype(np.int8))

    @cached_property
    def _best_below(self) -> Ints:
        """(rows, columns) column of the largest output at or below each, the first of equals."""
        running = np.maximum.accumulate(self._values, axis=1)
        earlier = np.concatenate([np.full((running.shape[0], 1), -np.inf), running[:, :-1]], axis=1)
        tolerance = 1e-12 * np.abs(np.where(np.isfinite(earlier), earlier, 0.0))
        better = running > earlier + tolerance
        column = np.where(better, np.arange(self._width), 0)
        return np.asarray(np.maximum.accumulate(column, axis=1))

    # --- reading it -----------------------------------------------------------------------------

    def output(self, heads: Floats, discharge: Floats) -> Floats:
        """Largest output of units that pass exactly this total.

        heads : (lines, n) net heads [m]
        discharge : (n,) [m3/s]

        Returns (n,) [W], -inf where no sharing passes exactly this total.
        """
        share = discharge / np.maximum(self.grid.full_discharge(heads), 1e-300)
        total, settled = np.zeros(discharge.shape), np.zeros(discharge.shape)
        weights = np.zeros(discharge.shape)
        for row, weight in self.grid.corners(heads):
            value = self._along(row, share)
            usable = np.isfinite(value)
            total += np.where(usable, weight * np.where(usable, value, 0.0), 0.0)
            settled += np.where(usable, weight, 0.0)
            weights += weight
        # rows of unlike groups may disagree near an edge: the nearer row decides
        feasible = (settled > 0.5 * weights) & (share <= 1 + 1e-6)
        scale = np.divide(weights, settled, out=np.zeros_like(weights), where=settled > 0)
        output = np.where(feasible, total * scale, np.where(discharge == 0, 0.0, -np.inf))
        if len(self.grid.stretched) == 1 and self.grid.stretched[0].size > 3:
            bent = np.flatnonzero(feasible & (heads[self.lines.free[0]] > self.grid.nodes[0][1]))
            if bent.size:
                output[bent] = self._with_bend(heads[:, bent], share[bent], output[bent])
        return self._at_least_discharge(heads, discharge, output)

    def _at_least_discharge(self, heads: Floats, discharge: Floats, output: Floats) -> Floats:
        """Output, exact about the least discharge of the plant, which may miss its column a bit."""
        groups, lines = self.plant.groups, self.lines.line_of_group
        minima = np.array([group.minimum_share for group in groups])[:, None]
        first = (self.grid.full_discharges(heads) * minima).argmin(axis=0)
        least = self._least(heads)
        output = np.where((discharge > 0) & (discharge < least * (1 - 1e-9)), -np.inf, output)
        near = (discharge >= least * (1 - 1e-9)) & (discharge < least * (1 + LEAST_BAND))
        for number in np.unique(first[near & ~np.isfinite(output)]):
            group, line = groups[number], lines[number]
            alone = np.flatnonzero(near & ~np.isfinite(output) & (first == number))
            head = heads[line, alone]
            share = discharge[alone] / np.maximum(group.full_discharge(head), 1e-300)
            water = discharge[alone] * head * group.efficiency(share, head)
            power = self.plant.terminal_output(group, water)
            most = group.most_output(head, share)
            output[alone] = np.where(share <= 1, np.minimum(power, most), -np.inf)
        return output

    def _with_bend(self, heads: Floats, share: Floats, straight: Floats) -> Floats:
        """Output between two rows where a unit reaches its capacity between them.

        Output is straight on either side of that head, so the lines of the neighbouring intervals
        are drawn on to where they meet; where they do not bound the chord from one side, the
        chord stays.
        """
        nodes = self.grid.stretched[0]
        z = np.clip(self.grid.stretch(heads[self.lines.free[0]]), 0, nodes[-1])
        low = np.clip(np.searchsorted(nodes, z, side="right") - 1, 1, nodes.size - 3)
        rows = [low - 1, low, low + 1, low + 2]
        z0, z1, z2, z3 = (nodes[row] for row in rows)
        with np.errstate(invalid="ignore"):  # where a row cannot pass this total the chord stays
            p0, p1, p2, p3 = (self._along(row, share) * self.grid.row_scale[row] for row in rows)
            left = p1 + (p1 - p0) / (z1 - z0) * (z - z1)
            right = p2 - (p3 - p2) / (z3 - z2) * (z2 - z)
            falls = np.minimum(np.minimum(left, right), np.minimum(p1 * z / z1, p2))
            rises = np.maximum(left, right)
        within = (z >= z1) & (z <= z2) & np.isfinite(left) & np.isfinite(right)
        concave = within & (left >= straight) & (right >= straight)
        convex = within & (left <= straight) & (right <= straight)
        return np.where(concave, np.maximum(falls, straight), np.where(convex, rises, straight))

    def _along(self, row: Ints, share: Floats) -> Floats:
        """Scaled output in given rows at shares of the open plant's discharge."""
        position = share * self.grid.columns[row]
        nearest = np.rint(position)
        position = np.where(np.abs(position - nearest) < 1e-5 * self._width, nearest, position)
        position = np.clip(position, 0, self.grid.columns[row])
        low = position.astype(np.int64)
        part = position - low
        flat = self._values.ravel()
        start = row * self._width + low
        left = flat[start]
        right = flat[start + (part > 0)]
        jump = self._jumps.ravel()[start]
        part = np.where((part > 0) & (jump != 0), (jump < 0).astype(np.float64), part)
        with np.errstate(invalid="ignore"):  # -inf beside a number: no sharing passes this total
            return np.asarray(np.where(part > 0, left + part * (right - left), left))

    def best_share_below(self, heads: Floats, discharge: Floats) -> Floats:
        """Share of the open plant's discharge with the largest output at or below `discharge`.

        heads : (lines, n) net heads, held constant [m]
        discharge : (n,) [m3/s]

        Returns (n,), the least of equals: on a column of the table, or the plant's exact least.
        """
        fully_open = np.maximum(self.grid.full_discharge(heads), 1e-300)
        row = self.grid.nearest_row(heads)
        share = np.minimum(discharge / fully_open, 1.0)
        low = np.floor(share * self.grid.columns[row] + 1e-6).astype(np.int64)
        best = self._best_below[row, low] / self.grid.columns[row]
        return np.where(best > 0, np.maximum(best, self._least(heads) / fully_open), 0.0)

    def _least(self, heads: Floats) -> Floats:
        """(n,) least discharge of the plant [m3/s]."""
        minima = np.array([group.minimum_share for group in self.plant.groups])[:, None]
        return np.asarray((self.grid.full_discharges(heads) * minima).min(axis=0))

    def unit_shares(self, heads: Floats, discharge: Floats) -> Floats:
        """Discharge of each unit as a share of its full discharge.

        heads : (lines, n) [m]
        discharge : (n,) [m3/s]

        Returns (units, n), units in the order of the groups; 0 for a unit that stands. The shares
        are those of the nearest row and column of the table.
        """
        row = self.grid.nearest_row(heads)
        share = discharge / np.maximum(self.grid.full_discharge(heads), 1e-300)
        left = np.rint(np.minimum(share, 1.0) * self.grid.columns[row]).astype(np.int64)
        numbers = [n for n, group in enumerate(self.plant.groups) for _ in range(group.count)]
        shares = np.zeros((len(numbers), discharge.size))
        for unit in range(len(numbers) - 1, 0, -1):
            own = self._units[numbers[unit]]
            before = self._stages[unit - 1]
            column = np.arange(own.shape[1])
            rest = left[:, None] - column
            usable = (rest >= 0) & (rest < before.shape[1])
            value = own[row] + np.where(
                usable, before[row[:, None], np.clip(rest, 0, before.shape[1] - 1)], -np.inf
            )
            taken = value.argmax(axis=1)
            shares[unit] = taken / self.grid.unit_steps[numbers[unit], row]
            left = left - taken
        shares[0] = left / self.grid.unit_steps[numbers[0], row]
        return shares


def max_plus(first: Floats, second: Floats) -> Floats:
    """Row by row the largest first(i) + second(k - i) for each k.

    first : (rows, a)
    second : (rows, b)

    Returns (rows, a + b - 1).
    """
    if first.shape[1] > second.shape[1]:
        first, second = second, first
    total = np.full((first.shape[0], first.shape[1] + second.shape[1] - 1), -np.inf)
    reach = second.shape[1]
    for top in range(0, first.shape[0], ROWS_AT_ONCE):
        rows = slice(top, top + ROWS_AT_ONCE)
        one, other, found = first[rows], second[rows], total[rows]
        both = np.empty_like(other)
        for step in np.flatnonzero(np.isfinite(one).any(axis=0)):
            np.add(one[:, step, None], other, out=both)
            window = found[:, step : step + reach]
            np.maximum(window, both, out=window)
    return total
