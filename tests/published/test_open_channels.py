"""Uniform flow, weirs and ratings against published values and a reference library.

Standing of each source: "seen" was read in a stored text; "from memory" was not seen.
"""

from __future__ import annotations

import math

import numpy as np
import pytest
from fluids import open_flow

from hydroyield.hydraulics import NormalDepth, StageDischarge, Weir
from hydroyield.quantities import FOOT


def test_velocity_in_a_weedy_channel() -> None:
    """Cengel & Cimbala, Fluid Mechanics: R 0.2859 m, S 0.005236, n 0.03 give 1.0468 m/s (seen).

    A trapezoid 0.8 m wide, 0.52 m deep, with banks at 60 degrees has that R (from memory).
    """
    channel = NormalDepth(0.0, 0.8, 1 / math.tan(math.radians(60)), 0.005236, 0.03)
    depth = 0.52
    area = (0.8 + depth * channel.side_slope) * depth
    radius = area / (0.8 + 2 * depth / math.sin(math.radians(60)))
    assert radius == pytest.approx(0.2859, abs=5e-5)
    velocity = float(channel.discharge(np.array(depth))) / area
    assert velocity == pytest.approx(1.0468, abs=2e-4)  # R is printed to 1 in 6000
    # with the printed R itself: a channel so wide that R is the depth
    wide = NormalDepth(0.0, 1e9, 0.0, 0.005236, 0.03)
    assert float(wide.discharge(np.array(0.2859))) / (1e9 * 0.2859) == pytest.approx(
        1.0468, abs=5e-5
    )
    assert float(wide.depth(np.array(1.0468 * 1e9 * 0.2859))) == pytest.approx(0.2859, abs=5e-5)


# width [m], side slope: a slot, a mill race, a stream, a river, a triangle
SECTIONS = [(0.5, 0.0), (2.0, 1.0), (9.0, 1.5), (60.0, 2.0), (0.0, 3.0)]
# Manning n, min / normal / max, Chow (1959), Open-Channel Hydraulics (seen)
ROUGHNESS = {
    "trowelled concrete": (0.011, 0.013, 0.015),
    "clean straight stream": (0.025, 0.030, 0.033),
    "winding with pools": (0.033, 0.040, 0.045),
    "mountain, gravel and cobbles": (0.030, 0.040, 0.050),
    "mountain, large boulders": (0.040, 0.050, 0.070),
}


@pytest.mark.parametrize(("width", "side"), SECTIONS)
@pytest.mark.parametrize("surface", ROUGHNESS)
def test_uniform_flow_against_a_library(width: float, side: float, surface: str) -> None:
    """Discharge and normal depth over a grid against fluids.open_flow.V_Manning."""
    for n in ROUGHNESS[surface]:
        for slope in (1e-4, 2e-3, 3e-2):
            channel = NormalDepth(97.2, width, side, slope, n)
            depths = np.array([0.05, 0.4, 1.3, 5.0])
            areas = (width + side * depths) * depths
            radii = areas / (width + 2 * depths * math.hypot(1, side))
            velocity = [open_flow.V_Manning(radius, slope, n) for radius in radii.tolist()]
            expected = areas * velocity
            np.testing.assert_allclose(channel.discharge(depths), expected, rtol=1e-12)
            np.testing.assert_allclose(channel(expected) - 97.2, depths, rtol=1e-9, atol=1e-12)


def head_in_feet(coefficient: float, length: float, cfs: float) -> float:
    """Head over a weir [ft] whose coefficient holds in feet."""
    weir = Weir(0.0, length * FOOT, coefficient * FOOT**0.5)
    return float(weir(np.array(cfs * FOOT**3))) / FOOT


@pytest.mark.parametrize(
    # USBR Water Measurement Manual, ch. 7 (from memory): feet; metric by a factor of 0.3048^0.5
    ("in_feet", "metric"),
    [(3.33, 1.84), (3.367, 1.86)],
    ids=["suppressed rectangular", "cipolletti"],
)
def test_weir_coefficients(in_feet: float, metric: float) -> None:
    assert in_feet * FOOT**0.5 == pytest.approx(metric, abs=0.005)
    # Q = C L h^1.5: 10 ft long, heads of 1 and 4 ft
    assert head_in_feet(in_feet, 10.0, 10 * in_feet) == pytest.approx(1.0, rel=1e-12)
    assert head_in_feet(in_feet, 10.0, 80 * in_feet) == pytest.approx(4.0, rel=1e-12)
    # the metric coefficient as printed gives the head to its own rounding
    weir = Weir(0.0, 10 * FOOT, metric)
    head = float(weir(np.array(80 * in_feet * FOOT**3))) / FOOT
    assert head == pytest.approx(4.0, rel=0.005 / metric)


@pytest.mark.parametrize("formula", ["Kindsvater_Carter", "Ackers"])
@pytest.mark.parametrize("head", [0.2, 0.4, 0.8])
@pytest.mark.parametrize("share_of_weir_height", [0.1, 0.2, 1 / 3])
def test_sharp_crested_weir_against_a_library(
    formula: str, head: float, share_of_weir_height: float
) -> None:
    """1.84 is one number for what newer formulas let vary with the approach.

    Up to a head of one third of the weir's height, where the approach may be neglected (Francis,
    from memory), their coefficients lie between 1.79 and 1.87, at most 2.5 % from it, or 1.7 % of
    the head.
    """
    law = getattr(open_flow, f"Q_weir_rectangular_full_{formula}")
    length = 50.0  # long enough that the formulas' correction of the length does not count
    discharge = law(head, head / share_of_weir_height, length)
    found = float(Weir(100.0, length, 1.84)(np.array(discharge))) - 100.0
    assert found == pytest.approx(head, rel=0.017)


def test_stage_discharge_form() -> None:
    """Q = C (h - a)^b, the form of ISO 18320 (form seen), inverted over its whole range."""
    rating = StageDischarge(zero_level=97.6, coefficient=18.0, exponent=1.7)
    levels = np.linspace(97.7, 101.0, 34)
    discharges = 18.0 * (levels - 97.6) ** 1.7
    np.testing.assert_allclose(rating(discharges), levels, rtol=0, atol=1e-10)
    assert float(rating(np.array(18.0))) == pytest.approx(98.6, abs=1e-12)
