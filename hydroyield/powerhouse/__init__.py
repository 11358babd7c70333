"""Turbines, generators and how the units of a plant share the water."""

from hydroyield.powerhouse.dispatcher import Dispatcher
from hydroyield.powerhouse.grid import HeadLines
from hydroyield.powerhouse.operation import Operation, operate
from hydroyield.powerhouse.outages import Dated, Outages, Spread
from hydroyield.powerhouse.types import MachineType, machine_types
from hydroyield.powerhouse.units import (
    EfficiencyCurve,
    Electrical,
    HillChart,
    JetCurve,
    LoadCurve,
    OutputLimit,
    Plant,
    UnitGroup,
)

__all__ = [
    "Dated",
    "Dispatcher",
    "EfficiencyCurve",
    "Electrical",
    "HeadLines",
    "HillChart",
    "JetCurve",
    "LoadCurve",
    "MachineType",
    "Operation",
    "Outages",
    "OutputLimit",
    "Plant",
    "Spread",
    "UnitGroup",
    "machine_types",
    "operate",
]
