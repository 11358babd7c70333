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


def test_a_single_size_has_no_neighbour() -> None:
    with pytest.raises(ValueError, match="between two sizes"):
        best_size(sqrt, [1.0])
