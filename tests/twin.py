"""A naive twin of the energy estimate: the same definitions, written a second time as plain loops.

It shares no code with the package and makes no use of its ideas (no cells, no curves of power
against discharge): every day of the record is searched for the best discharges of the
units on its own. The only shortcuts are to remember a day that looks exactly like an earlier one,
and to read the depth of a channel between 40 000 depths that were bisected once.

It reads site files whose quantities are bare numbers in the default units (m, m3/s, kW, km2, degC,
fractions, `percent` in per cent) and a record `date,discharge` in m3/s with blanks for no value.
It raises ValueError for what it does not know (duration tables, presets, outages that are placed
where they cost least, more than four units running together, any key that is not in KEYS) instead
of leaving it out.

Its own accuracy, measured on the sites of twin_sites.py by halving all steps of the search
(`fineness=2`): annual energy changes by 2e-6 with three units, by less than 1e-7 with one or two.
Ledger rows change by less than 1e-5 of the annual energy, but for one case: with three units the
border between `capacity_limit` and `below_minimum_or_unused` moves by 5e-4, as sharings with and
without a unit at its capacity are then within 1e-5 of each other.
A day's search takes about 1.5 ms with one unit, 8 with two, 9 with three alike, 18 with four
alike and 40 with three alike and one other (one core of a small machine).
"""

from __future__ import annotations

import calendar
import csv
import datetime
import functools
import itertools
import math
from collections.abc import Callable
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

import numpy as np
import yaml
from iapws._iapws import _Liquid
from scipy.interpolate import PchipInterpolator

ACCURACY = 3e-6  # of annual energy, see above

Array = np.ndarray

# efficiency at q / q_full = 0.1, 0.2, ... 1.0; "-" where no value is given (constant below)
TYPICAL = {
    "pelton": ".66 .82 .87 .89 .90 .90 .90 .90 .895 .885",
    "kaplan": ".40 .72 .84 .885 .905 .915 .92 .92 .915 .905",
    "semi_kaplan": "- .55 .71 .80 .85 .88 .895 .90 .90 .89",
    "francis": "- .45 .62 .73 .80 .86 .90 .92 .92 .90",
    "propeller": "- - - .35 .50 .62 .72 .80 .87 .90",
    "crossflow": ".55 .72 .78 .80 .81 .82 .82 .82 .82 .81",
    "turgo": ".55 .75 .82 .845 .85 .85 .85 .85 .85 .84",
    "screw": ".50 .65 .72 .76 .78 .79 .80 .80 .79 .78",
}
MINIMUM = {
    "francis": 0.40,
    "screw": 0.15,
    "semi_kaplan": 0.30,
    "kaplan": 0.15,
    "crossflow": 0.15,
    "pelton": 0.10,
    "turgo": 0.20,
    "propeller": 0.75,
}
STEPS = [
    "gross",
    "reserved",
    "shutdown",
    "no_admissible_head",
    "above_full_discharge",
    "capacity_limit",
    "below_minimum_or_unused",
    "outage",
    "levels",
    "waterway",
    "turbine",
    "drive_and_generator",
    "transformer",
    "own_use",
    "export_limit",
    "imports",
]
# the keys it knows; of those in brackets nothing that it computes depends
KEYS = {
    "site": "name latitude altitude water_temperature (source)",
    "discharge": "record year_start_month minimum_month_coverage transfer inflow_below_intake"
    " (source)",
    "head": "headwater tailwater minimum_net_head (source)",
    "headwater": "level table weir (source)",
    "weir": "crest length coefficient drowned (source)",
    "tailwater": "level table rating channel gaugings follows river not_below (source)",
    "abstractions": "name discharge months counts_as_environmental_flow returns (source)",
    "environmental_flow": "rule months discharge percent share above maximum_take steps"
    " (source permit date)",
    "turbines": "count type rated_discharge rated_head unit_capacity minimum_discharge efficiency"
    " axis_level jets waterway output_limit starting_discharge (source)",
    "electrical": "drive_efficiency generator_efficiency transformer_efficiency own_use"
    " standing_use transformer_no_load_loss transformer_load_loss export_limit (metered_at source)",
    "operation": "shutdown_above planned_outage forced_outage_rate common_outage_rate standstill"
    " closed (degradation source)",
}
# steps of the first grid for 1, 2, ... running units: total discharge, then openings
FIRST_GRID = {1: [96], 2: [40, 32], 3: [24, 32, 32], 4: [12, 7, 7, 7]}
# finer grids: their steps, how many old steps they reach to both sides, how often
FINER_GRID = {1: (24, 1.5, 5), 2: (6, 1.5, 12), 3: (6, 2.0, 12), 4: (4, 1.0, 12)}
EQUAL = 1e-9  # relative: outputs and limits closer than this are the same
AT_CAPACITY = 1e-4  # relative: the search comes this close to the kink at the capacity


# ---------------------------------------------------------------- units and their best discharges


@dataclass(frozen=True)
class Unit:
    """One unit. Output [W] = factor x q x H x efficiency(q / q_full), at most `capacity` [W]."""

    group: int
    kind: str
    rated_discharge: float  # m3/s
    rated_head: float  # m
    minimum: float  # of full discharge, both at the head before its branch
    capacity: float  # W
    factor: float  # rho g x drive x generator; without the generator where it has a load curve
    efficiency: Callable[[Any], Any] = field(repr=False, compare=False)
    axis: float | None = None  # m
    generator: Callable[[Any], Any] | None = field(default=None, repr=False, compare=False)
    limit: tuple[tuple[float, float], ...] = ()  # net head [m] and the most it gives [W]
    start: float = 0.0  # share of full discharge at which it starts
    branch: float = 0.0  # k of the head k q^2 lost on the way of this unit alone
    chart: Callable[[Any, Any], Any] | None = field(default=None, repr=False, compare=False)

    def behind_branch(self, head: Any, discharge: Any) -> Any:
        """Net head [m] of the unit itself, from that before its branch."""
        return np.maximum(head - self.branch * np.asarray(discharge) ** 2, 0.0)

    def eta(self, discharge: Any, net: Any) -> Any:
        """Turbine efficiency at a discharge [m3/s] and the net head of the unit itself [m]."""
        if self.chart is not None:
            return self.chart(discharge, net)
        free = self.rated_discharge * np.sqrt(np.maximum(net, 1e-9) / self.rated_head)
        if self.kind == "screw":
            free = self.rated_discharge
        return self.efficiency(np.clip(discharge / free, 0.0, 1.0))

    def most(self, head: Any) -> Any:
        """The most that the unit may give [W] at a net head [m]."""
        if not self.limit:
            return self.capacity
        heads, powers = zip(*self.limit, strict=True)
        return np.minimum(self.capacity, np.interp(head, heads, powers))

    def terminals(self, shaft: Any) -> Any:
        """Output [W] of what reaches the generator, its efficiency read at the output itself."""
        if self.generator is None:
            return shaft
        output = np.asarray(shaft, dtype=float) * 0.95
        for _ in range(80):
            output = shaft * self.generator(np.clip(output / self.capacity, 0, 1.5))
        return output


def full_discharge(unit: Unit, head: Any) -> Any:
    """Discharge at full opening [m3/s] at a net head [m]; 0 where there is no head."""
    head = np.maximum(head, 0.0)
    if unit.kind == "screw":
        return np.where(head > 0, unit.rated_discharge, 0.0)
    # behind its branch: q = qr sqrt((H - k q^2) / Hr), solved for q
    rated_head = unit.rated_head + unit.branch * unit.rated_discharge**2
    return unit.rated_discharge * np.sqrt(head / rated_head)


def opening_of_share(share: float, branch: float, discharge: float, head: float) -> float:
    """Discharge over that of full opening, both at one head before the branch.

    share : of full discharge at the head behind the branch, which is higher the less is taken
    discharge, head : rated
    """
    lost = branch * discharge**2 / head
    return share * math.sqrt((1 + lost) / (1 + share**2 * lost))


def efficiency_of_jets(curve: Callable[[Any], Any], jets: int) -> Callable[[Any], Any]:
    """As many jets open as give the most; each takes its part of the discharge."""

    def best(opening: Any) -> Any:
        tried = []
        for opened in range(1, jets + 1):
            of_jet = np.asarray(opening, dtype=float) * jets / opened
            tried.append(np.where(of_jet <= 1 + EQUAL, curve(np.minimum(of_jet, 1.0)), 0.0))
        return np.max(tried, axis=0)

    return best


def efficiency_chart(table: dict[str, Any]) -> Callable[[Any, Any], Any]:
    """Linear along the discharges of each head, then over the heads; constant outside."""
    heads = table["heads"]

    def at(discharge: Any, head: Any) -> Any:
        rows = [np.interp(discharge, table["discharges"], row) for row in table["values"]]
        found = rows[0]
        for i in range(len(heads) - 1):
            part = np.clip((np.asarray(head) - heads[i]) / (heads[i + 1] - heads[i]), 0, 1)
            found = found + part * (rows[i + 1] - rows[i])
        return found

    return at


def efficiency_curve(points: list[list[float]]) -> Callable[[Any], Any]:
    """PCHIP through the points (opening, efficiency), constant outside them."""
    if len(points) == 1:
        return lambda opening: np.full(np.shape(opening), float(points[0][1]))
    x = [float(p[0]) for p in points]
    curve = PchipInterpolator(x, [float(p[1]) for p in points])
    return lambda opening: curve(np.minimum(np.maximum(opening, x[0]), x[-1]))


def typical_curve(kind: str) -> list[list[float]]:
    """The typical efficiency points of a type."""
    words = TYPICAL[kind].split()
    return [[(i + 1) / 10, float(word)] for i, word in enumerate(words) if word != "-"]


def unit_output(unit: Unit, opening: Any, head: Any) -> Any:
    """Output [W] at an opening (q / q_full) and a net head [m]."""
    discharge = opening * full_discharge(unit, head)
    net = unit.behind_branch(head, discharge)
    shaft = unit.factor * discharge * net * unit.eta(discharge, net)
    return np.minimum(unit.terminals(shaft), unit.most(net))


Head = Callable[[Unit, Any], Any]  # (unit, total discharge) -> net head, 0 where not admissible


def net_heads(units: list[Unit], head: Head, total: Any) -> list[Any]:
    """Net head of each unit at these totals, asked for once for each group."""
    of_group: dict[int, Any] = {}
    for unit in units:
        if unit.group not in of_group:
            of_group[unit.group] = np.broadcast_to(head(unit, total), np.shape(total))
    return [of_group[unit.group] for unit in units]


def total_full(units: list[Unit], head: Head, total: Any, openings: list[float]) -> Any:
    """Sum of the discharges at these openings when the whole plant turbines `total`."""
    parts = zip(units, openings, net_heads(units, head, total), strict=True)
    return sum(opening * full_discharge(unit, net) for unit, opening, net in parts)


def fixed_point(
    units: list[Unit], head: Head, limit: float, openings: list[float]
) -> tuple[float, float]:
    """The total discharge at which the units, opened so far, pass just that total.

    The sum of discharges falls with the total (head falls), so there is one crossing.
    Returns the last total below it and the first above it; (limit, limit) when the units would
    pass `limit` or more.
    """
    if float(total_full(units, head, limit, openings)) >= limit * (1 - EQUAL):
        return limit, limit
    low, high = 0.0, limit
    for _ in range(6):  # cut the interval into 64 parts again and again
        grid = np.linspace(low, high, 65)
        under = total_full(units, head, grid, openings) >= grid
        under[0] = True
        last = int(np.flatnonzero(under)[-1])
        if last == 64:
            return high, high
        low, high = float(grid[last]), float(grid[last + 1])
    return low, high


def search_running(
    units: list[Unit], head: Head, limit: float, fineness: int = 1
) -> tuple[float, float, list[float]]:
    """Best output when exactly these units run and together turbine at most `limit`.

    The unknowns are the total discharge and the openings of all units but the last; the last
    takes what is left of the total. A grid over all of them, then grids of half the step or
    less around the best point, again and again.
    Returns (output [W], total [m3/s], discharge of each unit [m3/s]).
    """
    if len(units) not in FIRST_GRID:
        raise ValueError("more than four units are not known")
    nothing = (0.0, 0.0, [0.0] * len(units))
    minima = [u.minimum for u in units]
    most, _ = fixed_point(units, head, limit, [1.0] * len(units))
    if most <= 0 or float(total_full(units, head, most, minima)) > most * (1 + EQUAL):
        return nothing
    _, least = fixed_point(units, head, most, minima)
    bounds = [(least, most)] + [(u.minimum, 1.0) for u in units[:-1]]
    counts = FIRST_GRID[len(units)]
    windows, best = bounds, nothing
    finer, reach, turns = FINER_GRID[len(units)]
    for _ in range(turns + 1):
        sizes = [n * fineness + 1 for n in counts]
        axes = [np.linspace(a, b, n) for (a, b), n in zip(windows, sizes, strict=True)]
        output, place, discharges = best_on_grid(units, head, axes)
        if output <= 0:
            break
        if better(output, place[0], best[0], best[1]):
            best = (output, place[0], discharges)
        windows = [
            around(x, reach * (axis[1] - axis[0]), limits)
            for x, axis, limits in zip(place, axes, bounds, strict=True)
        ]
        counts = [finer] * len(units)
    return best


def around(x: float, reach: float, bounds: tuple[float, float]) -> tuple[float, float]:
    """The window from x - reach to x + reach, within the bounds."""
    return max(bounds[0], x - reach), min(bounds[1], x + reach)


def best_on_grid(
    units: list[Unit], head: Head, axes: list[Array]
) -> tuple[float, list[float], list[float]]:
    """Try every combination of total discharge (first axis) and openings of all but the last.

    Returns (output [W], the point of the grid, discharge of each unit); output 0 if none runs.
    """
    count = len(units)
    totals = axes[0].reshape([-1] + [1] * (count - 1))
    left = np.broadcast_to(totals, [len(a) for a in axes])
    output: Any = 0.0
    possible: Any = True
    for i, (unit, net) in enumerate(zip(units, net_heads(units, head, axes[0]), strict=True)):
        net = net.reshape(totals.shape)
        full = full_discharge(unit, net)
        possible = possible & (net > 0)
        if i < count - 1:
            opening = axes[i + 1].reshape([-1 if j == i + 1 else 1 for j in range(count)])
            left = left - opening * full
        else:
            opening = left / np.where(full > 0, full, np.inf)
            possible = possible & (opening >= unit.minimum * (1 - EQUAL)) & (opening <= 1 + EQUAL)
        output = output + unit_output(unit, np.clip(opening, unit.minimum, 1.0), net)
    output = np.where(possible, output, 0.0)
    highest = float(output.max())
    if highest <= 0:
        return 0.0, [], []
    equal = np.argwhere(output >= highest * (1 - 1e-11))  # sorted by total: the first has the least
    spot = tuple(int(k) for k in equal[0])
    place = [float(axis[k]) for axis, k in zip(axes, spot, strict=True)]
    nets = net_heads(units, head, place[0])
    discharges = [
        float(x * full_discharge(unit, net))
        for unit, net, x in zip(units[:-1], nets[:-1], place[1:], strict=True)
    ]
    return float(output[spot]), place, [*discharges, place[0] - sum(discharges)]


def better(output: float, total: float, best: float, best_total: float) -> bool:
    """More output, or as much from less water."""
    if output > best * (1 + EQUAL):
        return True
    return output >= best * (1 - EQUAL) and output > 0 and total < best_total


def brute_force_output(
    units: list[Unit], head: Head, offered: float, fineness: int = 1
) -> tuple[float, list[float]]:
    """The best the units can do with `offered` water [m3/s].

    head : net head [m] of a unit at a total turbine discharge (number or array), falling with it;
        0 where the unit must not run

    Returns (output [W], discharge of each unit [m3/s]); units that stand have 0.
    """
    best, best_total, best_split = 0.0, 0.0, [0.0] * len(units)
    if offered <= 0:
        return best, best_split
    for running in running_sets(units):
        for last in last_of_each_group(units, running):
            order = [i for i in running if i != last] + [last]
            output, total, split = search_running(
                [units[i] for i in order], head, offered, fineness
            )
            if better(output, total, best, best_total):
                best, best_total = output, total
                best_split = [0.0] * len(units)
                for i, discharge in zip(order, split, strict=True):
                    best_split[i] = discharge
    return best, best_split


def running_sets(units: list[Unit]) -> list[list[int]]:
    """Every choice of running units; of units of one group the first ones run, as all are alike."""
    groups: dict[int, list[int]] = {}
    for i, unit in enumerate(units):
        groups.setdefault(unit.group, []).append(i)
    choices = [[members[:n] for n in range(len(members) + 1)] for members in groups.values()]
    sets = [list(itertools.chain(*parts)) for parts in itertools.product(*choices)]
    return [s for s in sets if s]


def last_of_each_group(units: list[Unit], running: list[int]) -> list[int]:
    """The running units that take turns in taking the rest of the water: one of each group."""
    return list({units[i].group: i for i in running}.values())


# ---------------------------------------------------------------- the site and its record


@dataclass
class Plant:
    """A site with its record moved to the site, constants and units."""

    site: dict[str, Any]
    days: dict[datetime.date, float]
    density: float
    gravity: float
    units: list[Unit] = field(default_factory=list)
    remembered: dict[Any, Any] = field(default_factory=dict)
    fineness: int = 1
    waiting: set[datetime.date] = field(default_factory=set)

    def __post_init__(self) -> None:
        self.falling = sorted(self.days.values(), reverse=True)
        self.mean = sum(self.falling) / len(self.falling)

    def exceeded(self, percent: float) -> float:
        """Discharge equalled or exceeded so many per cent of the time; Weibull ranks."""
        rank = percent / 100 * (len(self.falling) + 1)  # first rank 1
        rank = min(max(rank, 1.0), float(len(self.falling)))
        whole = int(rank)
        if whole == len(self.falling):
            return self.falling[-1]
        upper, lower = self.falling[whole - 1], self.falling[whole]
        return upper + (rank - whole) * (lower - upper)


def read_record(path: Path) -> dict[datetime.date, float]:
    """{date: discharge [m3/s]} of the days that have a value."""
    with open(path, newline="") as file:
        rows = list(csv.DictReader(file))
    return {
        datetime.date.fromisoformat(row["date"]): float(row["discharge"])
        for row in rows
        if row["discharge"].strip()
    }


def move_to_site(days: dict[datetime.date, float], transfer: dict[str, Any] | None) -> Any:
    """Scale with the ratio of the areas or of the means, if asked for."""
    if transfer is None:
        return days
    if transfer["method"] == "mean_ratio":
        factor = transfer["site_mean"] / transfer["gauge_mean"]
    else:
        ratio = transfer["site_area"] / transfer["gauge_area"]
        factor = ratio ** transfer.get("exponent", 1.0)
    return {day: q * factor for day, q in days.items()}


def water_density(site: dict[str, Any]) -> float:
    """Density [kg/m3] of liquid water at 0.1 MPa by IAPWS SR6-08, or 1000."""
    if site.get("water_temperature") is None:
        return 1000.0
    from iapws._iapws import _Liquid

    return float(_Liquid(273.15 + site["water_temperature"], 0.1)["rho"])


def local_gravity(site: dict[str, Any]) -> float:
    """Gravity [m/s2] by IEC 60041 from latitude and altitude, or 9.81."""
    if site.get("latitude") is None:
        return 9.81
    sine = math.sin(math.radians(site["latitude"]))
    return 9.7803 * (1 + 0.0053 * sine**2) - 3e-6 * site.get("altitude", 0.0)


# ---------------------------------------------------------------- water of one day


@dataclass(frozen=True)
class Water:
    """What becomes of the river's discharge on a day, all in m3/s."""

    offered: float
    abstracted: float
    lost: float  # abstracted and not given back above the tailwater
    kept: float  # min(Q, the larger of environmental flow and counted abstractions)
    month: int = 1  # for the trash in the racks, 1 where all months are alike


def environmental_flow(plant: Plant, month: int, discharge: float) -> float:
    """The largest, the sum or the first of the rules that hold, never more than the inflow."""
    values = [0.0]
    for rule in plant.site.get("environmental_flow") or []:
        kind = rule["rule"]
        if month not in rule.get("months", range(1, 13)):
            continue
        if kind == "constant":
            value = rule["discharge"]
        elif kind == "monthly":
            value = rule["discharge"][month - 1]
        elif kind == "exceedance":
            value = plant.exceeded(rule["percent"])
        elif kind == "mean_share":
            value = rule["share"] * plant.mean
        elif kind == "inflow_share":
            above = rule.get("above", 0.0)
            value = min(discharge, above) + rule["share"] * max(0.0, discharge - above)
            value = max(value, discharge - rule.get("maximum_take", math.inf))
        elif kind == "steps":
            value = [kept for inflow, kept in rule["steps"] if inflow <= discharge][-1]
        else:
            raise ValueError(f"rule {kind} is not known")
        values.append(value)
    way = plant.site.get("environmental_flow_combination", "largest")
    if way == "largest":
        return min(discharge, max(values))
    return min(discharge, sum(values) if way == "sum" else [*values[1:], 0.0][0])


def share_water(plant: Plant, month: int, discharge: float) -> Water:
    """Split a day's discharge into what the turbines are offered and the rest."""
    abstracted = counted = lost = 0.0
    for item in plant.site.get("abstractions") or []:
        if month not in item.get("months", range(1, 13)):
            continue
        abstracted += item["discharge"]
        if item.get("counts_as_environmental_flow", False):
            counted += item["discharge"]
        if not item.get("returns", True):
            lost += item["discharge"]
    reserve = environmental_flow(plant, month, discharge)
    release = max(0.0, reserve - counted)
    offered = max(0.0, discharge - release - abstracted)
    racks = [
        part["trash_rack"] for part in plant.site.get("waterway") or [] if "trash_rack" in part
    ]
    by_month = any(isinstance(rack.get("blockage"), list) for rack in racks)
    kept = min(discharge, max(reserve, counted))
    return Water(offered, abstracted, lost, kept, month if by_month else 1)


# ---------------------------------------------------------------- levels and heads


def table_level(points: list[list[float]], discharge: Any) -> Any:
    """Linear between points, constant below them, the last segment extended above them."""
    q = [float(p[0]) for p in points]
    z = [float(p[1]) for p in points]
    level = np.interp(discharge, q, z)
    if len(points) > 1:
        slope = (z[-1] - z[-2]) / (q[-1] - q[-2])
        level = level + slope * np.maximum(np.asarray(discharge) - q[-1], 0.0)
    return level


def normal_depth(channel: dict[str, float], discharge: Any) -> Any:
    """Depth [m] of uniform flow (Manning) in a trapezoid, by bisection."""
    width, side = channel.get("bottom_width", 0.0), channel.get("side_slope", 0.0)
    discharge = np.asarray(discharge, dtype=float)
    low, high = np.zeros(discharge.shape), np.full(discharge.shape, 50.0)
    for _ in range(48):
        depth = (low + high) / 2
        area = (width + side * depth) * depth
        perimeter = width + 2 * depth * math.sqrt(1 + side**2)
        passed = area ** (5 / 3) / perimeter ** (2 / 3) * channel["slope"] ** 0.5
        too_deep = passed / channel["manning_n"] >= discharge
        high = np.where(too_deep, depth, high)
        low = np.where(too_deep, low, depth)
    return (low + high) / 2


@functools.cache
def depths_found_once(channel: tuple[tuple[str, float], ...]) -> tuple[Array, Array]:
    """40 000 discharges [m3/s], closer together where depth rises fast, and their depths [m]."""
    discharge = 1000.0 * np.linspace(0.0, 1.0, 40001) ** 3
    return discharge, normal_depth(dict(channel), discharge)


def channel_depth(channel: dict[str, float], discharge: Any) -> Any:
    """Normal depth [m], read between depths that were bisected once (to 1e-7 m)."""
    if np.max(discharge) > 1000.0:
        return normal_depth(channel, discharge)
    numbers = tuple((key, float(v)) for key, v in sorted(channel.items()) if key != "source")
    return np.interp(discharge, *depths_found_once(numbers))


def tailwater_level(tailwater: dict[str, Any], discharge: Any) -> Any:
    """Level [m] below the turbines at the discharge that the level follows."""
    if "level" in tailwater:
        return tailwater["level"] + 0.0 * np.asarray(discharge)
    if "table" in tailwater:
        return table_level(tailwater["table"], discharge)
    if "rating" in tailwater:
        r = tailwater["rating"]
        return r["zero_level"] + (np.asarray(discharge) / r["coefficient"]) ** (1 / r["exponent"])
    if "channel" in tailwater:
        return tailwater["channel"]["bed_level"] + channel_depth(tailwater["channel"], discharge)
    if "gaugings" in tailwater:
        zero, coefficient, exponent = fitted_rating(tuple(map(tuple, tailwater["gaugings"])))
        return zero + (np.asarray(discharge) / coefficient) ** (1 / exponent)
    raise ValueError(f"tailwater {sorted(tailwater)} is not known")


@functools.cache
def fitted_rating(gaugings: tuple[tuple[float, float], ...]) -> tuple[float, float, float]:
    """Zero level, coefficient and exponent of Q = C (h - a)^b: least squares of log Q, the zero
    level by trying many and then more about the best."""
    discharge, level = np.array(gaugings).T
    lowest = level.min()

    def fit(drop: float) -> tuple[float, float, float]:
        x = np.log(level - (lowest - drop))
        slope, start = np.polyfit(x, np.log(discharge), 1)
        return float(((np.log(discharge) - start - slope * x) ** 2).sum()), slope, start

    tried = np.geomspace(1e-6, 10 * (level.max() - lowest), 400)
    for _ in range(12):
        best = int(np.argmin([fit(drop)[0] for drop in tried]))
        tried = np.geomspace(tried[max(best - 1, 0)], tried[min(best + 1, tried.size - 1)], 40)
    _, slope, start = fit(tried[20])
    return float(lowest - tried[20]), math.exp(start), float(slope)


def headwater_level(
    headwater: dict[str, Any],
    discharge: float,
    abstracted: float,
    total: Any,
    downstream: Any = -np.inf,
) -> Any:
    """Level [m] above the turbines, which turbine `total` [m3/s] of the river's discharge.

    downstream : tailwater level, which may drown a weir [m]
    """
    if "level" in headwater:
        return headwater["level"] + 0.0 * np.asarray(total)
    if "table" in headwater:
        return table_level(headwater["table"], discharge) + 0.0 * np.asarray(total)
    if "weir" in headwater:
        weir = headwater["weir"]
        over = np.maximum(discharge - np.asarray(total) - abstracted, 0.0)
        unit = over / (weir["coefficient"] * weir["length"])
        if weir.get("drowned"):
            return weir["crest"] + drowned_depth(unit, downstream - weir["crest"])
        return weir["crest"] + unit ** (2 / 3)
    raise ValueError(f"headwater {sorted(headwater)} is not known")


def drowned_depth(unit: Any, behind: Any) -> Any:
    """Depth h [m] over a crest with Villemonte's q = h^1.5 (1 - (behind / h)^1.5)^0.385.

    unit : discharge over coefficient and length of the crest
    behind : depth of the water below the weir over the crest [m], negative below it
    """
    unit, behind = np.broadcast_arrays(unit, np.maximum(behind, 0.0))
    low, high = np.array(behind), behind + unit ** (2 / 3) + 1.0
    for _ in range(60):
        depth = (low + high) / 2
        free = np.maximum(1 - (behind / np.maximum(depth, 1e-12)) ** 1.5, 0.0)
        enough = depth**1.5 * free**0.385 >= unit
        low, high = np.where(enough, low, depth), np.where(enough, depth, high)
    return high


BARS = {"rectangular": 2.42, "rounded_upstream": 1.83, "rounded_both": 1.67, "circular": 1.79,
        "teardrop": 0.76}  # fmt: skip


def waterway_loss(plant: Plant, total: Any, month: int = 1) -> Any:
    """Head lost [m] between headwater and units at the discharge of the whole plant."""
    return losses(plant, plant.site.get("waterway") or [], total, month)


def losses(plant: Plant, parts: list[dict[str, Any]], total: Any, month: int = 1) -> Any:
    """Head lost [m] in parts of a way at a discharge [m3/s]."""
    loss = 0.0
    total = np.asarray(total, dtype=float)
    for part in parts:
        if "loss_coefficient" in part:
            loss = loss + part["loss_coefficient"] * total**2
        elif "pipe" in part:
            loss = loss + pipe_loss(plant, part["pipe"], total)
        elif "trash_rack" in part:
            rack = part["trash_rack"]
            blocked = rack.get("blockage", 0.0)
            blocked = blocked[month - 1] if isinstance(blocked, list) else blocked
            velocity = total / (rack["area"] * (1 - blocked))
            shape = BARS[rack["bar_shape"]]
            shape *= (rack["bar_thickness"] / rack["clear_spacing"]) ** (4 / 3)
            shape *= math.sin(math.radians(rack["inclination"]))
            loss = loss + shape * velocity**2 / (2 * plant.gravity)
        elif "exit" in part:
            loss = loss + (total / part["exit"]["area"]) ** 2 / (2 * plant.gravity)
        elif "canal" in part:
            canal = part["canal"]
            area = (canal["bottom_width"] + canal["side_slope"] * canal["depth"]) * canal["depth"]
            wetted = canal["bottom_width"] + 2 * canal["depth"] * math.hypot(1, canal["side_slope"])
            speed = total / area
            slope = (canal["manning_n"] * speed / (area / wetted) ** (2 / 3)) ** 2
            loss = loss + canal["length"] * slope
        else:
            raise ValueError(f"waterway {sorted(part)} is not known")
    return loss


def pipe_loss(plant: Plant, pipe: dict[str, float], total: Any) -> Any:
    """Darcy and Weisbach with Colebrook's friction factor by plain substitution."""
    temperature = (plant.site.get("site") or {}).get("water_temperature", 10)
    water = _Liquid(temperature + 273.15, 0.1)  # of the package iapws
    viscosity = water["mu"] / water["rho"]
    area = math.pi * pipe["diameter"] ** 2 / 4
    speed = np.maximum(total, 1e-9) / (area * pipe.get("parallel", 1))
    reynolds = speed * pipe["diameter"] / viscosity
    friction = np.full(np.shape(reynolds), 0.02)
    for _ in range(60):
        inner = pipe["roughness"] / (3.7 * pipe["diameter"]) + 2.51 / (reynolds * friction**0.5)
        friction = (-2 * np.log10(inner)) ** -2
    friction = np.where(reynolds < 2320, 64 / reynolds, friction)
    along = friction * pipe["length"] / pipe["diameter"] + pipe.get("minor_losses", 0.0)
    return along * speed**2 / (2 * plant.gravity)


def joining_below(plant: Plant, discharge: float) -> float:
    """Discharge that joins the river between intake and tailwater [m3/s]."""
    stated = plant.site["discharge"].get("inflow_below_intake")
    if stated is None:
        return 0.0
    if "area" in stated:
        return discharge * stated["area"] / plant.site["discharge"]["transfer"]["site_area"]
    return discharge * stated["discharge"] / plant.mean


HeadsOf = Callable[[float | None, Any], tuple[Any, Any]]


def heads_of_day(plant: Plant, discharge: float, water: Water) -> HeadsOf:
    """Gross and net head [m] on this day, as a function of (axis level or None, total discharge).

    The net head is 0 where the state is not admissible.
    """
    head = plant.site["head"]
    below = max(0.0, discharge + joining_below(plant, discharge) - water.lost)
    lowest = head.get("minimum_net_head", 0.0)

    def heads(axis: float | None, total: Any) -> tuple[Any, Any]:
        lower = level_below(head["tailwater"], below, total)
        upper = headwater_level(head["headwater"], discharge, water.abstracted, total, lower)
        end = lower if axis is None else axis
        gross = np.maximum(upper - end, 0.0)
        net = gross - waterway_loss(plant, total, water.month)
        admissible = (net > 0) & (net >= lowest * (1 - EQUAL))
        if axis is not None:
            admissible = admissible & (np.asarray(lower) <= axis)
        return gross, np.where(admissible, net, 0.0)

    return heads


def level_below(tailwater: dict[str, Any], below: float, total: Any) -> Any:
    """Level [m] below the turbines, of the river or of a tailrace that the river may drown.

    below : discharge of the river at the tailwater [m3/s]
    total : of the turbines [m3/s]
    """
    follows = tailwater.get("follows", "river")
    level = tailwater_level(tailwater, below if follows == "river" else total)
    if follows == "higher":
        level = np.maximum(level, tailwater_level(tailwater["river"], below))
    return np.maximum(level, tailwater.get("not_below", -np.inf))


def reference_head(plant: Plant) -> float:
    """H0 [m]: headwater (of a weir its crest) less tailwater at the median, nothing turbined."""
    head, median = plant.site["head"], plant.exceeded(50)
    if "weir" in head["headwater"]:
        upper = head["headwater"]["weir"]["crest"]
    else:
        upper = float(headwater_level(head["headwater"], median, 0.0, 0.0))
    below = median + joining_below(plant, median)
    return upper - float(level_below(head["tailwater"], below, 0.0))


# ---------------------------------------------------------------- units from the site file


def electrical(plant: Plant, key: str) -> float:
    """An efficiency of the electrical part; 1 if left out."""
    value = (plant.site.get("electrical") or {}).get(key, 1.0)
    if isinstance(value, list):
        raise ValueError(f"{key}: a curve is not known")
    return float(value)


def smallest_feeding_discharge(plant: Plant, wanted: float) -> tuple[float, int]:
    """The smallest river discharge, over all months, that offers the wanted water, and its month.

    If none of the record does: the largest discharge and the month that then offers most.
    """
    largest = plant.falling[0]
    found = []
    for month in range(1, 13):
        if share_water(plant, month, largest).offered < wanted:
            continue
        low, high = 0.0, largest
        for _ in range(60):
            middle = (low + high) / 2
            if share_water(plant, month, middle).offered >= wanted:
                high = middle
            else:
                low = middle
        found.append((high, month))
    if found:
        return min(found)
    return largest, max(range(1, 13), key=lambda m: share_water(plant, m, largest).offered)


def derived_rated_head(plant: Plant, total: float, axis: float | None) -> float:
    """Net head [m] with all units at rated discharge, at the smallest discharge that feeds them."""
    discharge, month = smallest_feeding_discharge(plant, total)
    head = heads_of_day(plant, discharge, share_water(plant, month, discharge))
    net = float(head(axis, total)[1])
    if net <= 0:
        raise ValueError("no head at the rated discharge")
    return net


def make_units(plant: Plant) -> list[Unit]:
    """The units, with rated head, rated discharge and capacity derived where left out."""
    groups = plant.site["turbines"]
    drive = electrical(plant, "drive_efficiency")
    points = (plant.site.get("electrical") or {}).get("generator_efficiency")
    load_curve = efficiency_curve(points) if isinstance(points, list) else None
    at_full_load = (
        float(load_curve(1.0)) if load_curve else electrical(plant, "generator_efficiency")
    )
    factor = plant.density * plant.gravity * drive * at_full_load
    curves: list[Any] = []
    charts: list[Any] = []
    for group in groups:
        points = group.get("efficiency", "typical")
        charts.append(efficiency_chart(points) if isinstance(points, dict) else None)
        points = typical_curve(group["type"]) if isinstance(points, str | dict) else points
        curve = efficiency_curve(points)
        curves.append(efficiency_of_jets(curve, group["jets"]) if "jets" in group else curve)
    branches = [0.0] * len(groups)

    def best_at_rated(i: int) -> float:
        return float(charts[i](rated_q[i], rated_h[i]) if charts[i] else curves[i](1.0))

    rated_q = [group.get("rated_discharge", 0.0) for group in groups]
    rated_h = [group.get("rated_head", 0.0) for group in groups]
    for _ in range(300):  # discharge and head, each from the other, until they rest
        total = sum(g.get("count", 1) * q for g, q in zip(groups, rated_q, strict=True))
        before = list(rated_q)
        for i, group in enumerate(groups):
            if rated_q[i] > 0:  # the friction of a pipe is taken at rated discharge
                own = losses(plant, group.get("waterway") or [], rated_q[i])
                branches[i] = float(own) / rated_q[i] ** 2
            if "rated_head" not in group:
                rated_h[i] = derived_rated_head(plant, total, group.get("axis_level"))
                rated_h[i] -= branches[i] * rated_q[i] ** 2
            if "rated_discharge" not in group:
                power = factor * rated_h[i] * best_at_rated(i)
                rated_q[i] = group["unit_capacity"] * 1000 / power
        if max(abs(a - b) for a, b in zip(before, rated_q, strict=True)) < 1e-13 * max(rated_q):
            break
    else:
        raise ValueError("no rated discharge gives the unit capacity")
    units = []
    for i, group in enumerate(groups):
        full_output = factor * rated_q[i] * rated_h[i] * best_at_rated(i)
        capacity = group["unit_capacity"] * 1000 if "unit_capacity" in group else full_output
        minimum = group.get("minimum_discharge")
        minimum = MINIMUM[group["type"]] / group.get("jets", 1) if minimum is None else minimum
        shares = (minimum, max(group.get("starting_discharge", 0.0), minimum))
        minimum, start = (
            opening_of_share(share, branches[i], rated_q[i], rated_h[i]) for share in shares
        )
        unit = Unit(
            i,
            group["type"],
            rated_q[i],
            rated_h[i],
            minimum,
            capacity,
            plant.density * plant.gravity * drive if load_curve else factor,
            curves[i],
            group.get("axis_level"),
            load_curve,
            tuple((head, 1000 * power) for head, power in group.get("output_limit") or []),
            start,
            branches[i],
            charts[i],
        )
        units += [unit] * group.get("count", 1)
    return units


# ---------------------------------------------------------------- one day


@dataclass(frozen=True)
class State:
    """What the plant does: discharge, heads, efficiency and output [W] of each unit."""

    discharges: list[float]
    gross: list[float]
    net: list[float]
    efficiency: list[float]
    output: list[float]
    at_capacity: bool

    @property
    def total(self) -> float:
        return sum(self.discharges)


def run_units(plant: Plant, units: list[Unit], heads: HeadsOf, offered: float) -> State:
    """Dispatch these units on a day and read off what each does."""
    _, split = brute_force_output(units, lambda u, t: heads(u.axis, t)[1], offered, plant.fineness)
    total = sum(split)
    running = [(u, q) for u, q in zip(units, split, strict=True) if q > 0]
    gross, net, etas, outputs, full_power = [], [], [], [], False
    for unit, q in running:
        g, h = (float(x) for x in heads(unit.axis, total))
        h = float(unit.behind_branch(h, q))
        eta = float(unit.eta(q, h))
        free_output = float(unit.terminals(unit.factor * q * h * eta))
        gross.append(g)
        net.append(h)
        etas.append(eta)
        most = float(unit.most(h))
        outputs.append(min(free_output, most))
        full_power = full_power or free_output >= most * (1 - AT_CAPACITY)
    return State([q for _, q in running], gross, net, etas, outputs, full_power)


STANDING = State([], [], [], [], [], False)


def stopped_by_river(plant: Plant, discharge: float) -> bool:
    """The river is higher than the plant may run."""
    limit = (plant.site.get("operation") or {}).get("shutdown_above")
    return limit is not None and discharge > limit


def waiting_days(plant: Plant) -> set[datetime.date]:
    """Days on which the plant stands as it stood the day before and lacks the water to start."""
    if all(unit.start <= unit.minimum for unit in plant.units):
        return set()
    day, last, running, found = min(plant.days), max(plant.days), False, set()
    while day <= last:
        could = starts = False
        if day in plant.days:
            could, starts = could_run_or_start(plant, day)
        if could and not (running or starts):
            found.add(day)
        running = could and (running or starts)
        day += datetime.timedelta(days=1)
    return found


def could_run_or_start(plant: Plant, day: datetime.date) -> tuple[bool, bool]:
    """Whether the plant could run on this day if it ran before, and whether it could start."""
    discharge = plant.days[day]
    water = share_water(plant, day.month, discharge)
    key = ("start", discharge, water)
    if key not in plant.remembered:
        could = starts = False
        if not stopped_by_river(plant, discharge):
            heads = heads_of_day(plant, discharge, water)
            everyone = tuple(range(len(plant.units)))
            could = state_of(plant, discharge, water, heads, everyone).total > 0
            for unit in plant.units:
                grid = np.linspace(0, water.offered, 20001)[1:]
                net = heads(unit.axis, grid)[1]
                opened = unit.start * full_discharge(unit, net)
                starts = starts or bool(((net > 0) & (grid >= opened * (1 - EQUAL))).any())
        plant.remembered[key] = could, starts
    return plant.remembered[key]


def rows_of_day(
    plant: Plant,
    discharge: float,
    water: Water,
    available: tuple[int, ...] | None,
    waiting: bool = False,
) -> dict[str, float]:
    """Power [W] of each ledger step on a day; `available` lists the units that are not out."""
    everyone = tuple(range(len(plant.units)))
    available = everyone if available is None else available
    key = (discharge, water, available, waiting)
    if key in plant.remembered:
        return plant.remembered[key]
    heads = heads_of_day(plant, discharge, water)
    stopped = stopped_by_river(plant, discharge)
    everything = state = STANDING
    if not stopped and not waiting:
        everything = state_of(plant, discharge, water, heads, everyone)
        state = state_of(plant, discharge, water, heads, available)
    rows = dict.fromkeys(STEPS, 0.0)
    weight = plant.density * plant.gravity
    h0 = plant.remembered.setdefault("reference head", reference_head(plant))
    rows["gross"] = weight * h0 * discharge
    rows["reserved"] = -weight * h0 * (discharge - water.offered)
    for step, lost in unused_water(plant, water, heads, stopped, everything).items():
        rows[step] = -weight * h0 * lost
    rows["outage"] = -weight * h0 * (everything.total - state.total)
    for q, gross, net, eta, output in zip(
        state.discharges, state.gross, state.net, state.efficiency, state.output, strict=True
    ):
        rows["levels"] -= weight * q * (h0 - gross)
        rows["waterway"] -= weight * q * (gross - net)
        rows["turbine"] -= weight * q * net * (1 - eta)
        rows["drive_and_generator"] -= weight * q * net * eta - output
    rows.update(electrical_rows(plant, sum(state.output), state.total > 0))
    plant.remembered[key] = rows
    return rows


def state_of(
    plant: Plant, discharge: float, water: Water, heads: HeadsOf, available: tuple[int, ...]
) -> State:
    """The dispatched state of the available units; alike sets of units are searched once."""
    key = ("state", discharge, water, tuple(plant.units[i].group for i in available))
    if key not in plant.remembered:
        units = [plant.units[i] for i in available]
        plant.remembered[key] = run_units(plant, units, heads, water.offered)
    return plant.remembered[key]


def unused_water(
    plant: Plant, water: Water, heads: HeadsOf, stopped: bool, state: State
) -> dict[str, float]:
    """The offered water that the units, all available, leave, by the first reason that applies."""
    left = water.offered - state.total
    if stopped:
        return {"shutdown": left}
    if all(float(heads(unit.axis, 0.0)[1]) <= 0 for unit in plant.units):
        return {"no_admissible_head": left}
    full, _ = fixed_point(
        plant.units,
        lambda u, t: heads_without_limit(plant, heads, u, t),
        water.offered,
        [1.0] * len(plant.units),
    )
    above = min(max(0.0, water.offered - full), left)
    rest = "capacity_limit" if state.at_capacity else "below_minimum_or_unused"
    return {"above_full_discharge": above, rest: left - above}


def heads_without_limit(plant: Plant, heads: HeadsOf, unit: Unit, total: Any) -> Any:
    """Net head [m] of a unit, whether or not it may run at it; F asks only for openings."""
    gross, _ = heads(unit.axis, total)
    return np.maximum(gross - waterway_loss(plant, total), 0.0)


def electrical_rows(plant: Plant, output: float, running: bool) -> dict[str, float]:
    """Transformer, own use and export limit, in this order; what is left is the net power.

    A plant that stands takes its standing use and the no-load loss of the transformer.
    """
    given = plant.site.get("electrical") or {}
    idle = given.get("transformer_no_load_loss", 0.0) * 1000
    if not running:
        return {"imports": -idle - given.get("standing_use", 0.0) * 1000}
    load = output / sum(unit.capacity for unit in plant.units)
    copper = given.get("transformer_load_loss", 0.0) * 1000 * load**2
    delivered = output * electrical(plant, "transformer_efficiency") - idle - copper
    delivered = max(0.0, delivered)
    own = min(given.get("own_use", 0.0) * 1000, delivered)
    after = delivered - own
    limit = given.get("export_limit")
    above = 0.0 if limit is None else max(0.0, after - limit * 1000)
    return {"transformer": delivered - output, "own_use": -own, "export_limit": -above}


# ---------------------------------------------------------------- outages


def availability(plant: Plant, day: datetime.date) -> list[tuple[float, tuple[int, ...] | None]]:
    """[(probability, units available)] on a day.

    Planned: each unit in turn is out for its days, spread evenly over the months named.
    Forced: every unit not planned out is down with the same chance, independently; what they share
    takes all of them out. In closed months and on days of standstill none is available.
    """
    operation = plant.site.get("operation") or {}
    if day.month in (operation.get("closed") or []):
        return [(1.0, ())]
    rate = operation.get("forced_outage_rate", 0.0)
    common = operation.get("common_outage_rate", 0.0)
    planned = operation.get("planned_outage")
    everyone = tuple(range(len(plant.units)))
    chance = 0.0
    if planned and "dates" in planned:
        chance = share_in_windows(planned["dates"], day) / len(everyone)
    elif planned:
        chance = share_of_spread_days(plant, planned, day)
    if chance * len(everyone) > 1:
        raise ValueError("planned outages do not fit into the months named")
    standstill = operation.get("standstill") or {"dates": []}
    if "dates" in standstill:
        stand = share_in_windows(standstill["dates"], day)
    else:
        stand = share_of_spread_days(plant, standstill, day)
    stand = 1 - (1 - stand) * (1 - common)
    if rate == 0 and chance == 0 and stand == 0:
        return [(1.0, None)]
    cases = [(1 - chance * len(everyone), everyone)]
    cases += [(chance, tuple(i for i in everyone if i != out)) for out in everyone]
    result: list[tuple[float, tuple[int, ...] | None]] = [(stand, ())] if stand else []
    cases = [(probability * (1 - stand), left) for probability, left in cases]
    for probability, left in cases:
        for up in itertools.product([True, False], repeat=len(left)):
            share = math.prod(1 - rate if u else rate for u in up)
            if probability * share > 0:
                kept = tuple(i for i, u in zip(left, up, strict=True) if u)
                result.append((probability * share, kept))
    return result


def share_of_spread_days(plant: Plant, stated: dict[str, Any], day: datetime.date) -> float:
    """The share of a day that falls to days spread evenly over the months named."""
    if "months" not in stated:
        raise ValueError("days that are placed where they cost least are not known")
    if day.month not in stated["months"]:
        return 0.0
    months = months_of(plant, water_year(plant, day))
    named = [calendar.monthrange(y, m)[1] for y, m in months if m in stated["months"]]
    return float(stated["days"] / sum(named))


def share_in_windows(windows: list[str], day: datetime.date) -> float:
    """The share of the days of this day's month that lie in windows "MM-DD to MM-DD"."""
    length = calendar.monthrange(day.year, day.month)[1]
    within = 0
    for number in range(1, length + 1):
        name = f"{day.month:02d}-{number:02d}"
        for window in windows:
            first, _, last = window.partition(" to ")
            last = last or first
            inside = first <= name <= last if first <= last else name >= first or name <= last
            within += inside
    return within / length


# ---------------------------------------------------------------- years


def first_month(plant: Plant) -> int:
    return plant.site["discharge"].get("year_start_month", 10)


def water_year(plant: Plant, day: datetime.date) -> int:
    """The hydrological year of a day, named by the calendar year in which it ends."""
    start = first_month(plant)
    return day.year + 1 if start > 1 and day.month >= start else day.year


def months_of(plant: Plant, year: int) -> list[tuple[int, int]]:
    """The twelve (calendar year, month) of a hydrological year."""
    start = first_month(plant)
    months = [(start - 1 + i) % 12 + 1 for i in range(12)]
    return [(year - 1 if start > 1 and m >= start else year, m) for m in months]


def load(path: Path | str, record: Path | str | None = None, fineness: int = 1) -> Plant:
    """Read a site file and its record (beside it, unless given)."""
    path = Path(path)
    site = yaml.safe_load(path.read_text())
    refuse_unknown_keys(site)
    file = Path(record) if record else path.parent / site["discharge"]["record"]["file"]
    days = move_to_site(read_record(file), site["discharge"].get("transfer"))
    place = site.get("site") or {}
    plant = Plant(site, days, water_density(place), local_gravity(place), fineness=fineness)
    plant.units = make_units(plant)
    plant.waiting = waiting_days(plant)
    return plant


def refuse_unknown_keys(site: dict[str, Any]) -> None:
    """Stop at any key that would be left out of the calculation."""
    head = site.get("head") or {}
    blocks = [(name, site.get(name)) for name in KEYS if name in site]
    blocks += [(name, head.get(name)) for name in ("headwater", "tailwater")]
    blocks.append(("weir", head["headwater"].get("weir")))
    for name, content in blocks:
        for block in content if isinstance(content, list) else [content or {}]:
            unknown = set(block) - set(KEYS[name].replace("(", "").replace(")", "").split())
            if unknown:
                raise ValueError(f"{name}: {sorted(unknown)} are not known")
            months = block.get("months", [])
            if isinstance(months, str) or any(isinstance(month, str) for month in months):
                raise ValueError(f"{name}: months in words are not known")


def missing_months(plant: Plant, year: int) -> list[str]:
    """The months of a year that do not reach the coverage."""
    least = plant.site["discharge"].get("minimum_month_coverage", 0.9)
    return [
        f"{y}-{m:02d}"
        for y, m in months_of(plant, year)
        if len(days_of(plant, y, m)) < least * calendar.monthrange(y, m)[1] * (1 - EQUAL)
    ]


def days_of(plant: Plant, year: int, month: int) -> list[datetime.date]:
    """The days of a calendar month that have a value."""
    length = calendar.monthrange(year, month)[1]
    dates = [datetime.date(year, month, d + 1) for d in range(length)]
    return [day for day in dates if day in plant.days]


def month_energy(plant: Plant, year: int, month: int) -> dict[str, float]:
    """Energy [MWh] of each ledger step in a month: mean power over its days x its hours."""
    days = days_of(plant, year, month)
    hours = 24 * calendar.monthrange(year, month)[1]
    sums = dict.fromkeys(STEPS, 0.0)
    for day in days:
        water = share_water(plant, month, plant.days[day])
        for probability, available in availability(plant, day):
            waiting = day in plant.waiting
            rows = rows_of_day(plant, plant.days[day], water, available, waiting)
            for step in STEPS:
                sums[step] += probability * rows[step]
    return {step: sums[step] / len(days) * hours / 1e6 for step in STEPS}


def estimate(
    path: Path | str, record: Path | str | None = None, fineness: int = 1
) -> dict[str, Any]:
    """Everything the twin knows about a site, with the keys of a result file."""
    plant = load(path, record, fineness)
    first, last = min(plant.days), max(plant.days)
    years = range(water_year(plant, first), water_year(plant, last) + 1)
    left_out = {
        str(y): ", ".join(missing_months(plant, y)) for y in years if missing_months(plant, y)
    }
    used = [y for y in years if str(y) not in left_out]
    if not used:
        raise ValueError(f"no usable year: {left_out}")
    yearly, hours, kept = {}, 0.0, []
    monthly, ledger = [0.0] * 12, dict.fromkeys(STEPS, 0.0)
    for year in used:
        yearly[str(year)] = 0.0
        for y, m in months_of(plant, year):
            energy = month_energy(plant, y, m)
            net = sum(energy.values())
            yearly[str(year)] += net
            monthly[m - 1] += net / len(used)
            hours += 24 * calendar.monthrange(y, m)[1]
            for step in STEPS:
                ledger[step] += energy[step] / len(used)
            kept += [share_water(plant, m, plant.days[d]).kept for d in days_of(plant, y, m)]
    capacity = sum(unit.capacity for unit in plant.units) / 1000
    given = plant.site.get("electrical") or {}
    imports = "standing_use" in given or "transformer_no_load_loss" in given
    steps = STEPS if imports else STEPS[:-1]
    return {
        "installed_capacity_kw": capacity,
        "mean_annual_energy_mwh": sum(yearly.values()) / len(used),
        "capacity_factor": sum(yearly.values()) * 1000 / (capacity * hours),
        "monthly_energy_mwh": monthly,
        "yearly_energy_mwh": yearly,
        "years_used": [str(y) for y in used],
        "years_left_out": left_out,
        "record": {
            "first": first.isoformat(),
            "last": last.isoformat(),
            "days": len(plant.days),
            "mean_m3s": plant.mean,
        },
        "exceedance_discharge_m3s": {
            str(p): plant.exceeded(p) for p in [1, 5, *range(10, 100, 10), 95, 99]
        },
        "characteristic_discharge_m3s": {
            str(d): plant.exceeded(d / 365.25 * 100) for d in [10, 30, 90, 180, 270, 355]
        },
        "environmental_flow_mean_m3s": sum(kept) / len(kept),
        "ledger_mwh": [
            *({"step": step, "energy_mwh": ledger[step]} for step in steps),
            {"step": "net", "energy_mwh": sum(ledger.values())},
        ],
        "density": plant.density,
        "gravity": plant.gravity,
        "reference_head_m": reference_head(plant),
        "units": [
            {
                "rated_head_m": u.rated_head,
                "rated_discharge_m3s": u.rated_discharge,
                "unit_capacity_kw": u.capacity / 1000,
                "minimum_discharge": u.minimum,
            }
            for u in plant.units
        ],
    }
