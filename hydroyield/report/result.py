"""The result as plain data, ready for JSON: units in the names, numbers at full precision."""

from __future__ import annotations

from dataclasses import asdict
from typing import Any

import hydroyield
from hydroyield.jobs import SiteEstimate
from hydroyield.quantities import W_PER_KW
from hydroyield.site.notes import Note, filled_in, left_out, to_derive, without_source

FORMAT = 1


def result(estimate: SiteEstimate) -> dict[str, Any]:
    """Everything that `result.json` holds."""
    return {
        "format": FORMAT,
        "site": {"name": estimate.site.name},
        "installed_capacity_kw": estimate.installed_capacity_kw,
        "maximum_net_power_kw": estimate.maximum_net_power_kw,
        "mean_annual_energy_mwh": estimate.mean_annual_energy_mwh,
        "capacity_factor": estimate.capacity_factor,
        "duration_integral_energy_mwh": estimate.duration_integral_energy_mwh,
        "monthly_energy_mwh": estimate.monthly_energy_mwh,
        "yearly_energy_mwh": estimate.yearly_energy_mwh,
        "years_used": estimate.years_used,
        "years_left_out": estimate.years_left_out,
        "record": _record(estimate),
        "exceedance_discharge_m3s": estimate.exceedance_discharge_m3s,
        "characteristic_discharge_m3s": estimate.characteristic_discharge_m3s,
        "environmental_flow_mean_m3s": estimate.environmental_flow_mean_m3s,
        "turbines": _turbines(estimate),
        "density_kg_m3": estimate.scheme.plant.density,
        "gravity_m_s2": estimate.scheme.plant.gravity,
        "reference_head_m": estimate.reference_head_m,
        "ledger_mwh": [{"step": step, "energy_mwh": mwh} for step, mwh in estimate.ledger_mwh],
        "assumptions": {
            "filled_in": _notes(filled_in(estimate.site)),
            "derived": to_derive(estimate.site),
            "left_out": _notes(left_out(estimate.site)),
            "without_source": without_source(estimate.site),
        },
        "checks": [asdict(check) for check in estimate.checks],
        "caution": CAUTION,
        "provenance": {
            "version": hydroyield.__version__,
            "sha256": {
                estimate.site.path.name: estimate.site.sha256,
                estimate.record.file: estimate.record.sha256,
            },
            "seed": None,
        },
    }


CAUTION = (
    "A pre-feasibility estimate, not a design. Local codes, permits and licensed engineers have "
    "the last word; see SAFETY.md."
)


def _record(estimate: SiteEstimate) -> dict[str, Any]:
    receipt = estimate.record
    return {
        "location": "site",
        "first": str(receipt.first),
        "last": str(receipt.last),
        "days": receipt.days,
        "missing_days": receipt.missing_days,
        "mean_m3s": float(estimate.scheme.valid_discharge.mean()),
        "file": receipt.file,
        "file_format": receipt.file_format,
        "station": receipt.station,
        "flags": receipt.flags,
        "unit": receipt.unit,
        "unit_source": receipt.unit_source,
        "date_format": receipt.date_format,
        "rows_read": receipt.rows_read,
        "rows_used": receipt.rows_used,
        "rows_dropped": {kind.reason: kind.count for kind in receipt.dropped},
    }


def _turbines(estimate: SiteEstimate) -> list[dict[str, Any]]:
    derived = set(to_derive(estimate.site))
    return [
        {
            "count": group.count,
            "type": group.type,
            "unit_capacity_kw": group.unit_capacity / W_PER_KW,
            "rated_discharge_m3s": group.rated_discharge,
            "rated_head_m": group.rated_head,
            "minimum_discharge_share": group.minimum_share,
            "derived": [
                key
                for key in ("rated_head", "rated_discharge", "unit_capacity")
                if f"turbines[{number}].{key}" in derived
            ],
        }
        for number, group in enumerate(estimate.scheme.plant.groups)
    ]


def _notes(notes: list[Note]) -> list[dict[str, str]]:
    return [{"key": note.key, "value": note.text} for note in notes]
