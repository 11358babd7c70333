"""The way from the energy of all the water to the energy delivered, step by step."""

from __future__ import annotations

from collections.abc import Iterator, Sequence

import numpy as np
from numpy.typing import NDArray

from hydroyield.energy.scheme import Scheme
from hydroyield.hydraulics import Weir
from hydroyield.powerhouse import Operation
from hydroyield.quantities import WH_PER_MWH
from hydroyield.river import Cells, quantile

Floats = NDArray[np.float64]

STEPS = (
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
    "net",
)
IMPORTS = "imports"  # a row before the net, where a standing plant takes something


def reference_head(scheme: Scheme) -> float:
    """Headwater less tailwater at the median discharge [m], the plant and abstractions apart.

    Over a weir the crest is the headwater.
    """
    median = quantile(scheme.valid_discharge, [50.0])
    state = scheme.heads.at(median, np.zeros(1), np.zeros(1))
    headwater = scheme.heads.headwater
    upper = (
        headwater.crest if isinstance(headwater, Weir) else float(state.headwater(np.zeros(1))[0])
    )
    return upper - float(state.tailwater(np.zeros(1))[0])


def ledger(
    scheme: Scheme, cells: Cells, runs: Sequence[tuple[Operation | None, Floats]]
) -> list[tuple[str, float]]:
    """Rows (step, mean annual energy [MWh]): gross positive, losses negative, net their sum.

    runs : operation and weight (c,) [h] of each state of the plant, that with all units first;
        None where no unit is in service
    """
    rows: dict[str, float] = {}
    full = runs[0][0]
    assert full is not None  # all units are
    for run, weight in runs:
        for step, power in _rates(scheme, cells, full, run):
            rows[step] = rows.get(step, 0.0) + float((weight * power).sum()) / WH_PER_MWH
    steps = [*STEPS[:-1]]
    if scheme.plant.electrical.imported:
        steps.append(IMPORTS)
    rows = {step: rows.get(step, 0.0) for step in steps}
    return [*rows.items(), ("net", sum(rows.values()))]


def _rates(
    scheme: Scheme, cells: Cells, full: Operation, run: Operation | None
) -> Iterator[tuple[str, Floats]]:
    """Each step as a rate by cell [W].

    full, run : with all units in service, and with those of a state
    """
    weight = scheme.plant.specific_weight
    of_water = weight * reference_head(scheme)
    yield "gross", of_water * cells.discharge
    yield "reserved", -of_water * (cells.discharge - full.offered)
    for step, water in _unused_water(full):
        yield step, -of_water * water
    electrical = scheme.plant.electrical
    if run is None:
        yield "outage", -of_water * full.turbined
        yield IMPORTS, np.full(full.turbined.size, -electrical.imported)
        return
    yield "outage", -of_water * (full.turbined - run.turbined)
    yield "levels", weight * run.turbined * run.gross_head - of_water * run.turbined
    yield "waterway", -weight * run.turbined * (run.gross_head - run.net_head)
    yield "turbine", run.shaft - weight * run.turbined * run.net_head
    yield "drive_and_generator", run.output - run.shaft
    runs = run.output > 0
    exported = np.where(runs, electrical.behind_transformer(run.output), 0.0)
    yield "transformer", exported - run.output
    own_use = np.minimum(exported, electrical.own_use * runs)
    yield "own_use", -own_use
    yield "export_limit", np.where(runs, scheme.net_power(run.output) - (exported - own_use), 0.0)
    yield IMPORTS, np.where(runs, 0.0, -electrical.imported)


def _unused_water(run: Operation) -> Iterator[tuple[str, Floats]]:
    """Offered water that is not turbined, each part under one heading [m3/s]."""
    unused = run.offered - run.turbined
    standing = run.stopped | run.no_head
    above = np.where(standing, 0.0, np.maximum(0.0, run.offered - run.fully_open))
    above = np.minimum(above, unused)
    rest = np.where(standing, 0.0, unused - above)
    yield "shutdown", np.where(run.stopped, unused, 0.0)
    yield "no_admissible_head", np.where(run.no_head & ~run.stopped, unused, 0.0)
    yield "above_full_discharge", above
    yield "capacity_limit", np.where(run.at_capacity, rest, 0.0)
    yield "below_minimum_or_unused", np.where(run.at_capacity, 0.0, rest)
