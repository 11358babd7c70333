"""The mass curve of a river and the storage that would even its flow out."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]

DAY_SECONDS = 86400


@dataclass(frozen=True)
class MassCurve:
    """Cumulative volume less that of the mean flow.

    dates : (n,) every day, datetime64[D]
    departure : (n,) at the end of each day, 0 before the first [m3]
    mean : discharge of the valid days [m3/s]
    storage : range between the extreme tangents that are parallel to the mean flow [m3]
    lowest, highest : dates at whose end the curve stands lowest and highest, datetime64[D]
    filled_days : days without a value, taken as the mean
    """

    dates: NDArray[np.datetime64]
    departure: Floats
    mean: float
    storage: float
    lowest: np.datetime64
    highest: np.datetime64
    filled_days: int


def mass_curve(dates: NDArray[np.datetime64], discharge: Floats) -> MassCurve:
    """Mass curve of a daily series, less its mean flow.

    dates : (n,) every day, datetime64[D]
    discharge : (n,) nan where missing [m3/s]

    The range of the curve is the smallest storage that delivers the mean at all times (Rippl 1883,
    Min. Proc. Inst. Civ. Eng. 71: 270-278; Hurst 1951, Trans. Am. Soc. Civ. Eng. 116: 770-799).
    Raises ValueError where no day has a value.
    """
    missing = np.isnan(discharge)
    if missing.all():
        raise ValueError("a mass curve needs a day with a value")
    mean = float(discharge[~missing].mean())
    departure = np.cumsum(np.where(missing, 0.0, discharge - mean)) * DAY_SECONDS
    most, least = max(0.0, float(departure.max())), min(0.0, float(departure.min()))
    return MassCurve(
        dates=dates,
        departure=departure,
        mean=mean,
        storage=most - least,
        lowest=dates[int(departure.argmin())],
        highest=dates[int(departure.argmax())],
        filled_days=int(missing.sum()),
    )
