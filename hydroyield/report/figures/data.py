"""What each figure shows, as plain arrays and without a drawing library."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from hydroyield.river.years import MONTH_NAMES

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]

UNSEEN = 2e-5  # share of the gross energy

LEDGER_LABELS = {
    "gross": "all the water",
    "reserved": "kept in river or taken by others",
    "shutdown": "shut down in high water",
    "no_admissible_head": "too little head",
    "above_full_discharge": "more than the units can pass",
    "capacity_limit": "units at full capacity",
    "below_minimum_or_unused": "below minimum, or unused",
    "outage": "units out of service",
    "levels": "head unlike reference head",
    "waterway": "waterway losses",
    "turbine": "turbine losses",
    "drive_and_generator": "drive and generator losses",
    "transformer": "transformer losses",
    "own_use": "own use",
    "export_limit": "above export limit",
    "imports": "imports while standing",
    "net": "delivered",
}


@dataclass(frozen=True)
class Curve:
    """The plant along the duration curve, all (n,), discharge falling; mean of the months.

    exceedance : [%]
    river, offered, turbined : discharges [m3/s]
    gross_head, net_head : [m]
    mean_river, low_river : mean of all days and the value exceeded in 95 % of the time [m3/s]
    """

    exceedance: Floats
    river: Floats
    offered: Floats
    turbined: Floats
    gross_head: Floats
    net_head: Floats
    mean_river: float
    low_river: float

    @property
    def reserved(self) -> Floats:
        """Kept in the river or taken by others [m3/s]."""
        return self.river - self.offered

    @property
    def left_over(self) -> Floats:
        """Offered and not turbined [m3/s]."""
        return self.offered - self.turbined


@dataclass(frozen=True)
class HeadCurve:
    """Head against river discharge, all (n,), discharge rising; mean of the months.

    river : [m3/s]
    gross_head, net_head : [m]
    least_head : net head below which the plant is not run [m]; 0 without one
    shutdown_above : river discharge that stops the plant [m3/s]; None without one
    """

    river: Floats
    gross_head: Floats
    net_head: Floats
    least_head: float = 0.0
    shutdown_above: float | None = None


@dataclass(frozen=True)
class PowerCurve:
    """Power duration curve, all (n,).

    exceedance : [%]
    power : net [kW]
    capacity : installed [kW]
    export_limit : [kW]; None without one
    energy : mean annual energy [MWh]
    """

    exceedance: Floats
    power: Floats
    capacity: float
    export_limit: float | None
    energy: float


@dataclass(frozen=True)
class UnitCurve:
    """Turbine discharge and units running along the duration curve, all (n,).

    exceedance : [%]
    offered, turbined : mean of the months [m3/s]
    running : units that run in `months`
    count : units of the plant
    rated : rated discharge of all units together [m3/s]
    months : in words, the months that `running` stands for; "" where all months are alike
    """

    exceedance: Floats
    offered: Floats
    turbined: Floats
    running: Ints
    count: int
    rated: float
    months: str


@dataclass(frozen=True)
class EfficiencyCurve:
    """Plant efficiency, from the turbined water at gross head to the grid, all (n,).

    turbined : in the order of rising river discharge [m3/s]
    efficiency : net power over density x gravity x discharge x gross head; nan at a stand [%]
    spilling : the river offers more than the turbines take
    mean : the same over the years used, energy over energy [%]; nan without energy
    months : in words, the months that the curve stands for; "" where all months are alike
    """

    turbined: Floats
    efficiency: Floats
    spilling: NDArray[np.bool_]
    mean: float
    months: str


@dataclass(frozen=True)
class YearEnergies:
    """Energy of each year from the first to the last, years left out as nan.

    names : the years as people write them
    energy : (y,) [MWh]
    filled : names of the years with days filled from a reference
    """

    names: tuple[str, ...]
    energy: Floats
    filled: frozenset[str] = frozenset()

    @property
    def mean(self) -> float:
        """Mean of the years used [MWh]."""
        return float(np.nanmean(self.energy))


@dataclass(frozen=True)
class MonthEnergies:
    """Energy of each month of each year used.

    names : twelve names in the order of the hydrological year
    energy : (y, 12) in the same order [MWh]
    """

    names: tuple[str, ...]
    energy: Floats

    @property
    def mean(self) -> Floats:
        """(12,) [MWh]"""
        return np.asarray(self.energy.mean(axis=0))

    def exceeded(self, percent: float) -> Floats:
        """(12,) energy exceeded in so many per cent of the years, linear between them [MWh]."""
        return np.asarray(np.quantile(self.energy, 1 - percent / 100, axis=0))


@dataclass(frozen=True)
class LedgerBar:
    """One bar of the way from gross to net.

    energy : of the step, losses negative [MWh]
    start, end : of the bar [MWh]
    """

    step: str
    label: str
    energy: float
    start: float
    end: float


@dataclass(frozen=True)
class Hydrograph:
    """One hydrological year, day by day, (d,).

    kind : "least energy", "median energy" or "most energy"; "only year" where there is one
    name : the year as people write it
    energy : [MWh]
    river, turbined : nan where there is no value [m3/s]
    month_starts : first day of each month, the first day of the year being 0
    months : their names
    filled : days filled from a reference; None without
    """

    kind: str
    name: str
    energy: float
    river: Floats
    turbined: Floats
    month_starts: tuple[int, ...]
    months: tuple[str, ...]
    filled: NDArray[np.bool_] | None = None


def thinned(x: Floats, y: Floats, dots: int = 1000) -> tuple[Floats, Floats]:
    """A line less the points that a drawing of `dots` x `dots` cannot show.

    x, y : (n,) of any unit

    Of consecutive points in one dot the first stays, and always the last of all.
    """
    places = np.stack([np.round(v / max(float(np.ptp(v)), 1e-300) * dots) for v in (x, y)])
    moved = (np.diff(places, axis=1) != 0).any(axis=0)
    keep = np.concatenate([[True], moved])
    keep[-1] = True
    return x[keep], y[keep]


def typical_years(energy: Floats) -> list[tuple[str, int]]:
    """(kind, row) of the years with the least, the nearest to the median and the most energy.

    energy : (y,) [MWh], or any unit
    """
    order = np.argsort(energy, kind="stable")
    if order.size == 1:
        return [("only year", 0)]
    least, most = ("least energy", int(order[0])), ("most energy", int(order[-1]))
    between = order[1:-1]
    if not between.size:
        return [least, most]
    off = np.abs(energy[between] - np.median(energy))
    return [least, ("median energy", int(between[off.argmin()])), most]


def ledger_bars(rows: list[tuple[str, float]]) -> tuple[LedgerBar, ...]:
    """Bars from gross to net, each beginning where the one before ends.

    Rows too small to be seen are left out.

    rows : (step, energy [MWh]), gross first and net last
    """
    bars, level = [], 0.0
    smallest = UNSEEN * rows[0][1]
    for step, energy in rows:
        total = step in ("gross", "net")
        start = 0.0 if total else level
        level = start + energy
        if total or abs(energy) > smallest:
            bars.append(LedgerBar(step, LEDGER_LABELS[step], energy, start, level))
    return tuple(bars)


def share_of_time(exceedance: Floats, holds: NDArray[np.bool_]) -> float:
    """Share of the time in which something holds [%], from points along a duration curve.

    exceedance : (n,) rising [%]
    holds : (n,)
    """
    return float((np.diff(exceedance) * (holds[1:] / 2 + holds[:-1] / 2)).sum())


def months_in_words(months: list[int]) -> str:
    """Rising month numbers, January 0, as people write them: "Jan, Jun to Aug"."""
    runs: list[list[int]] = []
    for month in months:
        if runs and month == runs[-1][-1] + 1:
            runs[-1].append(month)
        else:
            runs.append([month])
    if len(runs) > 1 and runs[0][0] == 0 and runs[-1][-1] == 11:  # the turn of the year
        runs[0] = runs.pop() + runs[0]
    short = [MONTH_NAMES[m][:3] for m in range(12)]
    return ", ".join(
        short[run[0]] if len(run) == 1 else f"{short[run[0]]} to {short[run[-1]]}" for run in runs
    )
