"""The river at a described site: its records moved there, lengthened, and what they cannot give."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from hydroyield.checks import Check
from hydroyield.errors import SiteFileError
from hydroyield.record import Record, RecordOptions
from hydroyield.record.lengthening import Lengthened, lengthen, lengthening_checks, period_check
from hydroyield.record.transfer import (
    AT_THE_SITE,
    SpotFit,
    Transfer,
    area_check,
    by_area,
    by_means,
    fit_spot_gaugings,
    spot_checks,
)
from hydroyield.river.duration_table import read_table
from hydroyield.site.models import SiteFile
from hydroyield.site.reading import SiteDescription

Floats = NDArray[np.float64]


@dataclass(frozen=True)
class RiverAtSite:
    """Discharge at the intake, and how it came there.

    gauged : the record at the gauge, lengthened where there is a reference; None with a duration
        table
    dates : (n,) every day, datetime64[D]; None with a duration table
    discharge : (n,) at the site, nan where missing; with a duration table values at even steps of
        exceedance [m3/s]
    transfer : the factor used
    spot_fit : what spot gaugings say of it
    lengthened : what the reference gave
    """

    gauged: Record | None
    dates: NDArray[np.datetime64] | None
    discharge: Floats
    transfer: Transfer
    spot_fit: SpotFit | None = None
    lengthened: Lengthened | None = None

    @property
    def filled(self) -> NDArray[np.bool_] | None:
        """(n,) days filled from the reference; None where there is none."""
        return None if self.gauged is None else self.gauged.filled

    @property
    def valid_discharge(self) -> Floats:
        """Discharge of the days with a value [m3/s]."""
        return self.discharge[~np.isnan(self.discharge)]


def record_options(site: SiteDescription) -> RecordOptions:
    """What the site file says about its record."""
    discharge = site.model.discharge
    record, transfer = discharge.record, discharge.transfer
    assert record is not None  # asked for only where there is one
    return RecordOptions(
        unit=record.unit,
        date_column=record.date_column,
        value_column=record.value_column,
        missing=record.missing,
        date_order=record.date_order,
        decimal_mark=record.decimal_mark,
        file_format=record.file_format,
        gauge_area_m2=transfer.gauge_area if transfer else None,
    )


def reference_options(site: SiteDescription) -> RecordOptions:
    """What the site file says about its reference record."""
    reference = site.model.discharge.reference
    assert reference is not None  # asked for only where there is one
    return RecordOptions(
        unit=reference.unit,
        date_column=reference.date_column,
        value_column=reference.value_column,
        missing=reference.missing,
        date_order=reference.date_order,
        decimal_mark=reference.decimal_mark,
        file_format=reference.file_format,
        gauge_area_m2=reference.gauge_area,
    )


def river_at_site(
    site: SiteDescription, record: Record | None, reference: Record | None
) -> RiverAtSite:
    """Move the record to the site, lengthened where there is a reference.

    record : at the gauge; None with a duration table
    reference : long record of another gauge, if any

    Raises SiteFileError where a reference has too few days in common, or no spot gauging falls on
    a day of the record.
    """
    table = site.model.discharge.duration_table
    if record is None:
        assert table is not None  # one of the two is given
        transfer = _stated(site.model) or AT_THE_SITE
        return RiverAtSite(
            None, None, read_table(*zip(*table, strict=True)) * transfer.factor, transfer
        )
    found = None if reference is None else lengthened(site, record, reference)
    gauged = record if found is None else found.record
    fit = _spot_fit(site, record)
    transfer = _transfer(site.model, fit)
    return RiverAtSite(
        gauged, gauged.dates, gauged.discharge * transfer.factor, transfer, fit, found
    )


def lengthened(site: SiteDescription, record: Record, reference: Record) -> Lengthened:
    """A record with the days that it lacks filled. Raises SiteFileError as `river_at_site`."""
    stated = site.model.discharge.reference
    seasonal = stated is not None and stated.seasonal
    try:
        return lengthen(record, reference, seasonal=seasonal)
    except ValueError as error:
        raise SiteFileError([site.fault(("discharge", "reference"), str(error))]) from None


def _spot_fit(site: SiteDescription, record: Record) -> SpotFit | None:
    pairs = site.model.discharge.spot_gaugings
    if pairs is None:
        return None
    days, measured = zip(*pairs, strict=True)
    try:
        return fit_spot_gaugings([np.datetime64(day, "D") for day in days], measured, record)
    except ValueError as error:
        raise SiteFileError([site.fault(("discharge", "spot_gaugings"), str(error))]) from None


def _transfer(model: SiteFile, fit: SpotFit | None) -> Transfer:
    """The factor used, with the uncertainty that the user states if there is one."""
    block = model.discharge.transfer
    if block is None:
        return AT_THE_SITE
    if block.method == "spot_gaugings":
        assert fit is not None  # the site file needs the gaugings for this method
        found = fit.transfer
    else:
        found = _stated(model) or AT_THE_SITE
    if block.uncertainty is None:
        return found
    return replace(found, relative_uncertainty=block.uncertainty, basis="stated")


def _stated(model: SiteFile) -> Transfer | None:
    """The factor from areas or means; None where neither pair is stated."""
    block = model.discharge.transfer
    if block is None:
        return None
    if block.method != "mean_ratio" and block.gauge_area and block.site_area:
        return by_area(block.gauge_area, block.site_area, block.exponent)
    if block.gauge_mean and block.site_mean:
        return by_means(block.gauge_mean, block.site_mean)
    return None


def inflow_below_intake(model: SiteFile, valid_discharge: Floats) -> float:
    """Water that joins below the intake, as a share of the river discharge at the intake."""
    block = model.discharge.inflow_below_intake
    if block is None:
        return 0.0
    if block.discharge is not None:
        return float(block.discharge / valid_discharge.mean())
    transfer = model.discharge.transfer
    assert block.area is not None  # one of the two is given
    assert transfer is not None  # the site file is refused without
    assert transfer.site_area is not None
    return block.area / transfer.site_area


def river_checks(model: SiteFile, river: RiverAtSite) -> Iterable[Check]:
    """Checks of the way from gauge to site and of what was filled."""
    block = model.discharge.transfer
    if block is not None and block.gauge_area and block.site_area:
        yield area_check(block.gauge_area, block.site_area)
    if river.spot_fit is not None:
        yield from spot_checks(river.spot_fit, _stated(model))
    if river.lengthened is not None:
        yield from lengthening_checks(river.lengthened)
        yield period_check(river.lengthened)
    if model.discharge.duration_table is not None:
        yield from _table_checks(model)


def _table_checks(model: SiteFile) -> Iterable[Check]:
    table = model.discharge.duration_table
    assert table is not None  # asked for only with a table
    (first, high), (last, low) = table[0], table[-1]
    open_share = (first + 100 - last) / 100
    yield Check(
        "duration_table_tails",
        "pass" if open_share <= 0.1 else "warn",
        open_share,
        0.1,
        f"The duration table runs from {first:g} to {last:g} %; outside, {open_share:.0%} of the "
        f"time, the discharge is held at {high:g} and {low:g} m3/s."
        + ("" if open_share <= 0.1 else " Give discharges at smaller and larger percentages."),
    )
    by_month = any(taken.months for taken in model.abstractions) or any(
        rule.months or (rule.rule == "monthly" and len(set(rule.discharge)) > 1)
        for rule in model.environmental_flow
    )
    if by_month:
        yield Check(
            "duration_table_seasons", "warn", None, None,
            "Rules differ by month, and a duration table does not say which months are dry; every "
            "month was given the same curve. Give a record of daily discharge.",
        )  # fmt: skip
