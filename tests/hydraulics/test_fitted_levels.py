"""Ratings fitted to gaugings, drowned weirs and drowned tailraces."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.optimize import brentq, curve_fit

from hydroyield.hydraulics import FixedLevel, Heads, LevelTable, Weir
from hydroyield.hydraulics.rating_fit import fit_rating

DISCHARGES = np.array([0.8, 2.0, 3.5, 6.0, 11.0, 18.0, 40.0])


def pairs(zero: float, coefficient: float, exponent: float, noise: float = 0.0) -> list:
    draw = np.random.default_rng(6)
    level = zero + (DISCHARGES / coefficient) ** (1 / exponent)
    flow = DISCHARGES * np.exp(noise * draw.normal(size=DISCHARGES.size))
    return list(zip(flow.tolist(), level.tolist(), strict=True))


@pytest.mark.parametrize(
    ("zero", "coefficient", "exponent"), [(97.6, 18.0, 1.7), (10.0, 4.0, 2.5), (0.0, 60.0, 1.5)]
)
def test_an_exact_rating_is_found_again(zero: float, coefficient: float, exponent: float) -> None:
    found = fit_rating(pairs(zero, coefficient, exponent))
    assert found.rating.exponent == pytest.approx(exponent, rel=1e-3)
    assert found.rating.zero_level == pytest.approx(zero, abs=2e-3)
    assert found.standard_error == pytest.approx(0, abs=1e-3)
    np.testing.assert_allclose(
        found(np.array([1.0, 9.0, 30.0])),
        zero + (np.array([1.0, 9.0, 30.0]) / coefficient) ** (1 / exponent),
        atol=1e-3,
    )
    assert found.discharges == (0.8, 40.0)


def test_a_noisy_rating_against_scipy() -> None:
    """Least squares of ln Q in all three coefficients at once."""
    gauged = pairs(97.6, 18.0, 1.7, noise=0.08)
    found = fit_rating(gauged)
    flow, level = np.array(gauged).T

    def line(h: np.ndarray, a: float, log_c: float, b: float) -> np.ndarray:
        return log_c + b * np.log(np.maximum(h - a, 1e-9))

    best, _ = curve_fit(line, level, np.log(flow), p0=(97.5, np.log(15), 1.8), maxfev=20000)
    squares = ((np.log(flow) - line(level, *best)) ** 2).sum()
    assert found.standard_error == pytest.approx((squares / (len(gauged) - 3)) ** 0.5, rel=1e-4)
    assert found.rating.exponent == pytest.approx(best[2], rel=2e-3)


def test_three_gaugings_show_no_error_and_two_are_refused() -> None:
    three = [(2.0, 98.0), (8.0, 98.4), (20.0, 98.9)]
    assert fit_rating(three).standard_error is None
    with pytest.raises(ValueError, match="needs 3 gaugings at different levels"):
        fit_rating(three[:2])
    with pytest.raises(ValueError, match="do not rise"):
        fit_rating([(2.0, 98.9), (8.0, 98.4), (20.0, 98.0)])


# --- weirs --------------------------------------------------------------------------------------


@settings(max_examples=80, deadline=None)
@given(st.floats(0.01, 60), st.floats(-1, 3))
def test_a_drowned_weir_against_a_root_of_villemontes_formula(flow: float, tail: float) -> None:
    weir = Weir(100.0, 12.0, 1.8, drowned=True)
    found = float(weir.drowned_level(np.array([flow]), np.array([100.0 + tail]))[0]) - 100
    behind = max(0.0, tail)

    def passed(h: float) -> float:
        return 12 * 1.8 * h**1.5 * max(0.0, 1 - (behind / h) ** 1.5) ** 0.385 - flow

    free = (flow / (12 * 1.8)) ** (2 / 3)
    expected = brentq(passed, max(free, behind) * (1 - 1e-9) + 1e-12, free + behind + 1e-6)
    assert found == pytest.approx(expected, abs=1e-6)


def test_a_tailwater_below_the_crest_does_not_drown_a_weir() -> None:
    weir = Weir(100.0, 12.0, 1.8, drowned=True)
    flow = np.array([0.0, 1.0, 30.0])
    np.testing.assert_allclose(weir.drowned_level(flow, np.full(3, 99.0)), weir(flow), atol=1e-9)


# --- tailraces ----------------------------------------------------------------------------------


def test_the_river_drowns_a_tailrace_and_a_pond_holds_it_up() -> None:
    race = LevelTable((0.0, 10.0), (50.0, 51.0))
    river = LevelTable((0.0, 100.0), (49.0, 54.0))
    heads = Heads(FixedLevel(60.0), race, follows_turbine=True, river_level=river)
    flow, nothing = np.array([10.0, 60.0]), np.zeros(2)
    state = heads.at(flow, nothing, nothing)
    assert state.tailwater(np.array([5.0, 5.0])).tolist() == [50.5, 52.0]
    assert state[np.array([1])].tailwater(np.array([5.0])).tolist() == [52.0]
    pond = Heads(FixedLevel(60.0), river, lowest_tailwater=50.2)
    assert pond.at(flow, nothing, nothing).tailwater(nothing).tolist() == [50.2, 52.0]
