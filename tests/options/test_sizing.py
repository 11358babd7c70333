"""The best size and how flat it is, on curves whose peak is known."""

from __future__ import annotations

from math import sqrt

import pytest

from hydroyield.options.sizing import best_size


def test_a_parabola() -> None:
    """100 - (q - 5)^2 is within 1 % of 100 between 4 and 6."""
    found = best_size(lambda q: 100 - (q - 5) ** 2, [1.0, 3.0, 6.5, 9.0])
    assert found.best == pytest.approx(5, abs=0.02)
    assert (found.low, found.high) == (pytest.approx(4, abs=0.02), pytest.approx(6, abs=0.02))
    assert [found.at_end, found.low_at_end, found.high_at_end] == [False] * 3


def test_a_worth_below_zero() -> None:
    """-100 - (q - 5)^2: 1 % of 100 is 1 again."""
    found = best_size(lambda q: -100 - (q - 5) ** 2, [1.0, 4.0, 6.5, 9.0])
    assert (found.low, found.high) == (pytest.approx(4, abs=0.02), pytest.approx(6, abs=0.02))


def test_a_worth_that_only_rises_is_best_at_the_end() -> None:
    """The root of q is within 1 % of its end 3 from (0.99 x 3)^2 on."""
    found = best_size(sqrt, [1.0, 4.0, 9.0])
    assert (found.best, found.high, found.at_end, found.high_at_end) == (9.0, 9.0, True, True)
    assert found.low == pytest.approx((0.99 * 3) ** 2, abs=0.02)


def test_a_flat_worth() -> None:
    found = best_size(lambda _: 7.0, [1.0, 2.0])
    assert (found.low, found.high) == (1.0, 2.0)
    assert found.low_at_end
    assert found.high_at_end


def test_a_limit_ends_the_search() -> None:
    """100 - (q - 5)^2 where nothing above 4 may be chosen: best at 4, down to 98.01."""
    found = best_size(lambda q: None if q > 4 else 100 - (q - 5) ** 2, [1.0, 3.0, 6.5, 9.0])
    assert found.best == pytest.approx(4, abs=0.01)
    assert found.best <= 4
    assert found.high == found.best
    assert found.low == pytest.approx(5 - sqrt(100 - 0.99 * 99), abs=0.02)
    assert (found.at_limit, found.high_at_limit, found.low_at_limit) == (True, True, False)
    assert not found.at_end
    assert not found.high_at_end


def test_a_limit_below_and_a_peak_within() -> None:
    found = best_size(lambda q: None if q < 4.5 else 100 - (q - 5) ** 2, [1.0, 3.0, 6.5, 9.0])
    assert found.best == pytest.approx(5, abs=0.02)
    assert found.low == pytest.approx(4.5, abs=0.01)
    assert found.low >= 4.5
    assert (found.low_at_limit, found.at_limit, found.high_at_limit) == (True, False, False)


def test_where_nothing_may_be_chosen() -> None:
    with pytest.raises(ValueError, match="no size has a worth"):
        best_size(lambda _: None, [1.0, 2.0])


def test_a_single_size_has_no_neighbour() -> None:
    with pytest.raises(ValueError, match="between two sizes"):
        best_size(sqrt, [1.0])
