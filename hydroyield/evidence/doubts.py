"""Doubts about the discharge record, and what each would change in the energy.

A doubt that comes with another reading of the record is computed again with it: the same plant,
the same rules, the other series.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from hydroyield.checks import Check, warn_unless
from hydroyield.energy import Estimate, estimate_energy
from hydroyield.energy.estimate import NoUsableYearError
from hydroyield.errors import SiteFileError
from hydroyield.record import Record
from hydroyield.record.suspects import suspects_of_days
from hydroyield.river import Calendar
from hydroyield.river.trends import break_in, standard_error_of_mean, trend
from hydroyield.site.assembly import Assembled, with_other_river
from hydroyield.site.reading import SiteDescription
from hydroyield.site.river_assembly import RiverAtSite, lengthened

Floats = NDArray[np.float64]

FEWEST_YEARS_FOR_TESTS = 10
SIGNIFICANCE = 0.05
LARGEST_MEAN_ERROR = 0.1  # standard error of the mean discharge, as a share of it


@dataclass(frozen=True)
class Doubt:
    """A finding about the record, and the record read otherwise where that can be done.

    check : the finding
    alternative : the record at the gauge without what is doubted; None where none can be made
    treatment : what was done in it, in words
    first_year : hydrological year from which on the record is taken, where the earlier ones are
        doubted; days without a value are then not filled from a reference
    """

    check: Check
    alternative: Record | None = None
    treatment: str = ""
    first_year: int | None = None


@dataclass(frozen=True)
class Rerun:
    """The energy that follows from another reading of the record.

    name : of the check that doubts the record
    treatment : what was done to the record, in words
    energy_mwh : mean annual energy [MWh]; None where no year is left
    change : against the estimate, as a share of it; None without energy
    """

    name: str
    treatment: str
    energy_mwh: float | None
    change: float | None

    @property
    def text(self) -> str:
        """One sentence for people."""
        if self.energy_mwh is None:
            return f"With {self.treatment} no year could be used."
        if self.change is None:
            return f"With {self.treatment} the annual energy would be {self.energy_mwh:.4g} MWh."
        return (
            f"With {self.treatment} the annual energy would be {self.energy_mwh:.4g} MWh "
            f"({100 * self.change:+.1f} %)."
        )


def doubts_of(
    record: Record, gauge_area_m2: float | None, assembled: Assembled, energy: Estimate
) -> tuple[Doubt, ...]:
    """Every doubt about a record: about its days, and about its years.

    record : as it was read, at the gauge
    gauge_area_m2 : catchment area of the gauge, if it is stated [m2]
    """
    views = energy.views
    of_years = () if views is None else year_doubts(*views.yearly_means())
    return (
        *suspects_of(record, gauge_area_m2),
        *(_with_alternative(doubt, assembled) for doubt in of_years),
    )


def suspects_of(record: Record, gauge_area_m2: float | None) -> tuple[Doubt, ...]:
    """Doubts about the days of a record.

    gauge_area_m2 : catchment area of the gauge, if it is stated [m2]; that of the file otherwise
    """
    found = suspects_of_days(
        record.dates,
        record.discharge,
        doubtful=record.doubtful,
        catchment_area_m2=gauge_area_m2 or record.receipt.catchment_area_m2,
    )
    return tuple(
        Doubt(
            suspect.check,
            None if suspect.alternative is None else replace(record, discharge=suspect.alternative),
            suspect.treatment,
        )
        for suspect in found
    )


def year_doubts(years: NDArray[np.int64], means: Floats) -> Iterator[Doubt]:
    """Trend, break, and how well the mean of so many years is known.

    years : (y,) complete hydrological years
    means : (y,) mean discharge of each [m3/s]
    """
    if years.size < FEWEST_YEARS_FOR_TESTS:
        return
    found = trend(years, means)
    per_decade = 10 * found.slope / means.mean()
    words = (
        f"The discharge of the years changes by {100 * per_decade:+.1f} % in ten years (Sen), "
        f"Mann-Kendall p = {found.p_value:.2g}"
    )
    yield Doubt(
        warn_unless(
            "record_trend",
            found.p_value >= SIGNIFICANCE,
            found.p_value,
            SIGNIFICANCE,
            f"{words}: no more than chance gives.",
            f"{words}: more than chance gives; the mean of the past may not be that of the life "
            "of the plant. Look for its cause, and look at the recent years alone.",
        )
    )
    yield _break(years, means)
    error = standard_error_of_mean(means)
    share = error.standard_error / means.mean()
    words = (
        f"The mean discharge of {years.size} years has a standard error of {100 * share:.1f} % "
        f"(autocorrelation of the years {error.autocorrelation:.2f}, worth "
        f"{error.effective_count:.3g} independent years)"
    )
    yield Doubt(
        warn_unless(
            "record_mean_error",
            share <= LARGEST_MEAN_ERROR,
            share,
            LARGEST_MEAN_ERROR,
            f"{words}.",
            f"{words}; lengthen the record with `reference:` if a longer one exists nearby.",
        )
    )


def _break(years: NDArray[np.int64], means: Floats) -> Doubt:
    found = break_in(means)
    first = int(years[found.position])
    words = (
        f"The mean discharge is {found.before:.3g} m3/s before and {found.after:.3g} m3/s from "
        f"{first} on, where a break is likeliest (Pettitt, p = {found.p_value:.2g})"
    )
    check = warn_unless(
        "record_break",
        found.p_value >= SIGNIFICANCE,
        found.p_value,
        SIGNIFICANCE,
        f"{words}: no more than chance gives.",
        f"{words}: more than chance gives. Ask the gauge's keeper what changed: the gauge, its "
        "rating, or the river.",
    )
    return Doubt(check, treatment=f"the years from {first} on alone", first_year=first)


def _with_alternative(doubt: Doubt, assembled: Assembled) -> Doubt:
    """A doubt about the early years, with the record of the late ones."""
    gauged = assembled.river.gauged
    if gauged is None or doubt.first_year is None:
        return doubt
    calendar = Calendar.of(gauged.dates, assembled.scheme.year_start_month)
    late = np.where(calendar.year >= doubt.first_year, gauged.discharge, np.nan)
    return replace(doubt, alternative=replace(gauged, discharge=late))


def rerun(
    site: SiteDescription,
    doubts: Sequence[Doubt],
    reference: Record | None,
    assembled: Assembled,
    energy: Estimate,
) -> tuple[Rerun, ...]:
    """The energy with each other reading of the record whose check did not pass.

    doubts : from `doubts_of`
    reference : long record that fills days without a value, if there is one
    """
    found = []
    for doubt in doubts:
        if doubt.check.outcome == "pass" or doubt.alternative is None:
            continue
        river = _river(site, doubt, reference, assembled)
        other = None if river is None else _energy(site, assembled, river)
        mean = energy.mean_annual_energy_mwh
        change = None if other is None or not mean else other / mean - 1
        found.append(Rerun(doubt.check.name, doubt.treatment, other, change))
    return tuple(found)


def _river(
    site: SiteDescription, doubt: Doubt, reference: Record | None, assembled: Assembled
) -> RiverAtSite | None:
    """The other series at the site, by the same factor; None where no line can be drawn."""
    gauged = doubt.alternative
    assert gauged is not None  # only such doubts are computed again
    if reference is not None and doubt.first_year is None:
        try:
            gauged = lengthened(site, gauged, reference).record
        except SiteFileError:
            return None
    transfer = assembled.river.transfer
    return RiverAtSite(gauged, gauged.dates, gauged.discharge * transfer.factor, transfer)


def _energy(site: SiteDescription, assembled: Assembled, river: RiverAtSite) -> float | None:
    if not river.valid_discharge.size:
        return None
    try:
        other = estimate_energy(with_other_river(site, assembled.scheme, river))
    except NoUsableYearError:
        return None
    return other.mean_annual_energy_mwh


def doubt_checks(doubts: Iterable[Doubt], reruns: Sequence[Rerun]) -> Iterator[Check]:
    """The checks of the doubts, each with what it would change."""
    by_name = {run.name: run for run in reruns}
    for doubt in doubts:
        run = by_name.get(doubt.check.name)
        if run is None:
            yield doubt.check
        else:
            yield replace(doubt.check, message=f"{doubt.check.message} {run.text}")
