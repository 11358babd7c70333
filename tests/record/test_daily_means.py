"""Daily means of records finer than daily, against a plain loop and cases known by hand."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from hydroyield.record import RecordOptions, read_record
from hydroyield.record.daily import trapezoid_means

DAY = 86400


def naive_means(times: list[int], values: list[float], step: float) -> dict[int, float]:
    """{day: mean} of the days covered to 90 %, pair by pair and day by day."""
    means = {}
    for day in range(times[0] // DAY, times[-1] // DAY + 1):
        covered = volume = 0.0
        for t0, t1, q0, q1 in zip(times, times[1:], values, values[1:], strict=False):
            start, stop = max(t0, day * DAY), min(t1, (day + 1) * DAY)
            if t1 - t0 > 3 * step or stop <= start:
                continue
            at_start = q0 + (q1 - q0) * (start - t0) / (t1 - t0)
            at_stop = q0 + (q1 - q0) * (stop - t0) / (t1 - t0)
            covered += stop - start
            volume += (at_start + at_stop) / 2 * (stop - start)
        if covered >= 0.9 * DAY:
            means[day] = volume / covered
    return means


@st.composite
def irregular_points(draw: st.DrawFn) -> tuple[list[int], list[float]]:
    steps = draw(
        st.lists(
            st.sampled_from([600, 3600, 5000, 7200, 10800, 14400, 43200, 86400, 200000]),
            min_size=1,
            max_size=120,
        )
    )
    start = draw(st.integers(-3 * DAY, 3 * DAY))
    times = [int(t) for t in start + np.cumsum([0, *steps])]
    flow = st.floats(0, 1e4, allow_subnormal=False)
    values = draw(st.lists(flow, min_size=len(times), max_size=len(times)))
    return times, values


@settings(deadline=None, max_examples=100)
@given(irregular_points())
def test_against_the_plain_loop(points: tuple[list[int], list[float]]) -> None:
    times, values = points
    step = float(np.median(np.diff(times)))
    first, means, _ = trapezoid_means(np.array(times), np.array(values), step)
    expected = naive_means(times, values, step)
    found = {first + k: mean for k, mean in enumerate(means) if not np.isnan(mean)}
    assert found.keys() == expected.keys()
    for day, mean in expected.items():
        assert found[day] == pytest.approx(mean, rel=1e-9, abs=1e-9)


def read_text(tmp_path: Path, rows: str) -> tuple[list[str], list[float], int]:
    path = tmp_path / "flow.csv"
    path.write_text(f"time,q (m3/s)\n{rows}")
    record = read_record(path, RecordOptions())
    return (
        [str(day) for day in record.dates],
        record.discharge.tolist(),
        record.receipt.partial_days,
    )


def hourly(start: str, values: list[float], skip: range = range(0)) -> str:
    stamps = np.datetime64(start) + np.arange(len(values)) * np.timedelta64(1, "h")
    kept = [k for k in range(len(values)) if k not in skip]
    return "".join(f"{stamps[k]},{values[k]!r}\n" for k in kept)


def test_straight_rise_has_the_noon_value_as_its_mean(tmp_path: Path) -> None:
    dates, means, _ = read_text(tmp_path, hourly("2020-01-01T00:00", list(map(float, range(49)))))
    assert dates == ["2020-01-01", "2020-01-02"]
    assert means == pytest.approx([12, 36], rel=1e-12)


def test_midnight_is_interpolated(tmp_path: Path) -> None:
    """Every six hours at 3, 9, 15 and 21 o'clock; the rise of one a day is met exactly."""
    stamps = np.datetime64("2020-01-01T21:00") + np.arange(10) * np.timedelta64(6, "h")
    rows = "".join(f"{t},{1 + k / 4}\n" for k, t in enumerate(stamps))
    dates, means, partial = read_text(tmp_path, rows)
    assert dates == ["2020-01-02", "2020-01-03"]
    assert means == pytest.approx([1.625, 2.625], rel=1e-12)  # value at noon, 15 h after the start
    assert partial == 2


@pytest.mark.parametrize(("missing", "valid"), [(2, True), (3, False)])
def test_gap_of_three_steps_is_bridged_and_four_are_not(
    tmp_path: Path, missing: int, valid: bool
) -> None:
    values = [1.0] * 73
    _, means, partial = read_text(
        tmp_path, hourly("2020-01-01T00:00", values, range(30, 30 + missing))
    )
    assert (means[1] == 1.0) is valid  # four hours are 17 % of the day
    assert partial == (0 if valid else 1)
    assert len(means) == 3


def test_rows_without_a_value_are_gaps_too(tmp_path: Path) -> None:
    rows = hourly("2020-01-01T00:00", [1.0] * 25).replace("T10:00,1.0", "T10:00,")
    assert read_text(tmp_path, rows)[1] == [1.0]


@pytest.mark.parametrize(("hours", "count"), [(22, 1), (21, 0)])
def test_ninety_percent_of_the_day(tmp_path: Path, hours: int, count: int) -> None:
    """22 of 24 hours are 91.7 %, 21 are 87.5 %; a whole day follows after a long gap."""
    rows = hourly("2020-01-01T00:00", [2.0] * (hours + 1)) + hourly("2020-02-01T00:00", [3.0] * 25)
    dates, means, _ = read_text(tmp_path, rows)
    assert (dates[0] == "2020-01-01") == bool(count)
    assert means[-1] == 3.0


def test_hour_twenty_four_is_the_next_midnight(tmp_path: Path) -> None:
    rows = hourly("2020-01-01T00:00", [1.0] * 24) + "2020-01-01T24:00,1.0\n"
    assert read_text(tmp_path, rows)[:2] == (["2020-01-01"], [1.0])


def test_twelve_hour_clock(tmp_path: Path) -> None:
    """12 AM is midnight, 12 PM noon: 0, 6, 12, 18 and 24 h give the mean of a straight rise."""
    clocks = ["12:00 AM", "6:00 AM", "12:00 PM", "6:00 PM"]
    rows = "".join(f"1/30/2020 {c},{k}\n" for k, c in enumerate(clocks)) + "1/31/2020 12:00 AM,4\n"
    assert read_text(tmp_path, rows)[1] == pytest.approx([2.0])


def test_clock_in_its_own_column(tmp_path: Path) -> None:
    path = tmp_path / "flow.csv"
    stamps = np.datetime64("2020-01-01T00:00") + np.arange(25) * np.timedelta64(1, "h")
    rows = "".join(f"{str(t).replace('T', ';')};{k}\n" for k, t in enumerate(stamps))
    path.write_text(f"date;time;q (m3/s)\n{rows}")
    assert read_record(path).discharge == pytest.approx([12.0])


def test_midnight_without_a_clock_counts_as_midnight(tmp_path: Path) -> None:
    rows = hourly("2020-01-01T00:00", [5.0] * 25).replace("T00:00", "")
    assert read_text(tmp_path, rows)[1] == [5.0]


def test_days_covered_in_part_are_counted(tmp_path: Path) -> None:
    """Noon to noon of three days: the first and the last are half there."""
    path = tmp_path / "flow.csv"
    path.write_text("time,q (m3/s)\n" + hourly("2020-01-01T12:00", [1.0] * 49))
    checks = {check.name: check for check in read_record(path).receipt.checks}
    found = checks["record_partial_days"]
    assert (found.outcome, "2 days are covered" in found.message) == ("pass", True)
    rows = "".join(hourly(f"2020-01-{d:02d}T06:00", [1.0] * 16) for d in range(1, 20))
    rows += hourly("2020-02-01T00:00", [1.0] * 72)
    path.write_text("time,q (m3/s)\n" + rows)
    checks = {check.name: check for check in read_record(path).receipt.checks}
    assert checks["record_partial_days"].outcome == "warn"
