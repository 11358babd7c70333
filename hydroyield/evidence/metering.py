"""Where the energy is metered."""

from __future__ import annotations

from collections.abc import Iterator

from hydroyield.checks import Check
from hydroyield.energy import Estimate
from hydroyield.site.reading import SiteDescription

NOTHING = 1e-9  # share of the energy


def metering_checks(site: SiteDescription, estimate: Estimate) -> Iterator[Check]:
    """A generator that is held back at the export limit makes less than its meter is given here."""
    if site.model.electrical.metered_at != "generator":
        return
    cut = -dict(estimate.ledger_mwh)["export_limit"]
    if cut > NOTHING * estimate.mean_annual_energy_mwh:
        yield Check(
            "metered_above_export_limit", "warn", cut, 0.0,
            f"The metered energy holds {cut:.3g} MWh a year above the export limit; a plant that "
            "is held back there does not make them. Take them off, or look at export_limit.",
        )  # fmt: skip
