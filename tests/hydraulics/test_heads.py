"""Gross and net head from levels and losses."""

from __future__ import annotations

import numpy as np
import pytest

from hydroyield.hydraulics import FixedLevel, Heads, LevelTable, StageDischarge, Weir
from hydroyield.hydraulics.losses import Waterway

RIVER = np.array([2.0, 10.0, 40.0, 120.0])
NOTHING = np.zeros(4)
TAILWATER = LevelTable((0.0, 20.0, 100.0), (97.9, 98.35, 99.8))


def test_a_weir_sees_what_turbines_and_abstractions_leave() -> None:
    weir = Weir(crest=100.9, length=22.0, coefficient=1.8)
    state = Heads(weir, FixedLevel(97.9)).at(RIVER, np.full(4, 1.5), NOTHING)
    turbined = np.array([0.5, 6.0, 8.0, 8.0])
    over = [0.0, 2.5, 30.5, 110.5]  # river - 1.5 - turbined, by hand
    expected = [100.9 + (q / (1.8 * 22)) ** (2 / 3) for q in over]
    np.testing.assert_allclose(state.headwater(turbined), expected, rtol=0, atol=1e-12)
    np.testing.assert_allclose(state.gross(turbined), np.subtract(expected, 97.9), atol=1e-12)


def test_the_crest_is_the_lowest_headwater_of_a_weir() -> None:
    state = Heads(Weir(100.9, 22.0, 1.8), FixedLevel(97.9)).at(RIVER, np.full(4, 5.0), NOTHING)
    assert state.headwater(RIVER).tolist() == [100.9] * 4  # more is taken than flows


def test_other_headwaters_see_the_whole_river() -> None:
    headwater = LevelTable((0.0, 100.0), (101.0, 102.0))
    state = Heads(headwater, FixedLevel(97.0)).at(RIVER, np.full(4, 1.0), np.full(4, 1.0))
    np.testing.assert_allclose(state.headwater(NOTHING), [101.02, 101.1, 101.4, 102.2])
    np.testing.assert_allclose(state.headwater(RIVER / 2), [101.02, 101.1, 101.4, 102.2])


def test_a_tailwater_that_follows_the_river_misses_what_does_not_come_back() -> None:
    heads = Heads(FixedLevel(101.2), TAILWATER)
    returned = heads.at(RIVER, np.full(4, 3.0), NOTHING)
    np.testing.assert_allclose(returned.tailwater(NOTHING), TAILWATER(RIVER))
    lost = heads.at(RIVER, np.full(4, 3.0), np.full(4, 3.0))
    np.testing.assert_allclose(lost.tailwater(NOTHING), TAILWATER(np.array([0.0, 7, 37, 117])))
    np.testing.assert_allclose(lost.tailwater(RIVER), lost.tailwater(NOTHING))


def test_a_tailrace_follows_the_turbines() -> None:
    tailrace = StageDischarge(zero_level=97.0, coefficient=10.0, exponent=2.0)
    heads = Heads(FixedLevel(101.2), tailrace, follows_turbine=True)
    state = heads.at(RIVER, NOTHING, np.full(4, 1.0))
    turbined = np.array([0.0, 2.5, 10.0, 40.0])
    np.testing.assert_allclose(state.tailwater(turbined), [97.0, 97.5, 98.0, 99.0])
    np.testing.assert_allclose(state.gross(turbined), [4.2, 3.7, 3.2, 2.2])


def test_the_head_of_an_impulse_machine_ends_at_its_axis() -> None:
    state = Heads(FixedLevel(101.2), TAILWATER).at(RIVER, NOTHING, NOTHING)
    assert state.gross(NOTHING, axis_level=98.5).tolist() == pytest.approx([2.7] * 4)
    assert state.net(NOTHING, axis_level=0.0).tolist() == pytest.approx([101.2] * 4)


def test_gross_head_is_never_below_zero() -> None:
    flood = np.array([500.0])
    state = Heads(FixedLevel(101.2), TAILWATER, waterway=Waterway(0.01)).at(
        flood, np.zeros(1), np.zeros(1)
    )
    assert state.tailwater(np.zeros(1))[0] > 101.2
    assert state.gross(np.zeros(1)).tolist() == [0.0]
    assert state.gross(np.zeros(1), axis_level=103.0).tolist() == [0.0]
    assert state.net(np.array([3.0])).tolist() == pytest.approx([-0.09])


def test_losses_grow_with_the_square_of_the_turbine_discharge() -> None:
    state = Heads(FixedLevel(101.2), FixedLevel(97.2), waterway=Waterway(0.0021)).at(
        RIVER, NOTHING, NOTHING
    )
    turbined = np.array([0.0, 1.0, 10.0, 20.0])
    np.testing.assert_allclose(state.loss(turbined), [0.0, 0.0021, 0.21, 0.84])
    np.testing.assert_allclose(state.net(turbined), [4.0, 3.9979, 3.79, 3.16])


@pytest.mark.parametrize(
    ("heads", "depends"),
    [
        (Heads(FixedLevel(101.2), TAILWATER), False),
        (Heads(LevelTable((0.0, 9.0), (101.0, 102.0)), TAILWATER), False),
        (Heads(FixedLevel(101.2), TAILWATER, waterway=Waterway(0.001)), True),
        (Heads(FixedLevel(101.2), TAILWATER, follows_turbine=True), True),
        (Heads(Weir(100.9, 22.0, 1.8), TAILWATER), True),
        (Heads(Weir(100.9, 22.0, 1.8), TAILWATER, follows_turbine=True), True),
    ],
)
def test_what_depends_on_turbines_is_known_and_choosing_states_keeps_them(
    heads: Heads, depends: bool
) -> None:
    state = heads.at(RIVER, np.full(4, 1.0), np.full(4, 0.5))
    assert state.depends_on_turbines is depends
    assert state.size == 4
    turbined = np.array([0.2, 3.0, 8.0, 5.0])
    changes = not np.array_equal(state.net(turbined), state.net(NOTHING))
    assert changes is depends
    part = state[np.array([False, True, False, True])]
    assert part.size == 2
    np.testing.assert_array_equal(part.net(turbined[[1, 3]]), state.net(turbined)[[1, 3]])
