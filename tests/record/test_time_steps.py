"""Steps of a record that is finer than daily."""

from __future__ import annotations

import numpy as np
import pandas as pd
import pytest

from hydroyield.record.time_steps import step_checks

HOUR = 3600


def clock(zone: str, start: str = "2015-01-01", stop: str = "2019-01-01") -> np.ndarray:
    """Hours as a wall clock in a zone writes them, each once [s]."""
    hours = pd.date_range(start, stop, freq="h", tz="UTC").tz_convert(zone).tz_localize(None)
    return np.unique(hours.to_numpy().astype("datetime64[s]").astype(np.int64))


def checks(times: np.ndarray, step: float = HOUR) -> dict[str, str]:
    return {check.name: check.outcome for check in step_checks(times, step)}


@pytest.mark.parametrize(
    "zone", ["Europe/Berlin", "America/New_York", "Australia/Sydney", "America/Santiago"]
)
def test_summer_time_is_seen_in_any_part_of_the_world(zone: str) -> None:
    assert checks(clock(zone)) == {
        "record_irregular_steps": "pass", "record_clock_changes": "warn",
    }  # fmt: skip


def test_standard_time_and_chance_gaps_pass() -> None:
    times = clock("UTC")
    assert set(checks(times).values()) == {"pass"}
    draw = np.random.default_rng(2)
    assert checks(times[draw.random(times.size) > 0.0005])["record_clock_changes"] == "pass"


def test_values_recorded_on_change_are_irregular() -> None:
    draw = np.random.default_rng(4)
    steps = np.where(draw.random(5000) < 0.05, draw.integers(60, 3000, 5000), HOUR)
    (irregular, _) = step_checks(np.cumsum(steps), HOUR)
    assert irregular.outcome == "warn"
    assert irregular.value == pytest.approx((np.abs(steps[1:] - HOUR) > 36).mean())


def test_a_long_gap_is_a_gap_and_no_irregular_step() -> None:
    times = np.concatenate([np.arange(100) * HOUR, np.arange(500, 600) * HOUR])
    assert step_checks(times, HOUR)[0].value == 0.0
