"""The river as tables: years, duration curves of years and months, low flow, mass curve."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np

from hydroyield.river.views import CURVE_PERCENT, RiverViews

if TYPE_CHECKING:
    import pandas as pd

RIVER_FOLDER = "river"
BANDS = (("lowest", 0.0), ("lower", 0.1), ("median", 0.5), ("upper", 0.9), ("highest", 1.0))


def years_table(views: RiverViews) -> pd.DataFrame:
    """Complete years, hydrological and civil.

    Columns `year_start_month`, `year` (in which it ends), `mean_m3s`, `wetness_percent` (share of
    the years whose duration curve is no higher), `seven_day_minimum_m3s`, `filled_days`.
    """
    import pandas as pd

    rows = [
        {
            "year_start_month": start,
            "year": year.year,
            "mean_m3s": year.mean,
            "wetness_percent": 100 * year.position,
            "seven_day_minimum_m3s": year.minimum,
            "filled_days": year.filled,
        }
        for start in dict.fromkeys((views.start_month, 1))
        for year in views.years(start)
    ]
    columns = (
        "year_start_month", "year", "mean_m3s", "wetness_percent", "seven_day_minimum_m3s",
        "filled_days",
    )  # fmt: skip
    return pd.DataFrame(rows, columns=list(columns))


def annual_duration_table(views: RiverViews) -> pd.DataFrame:
    """Duration curve of all days, and bands over those of the complete hydrological years.

    Columns `exceedance_percent`, `all_days_m3s`, then at each exceedance the `lowest_m3s` of the
    years, `lower_m3s` (one year in ten is below), `median_m3s`, `upper_m3s` (one in ten is above)
    and `highest_m3s` (Vogel & Fennessey 1994).
    """
    import pandas as pd

    columns = {"exceedance_percent": CURVE_PERCENT, "all_days_m3s": views.whole_curve}
    curves = views.annual
    if curves.years.size:
        for name, share in BANDS:
            columns[f"{name}_m3s"] = np.quantile(curves.discharge, share, axis=0)
    return pd.DataFrame(columns)


def yearly_duration_table(views: RiverViews) -> pd.DataFrame:
    """Duration curve of each complete hydrological year.

    Columns `year`, `exceedance_percent`, `river_discharge_m3s`.
    """
    import pandas as pd

    curves = views.annual
    return pd.DataFrame(
        {
            "year": np.repeat(curves.years, CURVE_PERCENT.size),
            "exceedance_percent": np.tile(CURVE_PERCENT, curves.years.size),
            "river_discharge_m3s": curves.discharge.ravel(),
        }
    )


def monthly_duration_table(views: RiverViews) -> pd.DataFrame:
    """Duration curve of each calendar month.

    Columns `month`, `exceedance_percent`, `river_discharge_m3s`.
    """
    import pandas as pd

    return pd.DataFrame(
        {
            "month": np.repeat(np.arange(1, 13), CURVE_PERCENT.size),
            "exceedance_percent": np.tile(CURVE_PERCENT, 12),
            "river_discharge_m3s": views.monthly.ravel(),
        }
    ).dropna()


def mass_curve_table(views: RiverViews) -> pd.DataFrame:
    """Cumulative volume less that of the mean flow, at the end of each day.

    Columns `date`, `departure_m3`.
    """
    import pandas as pd

    curve = views.mass_curve
    return pd.DataFrame({"date": curve.dates.astype(str), "departure_m3": curve.departure})


def daily_table(views: RiverViews) -> pd.DataFrame:
    """Every day: columns `date`, `river_discharge_m3s` (empty where missing), `filled` (0 or 1)."""
    import pandas as pd

    filled = np.zeros(views.dates.size, bool) if views.filled is None else views.filled
    return pd.DataFrame(
        {
            "date": views.dates.astype(str),
            "river_discharge_m3s": views.discharge,
            "filled": filled.astype(int),
        }
    )


TABLES = {
    "years.csv": years_table,
    "annual_duration.csv": annual_duration_table,
    "yearly_duration.csv": yearly_duration_table,
    "monthly_duration.csv": monthly_duration_table,
    "mass_curve.csv": mass_curve_table,
    "daily.csv": daily_table,
}


def write_river_tables(views: RiverViews, folder: Path) -> None:
    """Write every table into a new folder `river` of an existing folder."""
    (folder / RIVER_FOLDER).mkdir()
    for name, table in TABLES.items():
        table(views).to_csv(folder / RIVER_FOLDER / name, index=False, float_format="%.7g")
