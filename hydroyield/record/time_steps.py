"""Doubts about the steps of a record that is finer than daily."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from hydroyield.checks import Check, warn_unless
from hydroyield.record.daily import BRIDGED_STEPS

Ints = NDArray[np.int64]

HOUR = 3600
DAY = 86400
MOST_IRREGULAR = 0.01  # of the steps
LATEST_CHANGE = 4 * HOUR  # of the day; clocks change before
SUNDAY = 3  # days since 1970-01-01, a Thursday


def step_checks(times: Ints, step_seconds: float) -> tuple[Check, ...]:
    """Whether the steps are regular, and whether the clock keeps summer time.

    times : (m,) written clock time of the rows with a value, rising [s]
    step_seconds : usual step [s]
    """
    return _irregular(times, step_seconds), _clock_changes(times, step_seconds)


def _irregular(times: Ints, step: float) -> Check:
    steps = np.diff(times)
    bridged = steps[steps <= BRIDGED_STEPS * step]
    share = float((np.abs(bridged - step) > 0.01 * step).mean()) if bridged.size else 0.0
    words = f"{share:.1%} of the steps differ from the usual {step / 60:g} min"
    return warn_unless(
        "record_irregular_steps",
        share <= MOST_IRREGULAR,
        share,
        MOST_IRREGULAR,
        f"{words}.",
        f"{words}; daily means weigh each value by its time. Look whether values are recorded on "
        "change only, as a gap then looks like a steady river.",
    )


def _clock_changes(times: Ints, step: float) -> Check:
    """An hour that is missing on Sunday nights of several years is the start of summer time."""
    holes = np.flatnonzero(np.diff(times) - step == HOUR)
    due = times[holes] + round(step)  # the first time that is not there
    night = (due // DAY % 7 == SUNDAY) & (due % DAY <= LATEST_CHANGE)
    days = (due[night] // DAY).astype("datetime64[D]")
    years = np.unique(days.astype("datetime64[Y]"))
    shown = ", ".join(map(str, days[:3]))
    return warn_unless(
        "record_clock_changes",
        step > HOUR or years.size < 2,
        years.size,
        1,
        "No sign that the clock of the record keeps summer time.",
        f"An hour is missing on a Sunday night in {years.size} years ({shown}): the clock keeps "
        "summer time, and daily means in summer belong to a day that begins an hour early. The "
        "effect on energy is small; export the record in standard time.",
    )
