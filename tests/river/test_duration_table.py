"""A river known by its duration curve alone."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from hydroyield.river.duration_table import STEPS, cells_of_table, read_table

POINTS = st.lists(
    st.tuples(st.integers(0, 100), st.integers(0, 4000).map(lambda n: n / 8)),
    min_size=2,
    max_size=9,
    unique_by=lambda pair: pair[0],
)  # fmt: skip


def test_a_straight_curve_stays_straight() -> None:
    exceedance = 100 * np.arange(1, STEPS + 1) / (STEPS + 1)
    found = read_table((0.0, 30.0, 100.0), (10.0, 7.0, 0.0))
    np.testing.assert_allclose(found, 10 * (1 - exceedance / 100), atol=1e-9)


def test_beyond_the_points_it_is_constant() -> None:
    found = read_table((20.0, 80.0), (8.0, 2.0))
    exceedance = 100 * np.arange(1, STEPS + 1) / (STEPS + 1)
    assert (found[exceedance < 20] == 8.0).all()
    assert (found[exceedance > 80] == 2.0).all()


@given(POINTS)
def test_it_never_rises_and_goes_through_the_points(points: list[tuple[int, float]]) -> None:
    percent = sorted(p for p, _ in points)
    discharge = sorted((q for _, q in points), reverse=True)
    found = read_table(percent, discharge)
    assert (np.diff(found) <= 0).all()
    assert found.max() <= discharge[0]
    assert found.min() >= discharge[-1]
    exceedance = 100 * np.arange(1, STEPS + 1) / (STEPS + 1)
    for p, q in zip(percent, discharge, strict=True):
        # between the two nearest steps; the curve is continuous and falls
        before, after = found[exceedance <= p], found[exceedance >= p]
        assert before.min(initial=np.inf) >= q - 1e-9
        assert after.max(initial=0.0) <= q + 1e-9


def test_cells_hold_a_mean_year_of_every_season() -> None:
    season = np.array([0, 0, 0, 1, 1, 1, 1, 1, 1, 0, 0, 0])
    discharge = np.array([3.0, 2.0, 2.0, 1.0])
    cells = cells_of_table(discharge, season)
    assert cells.hours.sum() == pytest.approx(8766)  # 365.25 days of 24 hours
    assert cells.weight.sum() == pytest.approx(8766)
    summer = 24 * (30 + 31 + 30 + 31 + 31 + 30)
    assert cells.weight[cells.season == 1].sum() == pytest.approx(summer)
    twos = cells.discharge == 2.0
    assert cells.weight[twos].sum() == pytest.approx(8766 / 2)
    assert cells.mean(cells.discharge) == pytest.approx(2.0)
