"""Published rules for the flow that stays in a river, as examples with their date.

Laws change. A preset shows how a rule that was published at its date works out on a record; it is
never the law of the day, and never a permit.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from hydroyield.river.duration import characteristic_discharge

Floats = NDArray[np.float64]

DAYS = 365  # of the year in which these rules count days
WINTER = (10, 11, 12, 1, 2, 3)

# Swiss Waters Protection Act, Art. 31(1): Q347 and the residual flow there [l/s]
_SWISS = ((60, 50), (160, 130), (500, 280), (2500, 900), (10_000, 2500), (60_000, 10_000))
_SWISS_STEP = (8 / 10, 4.4 / 10, 31 / 100, 21.3 / 100, 150 / 1000)  # l/s more for each l/s more

# Tennant 1976: share of the mean annual flow, October to March and April to September
TENNANT = {
    "outstanding": (0.40, 0.60),
    "excellent": (0.30, 0.50),
    "good": (0.20, 0.40),
    "fair": (0.10, 0.30),
    "poor": (0.10, 0.10),
}


def swiss_residual_flow(q347: float) -> float:
    """Residual flow of the Swiss table [m3/s] from Q347 [m3/s].

    Between two printed values the printed increments count, and each printed value itself wins.

    >>> round(swiss_residual_flow(0.3), 4)
    0.1916
    """
    litres = 1000 * q347
    for (low, flow), (high, _), more in zip(_SWISS[:-1], _SWISS[1:], _SWISS_STEP, strict=True):
        if litres <= low:
            return flow / 1000
        if litres < high:
            return (flow + more * (litres - low)) / 1000
    return _SWISS[-1][1] / 1000


def czech_residual_flow(q330: float, q355: float, q364: float) -> float:
    """Minimum residual flow of the Czech guideline of 1998, all [m3/s].

    >>> round(czech_residual_flow(0.30, 0.20, 0.1), 4)
    0.25
    """
    if q355 < 0.05:
        return q330
    if q355 <= 0.5:
        return (q330 + q355) / 2
    return q355 if q355 <= 5.0 else (q355 + q364) / 2


def _swiss(valid: Floats) -> list[float]:
    return [swiss_residual_flow(float(characteristic_discharge(valid, 347, DAYS)))] * 12


def _czech(valid: Floats) -> list[float]:
    found = characteristic_discharge(valid, [330, 355, 364], DAYS)
    return [czech_residual_flow(*map(float, found))] * 12


def _french(valid: Floats) -> list[float]:
    mean = float(valid.mean())
    return [mean / (20 if mean > 80 else 10)] * 12


def _tennant(quality: str) -> Callable[[Floats], list[float]]:
    winter, summer = TENNANT[quality]

    def rule(valid: Floats) -> list[float]:
        mean = float(valid.mean())
        return [mean * (winter if month in WINTER else summer) for month in range(1, 13)]

    return rule


@dataclass(frozen=True)
class Preset:
    """A published rule.

    source : law, guideline or paper, with its date
    flows : (valid discharge of the record [m3/s]) -> twelve values, January first [m3/s]
    """

    source: str
    flows: Callable[[Floats], list[float]]


PRESETS: dict[str, Preset] = {
    "swiss_q347": Preset(
        "Swiss Waters Protection Act (SR 814.20) of 1991, Art. 31(1), by Q347", _swiss
    ),
    "czech_1998": Preset("Czech guideline of 1998, by Q330d, Q355d and Q364d", _czech),
    "french_tenth": Preset(
        "French Environment Code, L.214-18 as of 2006: 1/10 of the mean flow, 1/20 above 80 m3/s",
        _french,
    ),
    **{
        f"tennant_{quality}": Preset(
            "Tennant 1976, Fisheries 1(4): 6-10, shares of the mean annual flow", _tennant(quality)
        )
        for quality in TENNANT
    },
}
