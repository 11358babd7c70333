"""Turbine-generator units: full discharge, efficiency, output."""

from __future__ import annotations

from dataclasses import dataclass, replace
from functools import cached_property
from typing import Any, cast

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]


@dataclass(frozen=True)
class EfficiencyCurve:
    """Turbine efficiency against the share of full discharge at the head of the moment.

    shares : rising, 0 to 1
    efficiencies : at the shares

    Between the points a monotone piecewise cubic (PCHIP; Fritsch & Butland 1984, SIAM J. Sci.
    Stat. Comput. 5: 300-304); outside them constant.
    """

    shares: tuple[float, ...]
    efficiencies: tuple[float, ...]

    @cached_property
    def _interpolant(self) -> Any:
        from scipy.interpolate import PchipInterpolator

        return PchipInterpolator(self.shares, self.efficiencies)

    def __call__(self, share: Floats) -> Floats:
        inside = np.clip(share, self.shares[0], self.shares[-1])
        return np.asarray(self._interpolant(inside), dtype=np.float64)

    @property
    def best(self) -> float:
        return max(self.efficiencies)


def relative_opening(share: Floats, lost: float) -> Floats:
    """Discharge over that of full opening at one head before the branch.

    share : (n,) discharge over full discharge at the net head of the moment, behind the branch
    lost : share of the head that the branch takes at full opening

    The less a unit takes, the less of the head its branch takes: with r the result and s the share,
    s^2 (1 - r^2 lost) = r^2 (1 - lost).
    """
    return np.asarray(share / np.sqrt(1 - lost + lost * share**2))


@dataclass(frozen=True)
class BranchCurve:
    """Efficiency from the head before the branch of one unit to its shaft.

    curve : of the turbine
    lost : share of the head that the branch takes at full opening

    Full discharge behind a loss k q^2 grows with the root of the head before it, too, so that the
    share lost at full opening is the same at every head.
    """

    curve: EfficiencyCurve | JetCurve
    lost: float

    def head_left(self, relative: Floats) -> Floats:
        """Head behind the branch over that before it, at a discharge over that of full opening."""
        return np.asarray(1 - self.lost * relative**2)

    def __call__(self, relative: Floats) -> Floats:
        left = self.head_left(relative)
        share = relative * np.sqrt((1 - self.lost) / left)
        return np.asarray(left * self.curve(np.minimum(share, 1.0)))

    @property
    def best(self) -> float:
        """Best efficiency of the turbine itself."""
        return self.curve.best


@dataclass(frozen=True)
class JetCurve:
    """Efficiency of an impulse turbine that closes jets one after another at part load.

    curve : with all jets open, which is that of each jet
    jets : number of jets

    With k of n jets open each takes n / k of the share; as many are open as give the most.
    """

    curve: EfficiencyCurve
    jets: int

    def __call__(self, share: Floats) -> Floats:
        found = self.curve(share)
        for opened in range(1, self.jets):
            of_jet = share * self.jets / opened
            fewer = self.curve(np.minimum(of_jet, 1.0))
            found = np.where(of_jet <= 1 + 1e-9, np.maximum(found, fewer), found)
        return np.asarray(found)

    @property
    def best(self) -> float:
        return self.curve.best


@dataclass(frozen=True)
class HillChart:
    """Efficiency of one unit over net head and discharge, as makers draw it.

    heads : rising [m]
    discharges : of one unit, rising [m3/s]
    values : efficiency at each head (rows) and discharge

    Linear between the points in both directions, constant outside them.
    """

    heads: tuple[float, ...]
    discharges: tuple[float, ...]
    values: tuple[tuple[float, ...], ...]

    def __call__(self, discharge: Floats, head: Floats) -> Floats:
        """Efficiency at `discharge` [m3/s] and net `head` [m], arrays that go together."""
        row, up = _place(self.heads, head)
        column, along = _place(self.discharges, discharge)
        table = np.array(self.values)
        low = table[row, column] + along * (table[row, column + 1] - table[row, column])
        high = table[row + 1, column]
        high = high + along * (table[row + 1, column + 1] - high)
        return np.asarray(low + up * (high - low))

    @property
    def best(self) -> float:
        return max(map(max, self.values))


@dataclass(frozen=True)
class OutputLimit:
    """The most that one unit gives at a net head, beside its capacity.

    heads : net, rising [m]
    powers : at the generator terminals [W]

    Linear between the points, constant outside them.
    """

    heads: tuple[float, ...]
    powers: tuple[float, ...]

    def __call__(self, net_head: Floats) -> Floats:
        return np.asarray(np.interp(net_head, self.heads, self.powers))


def _place(nodes: tuple[float, ...], x: Floats) -> tuple[NDArray[np.int64], Floats]:
    """Interval of each x between rising nodes, and how far it lies along it, 0 to 1."""
    edges = np.asarray(nodes)
    inside = np.clip(x, edges[0], edges[-1])
    left = np.clip(np.searchsorted(edges, inside, side="right") - 1, 0, edges.size - 2)
    return left, (inside - edges[left]) / (edges[left + 1] - edges[left])


def rising_part(x: Floats, y: Floats) -> tuple[Floats, Floats]:
    """The points at which y is larger than at any x before."""
    before = np.concatenate([[-np.inf], np.maximum.accumulate(y)[:-1]])
    return x[y > before], y[y > before]


@dataclass(frozen=True)
class UnitGroup:
    """Equal units.

    count : number of units
    type : kaplan, francis, ...
    rated_discharge : of one unit, full opening at rated head [m3/s]
    rated_head : net [m]
    unit_capacity : of one unit, at the generator terminals [W]
    minimum_share : least discharge as a share of full discharge
    curve : efficiency of the turbine
    axis_level : where the head of an impulse machine ends [m]; None for the tailwater
    branch : k of h = k q^2 on the way of one unit alone [m per (m3/s)^2]
    output_limit : against the net head; None where the capacity alone limits
    starting_share : discharge at which a unit that stands starts, as a share of full discharge;
        where it is less than the minimum, at the minimum
    """

    count: int
    type: str
    rated_discharge: float
    rated_head: float
    unit_capacity: float
    minimum_share: float
    curve: EfficiencyCurve | JetCurve | BranchCurve | HillChart
    axis_level: float | None = None
    branch: float = 0.0
    output_limit: OutputLimit | None = None
    starting_share: float = 0.0

    def before_branch(self) -> UnitGroup:
        """The same units as the shared waterway sees them, their branches taken into the curve."""
        if not self.branch:
            return self
        lost = self.branch * self.rated_discharge**2
        share = lost / (self.rated_head + lost)
        openings = np.array([self.minimum_share, self.starting_share])
        minimum, starting = relative_opening(openings, share).tolist()
        return replace(
            self,
            rated_head=self.rated_head + lost,
            minimum_share=minimum,
            starting_share=starting,
            curve=BranchCurve(cast("EfficiencyCurve | JetCurve", self.curve), share),
            branch=0.0,
        )

    @property
    def head_exponent(self) -> float:
        """Full discharge grows with this power of the net head.

        One half is exact for nozzles and usual for other turbines; the discharge of a screw does
        not depend on the head.
        """
        return 0.0 if self.type == "screw" else 0.5

    def efficiency(self, share: Floats, net_head: Floats | float) -> Floats:
        """Efficiency at a share of full discharge and a net head [m], arrays that go together."""
        if isinstance(self.curve, HillChart):
            head = np.broadcast_to(net_head, np.broadcast_shapes(share.shape, np.shape(net_head)))
            return self.curve(share * self.full_discharge(head), head)
        return self.curve(share)

    @cached_property
    def _relative_output(self) -> tuple[Floats, Floats]:
        """Shares of full discharge, and share x efficiency at them as far as it rises."""
        share = np.linspace(self.minimum_share, 1, 2001)
        return rising_part(share, share * self.efficiency(share, self.rated_head))

    @property
    def best_relative_output(self) -> float:
        """Largest share x efficiency."""
        return float(self._relative_output[1][-1])

    def share_giving(self, relative_output: Floats) -> Floats:
        """Least share of full discharge with this share x efficiency; inf where not reached."""
        by_head = isinstance(self.curve, HillChart)
        if by_head or (self.output_limit is not None and isinstance(self.curve, BranchCurve)):
            return np.full(np.shape(relative_output), np.inf)  # found by search
        share, relative = self._relative_output
        return np.interp(relative_output, relative, share, right=np.inf)

    def most_output(self, net_head: Floats, share: Floats | float = 1.0) -> Floats:
        """The most that the unit may give at the generator terminals [W].

        net_head, share : arrays that go together [m]; the share of full discharge matters only
            where heads are those before a branch
        """
        if self.output_limit is None:
            return np.asarray(self.unit_capacity)
        if isinstance(self.curve, BranchCurve):
            net_head = net_head * self.curve.head_left(np.asarray(share))
        return np.minimum(self.unit_capacity, self.output_limit(net_head))

    def full_discharge(self, net_head: Floats) -> Floats:
        """Discharge of one fully open unit [m3/s] at `net_head` [m]; 0 without head."""
        if self.head_exponent == 0:
            return np.where(net_head > 0, self.rated_discharge, 0.0)
        return self.rated_discharge * np.sqrt(np.maximum(0.0, net_head) / self.rated_head)


@dataclass(frozen=True)
class LoadCurve:
    """Generator efficiency against load, the output at the terminals over the unit's capacity.

    curve : efficiency at loads from 0 to 1, read as that of a turbine
    """

    curve: EfficiencyCurve

    @cached_property
    def _loads(self) -> tuple[Floats, Floats]:
        """Power at the shaft over the capacity, rising, and the load that it gives."""
        load = np.linspace(0, 1.5, 3001)
        return np.maximum.accumulate(load / self.curve(load)), load

    def output(self, shaft: Floats, capacity: float) -> Floats:
        """Output at the terminals [W] of the power at the shaft [W]; capacity [W]."""
        return np.asarray(capacity * np.interp(shaft / capacity, *self._loads))

    def shaft(self, output: Floats, capacity: float) -> Floats:
        """Power at the shaft [W] for an output at the terminals [W]; capacity [W]."""
        return np.asarray(output / self.curve(output / capacity))


@dataclass(frozen=True)
class Electrical:
    """From the turbine shaft to the grid.

    drive, generator, transformer : efficiencies, 0 to 1; that of the generator at full load
    load_curve : of the generators; None where their efficiency is the same at every load
    own_use : taken while any unit runs [W]
    standing_use : taken while none runs [W]
    no_load_loss : of the transformer, all year [W]
    load_loss : of the transformer at `load_loss_at` [W]; it grows with the square of the load
    load_loss_at : output at the terminals [W]
    export_limit : after all losses [W]; None without one
    """

    drive: float = 1.0
    generator: float = 1.0
    transformer: float = 1.0
    own_use: float = 0.0
    export_limit: float | None = None
    load_curve: LoadCurve | None = None
    standing_use: float = 0.0
    no_load_loss: float = 0.0
    load_loss: float = 0.0
    load_loss_at: float = 1.0

    @property
    def imported(self) -> float:
        """Taken from the grid while no unit runs [W]."""
        return self.standing_use + self.no_load_loss

    def behind_transformer(self, output: Floats) -> Floats:
        """Power behind the transformer of a running plant [W], from that at the terminals [W]."""
        load_loss = self.load_loss * (output / self.load_loss_at) ** 2
        return np.maximum(0.0, output * self.transformer - self.no_load_loss - load_loss)

    @property
    def at_terminals(self) -> float:
        """Efficiency from the turbine shaft to the generator terminals, at full load."""
        return self.drive * self.generator


@dataclass(frozen=True)
class Plant:
    """The machines of a site.

    groups : groups of equal units
    electrical : common to all units
    density : of water [kg/m3]
    gravity : [m/s2]
    minimum_net_head : a state with less is not run [m]
    shutdown_above : river discharge that stops the plant [m3/s]; None without one
    """

    groups: tuple[UnitGroup, ...]
    electrical: Electrical
    density: float
    gravity: float
    minimum_net_head: float = 0.0
    shutdown_above: float | None = None

    @property
    def specific_weight(self) -> float:
        """Density times gravity [N/m3]."""
        return self.density * self.gravity

    def terminal_output(self, group: UnitGroup, water: Floats) -> Floats:
        """Output of one unit at the generator terminals [W], its capacity left aside.

        water : discharge x net head x turbine efficiency [m4/s]
        """
        shaft = self.specific_weight * self.electrical.drive * water  # behind the drive
        if self.electrical.load_curve is None:
            return shaft * self.electrical.generator
        return self.electrical.load_curve.output(shaft, group.unit_capacity)

    def water_needed(self, group: UnitGroup, output: Floats) -> Floats:
        """Discharge x net head x turbine efficiency of a unit [m4/s].

        output : at the generator terminals [W]
        """
        electrical = self.electrical
        if electrical.load_curve is None:
            shaft = output / electrical.generator
        else:
            shaft = electrical.load_curve.shaft(output, group.unit_capacity)
        return np.asarray(shaft / (self.specific_weight * electrical.drive))

    @property
    def installed_capacity(self) -> float:
        """Sum of the unit capacities [W]."""
        return sum(group.count * group.unit_capacity for group in self.groups)

    @property
    def rated_discharge(self) -> float:
        """Sum of the rated discharges [m3/s]."""
        return sum(group.count * group.rated_discharge for group in self.groups)

    def before_branches(self) -> Plant:
        """The plant as the shared waterway sees it."""
        return replace(self, groups=tuple(group.before_branch() for group in self.groups))

    @property
    def unit_count(self) -> int:
        return sum(group.count for group in self.groups)
