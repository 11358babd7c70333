"""Losses on the way: against the package fluids, published numbers and formulas by hand."""

from __future__ import annotations

import fluids
import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from iapws._iapws import _Liquid

from hydroyield.hydraulics.losses import (
    KIRSCHMER,
    Pipe,
    Waterway,
    canal_coefficient,
    exit_coefficient,
    friction_factor,
    rack_coefficient,
)
from hydroyield.hydraulics.water import kinematic_viscosity
from hydroyield.powerhouse import EfficiencyCurve, UnitGroup


@pytest.mark.parametrize(
    ("reynolds", "rough", "factor"),
    [(1e4, 1e-3, 0.032382), (1e5, 1e-4, 0.018514), (1e6, 1e-3, 0.019943), (1e7, 1e-5, 0.008996)],
)
def test_friction_factors_of_colebrook(reynolds: float, rough: float, factor: float) -> None:
    """Colebrook's formula, solved by hand to six digits."""
    found = friction_factor(np.array([reynolds]), rough)
    assert found == pytest.approx([factor], abs=6e-7)


@settings(max_examples=200, deadline=None)
@given(st.floats(3.5, 8.5), st.sampled_from([0.0, 1e-6, 1e-5, 1e-4, 1e-3, 1e-2, 0.05]))
def test_friction_factors_against_fluids(exponent: float, rough: float) -> None:
    reynolds = 10**exponent
    found = float(friction_factor(np.array([reynolds]), rough)[0])
    assert found == pytest.approx(fluids.friction.Colebrook(reynolds, rough), rel=1e-9)


def test_laminar_flow() -> None:
    assert friction_factor(np.array([1000.0]), 1e-3) == pytest.approx([0.064])


def test_pipe_of_a_textbook() -> None:
    """Maurer, Hydraulics and Water Resources (open text): 0.416 m3/s through 0.5 m, 100 m, 0.046
    mm, nu 1.023053e-6: V 2.1187 m/s, f 0.01328, hf 0.608 m (the text prints 0.061, a slip)."""
    pipe = Pipe(100.0, 0.5, 4.6e-5, 0.0, 1, 1.023053e-6, 9.81)
    assert 0.416 / pipe.area == pytest.approx(2.1187, abs=5e-5)
    lost = float(pipe.coefficient(np.array([0.416]))[0]) * 0.416**2
    assert lost == pytest.approx(0.608, abs=5e-4)


@settings(max_examples=60, deadline=None)
@given(
    st.floats(0.05, 20), st.floats(0.3, 3), st.sampled_from([1e-5, 1.5e-4, 3e-3]),
    st.floats(0, 5), st.integers(1, 4),
)  # fmt: skip
def test_pipes_against_fluids(
    discharge: float, diameter: float, roughness: float, minor: float, parallel: int
) -> None:
    """A grid of pipes: Darcy and Weisbach with the K of fluids; the table keeps eight digits."""
    pipe = Pipe(250.0, diameter, roughness, minor, parallel, 1.3e-6, 9.81)
    speed = discharge / parallel / (np.pi * diameter**2 / 4)
    reynolds = fluids.core.Reynolds(V=speed, D=diameter, nu=1.3e-6)
    friction = fluids.friction.friction_factor(
        Re=reynolds, eD=roughness / diameter, Method="Colebrook"
    )
    if reynolds < 4100:
        return  # where flow turns turbulent is a matter of definition
    loss = fluids.core.K_from_f(friction, 250.0, diameter) + minor
    expected = loss * speed**2 / (2 * 9.81)
    k = float(Waterway(pipes=(pipe,)).coefficient(np.array([discharge]))[0])
    assert k * discharge**2 == pytest.approx(expected, rel=1e-8)


@pytest.mark.parametrize("temperature", [0.5, 4, 10, 20, 30])
def test_viscosity_against_iapws(temperature: float) -> None:
    water = _Liquid(temperature + 273.15, 0.1)
    assert kinematic_viscosity(temperature) == pytest.approx(water["mu"] / water["rho"], rel=1e-9)


def test_rack_of_kirschmer() -> None:
    """t 12 mm, b 70 mm, v 1 m/s, 60 degrees, K 2.42: 0.01017 m, by hand."""
    loss = rack_coefficient(0.012, 0.070, "rectangular", 60, 2.0, 0.0, 9.81) * 2.0**2
    assert loss == pytest.approx(0.01017, abs=5e-6)
    half = rack_coefficient(0.012, 0.070, "rectangular", 60, 2.0, 0.5, 9.81) * 2.0**2
    assert half == pytest.approx(4 * loss)
    round_bars = rack_coefficient(0.012, 0.070, "circular", 60, 2.0, 0.0, 9.81) * 2.0**2
    assert round_bars == pytest.approx(loss * 1.79 / 2.42)
    assert set(KIRSCHMER.values()) == {2.42, 1.83, 1.67, 1.79, 0.76}


def test_exit_is_the_velocity_head() -> None:
    assert exit_coefficient(2.0, 9.81) * 6.0**2 == pytest.approx(3.0**2 / (2 * 9.81))


def test_canal_by_mannings_formula() -> None:
    """Cengel & Cimbala: R 0.2859 m, S 0.005236 and n 0.03 give 1.0468 m/s. A canal of 100 m with
    that radius and speed falls 0.5236 m."""
    depth = 0.2859 * 2  # of a rectangle twice as wide as deep, R is half the depth
    width = 2 * depth
    discharge = 1.0468 * width * depth
    fall = canal_coefficient(100.0, width, 0.0, depth, 0.03) * discharge**2
    assert fall == pytest.approx(0.5236, rel=2e-4)


# --- branches of single units --------------------------------------------------------------------

CURVE = EfficiencyCurve((0.2, 0.5, 0.8, 1.0), (0.7, 0.85, 0.9, 0.88))


def test_a_branch_taken_into_the_curve_gives_the_same_output() -> None:
    """Discharges between the minimum and full opening at net heads solved one by one."""
    unit = UnitGroup(1, "francis", 4.0, 8.0, 1e9, 0.3, CURVE, branch=0.05)
    seen = unit.before_branch()
    for head in (3.0, 8.0, 11.0):  # before the branch
        full = float(seen.full_discharge(np.array([head]))[0])
        behind = head - 0.05 * full**2
        assert full == pytest.approx(4.0 * (behind / 8.0) ** 0.5)  # open at its own net head
        for relative in (seen.minimum_share, 0.45, 0.7, 1.0):
            discharge = relative * full
            net = head - 0.05 * discharge**2
            share = discharge / (4.0 * (net / 8.0) ** 0.5)
            power = discharge * net * float(CURVE(np.array([share]))[0])
            found = discharge * head * float(seen.curve(np.array([relative]))[0])
            assert found == pytest.approx(power)
        least = seen.minimum_share * full
        assert least / (4.0 * ((head - 0.05 * least**2) / 8.0) ** 0.5) == pytest.approx(0.3)


def test_without_a_branch_nothing_changes() -> None:
    unit = UnitGroup(1, "francis", 4.0, 8.0, 1e9, 0.3, CURVE)
    assert unit.before_branch() is unit
