"""What the terminal shows: the answer, what it rests on, and what to look at."""

from __future__ import annotations

from collections.abc import Iterator

from hydroyield.jobs import SiteEstimate
from hydroyield.quantities import rounded
from hydroyield.report.result import CAUTION
from hydroyield.river.years import MONTH_NAMES, span

LEDGER_NAMES = {
    "gross": "all the water, at the reference head",
    "reserved": "stays in the river or is taken by others",
    "shutdown": "offered while shut down for high discharge",
    "no_admissible_head": "offered without enough head",
    "above_full_discharge": "above what all units can pass",
    "capacity_limit": "cannot be used at full capacity",
    "below_minimum_or_unused": "below the minimum discharge, or unused",
    "outage": "units out of service",
    "levels": "head that differs from the reference head",
    "waterway": "losses on the way to the turbines",
    "turbine": "losses of the turbines",
    "drive_and_generator": "losses of drive and generator",
    "transformer": "losses of the transformer",
    "own_use": "own use",
    "export_limit": "above the export limit",
    "net": "delivered",
}


def summary(estimate: SiteEstimate) -> str:
    """The summary as text of less than 100 columns."""
    return "\n".join(
        [
            *_headline(estimate),
            "",
            *_months(estimate),
            "",
            *_ledger(estimate),
            "",
            *_checks(estimate),
            "",
            CAUTION,
        ]
    )


def _headline(estimate: SiteEstimate) -> Iterator[str]:
    years, start = estimate.cells.years, estimate.scheme.year_start_month
    energies = estimate.yearly_energy_mwh
    driest, wettest = (pick(energies, key=energies.__getitem__) for pick in (min, max))
    left_out = len(estimate.years_left_out)
    record = estimate.record
    yield estimate.site.name
    yield "-" * len(estimate.site.name)
    yield _row("Mean annual energy", f"{rounded(estimate.mean_annual_energy_mwh)} MWh")
    yield _row("Capacity factor", f"{estimate.capacity_factor:.0%}")
    yield _row(
        "Installed capacity", f"{rounded(estimate.installed_capacity_kw)} kW, " + _units(estimate)
    )
    yield _row("Most delivered", f"{rounded(estimate.maximum_net_power_kw)} kW")
    yield _row(
        "Years",
        f"{len(years)} used, {span(int(years[0]), start)} to {span(int(years[-1]), start)}"
        + (f"; {left_out} left out" if left_out else ""),
    )
    yield _row(
        "Range of years",
        f"{rounded(energies[driest])} MWh ({span(int(driest), start)}) to "
        f"{rounded(energies[wettest])} MWh ({span(int(wettest), start)})",
    )
    yield _row(
        "Record",
        f"{record.file}, {record.first} to {record.last}, {record.missing_days} days missing",
    )
    mean = float(estimate.scheme.valid_discharge.mean())
    q = estimate.exceedance_discharge_m3s
    yield _row(
        "River at the site",
        f"mean {rounded(mean)} m3/s, Q50 {rounded(q['50'])}, Q95 {rounded(q['95'])}; "
        f"kept in it {rounded(estimate.environmental_flow_mean_m3s)}",
    )


def _row(name: str, text: str) -> str:
    return f"{name:<20}{text}"


def _units(estimate: SiteEstimate) -> str:
    return " + ".join(f"{g.count} x {g.type}" for g in estimate.scheme.plant.groups)


def _months(estimate: SiteEstimate) -> Iterator[str]:
    means = estimate.monthly_energy_mwh
    order = [(estimate.scheme.year_start_month - 1 + i) % 12 for i in range(12)]
    yield "Energy by month, MWh"
    yield "".join(f"{MONTH_NAMES[m][:3]:>7}" for m in order)
    yield "".join(f"{rounded(means[m]):>7}" for m in order)


def _ledger(estimate: SiteEstimate) -> Iterator[str]:
    rows = estimate.ledger_mwh
    gross = rows[0][1]
    yield f"From gross to net, MWh a year; water valued at {estimate.reference_head_m:.2f} m"
    for step, energy in rows:
        if energy or step in ("gross", "net"):
            share = f"{energy / gross:>7.1%}" if gross else ""
            yield f"{LEDGER_NAMES[step]:<44}{_signed(energy, step):>10}{share}"


def _signed(energy: float, step: str) -> str:
    sign = "" if step in ("gross", "net") else ("+" if energy > 0 else "-")
    return sign + rounded(abs(energy))


def _checks(estimate: SiteEstimate) -> Iterator[str]:
    found = estimate.warnings()
    passed = len(estimate.checks) - len(found)
    yield f"Checks: {passed} passed, {len(found)} to look at"
    for check in found:
        yield f"{check.outcome}: {check.message}"
