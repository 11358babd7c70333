"""Where a dispatch table has its rows and columns.

A row is a node of head, a column a share of the discharge of the fully open plant. In these shares
the minimum and the full opening of a unit hardly move with head, so the number of columns is chosen
such that both fall on columns.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from hydroyield.powerhouse.units import BranchCurve, HillChart, Plant, UnitGroup

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]

# Rows stand at even steps of head, and at even shares of the heads that occur:
HEAD_NODES = (24, 40)  # where heads of all groups end at one level
HEAD_NODES_OF_TWO_LINES = (8, 20)  # where some end at the tailwater and some at an axis
HEADS_TRIED = 2001  # for those at which a limit by head begins or ends to limit
COLUMNS_PER_UNIT = 128
COLUMNS = (384, 1024)  # fewest and most, before the search for the number that fits
COLUMNS_OF_UNLIKE_UNITS = 512  # fewest, where units differ in size or curve


@dataclass(frozen=True)
class HeadLines:
    """The distinct lower ends of head in a plant: the tailwater (None) and the axis levels.

    A tailwater line and an axis line vary independently; two axis lines differ by a constant.
    """

    lower_ends: tuple[float | None, ...]
    line_of_group: tuple[int, ...]

    @classmethod
    def of(cls, groups: tuple[UnitGroup, ...]) -> HeadLines:
        ends = sorted({g.axis_level for g in groups}, key=lambda e: (e is not None, e or 0.0))
        return cls(tuple(ends), tuple(ends.index(g.axis_level) for g in groups))

    @property
    def free(self) -> tuple[int, ...]:
        """Lines that span all heads: the tailwater and the first axis, as far as they occur."""
        kinds = [end is None for end in self.lower_ends]
        return tuple(kinds.index(kind) for kind in (True, False) if kind in kinds)


class Grid:
    """Rows and columns of a table of some units.

    plant, lines : what is tabulated
    nodes : of each free line, the heads of the rows [m]
    stretched : the same on the scale of `stretch`
    row_heads : (lines, rows) head of each line in each row [m]
    row_scale : (rows,) scale of power, see `scale`
    unit_steps : (groups, rows) columns that one fully open unit takes
    columns : (rows,) columns that the open plant takes
    """

    def __init__(self, plant: Plant, lines: HeadLines, seen: Floats) -> None:
        """Lay a grid for heads like those `seen` (lines, m) [m], the highest among them."""
        self.plant, self.lines = plant, lines
        self.nodes = [self._head_nodes(line, seen[line]) for line in lines.free]
        self.stretched = [self.stretch(nodes) for nodes in self.nodes]
        self.row_heads = self._heads_of_rows()
        self.row_scale = self.scale(self.row_heads)
        self.unit_steps, self.columns = self._choose_steps()

    # --- scales ---------------------------------------------------------------------------------

    @property
    def _alike(self) -> bool:
        """Whether the full discharges of all groups scale alike with head."""
        exponents = {group.head_exponent for group in self.plant.groups}
        return len(exponents) == 1 and len(self.lines.lower_ends) == 1

    @property
    def one_shape(self) -> bool:
        """Whether the rows of all heads have one shape, up to the capacities."""
        charts = any(isinstance(group.curve, HillChart) for group in self.plant.groups)
        return self._alike and not charts

    def stretch(self, head: Floats) -> Floats:
        """Scale on which the power of an open unit is linear: H^1.5, for screws H."""
        largest = max(group.head_exponent for group in self.plant.groups)
        return np.asarray(head * np.sqrt(head) if largest else head)

    def scale(self, heads: Floats) -> Floats:
        """Scale of power at heads (lines, n): the sum of the stretched heads of the free lines."""
        scale = np.zeros(heads.shape[1])
        for line in self.lines.free:
            scale += self.stretch(heads[line])
        return scale

    def full_discharges(self, heads: Floats) -> Floats:
        """(groups, n) discharge of one fully open unit of each group [m3/s]."""
        return np.stack(
            [
                group.full_discharge(heads[line])
                for group, line in zip(self.plant.groups, self.lines.line_of_group, strict=True)
            ]
        )

    def full_discharge(self, heads: Floats) -> Floats:
        """(n,) discharge of all units fully open [m3/s] at heads (lines, n) [m]."""
        total = np.zeros(heads.shape[1])
        for group, full in zip(self.plant.groups, self.full_discharges(heads), strict=True):
            total += group.count * full
        return total

    # --- rows -----------------------------------------------------------------------------------

    def _head_nodes(self, line: int, seen: Floats) -> Floats:
        """Heads of the rows: 0, the heads at which a capacity begins to limit, and some more.

        Below every limit the rows of units that scale alike with head are one, and need no nodes.
        """
        highest = max(1e-3, float(seen.max())) * (1 + 1e-9)
        limits = [
            self._limiting_head(group)
            for group, own in zip(self.plant.groups, self.lines.line_of_group, strict=True)
            if own == line
        ]
        limits = [head for head in limits if head < highest]
        bends = [
            head
            for group, own in zip(self.plant.groups, self.lines.line_of_group, strict=True)
            if own == line and group.output_limit is not None
            for head in self._bends_of_limit(group, highest)
        ]
        straight = self.one_shape and self.plant.electrical.load_curve is None and not bends
        if straight and not limits:
            return np.array([0.0, highest])
        lowest = min(limits) if straight else 0.0
        even, shares = HEAD_NODES if len(self.lines.free) == 1 else HEAD_NODES_OF_TWO_LINES
        inner = seen[(seen > lowest) & (seen < highest)]
        spread = np.quantile(inner, np.linspace(0, 1, shares)) if inner.size else inner
        return _apart([0.0, *limits, *bends, *np.linspace(lowest, highest, even), *spread])

    def _limiting_head(self, group: UnitGroup) -> float:
        """Net head above which a unit can exceed its capacity."""
        rated = group.rated_discharge * group.rated_head * group.best_relative_output
        needed = float(self.plant.water_needed(group, np.array(group.unit_capacity)))
        ratio = needed / max(rated, 1e-300)
        return float(group.rated_head * ratio ** (1 / (1 + group.head_exponent)))

    def _bends_of_limit(self, group: UnitGroup, highest: float) -> list[float]:
        """Heads up to the highest at which a limit by head bends, or begins or ends to limit."""
        assert group.output_limit is not None
        head = np.linspace(0, highest, HEADS_TRIED)
        water = group.full_discharge(head) * head * group.best_relative_output
        spare = group.most_output(head) - self.plant.terminal_output(group, water)
        crosses = np.flatnonzero(spare[:-1] * spare[1:] < 0)
        part = spare[crosses] / (spare[crosses] - spare[crosses + 1])
        whole = group.curve.head_left(np.array(1.0)) if isinstance(group.curve, BranchCurve) else 1
        bends = np.array(group.output_limit.heads) / whole
        met = head[crosses] + part * np.diff(head)[crosses]
        return [float(found) for found in (*met, *bends) if 0 < found < highest]

    def _heads_of_rows(self) -> Floats:
        """(lines, rows) head of each line in each row."""
        grid = np.stack(np.meshgrid(*self.nodes, indexing="ij")).reshape(len(self.nodes), -1)
        ends = self.lines.lower_ends
        heads = np.empty((len(ends), grid.shape[1]))
        for row, line in zip(grid, self.lines.free, strict=True):
            for other, end in enumerate(ends):
                if end is None and ends[line] is None:
                    heads[other] = row
                elif end is not None and ends[line] is not None:
                    heads[other] = np.maximum(0.0, row + (ends[line] or 0.0) - end)
        return heads

    # --- columns --------------------------------------------------------------------------------

    def _choose_steps(self) -> tuple[Ints, Ints]:
        """(groups, rows) steps of a fully open unit, and (rows,) columns of the open plant.

        The number of columns is the one at which full openings and minima fall closest to columns.
        """
        counts = np.array([group.count for group in self.plant.groups])
        minima = np.array([group.minimum_share for group in self.plant.groups])
        # at no head every unit would be shut: take the shares of a small one
        heads = np.maximum(self.row_heads, 1e-6)
        shares = self.full_discharges(heads[:, :1] if self._alike else heads)
        shares = shares / (counts[:, None] * shares).sum(axis=0)
        fewest = int(np.clip(COLUMNS_PER_UNIT * counts.sum(), *COLUMNS))
        if counts.size > 1:
            fewest = max(fewest, COLUMNS_OF_UNLIKE_UNITS)
        tried = np.arange(fewest, 2 * fewest)
        exact = shares[:, :, None] * tried  # (groups, rows, tried)
        steps = np.maximum(1, np.rint(exact))
        least = minima[:, None, None] * exact
        off = np.maximum(np.abs(exact - steps), np.abs(least - np.rint(least))).max(axis=0)
        best = off.argmin(axis=1)
        chosen = np.take_along_axis(steps, best[None, :, None], axis=2)[:, :, 0].astype(np.int64)
        chosen = np.broadcast_to(chosen, (counts.size, self.row_heads.shape[1]))
        return chosen, np.asarray((counts[:, None] * chosen).sum(axis=0))

    def exact_steps(self, number: int) -> Floats:
        """(rows,) columns that one fully open unit of a group takes, not rounded."""
        heads = np.maximum(self.row_heads, 1e-6)
        full = self.full_discharges(heads)[number]
        return np.asarray(full / self.full_discharge(heads) * self.columns)

    # --- where a state lies ---------------------------------------------------------------------

    def corners(self, heads: Floats) -> list[tuple[Ints, Floats]]:
        """Rows around heads (lines, n), and the weight of each in the scaled output."""
        corners: list[tuple[Ints, Floats]] = [
            (np.zeros(heads.shape[1], dtype=np.int64), np.ones(heads.shape[1]))
        ]
        for nodes, line in zip(self.stretched, self.lines.free, strict=True):
            z = np.clip(self.stretch(heads[line]), 0, nodes[-1])
            low = np.clip(np.searchsorted(nodes, z, side="right") - 1, 0, nodes.size - 2)
            part = (z - nodes[low]) / (nodes[low + 1] - nodes[low])
            corners = [
                (row * nodes.size + low + step, weight * share)
                for row, weight in corners
                for step, share in ((0, 1 - part), (1, part))
            ]
        return [(row, weight * self.row_scale[row]) for row, weight in corners]

    def nearest_row(self, heads: Floats) -> Ints:
        corners = self.corners(heads)
        heaviest = np.argmax([weight for _, weight in corners], axis=0)
        return np.asarray(np.choose(heaviest, [row for row, _ in corners]))


def _apart(heads: list[float]) -> Floats:
    """Sorted heads without those that coincide with the one before."""
    nodes = np.unique(heads)
    return np.asarray(nodes[np.concatenate([[True], np.diff(nodes) > 1e-9 * nodes[-1]])])
