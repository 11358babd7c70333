"""When and why a plant stands, and how long each unit runs."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from hydroyield.energy.estimate import Estimate

if TYPE_CHECKING:
    import pandas as pd

Floats = NDArray[np.float64]

CAUSES = ("too_little_water", "shutdown", "low_head", "outage")


def hours_by_cause(estimate: Estimate) -> dict[str, Floats]:
    """Hours in which the plant runs and in which it stands, by cause, each (y, 12) [h].

    An outage counts where the plant would run with all units in service. The chances of the states
    of the plant are expected hours.
    """
    cells, full = estimate.cells, estimate.operation
    would_run = full.turbined > 0
    hours = {"running": np.zeros(cells.hours.shape)}
    hours |= {cause: np.zeros(cells.hours.shape) for cause in CAUSES}
    standing = {
        "shutdown": full.stopped,
        "low_head": full.no_head & ~full.stopped,
        "too_little_water": ~would_run & ~full.stopped & ~full.no_head,
    }
    for cause, cells_of_cause in standing.items():
        hours[cause] += cells.by_month((cells_of_cause & ~would_run).astype(np.float64))
    for state in estimate.states:
        runs = would_run if state.operation is None else state.operation.turbined > 0
        runs = np.zeros(would_run.size, bool) if state.operation is None else runs
        hours["running"] += state.chance * cells.by_month(runs.astype(np.float64))
        lost = (would_run & ~runs).astype(np.float64)
        hours["outage"] += state.chance * cells.by_month(lost)
    return hours


def unit_hours(estimate: Estimate) -> list[float]:
    """Hours a year that each unit runs, in the order of the groups, all units in service [h].

    Equal units take turns: the first of a group is the one that runs most.
    """
    scheme, cells = estimate.scheme, estimate.cells
    state = scheme.head_state(cells.discharge, cells.season)
    through = scheme.dispatcher.unit_discharges(state, estimate.operation.turbined)
    weights = [float(cells.weight[discharge > 0].sum()) for discharge in through]
    ordered: list[float] = []
    start = 0
    for group in scheme.plant.groups:
        ordered += sorted(weights[start : start + group.count], reverse=True)
        start += group.count
    return ordered


def standing_table(estimate: Estimate) -> pd.DataFrame:
    """Hours of each month of each year used.

    Columns `year`, `month`, `running_hours`, then by cause `too_little_water_hours`,
    `shutdown_hours`, `low_head_hours`, `outage_hours`.
    """
    import pandas as pd

    hours = hours_by_cause(estimate)
    years = estimate.cells.years
    columns: dict[str, NDArray[Any]] = {
        "year": np.repeat(years, 12),
        "month": np.tile(np.arange(1, 13), years.size),
    }
    columns |= {f"{cause}_hours": values.ravel() for cause, values in hours.items()}
    return pd.DataFrame(columns)
