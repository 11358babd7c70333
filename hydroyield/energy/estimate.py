"""Annual energy of a scheme: cells x power, with years and months kept apart."""

from __future__ import annotations

from dataclasses import dataclass, replace
from functools import cached_property
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from hydroyield.energy.ledger import ledger, reference_head
from hydroyield.energy.scheme import Scheme
from hydroyield.errors import ComputationError
from hydroyield.powerhouse import Operation, Outages
from hydroyield.quantities import HOURS_PER_DAY, W_PER_KW, WH_PER_MWH
from hydroyield.river import (
    Calendar,
    Cells,
    cells_of_table,
    condense,
    quantile,
    usable_years,
)
from hydroyield.river.duration import usual_characteristic, usual_exceedances
from hydroyield.river.views import RiverViews
from hydroyield.river.years import count_months

if TYPE_CHECKING:
    import pandas as pd

Floats = NDArray[np.float64]

CURVE_STEPS = 400  # rows of a curve, less one


@dataclass(frozen=True)
class PlantState:
    """The plant with some of its units in service.

    counts : units in service of each group
    chance : (y, 12) of each month of each year used, January first
    weight : (c,) hours a year that each cell stands for in this state [h]
    operation : how the plant runs in each cell; None where no unit is in service
    net_power : (c,) delivered in each cell [W]
    """

    counts: tuple[int, ...]
    chance: Floats
    weight: Floats
    operation: Operation | None
    net_power: Floats


@dataclass(frozen=True)
class Estimate:
    """Annual energy of a scheme and what it rests on.

    scheme : what was computed
    cells : states of the river over the years used
    states : of the plant, the first with all units in service
    energy_by_month : (y, 12) of each year used, January first [Wh]
    years_left_out : {name of the year: reason}
    """

    scheme: Scheme
    cells: Cells
    states: tuple[PlantState, ...]
    energy_by_month: Floats
    years_left_out: dict[str, str]

    @property
    def operation(self) -> Operation:
        """How the plant runs in each cell with all units in service."""
        run = self.states[0].operation
        assert run is not None  # a plant has a unit
        return run

    @property
    def net_power(self) -> Floats:
        """(c,) delivered in each cell with all units in service [W]."""
        return self.states[0].net_power

    # --- headline -------------------------------------------------------------------------------

    @property
    def mean_annual_energy_mwh(self) -> float:
        """Net energy, mean over the years used [MWh]."""
        return float(self.energy_by_month.sum(axis=1).mean() / WH_PER_MWH)

    @property
    def installed_capacity_kw(self) -> float:
        """Sum of the unit capacities [kW]."""
        return self.scheme.plant.installed_capacity / W_PER_KW

    @property
    def capacity_factor(self) -> float:
        """Net energy over installed capacity times hours, for the years used."""
        full = self.scheme.plant.installed_capacity * float(self.cells.hours.sum())
        return float(self.energy_by_month.sum() / full)

    @cached_property
    def maximum_net_power_kw(self) -> float:
        """The most that the plant delivers at any river discharge [kW]."""
        best = int(self.net_power.argmax())
        season = self.cells.season[best]
        wide = max(self.cells.discharge.max(), 3 * self.scheme.plant.rated_discharge)
        around = self.cells.discharge[best] * np.linspace(0.8, 1.25, 200)
        tried = np.concatenate([around, np.geomspace(wide / 1000, wide, 200)])
        run = self.scheme.operate(tried, np.full(tried.size, season))
        return float(max(self.net_power.max(), self.scheme.net_power(run.output).max()) / W_PER_KW)

    # --- by year and month ----------------------------------------------------------------------

    @property
    def has_years(self) -> bool:
        """Whether the river is known day by day; a duration table knows no years and months."""
        return self.scheme.dates is not None

    @property
    def monthly_energy_mwh(self) -> list[float]:
        """Mean energy of each calendar month, January first [MWh]; none without `has_years`."""
        if not self.has_years:
            return []
        return [float(mean) for mean in self.energy_by_month.mean(axis=0) / WH_PER_MWH]

    @property
    def yearly_energy_mwh(self) -> dict[str, float]:
        """Energy of each year used, by the calendar year in which it ends [MWh].

        Empty without `has_years`.
        """
        totals = self.energy_by_month.sum(axis=1) / WH_PER_MWH
        return dict(zip(self.years_used, map(float, totals), strict=self.has_years))

    @property
    def years_used(self) -> list[str]:
        return [str(year) for year in self.cells.years] if self.has_years else []

    @cached_property
    def filled_days(self) -> dict[str, int]:
        """Days of each year used whose discharge was estimated from a reference."""
        scheme = self.scheme
        if scheme.dates is None or scheme.filled is None:
            return dict.fromkeys(self.years_used, 0)
        year = Calendar.of(scheme.dates, scheme.year_start_month).year[scheme.filled]
        return {name: int((year == int(name)).sum()) for name in self.years_used}

    @property
    def filled_share(self) -> float:
        """Share of the days of the years used whose discharge was estimated from a reference."""
        return sum(self.filled_days.values()) / self.cells.cell_of_day.size

    # --- the river ------------------------------------------------------------------------------

    @cached_property
    def views(self) -> RiverViews | None:
        """Statistics of the river at the site; None with a duration table."""
        scheme = self.scheme
        if scheme.dates is None:
            return None
        return RiverViews(
            scheme.dates,
            scheme.discharge,
            scheme.year_start_month,
            scheme.minimum_month_coverage,
            scheme.filled,
        )

    @property
    def exceedance_discharge_m3s(self) -> dict[str, float]:
        """Discharge equalled or exceeded in so many per cent of the time, all valid days [m3/s]."""
        return usual_exceedances(self.scheme.valid_discharge)

    @property
    def characteristic_discharge_m3s(self) -> dict[str, float]:
        """Discharge equalled or exceeded on so many days of a year, all valid days [m3/s]."""
        return usual_characteristic(self.scheme.valid_discharge)

    @property
    def environmental_flow_mean_m3s(self) -> float:
        """What the river keeps, counted abstractions included: mean of the days used [m3/s]."""
        kept = self.scheme.rules.reserved_for_river(self.cells.discharge, self.cells.season)
        return float(kept[self.cells.cell_of_day].mean())

    @property
    def days_at_residual_flow(self) -> float:
        """Days a year on which the plant takes all that it may, all units in service [d].

        The reach below the intake then has no more than what the rules keep in it.
        """
        cells, run = self.cells, self.operation
        all_taken = (run.turbined > 0) & (run.turbined >= run.offered * (1 - 1e-9))
        return float(cells.weight[all_taken].sum() / HOURS_PER_DAY)

    # --- cross-checks and tables ----------------------------------------------------------------

    @property
    def ledger_mwh(self) -> list[tuple[str, float]]:
        """(step, mean annual energy [MWh]) from the energy of all the water to the net."""
        runs = [(state.operation, state.weight) for state in self.states]
        return ledger(self.scheme, self.cells, runs)

    @property
    def reference_head_m(self) -> float:
        """Head by which the ledger values water [m]."""
        return reference_head(self.scheme)

    def power_duration(self) -> pd.DataFrame:
        """Power duration curve of the years used: `exceedance_percent`, `power_kw`.

        A staircase: each power stands at both ends of its share of the time, so that the area
        under straight lines is exact.
        """
        import pandas as pd

        every = np.concatenate([state.net_power for state in self.states])
        weights = np.concatenate([state.weight for state in self.states])
        power, where = np.unique(-every, return_inverse=True)
        hours = np.bincount(where, weights)
        ends = 100 * np.concatenate([[0.0], np.cumsum(hours) / hours.sum()])
        exceedance = np.repeat(ends, 2)[1:-1]
        return pd.DataFrame(
            {"exceedance_percent": exceedance, "power_kw": np.repeat(-power, 2) / W_PER_KW}
        )

    @property
    def duration_integral_energy_mwh(self) -> float:
        """The annual energy again, as the area under the power duration curve [MWh]."""
        curve = self.power_duration().to_numpy()
        exceedance, power = curve.T
        mean = float((np.diff(exceedance) * (power[1:] + power[:-1])).sum() / 200)
        return mean * W_PER_KW * self.cells.hours_per_year / WH_PER_MWH

    def curves(self) -> pd.DataFrame:
        """The plant against the river's discharge, falling.

        Columns `month` (0: mean of the months, weighted by their days; 1 to 12 where rules differ
        by month), `exceedance_percent`, `river_discharge_m3s`, `offered_discharge_m3s`,
        `turbine_discharge_m3s`, `gross_head_m`, `net_head_m`, `power_kw`. Exceedance is that of
        all valid days, in every month. All units are in service.
        """
        return self._curve_rows.copy()

    @cached_property
    def _curve_rows(self) -> pd.DataFrame:
        """The rows of `curves`, worked out once: tables and figures both want them."""
        import pandas as pd

        exceeded, river = self._curve_discharges()
        seasons = np.arange(self.scheme.rules.season_count)
        run = self.scheme.operate(np.tile(river, seasons.size), np.repeat(seasons, river.size))
        columns = {
            "offered_discharge_m3s": run.offered,
            "turbine_discharge_m3s": run.turbined,
            "gross_head_m": run.gross_head,
            "net_head_m": run.net_head,
            "power_kw": self.scheme.net_power(run.output) / W_PER_KW,
        }
        by_season = {name: values.reshape(-1, river.size) for name, values in columns.items()}
        season_of_month = self.scheme.rules.season_of_month
        month_hours = self.cells.hours.mean(axis=0)
        weight = np.bincount(season_of_month, month_hours) / month_hours.sum()
        mean = {name: (weight[:, None] * values).sum(axis=0) for name, values in by_season.items()}
        parts = [(0, mean)]
        if seasons.size > 1:
            parts += [
                (month, {name: values[season] for name, values in by_season.items()})
                for month, season in enumerate(season_of_month, start=1)
            ]
        frames = [
            pd.DataFrame(
                {
                    "month": month,
                    "exceedance_percent": exceeded,
                    "river_discharge_m3s": river,
                    **values,
                }
            )
            for month, values in parts
        ]
        return pd.concat(frames, ignore_index=True)

    def _curve_discharges(self) -> tuple[Floats, Floats]:
        """(r,) exceedances at about even steps [%], and the river discharges there, falling [m3/s].

        A discharge that lasts for several steps stands once, with the exceedance of its last day.
        """
        values = self.scheme.valid_discharge
        ends = 100 * np.array([1, values.size]) / (values.size + 1)
        steps = np.clip(np.linspace(0, 100, CURVE_STEPS + 1), *ends)
        river = quantile(values, steps)
        last = np.append(np.diff(river) < 0, True)
        river, steps = river[last], steps[last]
        recorded = np.isin(river, values)
        lasting = 100 * (values.size - np.searchsorted(np.sort(values), river)) / (values.size + 1)
        return np.where(recorded, lasting, steps), river


def estimate_energy(scheme: Scheme) -> Estimate:
    """Run a scheme over its record.

    Raises ComputationError where no hydrological year can be used; the message says which months
    are short of values.
    """
    cells, left_out = condensed(
        scheme.dates,
        scheme.discharge,
        scheme.rules.season_of_month,
        scheme.year_start_month,
        scheme.minimum_month_coverage,
        scheme.waiting,
    )
    return _run(scheme, cells, left_out)


def condensed(
    dates: NDArray[np.datetime64] | None,
    discharge: Floats,
    season_of_month: NDArray[np.int64],
    year_start_month: int,
    minimum_month_coverage: float,
    waiting: NDArray[np.bool_] | None = None,
) -> tuple[Cells, dict[str, str]]:
    """The states of the river over the years that can be used, and why others cannot.

    The arguments are as in `Scheme`; season_of_month as in `WaterRules`, (12,).
    waiting : (n,) days on which a plant that stands waits to start; None where it never does

    Returns the cells and {name of the year: reason}. Raises NoUsableYearError.
    """
    if dates is None:
        return cells_of_table(discharge, season_of_month), {}
    calendar = Calendar.of(dates, year_start_month)
    months = count_months(calendar, ~np.isnan(discharge))
    used, left_out = usable_years(months, minimum_month_coverage, year_start_month)
    if not used.any():
        raise NoUsableYearError(left_out)
    return condense(discharge, calendar, months, used, season_of_month, waiting), left_out


def _run(scheme: Scheme, cells: Cells, left_out: dict[str, str]) -> Estimate:
    counts = tuple(group.count for group in scheme.plant.groups)
    days_of_month = cells.hours / HOURS_PER_DAY
    states = tuple(
        _state(scheme, cells, state, chance)
        for state, chance in scheme.outages.states(counts, days_of_month)
    )
    energy = sum(state.chance * cells.by_month(state.net_power) for state in states)
    return Estimate(scheme, cells, states, np.asarray(energy), left_out)


def _state(scheme: Scheme, cells: Cells, counts: tuple[int, ...], chance: Floats) -> PlantState:
    weight = cells.weight_of(chance)
    if not any(counts):
        standing = scheme.net_power(np.zeros(cells.discharge.size))
        return PlantState(counts, chance, weight, None, standing)
    part = scheme.with_units(counts)
    run = part.operate(cells.discharge, cells.season, cells.waiting)
    return PlantState(counts, chance, weight, run, part.net_power(run.output))


def with_outages(estimate: Estimate, outages: Outages) -> Estimate:
    """The same estimate with units out of service at other times, or with other chances.

    States that were computed already are not computed again.
    """
    scheme, cells = replace(estimate.scheme, outages=outages), estimate.cells
    known = {state.counts: state for state in estimate.states}
    states = []
    counts = estimate.states[0].counts
    for left, chance in outages.states(counts, cells.hours / HOURS_PER_DAY):
        state = known.get(left) or _state(scheme, cells, left, chance)
        states.append(replace(state, chance=chance, weight=cells.weight_of(chance)))
    energy = sum(state.chance * cells.by_month(state.net_power) for state in states)
    return replace(
        estimate, scheme=scheme, states=tuple(states), energy_by_month=np.asarray(energy)
    )


def cost_of_planned_days(estimate: Estimate) -> Floats:
    """(12,) energy that a day of one unit out of service costs in each month [Wh].

    Mean over the units and over the years used; every other unit is in service.
    """
    cells, counts = estimate.cells, estimate.states[0].counts
    known = {state.counts: state for state in estimate.states}
    full = cells.by_month(estimate.net_power)
    lost = np.zeros(full.shape)
    for group, count in enumerate(counts):
        left = (*counts[:group], count - 1, *counts[group + 1 :])
        state = known.get(left) or _state(estimate.scheme, cells, left, np.zeros(full.shape))
        lost += count * (full - cells.by_month(state.net_power))
    days = cells.hours / HOURS_PER_DAY
    return np.asarray((lost / sum(counts) / days).mean(axis=0))


class NoUsableYearError(ComputationError):
    """No hydrological year has enough days with a value in every month.

    reasons : {name of the year: what it lacks}
    """

    def __init__(self, reasons: dict[str, str]) -> None:
        self.reasons = reasons
        super().__init__("no hydrological year of the record can be used")
