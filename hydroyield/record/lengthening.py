"""A short record lengthened, and its gaps filled, from a long record nearby.

Method: maintenance of variance, type 1 (MOVE.1; Hirsch 1982, Water Resour. Res. 18(4): 1081-1088)
on logarithms: Y = mean_y + sign(r) (s_y / s_x) (X - mean_x) over the concurrent days. Unlike least
squares it keeps the deviation as well as the mean.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from hydroyield.checks import Check, warn_unless
from hydroyield.record.result import Record

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]

SEASONS = {
    "December to February": (12, 1, 2),
    "March to May": (3, 4, 5),
    "June to August": (6, 7, 8),
    "September to November": (9, 10, 11),
}
ALL_YEAR = {"all months": tuple(range(1, 13))}
FEWEST_PAIRS = 30  # concurrent days with discharge at both, below which no line is drawn
SHORT_OVERLAP = 3 * 365  # d, common practice
LOWEST_CORRELATION = 0.8  # of the logarithms, common practice
KEPT = 0.1  # relative change of mean and deviation over the concurrent days


@dataclass(frozen=True)
class Relation:
    """The line between the logarithms of both records in some months.

    season : the months in words; months : their numbers
    pairs : concurrent days with discharge at both
    correlation : of the logarithms
    slope, intercept : ln(site record) = intercept + slope ln(reference), in ln(m3/s)
    """

    season: str
    months: tuple[int, ...]
    pairs: int
    correlation: float
    slope: float
    intercept: float

    def estimate(self, reference: Floats) -> Floats:
        """Discharge from that of the reference, both (n,) [m3/s]; zero stays zero."""
        positive = reference > 0
        logs = np.log(np.where(positive, reference, 1.0))
        return np.where(positive, np.exp(self.intercept + self.slope * logs), 0.0)


@dataclass(frozen=True)
class Lengthened:
    """A record with days filled from a reference.

    record : from the earlier start to the later end of both; `filled` marks the days
    relations : the lines used
    overlap : days with a value in both records
    zero_days : of these, days without discharge in one of them, which no line can use
    mean_kept, deviation_kept : mean and standard deviation of the estimates over the concurrent
        days, divided by those of the record
    reference_in_period, reference_mean : mean of the reference on the days of the record, and over
        all its days [m3/s]
    """

    record: Record
    relations: tuple[Relation, ...]
    overlap: int
    zero_days: int
    mean_kept: float
    deviation_kept: float
    reference_in_period: float
    reference_mean: float

    @property
    def correlation(self) -> float:
        """The lowest of the correlations."""
        return min(relation.correlation for relation in self.relations)


def move1(x: Floats, y: Floats) -> tuple[float, float, float]:
    """Slope and intercept of the MOVE.1 line of y on x, and their correlation.

    x, y : (n,) of any unit; neither of them constant
    """
    r = float(np.corrcoef(x, y)[0, 1])
    slope = float(np.sign(r) * y.std(ddof=1) / x.std(ddof=1))
    return slope, float(y.mean() - slope * x.mean()), r


def lengthen(record: Record, reference: Record, *, seasonal: bool = False) -> Lengthened:
    """Fill the days on which a record has no value from a reference.

    record, reference : daily discharge of the two gauges
    seasonal : a line for each of four seasons in place of one for all months

    Raises ValueError, with what to do, when the two have too few days in common.
    """
    dates, own, other = _side_by_side(record, reference)
    both = ~np.isnan(own) & ~np.isnan(other)
    month = dates.astype("datetime64[M]").astype(np.int64) % 12 + 1
    seasons = SEASONS if seasonal else ALL_YEAR
    relations = tuple(
        _relation(name, months, own, other, both & np.isin(month, months))
        for name, months in seasons.items()
    )
    estimated = np.full(own.size, np.nan)
    for relation in relations:
        chosen = np.isin(month, relation.months) & ~np.isnan(other)
        estimated[chosen] = relation.estimate(other[chosen])
    filled = np.isnan(own) & ~np.isnan(estimated)
    return Lengthened(
        replace(record, dates=dates, discharge=np.where(filled, estimated, own), filled=filled),
        relations,
        int(both.sum()),
        int((both & ((own <= 0) | (other <= 0))).sum()),
        _ratio(estimated[both].mean(), own[both].mean()),
        _ratio(estimated[both].std(), own[both].std()),
        float(other[both].mean()),
        float(reference.discharge[~np.isnan(reference.discharge)].mean()),
    )


def _side_by_side(
    record: Record, reference: Record
) -> tuple[NDArray[np.datetime64], Floats, Floats]:
    """Every day that either has, and both series on these days."""
    first = min(record.dates[0], reference.dates[0])
    last = max(record.dates[-1], reference.dates[-1])
    dates = np.arange(first, last + 1)
    series = []
    for each in (record, reference):
        on_days = np.full(dates.size, np.nan)
        start = int((each.dates[0] - first).astype(np.int64))
        on_days[start : start + each.dates.size] = each.discharge
        series.append(on_days)
    return dates, series[0], series[1]


def _relation(
    season: str, months: tuple[int, ...], own: Floats, other: Floats, both: NDArray[np.bool_]
) -> Relation:
    pair = both & (own > 0) & (other > 0)
    count = int(pair.sum())
    if count < FEWEST_PAIRS:
        raise ValueError(
            f"the record and its reference have only {count} days with discharge in common "
            f"({season}), and {FEWEST_PAIRS} are needed; use another reference"
            + ("" if len(months) == 12 else ", or leave `seasonal:` out")
        )
    x, y = np.log(other[pair]), np.log(own[pair])
    if np.ptp(x) == 0 or np.ptp(y) == 0:
        raise ValueError(
            "the record or its reference never changes on the days they have in common "
            f"({season}); look whether the columns are right"
        )
    slope, intercept, correlation = move1(x, y)
    return Relation(season, months, count, correlation, slope, intercept)


def _ratio(estimated: float, own: float) -> float:
    return float(estimated / own) if own > 0 else float("nan")


def lengthening_checks(found: Lengthened) -> Iterable[Check]:
    """Overlap, correlation, whether mean and deviation are kept, and what was done with zeros."""
    yield warn_unless(
        "reference_overlap",
        found.overlap >= SHORT_OVERLAP,
        found.overlap,
        SHORT_OVERLAP,
        f"Record and reference have {found.overlap} days in common.",
        f"Record and reference have only {found.overlap} days in common; three years show more of "
        "the spread (common practice). Wait for more of the record, or see how the lines differ "
        "with another reference.",
    )
    yield _correlation(found)
    yield from _kept(found)
    if found.zero_days:
        yield Check(
            "reference_zero_days", "warn", found.zero_days, 0,
            f"{found.zero_days} of the concurrent days have no discharge in one of the two "
            "records; the line is drawn without them, and a day without discharge at the reference "
            "is filled as one without. Look whether the river falls dry as the reference does.",
        )  # fmt: skip


def _correlation(found: Lengthened) -> Check:
    r = found.correlation
    if r <= 0:
        return Check(
            "reference_correlation", "fail", r, LOWEST_CORRELATION,
            f"The reference falls when the record rises (correlation {r:.2f}); what it fills is of "
            "no use. Take another reference.",
        )  # fmt: skip
    return warn_unless(
        "reference_correlation",
        r >= LOWEST_CORRELATION,
        r,
        LOWEST_CORRELATION,
        f"The logarithms of record and reference correlate with {r:.2f}.",
        f"The logarithms of record and reference correlate with {r:.2f} only; below "
        f"{LOWEST_CORRELATION:g} the filled days say little (common practice). Look for a "
        "reference nearer by, or of a like catchment.",
    )


def _kept(found: Lengthened) -> Iterator[Check]:
    for name, word, kept in (
        ("reference_mean_kept", "mean", found.mean_kept),
        ("reference_deviation_kept", "standard deviation", found.deviation_kept),
    ):
        if np.isnan(kept):
            continue
        words = f"On the concurrent days the estimates have {kept:.3f} times the record's {word}"
        yield warn_unless(
            name,
            abs(kept - 1) <= KEPT,
            kept,
            1 + KEPT if kept > 1 else 1 - KEPT,
            f"{words}.",
            f"{words}; the line, drawn through logarithms, does not fit floods or droughts. Try "
            "`seasonal: true`, or another reference.",
        )


def period_check(found: Lengthened) -> Check:
    """Whether the days of the record were as wet as the long term, seen at the reference."""
    ratio = _ratio(found.reference_in_period, found.reference_mean)
    words = f"On the days of the record the reference had {100 * ratio:.0f} % of its long-term mean"
    return warn_unless(
        "reference_period",
        abs(ratio - 1) <= KEPT,
        ratio,
        1 + KEPT if ratio > 1 else 1 - KEPT,
        f"{words}.",
        f"{words}: the measured years were {'wet' if ratio > 1 else 'dry'}. The filled days "
        "correct for it as far as the reference knows; say so where the estimate is used.",
    )
