"""Seven-day minima, the low flow of ten years and the base-flow index."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy import stats

from hydroyield.river import low_flow as low_flow_module
from hydroyield.river.low_flow import base_flow_index, low_flow, seven_day_minima

DATES = np.arange(np.datetime64("2000-01-01"), np.datetime64("2006-01-01"))


def flow(seed: int) -> np.ndarray:
    draw = np.random.default_rng(seed)
    return np.exp(
        np.cumsum(0.1 * draw.normal(size=DATES.size)) / 3 + draw.normal(size=DATES.size) / 5
    )


def naive_minima(discharge: np.ndarray, start_month: int) -> dict[int, float]:
    """Every window of seven days by itself; a year needs 95 % of its windows whole."""
    means: dict[int, list[float]] = {}
    for k in range(6, discharge.size):
        window = discharge[k - 6 : k + 1]
        day = DATES[k].item()
        year = day.year + (1 if start_month > 1 and day.month >= start_month else 0)
        if not np.isnan(window).any():
            means.setdefault(year, []).append(sum(window) / 7)
    length = {year: 366 if (year % 4 == 0) else 365 for year in means}
    if start_month > 2:
        length = {year: 366 if year % 4 == 0 else 365 for year in means}
    return {y: min(v) for y, v in sorted(means.items()) if len(v) >= 0.95 * length[y]}


@pytest.mark.parametrize("start_month", [1, 4, 10])
def test_minima_against_a_loop(start_month: int) -> None:
    discharge = flow(3)
    discharge[900:930] = np.nan  # spoils the year around July 2002
    found = seven_day_minima(DATES, discharge, start_month)
    expected = naive_minima(discharge, start_month)
    assert list(found) == list(expected)
    assert list(found.values()) == pytest.approx(list(expected.values()))


def test_a_record_of_less_than_a_week_has_none() -> None:
    assert seven_day_minima(DATES[:5], np.ones(5)) == {}


def test_log_pearson_of_a_symmetric_sample_is_the_log_normal_one() -> None:
    """Without skew the frequency factor is the normal quantile: 1.281552 below the mean."""
    logs = np.array([-2.0, -1.0, 0.0, 1.0, 2.0])
    found = low_flow(np.exp(logs))
    assert found.value == pytest.approx(np.exp(-1.281552 * logs.std(ddof=1)), rel=1e-6)
    assert (found.years, found.return_period) == (5, 10.0)


def test_log_pearson_with_frequency_factors_of_a_table() -> None:
    """K for skew 1.0 at 0.1 non-exceedance is -1.128 (Water Resources Council Bulletin 17B,
    appendix 3, from memory); it falls by 0.19 for each unit of skew."""
    draw = stats.pearson3.rvs(1.0, size=4000, random_state=np.random.default_rng(1))
    logs = (draw - draw.mean()) / draw.std(ddof=1)
    skew = stats.skew(logs, bias=False)
    found = np.log(low_flow(np.exp(logs)).value)
    assert found == pytest.approx(-1.128, abs=0.2 * abs(skew - 1) + 0.002)
    # and a second way: Wilson and Hilferty's approximation of the same factor
    k = skew / 6
    z = stats.norm.ppf(0.1)
    approximation = 2 / skew * ((1 + k * z - k**2) ** 3 - 1)
    assert found == pytest.approx(approximation, abs=0.01)


def test_years_without_flow_take_their_share_of_the_probability() -> None:
    flowing = np.exp(np.array([-1.0, 0.0, 1.0] * 10))
    dry = np.concatenate([flowing, np.zeros(2)])  # 2 of 32 years, less than 1 in 10
    found = low_flow(dry)
    left = (0.1 - 2 / 32) / (1 - 2 / 32)
    expected = np.exp(stats.norm.ppf(left) * np.log(flowing).std(ddof=1))
    assert found.value == pytest.approx(expected, rel=1e-6)
    assert "2 years without flow" in found.method
    assert low_flow(np.concatenate([flowing, np.zeros(5)])).value == 0.0
    assert low_flow([0.0, 0.0]).value == 0.0


def test_equal_years() -> None:
    assert low_flow([2.0] * 12).value == pytest.approx(2.0)
    assert low_flow([2.0]).value == pytest.approx(2.0)


def test_base_flow_of_a_steady_and_of_a_flashy_river() -> None:
    assert base_flow_index(np.full(400, 3.0)) == pytest.approx(1.0)
    # by hand: 1 m3/s, and on the third day of every block 11: five-day minima all 1
    flashy = np.tile([1.0, 1.0, 11.0, 1.0, 1.0], 40)
    inner = flashy[5:-10]  # from the first turning point to the last
    assert base_flow_index(flashy) == pytest.approx(1 / inner.mean(), rel=0.02)


@settings(max_examples=30, deadline=None)
@given(st.integers(0, 1000), st.integers(0, 5))
def test_base_flow_is_a_share_and_does_not_depend_on_the_unit(seed: int, gaps: int) -> None:
    discharge = flow(seed)[:600]
    draw = np.random.default_rng(seed)
    discharge[draw.integers(0, 600, gaps)] = np.nan
    index = base_flow_index(discharge)
    assert 0 < index <= 1
    assert base_flow_index(1000 * discharge) == pytest.approx(index)


def test_too_short_for_base_flow() -> None:
    assert np.isnan(base_flow_index(np.ones(12)))
    assert np.isnan(base_flow_index(np.full(100, np.nan)))


@pytest.mark.parametrize("skew", [-2.5, -1.0, -0.1, -5e-4, 0.0, 5e-4, 0.3, 1.0, 3.0])
def test_frequency_factors_against_scipy(skew: float) -> None:
    for probability in (0.01, 0.1, 0.5):
        found = low_flow_module._frequency_factor(skew, probability)
        assert found == pytest.approx(stats.pearson3.ppf(probability, skew), abs=1e-6)


def test_an_unknown_minimum_is_no_dry_year() -> None:
    known = [0.8, 1.0, 1.3, 0.9]
    found = low_flow([*known, np.nan])
    assert found == low_flow(known)
    assert (found.years, "without flow" in found.method) == (4, False)


@pytest.mark.parametrize(
    ("minima", "return_period"), [([], 10.0), ([np.nan], 10.0), ([1.0, 2.0], 1.0)]
)
def test_no_low_flow_without_a_minimum_or_a_return_period(
    minima: list[float], return_period: float
) -> None:
    with pytest.raises(ValueError, match=r"a yearly minimum and a return period above one year"):
        low_flow(minima, return_period)


@pytest.mark.parametrize(("missing", "counts"), [(12, True), (13, False)])
def test_a_year_needs_19_of_20_windows(missing: int, counts: bool) -> None:
    """Of 365 windows 346.75 must be whole; a gap of m days spoils m + 6: 12 leave 347."""
    discharge = np.ones(DATES.size)
    start = int(np.flatnonzero(np.datetime64("2003-06-01") == DATES)[0])
    discharge[start : start + missing] = np.nan
    assert (2003 in seven_day_minima(DATES, discharge, 1)) is counts


def test_base_flow_by_hand() -> None:
    """Minima 4, 2, 5, 3, 5 of five blocks: the 2 of day 7 and the 3 of day 17 are turning points.

    The line between them holds 11 days x 2.5; the river brings 67 in these days.
    """
    blocks = [
        [10, 8, 6, 5, 4], [4, 3, 2, 3, 9], [12, 10, 8, 6, 5], [5, 4, 3, 3, 6], [9, 8, 7, 6, 5]
    ]  # fmt: skip
    assert base_flow_index(np.array(blocks, dtype=float).ravel()) == pytest.approx(27.5 / 67)


def naive_base_flow_index(discharge: list[float]) -> float:
    """The same method, from memory of the two reports, one day after the other."""
    minima: list[tuple[int, float]] = []
    for start in range(0, len(discharge) - 4, 5):
        block = discharge[start : start + 5]
        if not any(np.isnan(block)):
            minima.append((start + block.index(min(block)), min(block)))
    turning = [
        middle
        for before, middle, after in zip(minima, minima[1:], minima[2:], strict=False)
        if 0.9 * middle[1] <= min(before[1], after[1])
    ]
    base = total = 0.0
    for day in range(turning[0][0], turning[-1][0] + 1):
        left = [point for point in turning if point[0] <= day][-1]
        right = next(point for point in turning if point[0] >= day)
        along = (day - left[0]) / max(1, right[0] - left[0])
        if not np.isnan(discharge[day]):
            base += min(discharge[day], left[1] + along * (right[1] - left[1]))
            total += discharge[day]
    return base / total


@settings(max_examples=20, deadline=None)
@given(st.integers(0, 1000), st.integers(0, 20), st.sampled_from([0.0, 0.5, 0.9]))
def test_base_flow_against_a_loop(seed: int, gaps: int, cut: float) -> None:
    """Also of a river that falls dry, where what exceeds `cut` is left."""
    discharge = np.maximum(0, flow(seed)[:400] - cut * np.median(flow(seed)[:400]))
    draw = np.random.default_rng(seed)
    discharge[draw.integers(0, 400, gaps)] = np.nan
    expected = naive_base_flow_index(discharge.tolist())
    assert base_flow_index(discharge) == pytest.approx(expected, rel=1e-9)
