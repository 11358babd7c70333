"""Energy against size: plants that differ in size alone, read from one table of relative output.

Units of one machine that share a head have the same relative output at every size: output over
that of all the water, against head over rated head and discharge over full discharge. So the best
sharing of the water is worked out once for a machine and a split, and a size costs little more than
reading that table at each state of the river.

It is used to search between the sizes that are computed in full, and only where it agrees with
them. What it leaves aside: that less water may give more where losses are steep, and that planned
outages may be placed in other months at other sizes.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from hydroyield.energy import Estimate
from hydroyield.energy.scheme import Scheme
from hydroyield.hydraulics import HeadState
from hydroyield.powerhouse import HeadLines, HillChart, Plant
from hydroyield.powerhouse.dispatch import DispatchTable
from hydroyield.quantities import W_PER_KW, WH_PER_MWH
from hydroyield.river import Cells

Floats = NDArray[np.float64]
Bools = NDArray[np.bool_]

ROWS_TO_RATED_HEAD = 24  # one of them at the rated head, where the capacity begins to limit
HIGHEST = 1.5  # of the heads that occur, which a smaller plant has more of
HEAD_ROUNDS = 4  # of the fixed point of head and discharge
RIVER_NODES = 4000  # at which the water offered is known, for the rated head
FINE = 2001  # shares of full discharge at which the slope of a curve is looked at
ON_A_COLUMN = 1e-7  # columns; a minimum that is met exactly is met


@dataclass(frozen=True)
class RelativeOutput:
    """Output of units in service, as a share of that of all the water at the head of the moment.

    share : of the design discharge that these units pass
    table : (rows, columns) against relative head and relative discharge, from no water to full
        opening, never falling; minima and full openings of units fall on columns
    gain : (rows, columns) change to the next column, 0 where a unit starts there
    weight : (c,) hours a year that each cell stands for with these units in service [h]
    """

    share: float
    table: Floats
    gain: Floats
    weight: Floats

    def __call__(self, relative_head: Floats, opening: Floats) -> Floats:
        """Share of the water's power at heads over rated head and discharges over full ones."""
        rows, columns = self.table.shape
        up = np.minimum(relative_head * ROWS_TO_RATED_HEAD, rows - 1.001)
        along = np.minimum(opening, 1.0) * (columns - 1) + ON_A_COLUMN
        row, column = up.astype(np.int64), along.astype(np.int64)
        up, along = up - row, along - column
        table, gain, place = self.table.ravel(), self.gain.ravel(), row * columns + column
        low = table[place] + along * gain[place]
        place += columns
        high = table[place] + along * gain[place]
        return np.asarray(low + up * (high - low))


class SizeSweep:
    """Energy of plants of any size, like one that was computed in full."""

    def __init__(self, estimate: Estimate, design_discharge: float) -> None:
        """Prepare the table.

        estimate : of a plant of the kind, with rated head and capacity derived
        design_discharge : of all its units together [m3/s]

        Raises ValueError where the plant is not of the sort that scales.
        """
        scheme, cells = estimate.scheme, estimate.cells
        if not scales(scheme):
            raise ValueError("units of this plant have no common relative output")
        group = scheme.plant.groups[0]
        self._scheme, self._cells = scheme, cells
        self._axis = group.axis_level
        self._exponent = group.head_exponent
        self._reference = (design_discharge, group.rated_head)
        self._river = np.linspace(0, float(scheme.valid_discharge.max()), RIVER_NODES)
        seasons = range(scheme.rules.season_count)
        self._reached = [  # the most that is offered up to each of these discharges
            np.maximum.accumulate(scheme.rules.offered(self._river, np.full(RIVER_NODES, season)))
            for season in seasons
        ]
        self._state: HeadState = scheme.head_state(cells.discharge, cells.season)
        limit = scheme.plant.shutdown_above
        offered = scheme.rules.offered(cells.discharge, cells.season)
        self._offered = offered if limit is None else offered * (cells.discharge <= limit)
        highest = HIGHEST * float(self._state.net(np.zeros(cells.discharge.size), self._axis).max())
        self._outputs = [
            _relative_output(
                scheme.with_units(state.counts), design_discharge, highest, state.weight
            )
            for state in estimate.states
            if any(state.counts)
        ]
        standing = [state.weight for state in estimate.states if not any(state.counts)]
        self._imported = -scheme.plant.electrical.imported * float(np.sum(standing))

    @property
    def cells(self) -> Cells:
        """States of the river over the years used."""
        return self._cells

    def rated_head(self, design_discharge: float) -> float:
        """Net head at the smallest river discharge that offers the design discharge [m].

        Where none does, at the discharge that offers most.
        """
        most = [offered[-1] for offered in self._reached]
        wanted = min(design_discharge, max(most))
        river, season = min(
            (float(np.interp(wanted, offered, self._river)), season)
            for season, offered in enumerate(self._reached)
            if offered[-1] >= wanted
        )
        state = self._scheme.head_state(np.array([river]), np.array([season]))
        return float(state.net(np.array([design_discharge]), self._axis)[0])

    def installed_capacity(self, design_discharge: float) -> float:
        """Sum of the unit capacities [kW]."""
        discharge, head = self._reference
        scale = design_discharge * self.rated_head(design_discharge) / (discharge * head)
        return scale * self._scheme.plant.installed_capacity / W_PER_KW

    def mean_annual_energy(self, design_discharge: float) -> float:
        """Net energy, mean over the years used [MWh]."""
        scheme, rated_head = self._at_size(design_discharge)
        made = self._imported
        for output in self._outputs:
            power = self._net_power(scheme, output, design_discharge, rated_head)
            made += float((output.weight * power).sum())
        return made / WH_PER_MWH

    def _at_size(self, design_discharge: float) -> tuple[Scheme, float]:
        """The scheme with a transformer of that size, and the rated head [m]."""
        head = self.rated_head(design_discharge)
        electrical = self._scheme.plant.electrical
        if not electrical.load_loss:
            return self._scheme, head
        discharge, reference = self._reference
        scale = design_discharge * head / (discharge * reference)
        plant = replace(
            self._scheme.plant,
            electrical=replace(electrical, load_loss_at=scale * electrical.load_loss_at),
        )
        return replace(self._scheme, plant=plant), head

    def _net_power(
        self, scheme: Scheme, output: RelativeOutput, design_discharge: float, rated_head: float
    ) -> Floats:
        """(c,) delivered in each cell with some units in service [W]."""
        passed = output.share * design_discharge
        turbined, head, full = self._flow(passed, rated_head)
        least = max(scheme.plant.minimum_net_head - 1e-9, 1e-9)
        runs = head >= least
        if self._axis is not None:
            runs &= self._state.tailwater(turbined) <= self._axis
        with np.errstate(divide="ignore", invalid="ignore"):
            opening = np.where(runs, turbined / full, 0.0)
        share = output(np.maximum(head, 0.0) / rated_head, opening)
        water = scheme.plant.specific_weight * full * head
        return scheme.net_power(np.where(runs, water * share, 0.0))

    def _flow(self, passed: float, rated_head: float) -> tuple[Floats, Floats, Floats]:
        """Discharge through the units [m3/s], net head [m] and full discharge [m3/s], each (c,)."""
        state, offered = self._state, self._offered
        turbined = np.minimum(offered, passed)
        rounds = HEAD_ROUNDS if state.depends_on_turbines else 1
        for _ in range(rounds):
            head = state.net(turbined, self._axis)
            if self._exponent:
                full = passed * np.sqrt(np.maximum(head, 0.0) / rated_head)
            else:
                full = np.where(head > 0, passed, 0.0)
            turbined = np.minimum(offered, full)
        return turbined, state.net(turbined, self._axis), full


def scales(scheme: Scheme) -> bool:
    """Whether all units have one machine and one head, so that size alone is left."""
    groups = scheme.plant.groups
    first = groups[0]
    return not scheme.waits_to_start and all(
        group.curve == first.curve
        and not isinstance(group.curve, HillChart)
        and not group.branch
        and group.output_limit is None
        and group.axis_level == first.axis_level
        and group.minimum_share == first.minimum_share
        and group.head_exponent == first.head_exponent
        for group in groups
    )


def _relative_output(
    scheme: Scheme, design_discharge: float, highest: float, weight: Floats
) -> RelativeOutput:
    plant = scheme.plant
    rated_head = plant.groups[0].rated_head
    rows = int(np.ceil(ROWS_TO_RATED_HEAD * max(highest / rated_head, 1.0))) + 2
    heads = rated_head * np.maximum(np.arange(rows), 1e-6) / ROWS_TO_RATED_HEAD
    dispatch = DispatchTable(plant, HeadLines.of(plant.groups), heads[None, :])
    opening = np.linspace(0, 1, dispatch.columns + 1)
    every_head = np.repeat(heads, opening.size)[None, :]
    full = dispatch.grid.full_discharge(every_head)
    found = dispatch.output(every_head, np.tile(opening, heads.size) * full)
    water = plant.specific_weight * full * every_head[0]
    share = (np.maximum(found, 0.0) / water).reshape(heads.size, opening.size)
    table = np.maximum.accumulate(share, axis=1)
    gain = np.diff(table, axis=1, append=table[:, -1:])
    gain[gain > _most_gained(plant) / dispatch.columns] = 0.0  # a unit starts at the next column
    return RelativeOutput(plant.rated_discharge / design_discharge, table, gain, weight)


def _most_gained(plant: Plant) -> float:
    """The most by which relative output grows with relative discharge while no unit starts."""
    group = plant.groups[0]
    share = np.linspace(group.minimum_share, 1, FINE)
    slope = np.diff(share * group.efficiency(share, group.rated_head)) * (FINE - 1)
    steepest = float(slope.max()) / max(1 - group.minimum_share, 1e-9)
    return 1.05 * steepest * plant.electrical.at_terminals
