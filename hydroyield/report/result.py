"""The result as plain data, ready for JSON: units in the names, numbers at full precision."""

from __future__ import annotations

from dataclasses import asdict
from typing import Any

import hydroyield
from hydroyield.energy.beside import AGES, after_years, at_terminals, mean_over_life
from hydroyield.energy.standing import hours_by_cause, unit_hours
from hydroyield.jobs import SiteEstimate
from hydroyield.quantities import W_PER_KW
from hydroyield.report.record_result import (
    digests,
    receipt_facts,
    reference_facts,
    river_facts,
    series_facts,
)
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
        "monthly_energy_mwh": estimate.monthly_energy_mwh or None,
        "yearly_energy_mwh": estimate.yearly_energy_mwh or None,
        "years_used": estimate.years_used,
        "years_left_out": estimate.years_left_out,
        "absent": {} if estimate.has_years else dict.fromkeys(NEED_DAYS, WITHOUT_DAYS),
        "record": _record(estimate),
        "river": None if estimate.views is None else river_facts(estimate.views),
        "exceedance_discharge_m3s": estimate.exceedance_discharge_m3s,
        "characteristic_discharge_m3s": estimate.characteristic_discharge_m3s,
        "environmental_flow_mean_m3s": estimate.environmental_flow_mean_m3s,
        "days_at_residual_flow": estimate.days_at_residual_flow,
        "gain": _gain(estimate),
        "ageing": _ageing(estimate),
        "metered_energy_mwh": _metered(estimate),
        "mean_hours_a_year": _hours(estimate),
        "unit_running_hours": unit_hours(estimate),
        "environmental_flow_costs": _rule_costs(estimate),
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
                **(digests(estimate.record) if estimate.record else {}),
                **(digests(estimate.reference.receipt) if estimate.reference else {}),
            },
            "seed": None,
        },
    }


NEED_DAYS = ("monthly_energy_mwh", "yearly_energy_mwh", "years_used", "river")
WITHOUT_DAYS = (
    "the river is known by a duration table alone, which does not say when which discharge occurs"
)
CAUTION = (
    "A pre-feasibility estimate, not a design. Local codes, permits and licensed engineers have "
    "the last word; see SAFETY.md."
)


def _record(estimate: SiteEstimate) -> dict[str, Any]:
    if estimate.measured is None or estimate.views is None:
        return _table_facts(estimate)
    river, years = estimate.river, estimate.filled_days
    facts = series_facts(estimate.views, "site") | receipt_facts(estimate.measured)
    facts |= {
        "yearly_filled_days": {year: days for year, days in years.items() if days},
        "filled_share": estimate.filled_share,
        "transfer": _transfer(estimate),
        "other_readings": [
            {
                "check": run.name,
                "treatment": run.treatment,
                "energy_mwh": run.energy_mwh,
                "change_share": run.change,
            }
            for run in estimate.reruns
        ],
    }
    if estimate.reference is not None and river.lengthened is not None:
        facts["reference"] = reference_facts(estimate.reference, river.lengthened)
    return facts


def _table_facts(estimate: SiteEstimate) -> dict[str, Any]:
    """A duration table has no days."""
    nothing = dict.fromkeys(("first", "last", "days", "missing_days"))
    return {
        "location": "site",
        **nothing,
        "mean_m3s": float(estimate.scheme.discharge.mean()),
        "transfer": _transfer(estimate),
    }


def _transfer(estimate: SiteEstimate) -> dict[str, Any]:
    transfer, fit = estimate.river.transfer, estimate.river.spot_fit
    facts = {
        "method": transfer.method,
        "transfer_factor": transfer.factor,
        "uncertainty_share": transfer.relative_uncertainty,
        "uncertainty_basis": transfer.basis,
    }
    if fit is not None:
        facts["spot_gaugings"] = {
            "transfer_factor": fit.factor,
            "uncertainty_share": fit.standard_error,
            "count": fit.used,
            "without_record": list(fit.without_record),
            "zero": list(fit.zero),
        }
    return facts


def _gain(estimate: SiteEstimate) -> dict[str, Any] | None:
    gain = estimate.gain
    if gain is None:
        return None
    return {
        "baseline_mwh": gain.baseline_mwh,
        "energy_mwh": gain.energy_mwh,
        "gain_mwh": gain.gain_mwh,
        "years": list(gain.years),
    }


def _ageing(estimate: SiteEstimate) -> dict[str, Any] | None:
    share, new = estimate.site.model.operation.degradation, estimate.mean_annual_energy_mwh
    if share is None:
        return None
    return {
        "degradation_share": share,
        "aged_energy_mwh": {str(age): after_years(new, share, age) for age in AGES},
        "mean_aged_energy_mwh": mean_over_life(new, share),
    }


def _metered(estimate: SiteEstimate) -> float | None:
    if estimate.site.model.electrical.metered_at == "grid":
        return None
    return at_terminals(estimate.ledger_mwh)


def _hours(estimate: SiteEstimate) -> dict[str, float]:
    """Hours a year that the plant runs and stands, by cause."""
    hours = hours_by_cause(estimate)
    return {f"{cause}_hours": float(h.sum(axis=1).mean()) for cause, h in hours.items()}


def _rule_costs(estimate: SiteEstimate) -> list[dict[str, Any]]:
    names = [rule.rule for rule in estimate.site.model.environmental_flow]
    return [
        {"rule": name, "energy_mwh": mwh}
        for name, mwh in zip([*names, "all"], estimate.rule_costs, strict=bool(names))
    ]


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
