"""What every type of turbine keeps to, whichever it is."""

from __future__ import annotations

from functools import cache
from pathlib import Path
from typing import get_args

import numpy as np
import pytest
from small_schemes import ONE_YEAR, WEIGHT, scheme, unit

import hydroyield
from hydroyield.energy import Estimate, estimate_energy
from hydroyield.powerhouse import EfficiencyCurve, MachineType, UnitGroup, machine_types
from hydroyield.site.plant_models import TurbineType

FULL, HEAD = 5.0, 10.0  # m3/s and m, of each unit
KINDS = machine_types()
types = pytest.mark.parametrize("kind", KINDS.values(), ids=KINDS)

# a year of every discharge from nothing to twice full discharge, edges among them
FLOW = np.linspace(0.0, 2 * FULL, ONE_YEAR.size)


def group(kind: MachineType, capacity: float | None = None) -> UnitGroup:
    curve = EfficiencyCurve(*zip(*kind.curve, strict=True))
    return unit(
        kind=kind.name, discharge=FULL, head=HEAD, capacity=capacity, curve=curve,
        minimum=kind.minimum_discharge,
    )  # fmt: skip


@cache
def run(name: str, share_of_capacity: float | None = None) -> Estimate:
    kind = KINDS[name]
    full_output = WEIGHT * FULL * HEAD * kind.curve[-1][1]
    capacity = None if share_of_capacity is None else share_of_capacity * full_output
    on_edges = FULL * np.array([kind.minimum_discharge, *(share for share, _ in kind.curve)])
    flow = FLOW.copy()
    flow[: on_edges.size] = on_edges
    one = group(kind, capacity)
    return estimate_energy(scheme(flow, [one], ONE_YEAR, year_start_month=1))


def test_every_type_of_the_table_can_be_written() -> None:
    assert set(KINDS) | {"other"} == set(get_args(TurbineType))


@types
def test_it_stands_below_its_minimum_and_runs_from_there_on(kind: MachineType) -> None:
    estimate = run(kind.name)
    offered, output = estimate.operation.offered, estimate.operation.output
    least = kind.minimum_discharge * FULL
    assert (output[offered < least * (1 - 1e-9)] == 0).all()
    assert (output[offered >= least] > 0).all()


@types
def test_its_efficiency_is_that_of_its_curve(kind: MachineType) -> None:
    """At each share of the table from the minimum on; the head is the same at every discharge."""
    estimate = run(kind.name)
    output = dict(
        zip(estimate.cells.discharge.tolist(), estimate.operation.output.tolist(), strict=True)
    )
    for share, efficiency in kind.curve:
        if share >= kind.minimum_discharge:
            expected = WEIGHT * share * FULL * HEAD * efficiency
            assert output[FULL * share] == pytest.approx(expected, rel=1e-4)


@types
@pytest.mark.parametrize("share", [None, 0.7])
def test_more_water_never_gives_less_power(kind: MachineType, share: float | None) -> None:
    estimate = run(kind.name, share)  # cells stand in order of discharge
    output = estimate.operation.output
    assert (np.diff(output) >= -1e-5 * output.max()).all()


@types
def test_its_output_never_exceeds_its_capacity(kind: MachineType) -> None:
    estimate = run(kind.name, 0.7)
    capacity = estimate.scheme.plant.installed_capacity
    output = estimate.operation.output
    assert output.max() == pytest.approx(capacity, rel=1e-9)
    assert (output <= capacity * (1 + 1e-12)).all()
    assert (estimate.operation.turbined <= np.minimum(FULL, estimate.operation.offered)).all()


@types
def test_its_losses_and_the_water_it_leaves_add_up(kind: MachineType) -> None:
    (_, gross), *losses, (_, net) = run(kind.name, 0.7).ledger_mwh
    assert net == pytest.approx(gross + sum(loss for _, loss in losses), abs=1e-12 * gross)
    assert all(loss <= 1e-9 * gross for _, loss in losses)


@types
def test_a_site_file_needs_no_more_than_type_and_discharge(
    kind: MachineType, tmp_path: Path
) -> None:
    head = sum(kind.head_range) / 2
    axis = f", axis_level: {0.1}" if kind.name in ("pelton", "turgo") else ""
    path = tmp_path / "site.yaml"
    path.write_text(
        "format: 1\nsite: {name: T}\ndischarge: {duration_table: [[5, 9], [50, 3], [95, 0.4]]}\n"
        f"head: {{headwater: {{level: {head}}}, tailwater: {{level: 0}}}}\n"
        f"turbines:\n  - {{count: 1, type: {kind.name}, rated_discharge: 3{axis}}}\n"
    )
    found = hydroyield.estimate(hydroyield.read_site(path))
    (made,) = found.scheme.plant.groups
    assert found.mean_annual_energy_mwh > 0
    assert made.minimum_share == kind.minimum_discharge
    shares = np.array([share for share, _ in kind.curve])
    assert made.efficiency(shares, made.rated_head) == pytest.approx([e for _, e in kind.curve])
