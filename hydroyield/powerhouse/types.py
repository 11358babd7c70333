"""What is typical of each turbine type; data with a source on each row in machine_types.csv."""

from __future__ import annotations

import csv
from dataclasses import dataclass
from functools import cache
from importlib import resources

# typical curves are drawn for machines above about this output; smaller ones reach 3 to 8 points
# less (common practice)
SMALL_MACHINE = 100e3  # W


@dataclass(frozen=True)
class MachineType:
    """Typical values of a turbine type.

    name : kaplan, francis, ...
    minimum_discharge : share of the full discharge below which a unit does not run
    best_efficiency : the best that machines of the type reach
    head_range : advisory [m]
    curve : (share of full discharge, efficiency) points
    source : where the values come from
    """

    name: str
    minimum_discharge: float
    best_efficiency: float
    head_range: tuple[float, float]
    curve: tuple[tuple[float, float], ...]
    source: str


@cache
def machine_types() -> dict[str, MachineType]:
    """All types that have typical values, by name."""
    text = (resources.files("hydroyield.powerhouse") / "machine_types.csv").read_text("utf-8")
    return {row["type"]: _machine_type(row) for row in csv.DictReader(text.splitlines())}


def _machine_type(row: dict[str, str]) -> MachineType:
    points = {percent: row[f"eta_{percent}"] for percent in range(10, 101, 10)}
    return MachineType(
        name=row["type"],
        minimum_discharge=float(row["minimum_discharge"]),
        best_efficiency=float(row["best_efficiency"]),
        head_range=(float(row["head_from_m"]), float(row["head_to_m"])),
        curve=tuple((percent / 100, float(eta)) for percent, eta in points.items() if eta),
        source=row["source"],
    )
