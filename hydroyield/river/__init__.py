"""The river at the site: duration curves, hydrological years, what must stay in it, and cells."""

from hydroyield.river.cells import Cells, condense, distinct_states
from hydroyield.river.duration import characteristic_discharge, exceedance_percent, quantile
from hydroyield.river.duration_table import cells_of_table
from hydroyield.river.reserve import Abstraction, InflowShare, InflowSteps, WaterRules
from hydroyield.river.years import Calendar, usable_years

__all__ = [
    "Abstraction",
    "Calendar",
    "Cells",
    "InflowShare",
    "InflowSteps",
    "WaterRules",
    "cells_of_table",
    "characteristic_discharge",
    "condense",
    "distinct_states",
    "exceedance_percent",
    "quantile",
    "usable_years",
]
