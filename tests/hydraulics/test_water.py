"""Density and gravity as functions; their values stand in the published tests."""

from __future__ import annotations

import numpy as np
import pytest

from hydroyield.hydraulics.water import STANDARD_DENSITY, STANDARD_GRAVITY, density, gravity


def test_water_is_densest_near_four_degrees() -> None:
    temperatures = np.arange(0, 100.01, 0.01).tolist()
    densities = [density(t) for t in temperatures]
    assert temperatures[int(np.argmax(densities))] == pytest.approx(3.98, abs=0.011)
    after = [d for t, d in zip(temperatures, densities, strict=True) if t > 4]
    assert (np.diff(after) < 0).all()


def test_gravity_grows_towards_the_poles_and_falls_with_altitude() -> None:
    latitudes = np.linspace(0, 90, 91).tolist()
    assert (np.diff([gravity(latitude) for latitude in latitudes]) > 0).all()
    assert gravity(-54.2) == gravity(54.2)
    assert gravity(45.0) - gravity(45.0, 1000.0) == pytest.approx(3e-3)


def test_values_used_without_a_temperature_or_latitude() -> None:
    assert STANDARD_DENSITY == 1000.0
    assert STANDARD_GRAVITY == 9.81
    assert density(4.0) == pytest.approx(STANDARD_DENSITY, rel=1e-4)
