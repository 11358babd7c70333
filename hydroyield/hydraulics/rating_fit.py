"""A rating fitted to surveyed pairs of discharge and level."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from hydroyield.hydraulics.levels import StageDischarge

Floats = NDArray[np.float64]

FEWEST = 3  # gaugings for three coefficients; a fit of three has no error to show
EXPONENTS = (1.2, 4.0)  # within which natural sections lie (common practice)


@dataclass(frozen=True)
class FittedRating:
    """A rating Q = C (h - a)^b through gaugings, and how well it holds them.

    rating : the fit
    standard_error : of ln Q, so about a share of the discharge; None with three gaugings
    discharges : smallest and largest gauged [m3/s]
    count : of gaugings
    """

    rating: StageDischarge
    standard_error: float | None
    discharges: tuple[float, float]
    count: int

    def __call__(self, discharge: Floats) -> Floats:
        """Level [m] at `discharge` (n,) [m3/s]."""
        return self.rating(discharge)


def fit_rating(gaugings: Sequence[tuple[float, float]]) -> FittedRating:
    """Fit Q = C (h - a)^b by least squares of ln Q (ISO 18320 has the form).

    gaugings : pairs of discharge [m3/s], above 0, and level [m]

    For each zero level a the rest is a straight line in logarithms; a is searched for, with b kept
    to 1.2 to 4.0. Raises ValueError for too few gaugings, or levels that do not rise.
    """
    discharge, level = np.asarray(sorted(gaugings), dtype=np.float64).T
    if discharge.size < FEWEST or np.unique(level).size < FEWEST:
        raise ValueError(
            f"a rating needs {FEWEST} gaugings at different levels; write more, or a table"
        )
    if np.corrcoef(np.log(discharge), level)[0, 1] <= 0:
        raise ValueError("the levels do not rise with the discharge; correct the gaugings")
    spread = float(np.ptp(level))
    depths = spread * np.geomspace(1e-4, 100, 4000)  # of zero level below the lowest gauging
    errors = np.array([_line(discharge, level, level.min() - depth)[0] for depth in depths])
    best = int(errors.argmin())
    fine = np.geomspace(depths[max(best - 1, 0)], depths[min(best + 1, depths.size - 1)], 400)
    errors = np.array([_line(discharge, level, level.min() - depth)[0] for depth in fine])
    zero = float(level.min() - fine[int(errors.argmin())])
    squares, exponent, log_coefficient = _line(discharge, level, zero)
    free = discharge.size - 3
    return FittedRating(
        StageDischarge(zero, float(np.exp(log_coefficient)), exponent),
        float(np.sqrt(squares / free)) if free else None,
        (float(discharge.min()), float(discharge.max())),
        discharge.size,
    )


def _line(discharge: Floats, level: Floats, zero: float) -> tuple[float, float, float]:
    """Sum of squares, exponent and ln C of the line of ln Q on ln (h - a) for a zero level."""
    x, y = np.log(level - zero), np.log(discharge)
    apart = x - x.mean()
    slope = float((apart * (y - y.mean())).sum() / (apart**2).sum())
    slope = min(max(slope, EXPONENTS[0]), EXPONENTS[1])
    intercept = float(y.mean() - slope * x.mean())
    return float(((y - intercept - slope * x) ** 2).sum()), slope, intercept
