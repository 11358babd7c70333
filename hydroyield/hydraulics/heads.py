"""Gross and net head at a river discharge and a turbine discharge.

Head ends at the tailwater, or at the axis of an impulse machine. Waterway losses belong to the
turbine discharge of the whole plant.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from hydroyield.hydraulics.levels import Level, Weir
from hydroyield.hydraulics.losses import Waterway

Floats = NDArray[np.float64]

FREE = Waterway()


@dataclass(frozen=True)
class Heads:
    """The levels and losses of a site.

    headwater : level against river discharge; a `Weir` sees what is left after turbines and
        abstractions
    tailwater : level against the discharge that it follows
    follows_turbine : the tailwater follows the turbine discharge (a separate tailrace) and not
        the river
    river_level : level of the river where a tailrace joins it, against river discharge; None where
        it does not matter. The tailwater is never below it
    lowest_tailwater : level that backwater from downstream holds [m]
    waterway : losses that the discharge of the whole plant meets
    rack_of_season : (s,) coefficient of the trash racks [m per (m3/s)^2]; empty without them
    inflow_below_intake : water that joins between intake and tailwater, as a share of the river
        discharge at the intake
    """

    headwater: Level
    tailwater: Level
    follows_turbine: bool = False
    river_level: Level | None = None
    lowest_tailwater: float = -np.inf
    waterway: Waterway = FREE
    rack_of_season: tuple[float, ...] = ()
    inflow_below_intake: float = 0.0

    def below(self, discharge: Floats, unreturned: Floats) -> Floats:
        """River discharge at the tailwater [m3/s].

        discharge : (n,) at the intake [m3/s]
        unreturned : (n,) abstractions that do not come back above the tailwater [m3/s]
        """
        return np.maximum(0.0, discharge * (1 + self.inflow_below_intake) - unreturned)

    def at(
        self,
        discharge: Floats,
        abstracted: Floats,
        unreturned: Floats,
        season: NDArray[np.int64] | None = None,
    ) -> HeadState:
        """The levels at given states of the river.

        discharge : (n,) river discharge [m3/s]
        abstracted : (n,) all abstractions [m3/s]
        unreturned : (n,) abstractions that do not come back above the tailwater [m3/s]
        season : (n,) by which trash racks are blocked; None for the first
        """
        racks = np.asarray(self.rack_of_season)
        seasons = np.zeros(discharge.size, dtype=np.int64) if season is None else season
        over_weir = isinstance(self.headwater, Weir)
        below = self.below(discharge, unreturned)
        floor = np.full(discharge.size, self.lowest_tailwater)
        if self.river_level is not None:
            floor = np.maximum(floor, self.river_level(below))
        fixed = None if self.follows_turbine else np.maximum(floor, self.tailwater(below))
        return HeadState(
            self,
            after_abstraction=discharge - abstracted if over_weir else None,
            fixed_headwater=None if over_weir else self.headwater(discharge),
            fixed_tailwater=fixed,
            rack=racks[seasons] if racks.size else None,
            tailwater_floor=floor,
        )


@dataclass(frozen=True)
class HeadState:
    """Levels at n states of the river, open in the turbine discharge t (n,) [m3/s].

    Whatever does not depend on t is computed once.
    """

    heads: Heads
    after_abstraction: Floats | None
    fixed_headwater: Floats | None
    fixed_tailwater: Floats | None
    rack: Floats | None = None
    tailwater_floor: Floats | None = None

    def __getitem__(self, chosen: NDArray[np.intp] | NDArray[np.bool_]) -> HeadState:
        """The chosen states only."""

        def part(values: Floats | None) -> Floats | None:
            return None if values is None else values[chosen]

        return HeadState(
            self.heads,
            part(self.after_abstraction),
            part(self.fixed_headwater),
            part(self.fixed_tailwater),
            part(self.rack),
            part(self.tailwater_floor),
        )

    @property
    def size(self) -> int:
        """Number of states."""
        known = (self.after_abstraction, self.fixed_headwater, self.fixed_tailwater)
        return next(values.size for values in known if values is not None)

    @property
    def depends_on_turbines(self) -> bool:
        """Whether the net head changes with the turbine discharge."""
        levels_fixed = self.fixed_headwater is not None and self.fixed_tailwater is not None
        return not (levels_fixed and self.heads.waterway.is_free)

    def headwater(self, turbined: Floats) -> Floats:
        """Headwater level [m]."""
        if self.fixed_headwater is not None:
            return self.fixed_headwater
        assert self.after_abstraction is not None  # one of the two is always there
        over = self.after_abstraction - turbined
        weir = self.heads.headwater
        if isinstance(weir, Weir) and weir.drowned:
            return weir.drowned_level(over, self.tailwater(turbined))
        return weir(over)

    def tailwater(self, turbined: Floats) -> Floats:
        """Tailwater level [m]."""
        if self.fixed_tailwater is not None:
            return self.fixed_tailwater
        level = self.heads.tailwater(turbined)
        return level if self.tailwater_floor is None else np.maximum(level, self.tailwater_floor)

    def gross(self, turbined: Floats, axis_level: float | None = None) -> Floats:
        """Gross head [m], never below 0: down to the tailwater, or to `axis_level` [m]."""
        lower = self.tailwater(turbined) if axis_level is None else axis_level
        return np.maximum(0.0, self.headwater(turbined) - lower)

    def loss(self, turbined: Floats) -> Floats:
        """Head lost in the waterway [m]."""
        coefficient = self.heads.waterway.coefficient(turbined)
        if self.rack is not None:
            coefficient = coefficient + self.rack
        return np.asarray(coefficient * turbined**2)

    def net(self, turbined: Floats, axis_level: float | None = None) -> Floats:
        """Net head [m]; negative where the losses exceed the gross head."""
        return self.gross(turbined, axis_level) - self.loss(turbined)
