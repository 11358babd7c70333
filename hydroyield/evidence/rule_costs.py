"""What each rule for the environmental flow costs in energy."""

from __future__ import annotations

from dataclasses import replace

from hydroyield.energy import Estimate, estimate_energy
from hydroyield.site.assembly import levels, water_rules
from hydroyield.site.reading import SiteDescription


def rule_costs(site: SiteDescription, energy: Estimate) -> tuple[float, ...]:
    """Energy that each rule costs beside the others, and then all of them together [MWh a year].

    Each is the energy without it less that with it. Rules overlap, so that the costs need not add
    up: a rule that is never the largest costs nothing. By priority another rule takes the place of
    one that is gone, which may keep more water, so that a cost may be negative.
    """
    rules = site.model.environmental_flow
    if not rules:
        return ()
    each = [_energy_with(site, energy, (*rules[:k], *rules[k + 1 :])) for k in range(len(rules))]
    together = each[0] if len(rules) == 1 else _energy_with(site, energy, ())
    known = energy.mean_annual_energy_mwh
    return tuple(without - known for without in (*each, together))


def _energy_with(site: SiteDescription, energy: Estimate, rules: tuple[object, ...]) -> float:
    model = site.model.model_copy(update={"environmental_flow": rules})
    scheme = energy.scheme
    found = water_rules(model, scheme.valid_discharge)
    heads = levels(model, found, scheme.valid_discharge)  # racks follow the seasons of the rules
    other = replace(scheme, rules=found, heads=heads)
    return estimate_energy(other).mean_annual_energy_mwh
