"""One function for each job: it wires the rooms together and leaves the work to them."""

from __future__ import annotations

import re
from collections.abc import Callable, Sequence
from dataclasses import dataclass, fields
from pathlib import Path

from hydroyield.checks import Check
from hydroyield.comparison.compared import PlantComparison, compare_plants
from hydroyield.comparison.writing import option_files
from hydroyield.energy import Estimate, estimate_energy
from hydroyield.energy.estimate import NoUsableYearError
from hydroyield.errors import Fault, RecordError, SiteFileError
from hydroyield.evidence import audit
from hydroyield.evidence.doubts import Rerun, doubts_of, rerun, suspects_of, year_doubts
from hydroyield.evidence.gain import Gain, gain_check, gain_over_mean, gain_over_years
from hydroyield.evidence.outages import with_placed_outage
from hydroyield.evidence.rule_costs import rule_costs
from hydroyield.evidence.suitable import Suitability, suitable_machines
from hydroyield.record import Receipt, Record, read_record
from hydroyield.record.joining import read_records
from hydroyield.record.options import RecordOptions
from hydroyield.river.views import RiverViews
from hydroyield.site.assembly import Assembled, assemble, read_site
from hydroyield.site.option_assembly import most_combinations
from hydroyield.site.reading import SiteDescription
from hydroyield.site.river_assembly import (
    RiverAtSite,
    record_options,
    reference_options,
    river_at_site,
)


@dataclass(frozen=True)
class SiteEstimate(Estimate):
    """The annual energy of a described site, with what it rests on.

    site : the site file
    measured : the discharge record as it was read; None with a duration table
    reference : the reference record; None without one
    river : how the record became the river at the site
    rule_costs : energy that each rule for the environmental flow costs, and all together [MWh]
    gain : over the plant that runs there already; None without one
    reruns : the energy of other readings of the record, where there is a doubt about it
    checks : every check of the result
    """

    site: SiteDescription
    measured: Record | None
    reference: Record | None
    river: RiverAtSite
    rule_costs: tuple[float, ...]
    gain: Gain | None
    reruns: tuple[Rerun, ...]
    checks: tuple[Check, ...]

    @property
    def record(self) -> Receipt | None:
        """The receipt of the discharge record; None with a duration table."""
        return None if self.measured is None else self.measured.receipt

    def warnings(self) -> list[Check]:
        """The checks that did not pass, failed ones first."""
        return not_passed(self.checks)


def not_passed(checks: Sequence[Check]) -> list[Check]:
    """The checks that did not pass, failed ones first."""
    found = [check for check in checks if check.outcome != "pass"]
    return sorted(found, key=lambda check: check.outcome != "fail")


def estimate(site: SiteDescription, record: Record | None = None) -> SiteEstimate:
    """Annual energy of a site.

    site : from `hydroyield.read_site`
    record : discharge at the gauge, if not the file that the site names

    Raises SiteFileError or RecordError with every fault found.
    """
    record, reference = record or _record(site), _reference(site)
    river = river_at_site(site, record, reference)
    assembled = assemble(site, river)
    try:
        energy = with_placed_outage(site, estimate_energy(assembled.scheme))
    except NoUsableYearError as error:
        assert record is not None  # a duration table has no years that could be short
        raise RecordError([_no_usable_year(site, error, record)]) from None
    return _concluded(site, record, reference, assembled, energy)


def _concluded(
    site: SiteDescription,
    record: Record | None,
    reference: Record | None,
    assembled: Assembled,
    energy: Estimate,
) -> SiteEstimate:
    """The result with its checks, and with what each doubt about the record would change."""
    transfer = site.model.discharge.transfer
    area = None if transfer is None else transfer.gauge_area
    doubts = () if record is None else doubts_of(record, area, assembled, energy)
    reruns = rerun(site, doubts, reference, assembled, energy)
    gain = _gain(site, energy)
    known = {field.name: getattr(energy, field.name) for field in fields(energy)}
    return SiteEstimate(
        **known,
        site=site,
        measured=record,
        reference=reference,
        river=assembled.river,
        rule_costs=rule_costs(site, energy),
        gain=gain,
        reruns=reruns,
        checks=(
            *audit(site, record, assembled, energy, doubts, reruns),
            *(() if gain is None else (gain_check(gain),)),
        ),
    )


def _gain(site: SiteDescription, energy: Estimate) -> Gain | None:
    """The gain over the plant that runs there already, if one is stated."""
    baseline = site.model.baseline
    if baseline is None:
        return None
    if baseline.annual_energy is not None:
        return gain_over_mean(energy, baseline.annual_energy)
    if baseline.yearly_energy is not None:
        years = {str(year): mwh for year, mwh in baseline.yearly_energy.items()}
    else:
        assert baseline.site is not None  # one of the three is given
        old = read_site(site.folder / baseline.site)
        if old.model.baseline is not None:
            message = "the site file of the old plant has a baseline of its own; take it out there"
            raise SiteFileError([site.fault(("baseline", "site"), message)])
        found = estimate(old)
        if not (found.has_years and energy.has_years):
            return gain_over_mean(energy, found.mean_annual_energy_mwh)
        years = found.yearly_energy_mwh
    try:
        return gain_over_years(energy, years)
    except ValueError as error:
        raise SiteFileError([site.fault(("baseline",), str(error))]) from None


def _record(site: SiteDescription) -> Record | None:
    """The record that a site file names; None where it gives a duration table."""
    if not site.record_paths:
        return None
    return _read(site, "record", site.record_paths, record_options(site))


def _reference(site: SiteDescription) -> Record | None:
    if not site.reference_paths:
        return None
    try:
        return _read(site, "reference", site.reference_paths, reference_options(site))
    except RecordError as error:
        raise RecordError([_of_reference(fault) for fault in error.faults]) from None


def _of_reference(fault: Fault) -> Fault:
    """A fault that names the keys of the record, naming those of the reference."""
    key, message = (
        text.replace("discharge.record", "discharge.reference")
        for text in (fault.key, fault.message)
    )
    return Fault(fault.file, fault.line, key, message)


def _read(
    site: SiteDescription, block: str, paths: Sequence[Path], options: RecordOptions
) -> Record:
    missing = [path for path in paths if not path.is_file()]
    if missing:
        raise RecordError([_missing(site, block, path) for path in missing])
    if len(paths) == 1:
        return read_record(paths[0], options, shown_as=str(paths[0]))
    return read_records(paths, options)


def _missing(site: SiteDescription, block: str, path: Path) -> Fault:
    message = f"there is no file {path}; write the name of the record, relative to this file"
    if path.is_dir():
        message = f"{path} is a folder; write the name of the record in it"
    return site.fault(("discharge", block, "file"), message)


def _no_usable_year(site: SiteDescription, error: NoUsableYearError, record: Record) -> Fault:
    lacking = "; ".join(f"{year}: {reason}" for year, reason in list(error.reasons.items())[:5])
    more = len(error.reasons) - 5
    rest = f"; and {more} more years" if more > 0 else ""
    return site.fault(
        ("discharge", "record", "file"),
        f"{record.receipt.file}: no hydrological year has enough days with a value in every "
        f"month ({lacking}{rest}); use a longer record, or another year_start_month or a lower "
        "minimum_month_coverage under discharge",
    )


def machines(site: SiteDescription) -> list[Suitability]:
    """Which types of machine suit a site, and why the others do not.

    Raises SiteFileError or RecordError with every fault found.
    """
    return suitable_machines(estimate(site))


# --- options ------------------------------------------------------------------------------------


def compare(site: SiteDescription, done: Callable[[], None] = lambda: None) -> PlantComparison:
    """The options of a site, each computed as fully as an estimate, held against each other.

    site : from `hydroyield.read_site`, with a block `options`
    done : called after each option

    Raises SiteFileError or RecordError with every fault found.
    """
    _needs_options(site)
    record, reference = _record(site), _reference(site)
    river = river_at_site(site, record, reference)
    try:
        return compare_plants(site, river, (record, reference), done)
    except NoUsableYearError as error:
        assert record is not None  # a duration table has no years that could be short
        raise RecordError([_no_usable_year(site, error, record)]) from None


def option_count(site: SiteDescription) -> int:
    """How many combinations the options of a site make, at most.

    Raises SiteFileError where the site file has no options.
    """
    _needs_options(site)
    return most_combinations(site)


def write_option(site: SiteDescription, number: int) -> dict[str, bytes]:
    """The files of a folder in which an option is a site of its own: {name: content}, the site
    file first.

    number : of the option, from 1

    Raises SiteFileError where there is no such option, RecordError where a record is at fault.
    """
    _needs_options(site)
    record, reference = _record(site), _reference(site)
    river = river_at_site(site, record, reference)
    return option_files(site, river, number)


def _needs_options(site: SiteDescription) -> None:
    if site.model.options is None:
        message = (
            "no options to compare; write a block such as options: {unit_counts: [1, 2], "
            "exceedances: [20, 30, 40]}"
        )
        raise SiteFileError([site.fault(("options",), message)])


# --- a record alone -------------------------------------------------------------------------------


@dataclass(frozen=True)
class GaugeRecord:
    """A discharge record at its gauge, before any site.

    record : as it was read
    views : its statistics
    checks : every check of it
    """

    record: Record
    views: RiverViews
    checks: tuple[Check, ...]

    def warnings(self) -> list[Check]:
        """The checks that did not pass, failed ones first."""
        return not_passed(self.checks)


def look_at_record(
    paths: Sequence[Path],
    options: RecordOptions,
    *,
    year_start_month: int = 10,
    minimum_month_coverage: float = 0.9,
) -> GaugeRecord:
    """Read a record, in one file or in several of one gauge, and look at it.

    year_start_month : first month of the hydrological year
    minimum_month_coverage : share of the days of each month that a complete year needs

    Raises RecordError with every fault found.
    """
    try:
        record = read_records(paths, options)
    except RecordError as error:
        raise RecordError([_of_command(fault) for fault in error.faults]) from None
    views = RiverViews(record.dates, record.discharge, year_start_month, minimum_month_coverage)
    found = (*suspects_of(record, options.gauge_area_m2), *year_doubts(*views.yearly_means()))
    checks = (*record.receipt.checks, *(doubt.check for doubt in found))
    return GaugeRecord(record, views, checks)


_KEY = re.compile(r"`(\w+):(?: (\[?[^`]*?\]?))?`")


def _of_command(fault: Fault) -> Fault:
    """A fault that names keys of a site file, naming options of the command."""
    message = fault.message.replace(" under discharge.record", "")
    message = _KEY.sub(
        lambda key: f"`--{key[1].replace('_', '-')}{' ' + key[2].strip('[]') if key[2] else ''}`",
        message,
    )
    key = fault.key.replace("discharge.record.", "--").replace("_", "-")
    return Fault(fault.file, fault.line, key, message)
