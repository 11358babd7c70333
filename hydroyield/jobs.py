"""One function for each job: it wires the rooms together and leaves the work to them."""

from __future__ import annotations

from dataclasses import dataclass, fields
from pathlib import Path

from hydroyield.checks import Check
from hydroyield.energy import Estimate, estimate_energy
from hydroyield.energy.estimate import NoUsableYearError
from hydroyield.errors import Fault, RecordError
from hydroyield.evidence import audit
from hydroyield.record import Receipt, Record, read_record
from hydroyield.site.assembly import assemble, record_options
from hydroyield.site.reading import SiteDescription


@dataclass(frozen=True)
class SiteEstimate(Estimate):
    """The annual energy of a described site, with what it rests on.

    site : the site file
    record : the receipt of the discharge record
    checks : every check of the result
    """

    site: SiteDescription
    record: Receipt
    checks: tuple[Check, ...]

    def warnings(self) -> list[Check]:
        """The checks that did not pass, failed ones first."""
        found = [check for check in self.checks if check.outcome != "pass"]
        return sorted(found, key=lambda check: check.outcome != "fail")


def estimate(site: SiteDescription, record: Record | None = None) -> SiteEstimate:
    """Annual energy of a site.

    site : from `hydroyield.read_site`
    record : discharge at the gauge, if not the file that the site names

    Raises SiteFileError or RecordError with every fault found.
    """
    if record is None:
        path = site.record_path
        _refuse_missing(site, path)
        record = read_record(path, record_options(site), shown_as=str(path))
    assembled = assemble(site, record)
    try:
        energy = estimate_energy(assembled.scheme)
    except NoUsableYearError as error:
        raise RecordError([_no_usable_year(site, error, record)]) from None
    checks = audit(site, record.receipt, assembled, energy)
    known = {field.name: getattr(energy, field.name) for field in fields(energy)}
    return SiteEstimate(**known, site=site, record=record.receipt, checks=checks)


def _refuse_missing(site: SiteDescription, path: Path) -> None:
    if not path.is_file():
        message = f"there is no file {path}; write the name of the record, relative to this file"
        if path.is_dir():
            message = f"{path} is a folder; write the name of the record in it"
        raise RecordError([site.fault(("discharge", "record", "file"), message)])


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
