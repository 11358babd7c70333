"""A described site in the words of a report. User text is passed on; the page escapes it."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

from hydroyield.energy.beside import AGES, LIFE, after_years, at_terminals, mean_over_life
from hydroyield.jobs import SiteEstimate
from hydroyield.powerhouse import Dated, UnitGroup
from hydroyield.quantities import W_PER_KW, rounded
from hydroyield.river.presets import PRESETS
from hydroyield.river.years import MONTH_NAMES, span
from hydroyield.site.discharge_models import Transfer
from hydroyield.site.head_models import RiverLevel
from hydroyield.site.models import SiteFile
from hydroyield.site.waterway_models import WaterwayLoss

KM2 = 1e6  # m2


def energy(mwh: float) -> str:
    """Energy to three significant figures."""
    return f"{rounded(mwh)} MWh"


def head(metres: float) -> str:
    """Head to 0.01 m under 10 m, else to three significant figures."""
    return f"{metres:.2f} m" if abs(metres) < 10 else f"{rounded(metres)} m"


def discharge(m3s: float) -> str:
    """Discharge to three significant figures; litres below a tenth of a cubic metre."""
    if 0 < abs(m3s) < 0.1:
        return f"{rounded(1000 * m3s)} l/s"
    return f"{rounded(m3s)} m3/s"


def percent(share: float) -> str:
    """A share in whole per cent."""
    return f"{100 * share:.0f} %"


def year_name(estimate: SiteEstimate, year: str) -> str:
    """A hydrological year as people write it."""
    return span(int(year), estimate.scheme.year_start_month)


def ranked_years(estimate: SiteEstimate) -> list[tuple[str, float]]:
    """(year, energy [MWh]) from the driest to the wettest in energy."""
    return sorted(estimate.yearly_energy_mwh.items(), key=lambda item: item[1])


def months_in_turn(numbers: tuple[int, ...]) -> str:
    """A run of months by its first and last, over the turn of the year where need be."""
    return f"{MONTH_NAMES[numbers[0] - 1]} to {MONTH_NAMES[numbers[-1] - 1]}"


def months(numbers: tuple[int, ...] | None) -> str:
    """Months in words; a run of months as a range, over the turn of the year where need be."""
    if numbers is None or len(numbers) == len(MONTH_NAMES):
        return "all year"
    ordered = sorted(numbers)
    first = [number for number in ordered if (number - 2) % 12 + 1 not in ordered]
    if len(ordered) > 2 and len(first) == 1:
        return months_in_turn(tuple((first[0] - 1 + n) % 12 + 1 for n in range(len(ordered))))
    return ", ".join(MONTH_NAMES[number - 1] for number in ordered)


# --- what the estimate rests on -------------------------------------------------------------------


TOGETHER = {
    "largest": ", the largest of",
    "sum": ", the sum of",
    "priority": ", the first that holds of",
}


def environmental_flow(model: SiteFile) -> list[str]:
    """The rules, one sentence each."""
    return [_rule(rule) for rule in model.environmental_flow]


def _rule(rule: Any) -> str:
    when = "" if rule.months is None else f", {months(rule.months)}"
    stated = ", ".join(text for text in (rule.permit, rule.date) if text)
    return _kept(rule) + when + (f" ({stated})" if stated else "")


def _kept(rule: Any) -> str:
    if rule.rule == "constant":
        return f"{discharge(rule.discharge)}" + (" all year" if rule.months is None else "")
    if rule.rule == "monthly":
        return "by month, January first: " + ", ".join(rounded(q) for q in rule.discharge) + " m3/s"
    if rule.rule == "exceedance":
        return f"the discharge exceeded {rule.percent:g} % of the time"
    if rule.rule == "mean_share":
        return f"{percent(rule.share)} of the mean discharge"
    if rule.rule == "steps":
        steps = (f"{discharge(kept)} from {discharge(inflow)} on" for inflow, kept in rule.steps)
        return "in steps of the inflow: " + ", ".join(steps)
    if rule.rule == "preset":
        return f"{PRESETS[rule.name].source}, as an example"
    most = "" if rule.maximum_take is None else f", at most {discharge(rule.maximum_take)} taken"
    return (
        f"everything up to {discharge(rule.above)}, and {percent(rule.share)} of what exceeds it"
        f"{most}"
    )


def abstractions(model: SiteFile) -> list[str]:
    """Other takers of water, one sentence each."""
    return [
        f"{taken.name}: {discharge(taken.discharge)}, {months(taken.months)}"
        + ("; counts as environmental flow" if taken.counts_as_environmental_flow else "")
        + ("" if taken.returns else "; does not return above the tailwater")
        for taken in model.abstractions
    ]


def transfer(estimate: SiteEstimate) -> str:
    """How the record was moved to the site, and how well that is known."""
    stated, used = estimate.site.model.discharge.transfer, estimate.river.transfer
    if stated is None:
        return "none: the record counts as that of the site"
    if used.relative_uncertainty is None:
        known = "its uncertainty is not stated"
    else:
        known = f"standard uncertainty {100 * used.relative_uncertainty:.1f} % ({used.basis})"
    return f"{_way_to_site(stated)}: factor {used.factor:.4g}, {known}"


def _way_to_site(stated: Transfer) -> str:
    if stated.method == "spot_gaugings":
        return "by spot gaugings at the site against the record of the same days"
    if stated.method == "mean_ratio":
        assert stated.site_mean  # the site file is refused without
        assert stated.gauge_mean
        return (
            f"by mean discharge, {discharge(stated.site_mean)} at the site to "
            f"{discharge(stated.gauge_mean)} at the gauge"
        )
    assert stated.site_area  # the site file is refused without
    assert stated.gauge_area
    return (
        f"by catchment area, {rounded(stated.site_area / KM2)} km2 at the site to "
        f"{rounded(stated.gauge_area / KM2)} km2 at the gauge, exponent {stated.exponent:g}"
    )


def filled(estimate: SiteEstimate) -> str:
    """The share of the days that a reference gave, beside the headline; "" where there is none."""
    share = estimate.filled_share
    return f"{100 * share:.1f} % of the days used filled from a reference" if share else ""


def gain(estimate: SiteEstimate) -> str:
    """The gain over the old plant in one sentence; "" without one."""
    found = estimate.gain
    if found is None:
        return ""
    more = "more" if found.gain_mwh >= 0 else "less"
    share = abs(found.gain_mwh) / found.baseline_mwh if found.baseline_mwh else 0.0
    years = f" over {len(found.years)} years that both have" if found.years else ""
    return (
        f"{energy(abs(found.gain_mwh))} a year {more} than the old plant "
        f"({energy(found.baseline_mwh)}, {percent(share)}){years}"
    )


def ageing(estimate: SiteEstimate) -> str:
    """The energy of the plant as it ages, in one phrase; "" where nothing is stated."""
    share, new = estimate.site.model.operation.degradation, estimate.mean_annual_energy_mwh
    if share is None:
        return ""
    aged = ", ".join(f"{rounded(after_years(new, share, age))}" for age in AGES)
    return (
        f"with {100 * share:g} % less each year, {aged} MWh after {AGES[0]}, {AGES[1]} and "
        f"{AGES[2]} years, {energy(mean_over_life(new, share))} on average over {LIFE}"
    )


def metered(estimate: SiteEstimate) -> str:
    """The energy at the generator terminals, in one phrase; "" where the grid is the place."""
    if estimate.site.model.electrical.metered_at == "grid":
        return ""
    return f"{energy(at_terminals(estimate.ledger_mwh))} at the generator terminals"


def inflow_below(model: SiteFile) -> str:
    """Water that joins between intake and tailwater, in one phrase; "" without any."""
    block = model.discharge.inflow_below_intake
    if block is None:
        return ""
    if block.discharge is not None:
        return f"{discharge(block.discharge)} on average, rising and falling with the river"
    assert block.area is not None  # one of the two is given
    return f"from {rounded(block.area / KM2)} km2, as much per area as above the intake"


def headwater(model: SiteFile) -> str:
    """The headwater in one phrase."""
    form = model.head.headwater
    if form.weir is not None:
        return (
            f"over a weir of {form.weir.length:g} m, crest at {form.weir.crest:.2f} m, "
            f"coefficient {form.weir.coefficient:g}"
        )
    if form.table is not None:
        return f"table of {len(form.table)} levels against river discharge"
    return f"{form.level:.2f} m"


def tailwater(model: SiteFile) -> str:
    """The tailwater in one phrase."""
    form = model.head.tailwater
    words = _level(form)
    if form.level is None:
        words += {"river": ", following the river", "turbine": ", following the turbine discharge",
                  "higher": ", following the turbine discharge"}[form.follows]  # fmt: skip
    if form.river is not None:
        words += f"; never below the river ({_level(form.river)})"
    if form.not_below is not None:
        words += f"; never below {form.not_below:.2f} m"
    return words


def _level(form: RiverLevel) -> str:
    if form.rating is not None:
        rating = form.rating
        return f"rating Q = {rating.coefficient:g} (h - {rating.zero_level:g})^{rating.exponent:g}"
    if form.channel is not None:
        return f"uniform flow in a channel, Manning n {form.channel.manning_n:g}"
    if form.gaugings is not None:
        return f"rating fitted to {len(form.gaugings)} gaugings"
    if form.table is not None:
        return f"table of {len(form.table)} levels"
    return f"{form.level:.2f} m"


def waterway(model: SiteFile) -> str:
    """The losses in one phrase."""
    losses = list(map(_loss, model.waterway))
    for number, group in enumerate(model.turbines):
        losses += [f"each unit of turbines[{number}]: {_loss(loss)}" for loss in group.waterway]
    return "; ".join(losses) or "none stated"


def starting(group: UnitGroup) -> str:
    """The starting discharge, behind the minimum; "" where it is no more than that."""
    if group.starting_share <= group.minimum_share:
        return ""
    return f", starts at {percent(group.starting_share)}"


def output_limit(group: UnitGroup) -> str:
    """The limit by head, behind the capacity; "" without one."""
    limit = group.output_limit
    if limit is None:
        return ""
    ends = " to ".join(
        f"{rounded(limit.powers[i] / W_PER_KW)} kW at {head(limit.heads[i])}" for i in (0, -1)
    )
    return f", limited by head: {ends}"


def outages(estimate: SiteEstimate) -> str:
    """When units are out of service, in one phrase."""
    found = estimate.scheme.outages
    parts = []
    if found.planned is not None:
        if isinstance(found.planned, Dated):
            turns = "one unit after another" if found.planned.turns > 1 else "the unit"
            parts.append(f"{turns} out of service {_windows(found.planned)}")
        else:
            planned = found.planned
            parts.append(f"{planned.days:g} days of each unit in {months(planned.months)}")
    if found.standstill is not None:
        standstill = found.standstill
        when = f"in {months(standstill.months)}"
        if isinstance(standstill, Dated):
            when = _windows(standstill)
        parts.append(f"all stand {standstill.days:g} days {when}")
    if found.forced_rate:
        parts.append(f"each unit down {100 * found.forced_rate:g} % of the hours")
    if found.common_rate:
        parts.append(f"all down {100 * found.common_rate:g} % of the hours")
    if found.closed:
        parts.append(f"closed in {months(found.closed)}")
    return "; ".join(parts) or "none stated"


def _windows(dated: Dated) -> str:
    """Windows of the year as people write them."""
    return " and ".join(
        f"from {day} {MONTH_NAMES[month - 1]} to {last_day} {MONTH_NAMES[last_month - 1]}"
        for (month, day), (last_month, last_day) in dated.windows
    )


def _loss(loss: WaterwayLoss) -> str:
    if loss.pipe is not None:
        pipe = loss.pipe
        beside = f"{pipe.parallel} pipes" if pipe.parallel > 1 else "pipe"
        return (
            f"{beside} of {pipe.length:g} m, {pipe.diameter:g} m wide, roughness "
            f"{1000 * pipe.roughness:g} mm, minor losses {pipe.minor_losses:g}"
        )
    if loss.trash_rack is not None:
        rack = loss.trash_rack
        blocked = sorted({percent(share) for share in rack.blockage})
        return (
            f"trash rack of {rack.area:g} m2, {1000 * rack.clear_spacing:g} mm clear, "
            f"{' to '.join(dict.fromkeys((blocked[0], blocked[-1])))} blocked"
        )
    if loss.exit is not None:
        return f"velocity head behind outlets of {loss.exit.area:g} m2"
    if loss.canal is not None:
        return f"canal of {loss.canal.length:g} m, held at {loss.canal.depth:g} m"
    return f"h = k Q^2 with k = {loss.loss_coefficient:.3g} m per (m3/s)^2"


def electrical(estimate: SiteEstimate) -> Iterator[tuple[str, str]]:
    """(part, value) of the chain from shaft to grid."""
    given = estimate.site.model.electrical
    for name, share in (
        ("Drive", given.drive_efficiency),
        ("Generator", given.generator_efficiency),
        ("Transformer", given.transformer_efficiency),
    ):
        losses_stated = given.transformer_no_load_loss or given.transformer_load_loss
        if not (name == "Transformer" and share is None and losses_stated):
            yield name, _efficiency(share)
    own_use, limit = given.own_use, given.export_limit
    yield (
        "Own use",
        "not stated; none"
        if own_use is None
        else f"{rounded(own_use / W_PER_KW)} kW while running",
    )
    if given.transformer_no_load_loss or given.transformer_load_loss:
        idle, loaded = given.transformer_no_load_loss or 0, given.transformer_load_loss or 0
        yield (
            "Transformer losses",
            f"{rounded(idle / W_PER_KW)} kW at any load, {rounded(loaded / W_PER_KW)} kW more at "
            "full capacity",
        )
    if given.standing_use:
        yield "Taken while standing", f"{rounded(given.standing_use / W_PER_KW)} kW"
    yield "Export limit", "none" if limit is None else f"{rounded(limit / W_PER_KW)} kW"


def _efficiency(share: float | tuple[tuple[float, float], ...] | None) -> str:
    if share is None:
        return "not stated; no loss"
    if isinstance(share, tuple):
        return f"load curve, {100 * share[-1][1]:.1f} % at a load of {percent(share[-1][0])}"
    return f"{100 * share:.1f} %"


def sources(model: SiteFile) -> list[tuple[str, str]]:
    """(block, where its values come from) for every block that says so."""
    found: list[tuple[str, str]] = []
    _collect_sources(model, "", found)
    return found


def _collect_sources(block: Any, path: str, found: list[tuple[str, str]]) -> None:
    if getattr(block, "source", None):
        found.append((path or "file", block.source))
    for key in type(block).model_fields:
        value = getattr(block, key)
        inner = f"{path}.{key}" if path else key
        if hasattr(type(value), "model_fields"):
            _collect_sources(value, inner, found)
        elif isinstance(value, tuple):
            for number, entry in enumerate(value):
                if hasattr(type(entry), "model_fields"):
                    _collect_sources(entry, f"{inner}[{number}]", found)
