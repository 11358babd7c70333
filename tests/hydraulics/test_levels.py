"""Water levels against discharge: tables, ratings, weirs and uniform flow."""

from __future__ import annotations

import itertools
import math

import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from hydroyield.hydraulics import FixedLevel, LevelTable, NormalDepth, StageDischarge, Weir
from hydroyield.hydraulics.levels import range_covered

TAILWATER = LevelTable((2.0, 20.0, 100.0), (97.9, 98.35, 99.8))


@st.composite
def channels(draw: st.DrawFn) -> NormalDepth:
    """Rectangles, trapezoids and triangles."""
    width = draw(st.one_of(st.just(0.0), st.floats(0.3, 80)))
    side = draw(st.one_of(st.just(0.0), st.floats(0.2, 5)))
    assume(width + side > 0)
    slope = draw(st.floats(1e-5, 0.1))
    return NormalDepth(97.2, width, side, slope, draw(st.floats(0.009, 0.15)))


def naive_table(table: LevelTable, flow: float) -> float:
    """Follow the segments one after the other."""
    points = list(zip(table.discharges, table.levels, strict=True))
    if flow <= points[0][0]:
        return points[0][1]
    for (q0, z0), (q1, z1) in itertools.pairwise(points):
        if flow <= q1 or q1 == points[-1][0]:
            return z0 + (flow - q0) * (z1 - z0) / (q1 - q0)
    raise AssertionError


def test_a_fixed_level_has_the_shape_of_the_discharge() -> None:
    found = FixedLevel(101.2)(np.array([0.0, 5.0, 90.0]))
    assert found.tolist() == [101.2] * 3


def test_table_by_hand() -> None:
    discharges = np.array([0.0, 2.0, 11.0, 20.0, 60.0, 100.0, 140.0])
    # constant below; halfway; on points; halfway; the last slope 1.45 m per 80 m3/s goes on
    expected = [97.9, 97.9, 98.125, 98.35, 99.075, 99.8, 99.8 + 1.45 / 2]
    np.testing.assert_allclose(TAILWATER(discharges), expected, rtol=0, atol=1e-12)


@given(
    steps=st.lists(st.floats(0.5, 30), min_size=2, max_size=6),
    levels=st.lists(st.floats(90, 110), min_size=6, max_size=6),
    flows=st.lists(st.floats(0, 300), min_size=1, max_size=10),
)
@settings(max_examples=50, deadline=None)
def test_tables_against_following_the_segments(
    steps: list[float], levels: list[float], flows: list[float]
) -> None:
    discharges = tuple(float(q) for q in np.cumsum(steps))
    table = LevelTable(discharges, tuple(levels[: len(steps)]))
    expected = [naive_table(table, flow) for flow in flows]
    np.testing.assert_allclose(table(np.array(flows)), expected, rtol=0, atol=1e-9)


def test_a_table_states_the_range_that_it_covers() -> None:
    assert range_covered(TAILWATER) == (2.0, 100.0)
    assert range_covered(FixedLevel(97.9)) is None
    assert range_covered(Weir(100.9, 22.0, 1.8)) is None


@given(
    coefficient=st.floats(0.1, 500),
    exponent=st.floats(1, 4),
    flow=st.floats(0, 1e4, allow_subnormal=False),
)
@settings(max_examples=50, deadline=None)
def test_rating_inverts_its_formula(coefficient: float, exponent: float, flow: float) -> None:
    level = float(StageDischarge(97.6, coefficient, exponent)(np.array(flow)))
    assert level >= 97.6
    depth = (flow / coefficient) ** (1 / exponent)
    assert level - 97.6 == pytest.approx(depth, rel=1e-12, abs=1e-12)
    if depth > 0.1:  # below, the difference of two levels leaves few digits
        back = coefficient * (level - 97.6) ** exponent
        assert back == pytest.approx(flow, rel=1e-10)


@given(
    length=st.floats(0.5, 200),
    coefficient=st.floats(1.3, 2.3),
    flow=st.floats(0, 2000, allow_subnormal=False),
)
@settings(max_examples=50, deadline=None)
def test_weir_inverts_its_formula(length: float, coefficient: float, flow: float) -> None:
    head = float(Weir(0.0, length, coefficient)(np.array(flow)))
    assert coefficient * length * head**1.5 == pytest.approx(flow, rel=1e-12, abs=1e-300)


def test_nothing_over_the_weir_leaves_the_crest() -> None:
    found = Weir(100.9, 22.0, 1.8)(np.array([-3.0, 0.0]))
    assert found.tolist() == [100.9, 100.9]
    assert StageDischarge(97.6, 18, 1.7)(np.array([-3.0, 0.0])).tolist() == [97.6, 97.6]


@given(channel=channels(), depth=st.floats(1e-3, 30))
@settings(max_examples=80, deadline=None)
def test_normal_depth_is_the_inverse_of_mannings_formula(
    channel: NormalDepth, depth: float
) -> None:
    discharge = channel.discharge(np.array([depth]))
    assert channel.depth(discharge)[0] == pytest.approx(depth, rel=1e-9)


@given(channel=channels(), discharge=st.floats(1e-6, 1e5))
@settings(max_examples=80, deadline=None)
def test_normal_depth_gives_the_discharge_back(channel: NormalDepth, discharge: float) -> None:
    depth = channel.depth(np.array([discharge]))
    assert channel.discharge(depth)[0] == pytest.approx(discharge, rel=1e-9)


@given(channel=channels(), depth=st.floats(0.01, 20))
@settings(max_examples=50, deadline=None)
def test_mannings_formula_written_out(channel: NormalDepth, depth: float) -> None:
    side = math.hypot(depth, channel.side_slope * depth)
    area = channel.bottom_width * depth + channel.side_slope * depth * depth
    radius = area / (channel.bottom_width + 2 * side)
    expected = area * radius ** (2 / 3) * math.sqrt(channel.slope) / channel.manning_n
    assert float(channel.discharge(np.array(depth))) == pytest.approx(expected, rel=1e-12)


def test_normal_depth_of_a_triangle_in_closed_form() -> None:
    """A = z y2 and R = z y / 2 sqrt(1 + z2) give y = (Q n / (z S^0.5))^(3/8) / (R/y)^(1/4)."""
    z, slope, n, flow = 1.5, 0.002, 0.035, 7.0
    radius_per_depth = z / (2 * math.sqrt(1 + z * z))
    expected = (flow * n / (z * math.sqrt(slope))) ** 0.375 / radius_per_depth**0.25
    channel = NormalDepth(97.2, 0.0, z, slope, n)
    assert channel(np.array([flow]))[0] == pytest.approx(97.2 + expected, abs=1e-9)


def test_normal_depth_of_a_wide_river_in_closed_form() -> None:
    """Without banks to speak of R = y, so y = (q n / S^0.5)^0.6 for the discharge per width."""
    channel = NormalDepth(0.0, 1e7, 0.0, 0.001, 0.03)
    expected = (2.0 * 0.03 / math.sqrt(0.001)) ** 0.6
    assert channel(np.array([2e7]))[0] == pytest.approx(expected, rel=1e-6)


@given(channel=channels())
@settings(max_examples=30, deadline=None)
def test_level_rises_with_discharge_in_one_call_for_all(channel: NormalDepth) -> None:
    flows = np.concatenate([[0.0], np.geomspace(1e-6, 1e4, 60)])
    levels = channel.depth(flows)
    assert (np.diff(levels) > 0).all()


def test_no_flow_leaves_the_bed() -> None:
    channel = NormalDepth(97.2, 9.0, 1.5, 0.002, 0.035)
    assert channel(np.array([0.0, -1.0])).tolist() == [97.2, 97.2]
    assert float(channel(np.array(0.0))) == 97.2
