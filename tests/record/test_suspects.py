"""Each fault planted in an invented record is found on its days; the record without it passes."""

from __future__ import annotations

import datetime

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from hypothesis.extra.numpy import arrays

from hydroyield.record.suspects import Suspect, suspects_of_days
from hydroyield.record.unit_steps import FACTORS, unit_step

TODAY = datetime.date(2021, 6, 1)
DATES = np.arange(np.datetime64("1990-10-01"), np.datetime64("2020-10-01"))


def river(seed: int = 5) -> np.ndarray:
    """Thirty years of an invented river with floods that rise in a day and fall in many."""
    draw = np.random.default_rng(seed)
    days = DATES.size
    wet = 0.6 * np.cos(2 * np.pi * np.arange(days) / 365.25)
    storms = np.where(draw.random(days) < 0.08, draw.gamma(0.8, 6.0, days), 0.0)
    flow = np.zeros(days)
    for day in range(1, days):
        flow[day] = 0.82 * flow[day - 1] + storms[day]
    return np.round((2.0 + flow) * np.exp(wet) * np.exp(0.05 * draw.normal(size=days)), 3)


RIVER = river()


def look(discharge: np.ndarray, **known: object) -> dict[str, Suspect]:
    found = suspects_of_days(DATES[: discharge.size], discharge, today=TODAY, **known)  # type: ignore[arg-type]
    return {suspect.check.name: suspect for suspect in found}


def left_out(suspect: Suspect, discharge: np.ndarray) -> list[int]:
    """Days that the alternative leaves out."""
    assert suspect.alternative is not None
    gone = np.isnan(suspect.alternative) & ~np.isnan(discharge)
    kept = ~np.isnan(suspect.alternative)
    np.testing.assert_array_equal(suspect.alternative[kept], discharge[kept])
    return np.flatnonzero(gone).tolist()


def test_a_clean_record_passes_every_look() -> None:
    found = look(RIVER, doubtful=np.zeros(RIVER.size, bool), catchment_area_m2=400e6)
    assert {name for name, suspect in found.items() if suspect.check.outcome != "pass"} == set()
    assert len(found) == 10
    assert all(suspect.alternative is None for suspect in found.values())


def test_a_stuck_sensor() -> None:
    stuck = RIVER.copy()
    stuck[4000:4040] = stuck[4000]
    suspect = look(stuck)["record_stuck_values"]
    assert (suspect.check.outcome, suspect.check.value) == ("warn", 40)
    assert str(DATES[4000]) in suspect.check.message
    assert left_out(suspect, stuck) == list(range(4001, 4040))
    assert suspect.treatment == "the 39 days left out"


def test_long_runs_are_no_fault_where_they_are_usual_or_the_river_is_dry() -> None:
    steps = np.repeat(RIVER[:1500], 12)[: RIVER.size // 2]  # a record that changes every 12 days
    assert look(steps)["record_stuck_values"].check.outcome == "pass"
    dry = np.where(np.arange(RIVER.size) % 365 < 90, 0.0, RIVER)
    assert look(dry)["record_stuck_values"].check.outcome == "pass"


def test_floods_cut_off_at_the_end_of_the_rating() -> None:
    top = float(np.quantile(RIVER, 0.998))
    cut = np.minimum(RIVER, top)
    suspect = look(cut)["record_repeated_maximum"]
    assert suspect.check.outcome == "warn"
    assert left_out(suspect, cut) == np.flatnonzero(cut >= 0.999 * top).tolist()
    twice = np.minimum(RIVER, np.sort(RIVER)[-2])
    assert look(twice)["record_repeated_maximum"].check.outcome == "pass"


@pytest.mark.parametrize(("units", "factor"), FACTORS.items())
@pytest.mark.parametrize("part", [slice(0, 2000), slice(3000, 5000), slice(9000, None)])
def test_a_change_of_unit(units: str, factor: float, part: slice) -> None:
    changed = RIVER.copy()
    changed[part] *= factor
    suspect = look(changed)["record_unit_step"]
    assert suspect.check.outcome == "warn"
    assert suspect.alternative is not None
    other = np.setdiff1d(np.arange(RIVER.size), np.arange(RIVER.size)[part])
    np.testing.assert_array_equal(suspect.alternative[other], RIVER[other])
    # two factors (28.3 and 35.3) are too near for a river to tell them apart
    ratio = suspect.alternative[part] / RIVER[part]
    assert np.ptp(ratio) < 1e-9
    assert 0.75 < ratio[0] < 1.3
    assert str(DATES[part][0]) in suspect.check.message


def test_factors_are_those_of_the_units() -> None:
    """1 m3/s = 1000 l/s = 35.3147 cfs = 86.4 Ml/d (0.3048 m to the foot, exactly)."""
    assert FACTORS["m3/s to l/s"] == pytest.approx(1000)
    assert FACTORS["m3/s to cfs"] == pytest.approx(1 / 0.3048**3)
    assert FACTORS["cfs to l/s"] == pytest.approx(1000 * 0.3048**3)
    assert FACTORS["Ml/d to m3/s"] == pytest.approx(1 / 86.4)


def test_a_flood_or_a_wet_season_is_no_change_of_unit() -> None:
    season = np.where(np.arange(RIVER.size) % 365 < 120, 6.4, 0.8) * RIVER
    assert unit_step(season) is None
    flood = RIVER.copy()
    flood[5000:5010] *= 200
    assert unit_step(flood) is None


def test_slips_of_the_decimal_point() -> None:
    spiky = RIVER.copy()
    spiky[[1234, 6000]] *= 100
    spiky[3000] /= 1000
    suspect = look(spiky)["record_spikes"]
    assert (suspect.check.outcome, suspect.check.value) == ("warn", 3)
    assert left_out(suspect, spiky) == [1234, 3000, 6000]
    for day in (1234, 3000, 6000):
        assert str(DATES[day]) in suspect.check.message


def test_estimated_days() -> None:
    marked = np.arange(RIVER.size) % 10 == 0
    suspect = look(RIVER, doubtful=marked)["record_doubtful_flags"]
    assert suspect.check.outcome == "warn"
    assert suspect.check.value == pytest.approx(0.1, abs=1e-3)
    assert left_out(suspect, RIVER) == np.flatnonzero(marked).tolist()
    few = look(RIVER, doubtful=np.arange(RIVER.size) % 25 == 0)["record_doubtful_flags"]
    assert few.check.outcome == "pass"
    assert "record_doubtful_flags" not in look(RIVER)


@pytest.mark.parametrize(
    ("yield_", "outcome"), [(0.9, "warn"), (1.1, "pass"), (149.0, "pass"), (151.0, "warn")]
)
def test_specific_yield(yield_: float, outcome: str) -> None:
    """1 l/s per km2 from 100 km2 is 0.1 m3/s."""
    flow = RIVER / RIVER.mean() * 0.1 * yield_
    check = look(flow, catchment_area_m2=100e6)["record_specific_yield"].check
    assert (check.outcome, check.value) == (outcome, pytest.approx(yield_))


def test_a_calendar_without_leap_days() -> None:
    leap = np.array([str(day).endswith("02-29") for day in DATES])
    check = look(np.where(leap, np.nan, RIVER))["record_leap_days"].check
    assert (check.outcome, check.value) == ("warn", 8)  # 1992 to 2020
    one = RIVER.copy()
    one[np.flatnonzero(leap)[0]] = np.nan
    assert look(one)["record_leap_days"].check.outcome == "pass"


def test_gaps_that_gather_in_some_months() -> None:
    month = DATES.astype("datetime64[M]").astype(int) % 12
    july = np.where((month == 6) & (np.arange(RIVER.size) > 3000), np.nan, RIVER)
    check = look(july)["record_gaps_by_month"].check
    assert check.outcome == "warn"
    assert "July" in check.message
    assert "June" not in check.message
    spread = np.where(np.arange(RIVER.size) % 7 == 0, np.nan, RIVER)
    assert look(spread)["record_gaps_by_month"].check.outcome == "pass"


@pytest.mark.parametrize(("day", "outcome"), [("2025-09-28", "pass"), ("2025-10-05", "warn")])
def test_a_record_that_ended_long_ago(day: str, outcome: str) -> None:
    found = suspects_of_days(DATES, RIVER, today=datetime.date.fromisoformat(day))
    (check,) = [s.check for s in found if s.check.name == "record_ended"]
    assert check.outcome == outcome  # the last day is 2020-09-30


def test_last_years_unlike_the_whole() -> None:
    drier = np.where(np.arange(RIVER.size) > RIVER.size // 2, 0.6, 1.0) * RIVER
    suspect = look(drier)["record_last_15_years"]
    assert suspect.check.outcome == "warn"
    # by hand: the mean of the late half over that of the whole
    late = drier[-round(15 * 365.25) :].mean()
    assert suspect.check.value == pytest.approx(late / drier.mean())
    first = DATES.size - round(15 * 365.25)
    assert left_out(suspect, drier) == list(range(first))
    assert "record_last_15_years" not in look(RIVER[: 24 * 365])


@settings(max_examples=60, deadline=None)
@given(
    arrays(
        float,
        st.integers(1, 90),
        elements=st.sampled_from([0.0, 0.001, 0.5, 1.0, 1.0, 250.0, 8000.0, float("nan")]),
    ),
    st.booleans(),
)
def test_no_record_is_too_odd(discharge: np.ndarray, coded: bool) -> None:
    if np.isnan(discharge).all():
        discharge[0] = 1.0
    doubtful = np.arange(discharge.size) % 2 == 0 if coded else None
    for suspect in look(discharge, doubtful=doubtful, catchment_area_m2=1e6).values():
        assert suspect.check.message.endswith(".")
        assert suspect.alternative is None or suspect.alternative.shape == discharge.shape
