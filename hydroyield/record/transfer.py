"""From discharge at the gauge to discharge at the site: one factor, and how well it is known."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from hydroyield.checks import Check, warn_unless
from hydroyield.record.result import Record

TRUSTED_AREA_RATIO = (0.5, 1.5)  # USGS SIR 2008-5126, for gauges on the same stream
EXPONENT_HALF_WIDTH = 0.3  # published exponents run from 0.70 (USGS SIR 2006-5286) to about 1
FEWEST_GAUGINGS = 6  # common practice: with fewer, one bad gauging decides
SIGNIFICANCE = 0.05


@dataclass(frozen=True)
class Transfer:
    """How discharge at the gauge becomes discharge at the site.

    method : "none", "area_ratio", "mean_ratio" or "spot_gaugings"
    factor : discharge at the site over discharge at the gauge
    relative_uncertainty : standard uncertainty of the factor as a share of it; None where nothing
        is known of it
    basis : where that number comes from, in words
    """

    method: str
    factor: float
    relative_uncertainty: float | None
    basis: str


AT_THE_SITE = Transfer("none", 1.0, 0.0, "the record counts as one of the site itself")


def by_area(gauge_area: float, site_area: float, exponent: float) -> Transfer:
    """Factor (site area / gauge area) ^ exponent.

    gauge_area, site_area : catchment areas [m2]
    exponent : [-]

    Its uncertainty is that of an exponent spread evenly over 0.3 on both sides, which covers the
    published ones (0.70 to 0.935 in Texas, USGS SIR 2006-5286) seen from 1.
    """
    ratio = site_area / gauge_area
    spread = EXPONENT_HALF_WIDTH / np.sqrt(3) * abs(np.log(ratio))
    basis = f"an exponent known to {EXPONENT_HALF_WIDTH:g} either side, spread evenly"
    return Transfer("area_ratio", float(ratio**exponent), float(np.expm1(spread)), basis)


def by_means(gauge_mean: float, site_mean: float) -> Transfer:
    """Factor site mean / gauge mean, both [m3/s]; nothing is known of its uncertainty."""
    return Transfer("mean_ratio", site_mean / gauge_mean, None, "nothing is stated")


@dataclass(frozen=True)
class SpotFit:
    """The factor that spot gaugings at the site give, against the record of the same days.

    factor : geometric mean of site over gauge
    standard_error : of the logarithm of the factor, so about a share of the factor; None with a
        single gauging
    used : gaugings used
    without_record : dates on which the record has no value
    zero : dates left out since one of the two discharges is zero
    """

    factor: float
    standard_error: float | None
    used: int
    without_record: tuple[str, ...]
    zero: tuple[str, ...]

    @property
    def transfer(self) -> Transfer:
        basis = f"scatter of {self.used} spot gaugings"
        return Transfer("spot_gaugings", self.factor, self.standard_error, basis)


def fit_spot_gaugings(
    dates: Sequence[np.datetime64], measured: Sequence[float], record: Record
) -> SpotFit:
    """Fit the factor from gauge to site as the geometric mean of the ratios.

    dates : (n,) of the gaugings
    measured : (n,) discharge at the site [m3/s]
    record : daily discharge at the gauge

    Raises ValueError when no gauging falls on a day with discharge at both.
    """
    days = np.asarray(dates, dtype="datetime64[D]")
    at_site = np.asarray(measured, dtype=np.float64)
    at_gauge = _on_days(record, days)
    known = ~np.isnan(at_gauge)
    positive = known & (at_gauge > 0) & (at_site > 0)
    if not positive.any():
        raise ValueError(
            f"none of the {days.size} spot gaugings falls on a day on which the record has a "
            f"discharge; the record runs from {record.dates[0]} to {record.dates[-1]}"
        )
    logs = np.log(at_site[positive] / at_gauge[positive])
    error = float(logs.std(ddof=1) / np.sqrt(logs.size)) if logs.size > 1 else None
    return SpotFit(
        float(np.exp(logs.mean())),
        error,
        logs.size,
        tuple(map(str, days[~known])),
        tuple(map(str, days[known & ~positive])),
    )


def _on_days(record: Record, days: NDArray[np.datetime64]) -> NDArray[np.float64]:
    """(n,) discharge of the record on given days, nan where it has none [m3/s]."""
    place = (days - record.dates[0]).astype(np.int64)
    inside = (place >= 0) & (place < record.dates.size)
    found = np.full(days.size, np.nan)
    found[inside] = record.discharge[place[inside]]
    return found


def area_check(gauge_area: float, site_area: float) -> Check:
    """Whether the area ratio [m2 over m2] is one for which the method is trusted."""
    ratio = site_area / gauge_area
    low, high = TRUSTED_AREA_RATIO
    return warn_unless(
        "area_ratio",
        low <= ratio <= high,
        ratio,
        low if ratio < low else high,
        f"The site drains {ratio:.2f} times the area of the gauge.",
        f"The site drains {ratio:.2f} times the area of the gauge; the method is trusted from "
        f"{low:g} to {high:g} on the same stream (USGS SIR 2008-5126). Gauge the site itself.",
    )


def spot_checks(fit: SpotFit, other: Transfer | None) -> tuple[Check, ...]:
    """Whether there are enough gaugings, and whether they agree with another way to the factor."""
    left_out = [
        f"{len(days)} left out, {why} ({', '.join(days[:3])})"
        for days, why in (
            (fit.without_record, "the record has no value"),
            (fit.zero, "a discharge is zero"),
        )
        if days
    ]
    counted = f"{fit.used} spot gaugings give a factor of {fit.factor:.3g} from gauge to site"
    counted = "; ".join([counted, *left_out])
    enough = warn_unless(
        "spot_gaugings",
        fit.used >= FEWEST_GAUGINGS,
        fit.used,
        FEWEST_GAUGINGS,
        f"{counted}.",
        f"{counted}; fewer than {FEWEST_GAUGINGS} decide little (common practice). Gauge the site "
        "more often, at low and at high discharge.",
    )
    if other is None or other.method == "none" or fit.standard_error is None:
        return (enough,)
    return enough, _agreement(fit, other)


def _agreement(fit: SpotFit, other: Transfer) -> Check:
    """Student's t of the difference of logarithms, both sides."""
    from scipy.special import stdtrit

    assert fit.standard_error is not None
    apart = abs(np.log(fit.factor / other.factor))
    limit = float(stdtrit(fit.used - 1, 1 - SIGNIFICANCE / 2))
    statistic = apart / fit.standard_error if fit.standard_error > 0 else float("inf")
    if apart <= 1e-9:
        statistic = 0.0
    name = {"area_ratio": "area ratio", "mean_ratio": "ratio of mean flows"}[other.method]
    words = (
        f"Spot gaugings give a factor of {fit.factor:.3g}, the {name} {other.factor:.3g} "
        f"({100 * (other.factor / fit.factor - 1):+.0f} %)"
    )
    return warn_unless(
        "spot_gaugings_agree",
        statistic <= limit,
        min(float(statistic), 1e6),
        limit,
        f"{words}; with their scatter the two agree.",
        f"{words}; their scatter does not explain the difference (Student's t). Use "
        "`method: spot_gaugings`, or look at the areas and at abstractions between the two.",
    )
