"""Which plants the lists of a site file make."""

from __future__ import annotations

import pytest

from hydroyield.options.combination import Combination, combinations, equal_split, splits_of


def test_equal_units_and_splits_count_once() -> None:
    splits = splits_of([1, 2], [[1.0], [0.5, 0.5], [0.33, 0.67], [0.67, 0.33]])
    assert [len(split) for split in splits] == [1, 2, 2]
    assert splits[2] == pytest.approx((0.33, 0.67))


def test_rounded_shares_are_made_to_add_up() -> None:
    (split,) = splits_of([], [[0.33, 0.33, 0.33]])
    assert sum(split) == pytest.approx(1, abs=1e-15)
    assert split == pytest.approx(equal_split(3))


def test_every_combination_once() -> None:
    found = combinations(2, [(1.0,), (0.5, 0.5)], [6.0, 4.0, 6.0], [0.9, 1.1])
    assert len(found) == len(set(found)) == 2 * 2 * 2 * 2
    assert [mix.design_discharge for mix in found[:2]] == [4.0, 6.0]
    assert combinations(1, [(1.0,)], [4.0])[0].pipe_diameter is None


def test_groups_of_equal_units() -> None:
    mix = Combination(0, (0.25, 0.25, 0.5), 8.0)
    assert mix.groups == [(2, 2.0), (1, 4.0)]
    assert (mix.unit_count, mix.largest_unit, mix.split_text) == (3, 4.0, "0.25+0.25+0.5")
