"""Days on which a plant that stands waits for more water than it needs to run."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

Bools = NDArray[np.bool_]


def waiting_days(runs: Bools, enough: Bools) -> Bools:
    """Days, in order, on which a plant could run on but does not start.

    runs : (n,) it can run on that day if it ran the day before; false where nothing is known
    enough : (n,) there is water enough to start

    Returns (n,). A day on which it cannot run leaves it standing, and so it is before the first.
    """
    day = np.arange(runs.size)
    started = np.maximum.accumulate(np.where(runs & enough, day, -1))
    stopped = np.maximum.accumulate(np.where(runs, -1, day))
    return np.asarray(runs & (started <= stopped))
