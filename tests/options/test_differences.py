"""Which differences are real: by hand, against scipy, Tukey's table, and by simulated records."""

from __future__ import annotations

import warnings
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy import stats

from hydroyield.options.differences import (
    Candidate,
    Differences,
    MachineError,
    differences,
    in_words,
)

KNOWN = MachineError(0.0, 0.0, 0.0, 0.0)  # machines exactly as their curves say


def candidate(
    name: int, yearly: np.ndarray, kind: str = "kaplan", size: float = 5.0, part_load: float = 0.0
) -> Candidate:
    """An option with units of one size."""
    energy = float(yearly.mean())
    return Candidate(name, energy, yearly, kind, ((size, energy, part_load),))


def weather(seed: int, years: int) -> np.ndarray:
    """Yearly values that alternate about their mean, so that no year seems to follow the last."""
    draw = np.random.default_rng(seed).normal(size=years)
    return np.where(np.arange(years) % 2, 1, -1) * np.abs(draw)


def test_paired_t_test_of_scipy() -> None:
    first, second = 1000 + 20 * weather(1, 12), 985 - 12 * weather(2, 12)
    found = differences([candidate(1, first), candidate(2, second)], KNOWN).against[0]
    paired = stats.ttest_rel(first, second)
    interval = paired.confidence_interval(0.95)
    assert found.mean == pytest.approx((first - second).mean())
    assert found.year_error == pytest.approx(found.mean / paired.statistic)
    assert found.chance == pytest.approx(paired.pvalue)
    assert (found.low, found.high) == pytest.approx((interval.low, interval.high))


def test_years_cancel_where_options_differ_by_as_much_every_year() -> None:
    shared = 1000 + 200 * weather(3, 8)
    found = differences([candidate(1, shared), candidate(2, shared - 1)], KNOWN).against[0]
    assert found.standard_error == pytest.approx(0, abs=1e-9)
    assert found.real


@pytest.mark.parametrize(
    ("error", "expected"),
    # 1000 and 900 MWh, all of part load 200 and 150
    [
        (MachineError(0.02, 0.0, 0.0, 0.0), 0.02 * 100),
        (MachineError(0.0, 0.02, 0.0, 0.0), 0.02 * 100),
        (MachineError(0.0, 0.0, 0.01, 0.0), 0.01 * np.hypot(1000, 900)),
        (MachineError(0.0, 0.0, 0.0, 0.03), 0.03 * np.hypot(200, 150)),
    ],
)
def test_machine_errors_of_one_type_in_two_sizes(error: MachineError, expected: float) -> None:
    """What options share moves only their difference; sizes have errors of their own."""
    one = candidate(1, np.full(5, 1000.0), size=5.0, part_load=200)
    other = candidate(2, np.full(5, 900.0), size=4.0, part_load=150)
    found = differences([one, other], error).against[0]
    assert found.machine_error == pytest.approx(expected)


def test_machine_errors_of_one_size_and_of_two_types() -> None:
    one = candidate(1, np.full(5, 1000.0))
    like = candidate(2, np.full(5, 900.0))
    unlike = candidate(3, np.full(5, 900.0), kind="francis")
    sized = MachineError(0.0, 0.0, 0.01, 0.0)
    typed = MachineError(0.0, 0.02, 0.0, 0.0)
    assert differences([one, like], sized).against[0].machine_error == pytest.approx(1.0)
    found = differences([one, unlike], typed).against[0].machine_error
    assert found == pytest.approx(0.02 * np.hypot(1000, 900))


def test_one_comparison_needs_what_student_says() -> None:
    """With a single other option a chance of 5 % by itself is one of 5 % of all."""
    yearly = [1000 + 20 * weather(seed, 12) for seed in (1, 2)]
    found = differences([candidate(n, y) for n, y in enumerate(yearly, 1)], KNOWN)
    assert found.critical_chance == pytest.approx(0.05, rel=0.25)


def test_tukey_table() -> None:
    """Five options with independent errors of one size, the best of them found from the data.

    The upper 5 % point of the studentised range of five with no end of degrees of freedom is 3.86
    (Tukey; Harter 1960, Ann. Math. Stat. 31: 1122-1147, from memory); scipy gives the same.
    """
    sized = MachineError(0.0, 0.0, 0.01, 0.0)
    yearly = np.full(3, 1000.0)
    tried = [candidate(n, yearly - 1e-3 * n, size=float(n)) for n in range(1, 6)]
    found = differences(tried, sized)
    steps = stats.norm.isf(found.critical_chance / 2)  # of the error of a difference
    assert stats.studentized_range.ppf(0.95, 5, np.inf) == pytest.approx(3.86, abs=0.005)
    assert steps * np.sqrt(2) == pytest.approx(3.86, abs=0.08)


def test_options_that_are_equal_in_all_are_one() -> None:
    yearly = 1000 + 20 * weather(1, 9)
    with warnings.catch_warnings():
        warnings.simplefilter("error")
        found = differences([candidate(1, yearly), candidate(2, yearly.copy())], MachineError())
    assert found.indistinguishable == (2,)
    assert found.against[0].chance == 1


def test_two_machines_of_a_type_have_errors_of_their_own() -> None:
    """One per cent of each size offset: sqrt(2) per cent of the energy between them."""
    yearly = np.full(5, 1000.0)
    sized = MachineError(0.0, 0.02, 0.01, 0.0)
    other = replace(candidate(2, yearly), machine=1)
    found = differences([candidate(1, yearly), other], sized).against[0]
    assert found.machine_error == pytest.approx(10 * np.sqrt(2))


def test_one_year_tells_nothing() -> None:
    found = differences([candidate(1, np.array([1000.0])), candidate(2, np.array([10.0]))], KNOWN)
    assert found.indistinguishable == (2,)
    assert found.against[0].year_error is None
    assert np.isinf(found.against[0].high)
    assert "One year of record cannot tell" in in_words(found)


def test_without_years_the_machines_are_all_there_is() -> None:
    none = np.empty(0)
    tried = [
        Candidate(1, 1000.0, none, "kaplan", ((5.0, 1000.0, 0.0),)),
        Candidate(2, 985.0, none, "kaplan", ((4.0, 985.0, 0.0),)),
        Candidate(3, 500.0, none, "kaplan", ((3.0, 500.0, 0.0),)),
    ]
    found = differences(tried, MachineError())
    assert (found.years, found.indistinguishable) == (0, (2,))
    assert "the record's years are not known" in in_words(found)


def test_a_difference_needs_two() -> None:
    with pytest.raises(ValueError, match="needs two options"):
        differences([candidate(1, np.ones(3))], KNOWN)


# --- what must hold -------------------------------------------------------------------------------

YEARS = st.integers(2, 10)


def some(seed: int, years: int, count: int = 4) -> list[Candidate]:
    draw = np.random.default_rng(seed)
    common = 1000 + 200 * draw.normal(size=years)
    return [
        candidate(n, common + 30 * draw.normal(size=years), ("kaplan", "francis")[n % 2], float(n))
        for n in range(1, count + 1)
    ]


@settings(max_examples=15, deadline=None)
@given(st.integers(0, 1000), YEARS)
def test_order_and_scale_do_not_matter(seed: int, years: int) -> None:
    tried = some(seed, years)
    found = differences(tried, MachineError())
    assert differences(tried[::-1], MachineError()) == found
    doubled = [
        Candidate(
            each.name, 2 * each.mean_energy, 2 * each.yearly_energy, each.type,
            tuple((q, 2 * made, 2 * part) for q, made, part in each.sizes),
        )
        for each in tried
    ]  # fmt: skip
    twice = differences(doubled, MachineError())
    assert twice.critical_chance == pytest.approx(found.critical_chance)
    assert [d.standard_error for d in twice.against] == pytest.approx(
        [2 * d.standard_error for d in found.against]
    )


@settings(max_examples=15, deadline=None)
@given(st.integers(0, 1000), YEARS)
def test_many_comparisons_ask_for_more_than_one(seed: int, years: int) -> None:
    tried = some(seed, years)
    for part in (tried[:2], tried):
        assert differences(part, MachineError()).critical_chance < 1.3 * 0.05


def test_more_confidence_asks_for_more() -> None:
    tried = some(1, 8)
    levels = [
        differences(tried, MachineError(), confidence=c).critical_chance for c in (0.8, 0.95, 0.99)
    ]
    assert levels == sorted(levels, reverse=True)
    assert levels[0] > levels[-1]


def persistent(draw: np.random.Generator, years: int, r: float) -> np.ndarray:
    """Values of a first-order autoregressive series, of unit deviation."""
    found = [draw.normal()]
    for _ in range(years - 1):
        found.append(r * found[-1] + np.sqrt(1 - r**2) * draw.normal())
    return np.array(found)


@pytest.mark.slow
@pytest.mark.parametrize(
    ("count", "years", "r"),
    [(2, 27, 0.0), (6, 15, 0.0), (10, 27, 0.0), (10, 5, 0.0), (10, 3, 0.0), (10, 27, 0.3)],
)
def test_equal_options_are_seldom_told_apart(
    monkeypatch: pytest.MonkeyPatch, count: int, years: int, r: float
) -> None:
    """Options that are equally good: about 5 % of records give any false alarm.

    Of 400 simulated records; 3 standard deviations of a share of 5 % are 3.3 %.
    """
    monkeypatch.setattr("hydroyield.options.simultaneous.DRAWS", 1000)
    alarms = 0
    for seed in range(400):
        draw = np.random.default_rng(seed)
        common = 1000 + 200 * persistent(draw, years, r)
        tried = [candidate(n, common + 20 * persistent(draw, years, r)) for n in range(count)]
        alarms += len(differences(tried, KNOWN, seed=seed).indistinguishable) < count - 1
    assert alarms / 400 < 0.05 + 0.033


# --- in words -------------------------------------------------------------------------------------


def told(same: int, apart: int, years: int = 12) -> Differences:
    """A result with so many options that are like the best, and so many that are not."""
    base = differences(some(1, 3, 2), MachineError())
    against = tuple(
        replace(base.against[0], second=number, real=number > 1 + same)
        for number in range(2, 2 + same + apart)
    )
    return replace(base, best=1, years=years, against=against)


def test_words() -> None:
    evidence = "with 12 years of record and the stated uncertainty of the machines."
    assert in_words(told(0, 3)) == (
        f"Option 1 gives the most energy. All others give less, {evidence}"
    )
    assert in_words(told(1, 1)) == (
        "Option 1 gives the most energy. Option 2 cannot be told apart from it "
        f"{evidence} All others give less."
    )
    assert "Options 2 and 3 cannot be told apart" in in_words(told(2, 0))
    assert "Options 2, 3, 4, 5, 6, 7 and 2 more cannot" in in_words(told(8, 0))
    assert not in_words(told(2, 0)).endswith("All others give less.")
