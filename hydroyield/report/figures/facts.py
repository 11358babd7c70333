"""What the figures show of an estimate, each part computed once however many figures use it."""

from __future__ import annotations

from functools import cached_property
from typing import TYPE_CHECKING, overload

import numpy as np
from numpy.typing import NDArray

from hydroyield.energy import Estimate
from hydroyield.quantities import W_PER_KW, WH_PER_MWH
from hydroyield.report.figures.data import (
    Curve,
    EfficiencyCurve,
    HeadCurve,
    Hydrograph,
    LedgerBar,
    MonthEnergies,
    PowerCurve,
    UnitCurve,
    YearEnergies,
    ledger_bars,
    months_in_words,
    thinned,
    typical_years,
)
from hydroyield.report.figures.options import OptionFacts
from hydroyield.river.views import RiverViews
from hydroyield.river.years import MONTH_NAMES, Calendar, months_in_order, span

if TYPE_CHECKING:
    import pandas as pd

Floats = NDArray[np.float64]

GRID_STEPS = 320  # river discharges of a curve against discharge
LONG = 0.6  # share of the time for which one discharge lasts that can be seen [%]


class Facts:
    """What the figures of one estimate show, each part computed when it is first asked for."""

    def __init__(self, estimate: Estimate) -> None:
        self.estimate = estimate

    @property
    def views(self) -> RiverViews:
        """The record at the site; there is one wherever figures of days are drawn."""
        views = self.estimate.views
        assert views is not None
        return views

    # --- along the duration curve ---------------------------------------------------------------

    @cached_property
    def _curves(self) -> pd.DataFrame:
        return self.estimate.curves()

    def _rows(self, month: int) -> dict[str, Floats]:
        rows = self._curves[self._curves["month"] == month]
        table = {str(name): rows[name].to_numpy(dtype=np.float64) for name in rows.columns}
        return _over_all_the_time(table)

    @cached_property
    def _season_weight(self) -> Floats:
        """(s,) share of the year."""
        hours = self.estimate.cells.hours.mean(axis=0)
        season_of_month = self.estimate.scheme.rules.season_of_month
        return np.asarray(np.bincount(season_of_month, hours) / hours.sum(), dtype=np.float64)

    @property
    def _main_season(self) -> int:
        return int(self._season_weight.argmax())

    @cached_property
    def _main_months(self) -> str:
        rules = self.estimate.scheme.rules
        if rules.season_count == 1:
            return ""
        return months_in_words(np.flatnonzero(rules.season_of_month == self._main_season).tolist())

    @cached_property
    def curve(self) -> Curve:
        rows, valid = self._rows(0), self.estimate.scheme.valid_discharge
        return Curve(
            exceedance=rows["exceedance_percent"],
            river=rows["river_discharge_m3s"],
            offered=rows["offered_discharge_m3s"],
            turbined=rows["turbine_discharge_m3s"],
            gross_head=rows["gross_head_m"],
            net_head=rows["net_head_m"],
            mean_river=float(valid.mean()),
            low_river=self.estimate.exceedance_discharge_m3s["95"],
        )

    @cached_property
    def units(self) -> UnitCurve:
        scheme, season = self.estimate.scheme, self._main_season
        mean, own = self._rows(0), self._rows(0)
        if scheme.rules.season_count > 1:
            month = int(np.flatnonzero(scheme.rules.season_of_month == season)[0]) + 1
            own = self._rows(month)
        river, turbined = own["river_discharge_m3s"], own["turbine_discharge_m3s"]
        state = scheme.head_state(river, np.full(river.size, season))
        discharges = scheme.dispatcher.unit_discharges(state, turbined)
        return UnitCurve(
            exceedance=mean["exceedance_percent"],
            offered=mean["offered_discharge_m3s"],
            turbined=mean["turbine_discharge_m3s"],
            running=(discharges > 0).sum(axis=0),
            count=scheme.plant.unit_count,
            rated=scheme.plant.rated_discharge,
            months=self._main_months,
        )

    @cached_property
    def power(self) -> PowerCurve:
        table = self.estimate.power_duration()
        limit = self.estimate.scheme.plant.electrical.export_limit
        exceedance, power = thinned(
            table["exceedance_percent"].to_numpy(dtype=np.float64),
            table["power_kw"].to_numpy(dtype=np.float64),
        )
        return PowerCurve(
            exceedance=exceedance,
            power=power,
            capacity=self.estimate.installed_capacity_kw,
            export_limit=None if limit is None else limit / W_PER_KW,
            energy=self.estimate.mean_annual_energy_mwh,
        )

    # --- against discharge ----------------------------------------------------------------------

    @cached_property
    def _grid(self) -> dict[str, Floats]:
        """The plant at even steps of the logarithm of river discharge: (s, n) each."""
        scheme = self.estimate.scheme
        river = _river_grid(scheme.valid_discharge, scheme.plant.shutdown_above)
        count = scheme.rules.season_count
        run = scheme.operate(np.tile(river, count), np.repeat(np.arange(count), river.size))
        values = {
            "river": np.tile(river, count),
            "offered": run.offered,
            "turbined": run.turbined,
            "gross_head": run.gross_head,
            "net_head": run.net_head,
            "power": scheme.net_power(run.output),
        }
        return {name: array.reshape(count, -1) for name, array in values.items()}

    @cached_property
    def heads(self) -> HeadCurve:
        weight, plant = self._season_weight[:, None], self.estimate.scheme.plant
        return HeadCurve(
            river=self._grid["river"][0],
            gross_head=(weight * self._grid["gross_head"]).sum(axis=0),
            net_head=(weight * self._grid["net_head"]).sum(axis=0),
            least_head=plant.minimum_net_head,
            shutdown_above=plant.shutdown_above,
        )

    @cached_property
    def efficiency(self) -> EfficiencyCurve:
        own = {name: values[self._main_season] for name, values in self._grid.items()}
        weight = self.estimate.scheme.plant.specific_weight
        water = weight * own["turbined"] * own["gross_head"]
        runs = [(state.operation, state.weight) for state in self.estimate.states]
        turned = sum(
            float((hours * weight * run.turbined * run.gross_head).sum())
            for run, hours in runs
            if run is not None
        )
        delivered = self.estimate.mean_annual_energy_mwh * WH_PER_MWH
        return EfficiencyCurve(
            turbined=own["turbined"],
            efficiency=100 * _ratio(own["power"], water),
            spilling=own["offered"] > own["turbined"] * (1 + 1e-6),
            mean=100 * delivered / turned if turned > 0 else np.nan,
            months=self._main_months,
        )

    # --- years and months -----------------------------------------------------------------------

    @cached_property
    def years(self) -> YearEnergies:
        used, left_out = self.estimate.yearly_energy_mwh, self.estimate.years_left_out
        known = [int(year) for year in (*used, *left_out)]
        every = range(min(known), max(known) + 1)
        start = self.estimate.scheme.year_start_month
        return YearEnergies(
            tuple(span(year, start) for year in every),
            np.array([used.get(str(year), np.nan) for year in every]),
            frozenset(
                span(int(year), start) for year, days in self.estimate.filled_days.items() if days
            ),
        )

    @cached_property
    def months(self) -> MonthEnergies:
        start = self.estimate.scheme.year_start_month
        order = [month - 1 for month in months_in_order(start)]
        return MonthEnergies(
            tuple(MONTH_NAMES[m][:3] for m in order),
            self.estimate.energy_by_month[:, order] / WH_PER_MWH,
        )

    @cached_property
    def ledger(self) -> tuple[LedgerBar, ...]:
        return ledger_bars(self.estimate.ledger_mwh)

    @cached_property
    def hydrographs(self) -> tuple[Hydrograph, ...]:
        """Years of little, median and much energy; fewer where there are fewer years."""
        energy = self.estimate.energy_by_month.sum(axis=1) / WH_PER_MWH
        chosen = typical_years(energy)
        return tuple(self._hydrograph(kind, row, float(energy[row])) for kind, row in chosen)

    def _hydrograph(self, kind: str, row: int, energy: float) -> Hydrograph:
        scheme, cells = self.estimate.scheme, self.estimate.cells
        assert scheme.dates is not None  # without days no hydrographs are drawn
        calendar = Calendar.of(scheme.dates, scheme.year_start_month)
        days = calendar.year == cells.years[row]
        river = np.where(days, scheme.discharge, np.nan)[days]
        turbined = np.full(river.size, np.nan)
        of_year = cells.month_of_day // 12 == row
        turbined[~np.isnan(river)] = self.estimate.operation.turbined[cells.cell_of_day[of_year]]
        first = np.flatnonzero(np.diff(calendar.month[days], prepend=0))
        return Hydrograph(
            kind=kind,
            name=span(int(cells.years[row]), scheme.year_start_month),
            energy=energy,
            river=river,
            turbined=turbined,
            month_starts=tuple(first.tolist()),
            months=tuple(MONTH_NAMES[m - 1][:3] for m in calendar.month[days][first].tolist()),
            filled=None if scheme.filled is None else scheme.filled[days],
        )


@overload
def as_facts(estimate: Estimate | Facts) -> Facts: ...


@overload
def as_facts(estimate: RiverViews | OptionFacts) -> RiverViews | OptionFacts: ...


def as_facts(
    estimate: Estimate | Facts | RiverViews | OptionFacts,
) -> Facts | RiverViews | OptionFacts:
    """Facts of an estimate; facts, and what a record or options show, stay what they are."""
    return Facts(estimate) if isinstance(estimate, Estimate) else estimate


def _over_all_the_time(table: dict[str, Floats]) -> dict[str, Floats]:
    """Rows from 0 to 100 % of the time; a discharge that lasts long has a row at both its ends."""
    last = table["exceedance_percent"]
    first = np.concatenate([[0.0], last[:-1]])
    long = last - first > LONG
    long[0] = True
    row = np.repeat(np.arange(last.size), 1 + long)
    begins = np.concatenate([[True], np.diff(row) > 0]) & long[row]
    exceedance = np.where(begins, first[row], last[row])
    whole = {name: np.append(values[row], values[-1]) for name, values in table.items()}
    return whole | {"exceedance_percent": np.append(exceedance, 100.0)}


def _ratio(part: Floats, whole: Floats) -> Floats:
    return np.asarray(np.divide(part, whole, out=np.full(part.shape, np.nan), where=whole > 0))


def _river_grid(discharge: Floats, shutdown_above: float | None) -> Floats:
    """Rising river discharges over the range of the record, both sides of a shutdown [m3/s]."""
    above_zero = discharge[discharge > 0]
    if not above_zero.size:
        return np.array([1e-3, 1.0])
    low, high = float(above_zero.min()), float(above_zero.max())
    grid = np.geomspace(low, max(high, 1.2 * low), GRID_STEPS)
    if shutdown_above is not None and low < shutdown_above < high:
        grid = np.concatenate([grid, [shutdown_above, shutdown_above * (1 + 1e-9)]])
    return np.unique(grid)
