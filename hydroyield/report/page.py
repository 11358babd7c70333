"""The page that an engineer would hand over: one file that opens without a network.

What it says is gathered here as plain data; the template only lays it out and escapes it.
"""

from __future__ import annotations

import datetime
from collections.abc import Sequence
from typing import Any

import hydroyield
from hydroyield.energy.standing import hours_by_cause
from hydroyield.jobs import SiteEstimate
from hydroyield.powerhouse import HillChart, UnitGroup
from hydroyield.quantities import W_PER_KW, rounded
from hydroyield.report import words
from hydroyield.report.drawn import DrawnFigure, rendered
from hydroyield.report.record_result import digests
from hydroyield.report.record_words import receipt_rows, reference_rows, river_rows, year_rows
from hydroyield.report.result import CAUTION, WITHOUT_DAYS
from hydroyield.report.summary import LEDGER_NAMES, UNSEEN
from hydroyield.river.years import MONTH_NAMES
from hydroyield.site.notes import filled_in, left_out, to_derive, without_source

Rows = list[tuple[str, ...]]

METHODS = (
    (
        "Duration curve",
        "All valid days at the site; plotting positions m/(N+1) (Weibull), linear between ranks.",
    ),
    (
        "From gauge to site",
        "The record is multiplied by one factor. Days filled from a reference follow MOVE.1 on "
        "logarithms (Hirsch 1982). Doubts about the record are computed again with the days in "
        "question left out or read otherwise, the plant unchanged.",
    ),
    (
        "The river",
        "Curves of single years give the bands (Vogel and Fennessey 1994). Seven-day minima are "
        "taken in years that begin with the wettest month. The range between the extreme tangents "
        "of the mass curve is the storage that would even the flow out (Rippl 1883). Trend by Mann "
        "and Kendall with Sen's slope, break by Pettitt, from yearly means.",
    ),
    (
        "Energy",
        "Each day of the record is evaluated by itself. A month's energy is its mean power times "
        "its hours; a year counts if every month has enough days with a value; means are over the "
        "years used.",
    ),
    (
        "Water to the turbines",
        "River discharge less the environmental flow (of several rules the largest, unless stated "
        "otherwise; never more than the inflow, and less what counts towards it) and less all "
        "abstractions.",
    ),
    (
        "Head",
        "Headwater less tailwater, or less the turbine axis, at the discharge of the day, less "
        "losses k Q^2. Over a weir Q = C L h^1.5; channels by Manning's formula; ratings "
        "Q = C (h - a)^b (ISO 18320). Density by IAPWS SR6-08(2011), gravity by IEC 60041.",
    ),
    (
        "Machines",
        "Full discharge grows with the square root of the net head (that of screws is constant). "
        "Efficiency is read at the share of full discharge, by a monotone cubic through the points "
        "(Fritsch and Butland 1984). The units share the water so that output is largest; a unit "
        "runs between its minimum and full discharge and up to its capacity.",
    ),
)


def page(estimate: SiteEstimate, figures: Sequence[DrawnFigure]) -> str:
    """The page as HTML, self-contained; all user text is escaped."""
    return rendered("report.html.j2", page_data(estimate, figures))


def page_data(estimate: SiteEstimate, figures: Sequence[DrawnFigure]) -> dict[str, Any]:
    """Everything that the page shows, as plain data."""
    return {
        "name": estimate.site.name,
        "headline": _headline(estimate),
        "answer": _answer(estimate),
        "warnings": [(check.outcome, check.message) for check in estimate.warnings()],
        "passed": [check.message for check in estimate.checks if check.outcome == "pass"],
        "basis": _basis(estimate),
        "turbines": _turbines(estimate),
        "assumptions": _assumptions(estimate),
        "sources": words.sources(estimate.site.model),
        "figures": figures,
        "years": _years(estimate),
        "months": [
            (month, words.energy(mwh).removesuffix(" MWh"))
            for month, mwh in zip(MONTH_NAMES, estimate.monthly_energy_mwh, strict=False)
        ],
        "river_years": [] if estimate.views is None else year_rows(estimate.views),
        "river_facts": [] if estimate.views is None else river_rows(estimate.views),
        "other_readings": _other_readings(estimate),
        "river": _river(estimate),
        "ledger": _ledger(estimate),
        "hours": _hours(estimate),
        "reference_head": words.head(estimate.reference_head_m),
        "methods": METHODS,
        "caution": CAUTION,
        "provenance": _provenance(estimate),
    }


def _headline(estimate: SiteEstimate) -> Rows:
    units = " + ".join(f"{g.count} x {g.type}" for g in estimate.scheme.plant.groups)
    return [
        (
            "Mean annual energy",
            words.energy(estimate.mean_annual_energy_mwh),
            words.filled(estimate) or "net, to the grid",
        ),
        ("Capacity factor", words.percent(estimate.capacity_factor), "of installed capacity"),
        ("Installed capacity", f"{rounded(estimate.installed_capacity_kw)} kW", units),
        (
            "Most delivered",
            f"{rounded(estimate.maximum_net_power_kw)} kW",
            "at any river discharge",
        ),
    ]


def _answer(estimate: SiteEstimate) -> str:
    full = estimate.mean_annual_energy_mwh * W_PER_KW / estimate.installed_capacity_kw
    text = (
        f"In a mean year the plant delivers {words.energy(estimate.mean_annual_energy_mwh)}, as "
        f"much as {rounded(full)} hours at full capacity. "
    )
    if estimate.gain is not None:
        text += f"That is {words.gain(estimate)}. "
    if words.metered(estimate):
        text += f"Metered are {words.metered(estimate)}. "
    if words.ageing(estimate):
        text += f"This is the new plant; {words.ageing(estimate)}. "
    if not estimate.has_years:
        return text + (
            "The river is known by a duration table alone, so nothing can be said of single years "
            "and months."
        )
    ranked = words.ranked_years(estimate)
    (dry, least), (wet, most) = ranked[0], ranked[-1]
    if len(ranked) == 1:
        return text + f"This rests on one year only, {words.year_name(estimate, dry)}."
    return text + (
        f"Over the {len(ranked)} years used it ranges from {words.energy(least)} "
        f"({words.year_name(estimate, dry)}) to {words.energy(most)} "
        f"({words.year_name(estimate, wet)})."
    )


def _basis(estimate: SiteEstimate) -> Rows:
    model = estimate.site.model
    rows: Rows = [*_of_record(estimate), ("From gauge to site", words.transfer(estimate))]
    if estimate.has_years:
        rows += _years_used(estimate)
    if words.inflow_below(model):
        rows.append(("Inflow between intake and tailwater", words.inflow_below(model)))
    rules = words.environmental_flow(model)
    together = words.TOGETHER[model.environmental_flow_combination] if len(rules) > 1 else ""
    rows.append((f"Environmental flow{together}", "; ".join(rules) or "none stated"))
    rows += _rule_costs(estimate)
    rows += [("Abstraction", text) for text in words.abstractions(model)]
    rows += [
        ("Headwater", words.headwater(model)),
        ("Tailwater", words.tailwater(model)),
        ("Waterway losses", words.waterway(model)),
        *words.electrical(estimate),
    ]
    shutdown = model.operation.shutdown_above
    rows.append(
        ("Shutdown", f"above {words.discharge(shutdown)} in the river" if shutdown else "none")
    )
    rows.append(("Outages", words.outages(estimate)))
    return rows


def _rule_costs(estimate: SiteEstimate) -> Rows:
    if not estimate.rule_costs:
        return []
    *each, together = (f"{rounded(mwh)} MWh" for mwh in _clear(estimate.rule_costs))
    apart = f" (rule by rule {', '.join(each)}; rules overlap)" if len(each) > 1 else ""
    days = f"{estimate.days_at_residual_flow:.0f} days a year"
    return [
        ("Cost of environmental flow", f"{together} a year{apart}"),
        ("Reach at its residual flow", days),
    ]


def _clear(costs: Sequence[float]) -> list[float]:
    """Costs [MWh] without rounding alone, which may be negative."""
    return [mwh if abs(mwh) > UNSEEN * max(map(abs, costs)) else 0.0 for mwh in costs]


def _of_record(estimate: SiteEstimate) -> Rows:
    if estimate.measured is None:
        table = estimate.site.model.discharge.duration_table or ()
        return [
            ("Record", f"none: a duration table of {len(table)} points"),
            ("Energy by year and month", f"absent: {WITHOUT_DAYS}"),
        ]
    rows = receipt_rows(estimate.measured)
    if estimate.reference is not None and estimate.river.lengthened is not None:
        rows += reference_rows(estimate.reference, estimate.river.lengthened)
    if words.filled(estimate):
        rows.append(("Filled days", words.filled(estimate)))
    return rows


def _years_used(estimate: SiteEstimate) -> Rows:
    first, last = (words.year_name(estimate, estimate.years_used[i]) for i in (0, -1))
    return [
        ("Years used", f"{len(estimate.years_used)}, {first} to {last}"),
        *(
            (f"Left out: {words.year_name(estimate, year)}", reason)
            for year, reason in estimate.years_left_out.items()
        ),
    ]


def _turbines(estimate: SiteEstimate) -> Rows:
    derived = to_derive(estimate.site)
    rows: Rows = []
    for number, group in enumerate(estimate.scheme.plant.groups):

        def mark(key: str, text: str, number: int = number) -> str:
            return text + (" (derived)" if f"turbines[{number}].{key}" in derived else "")

        curve = estimate.site.model.turbines[number].efficiency
        typical = curve is None or curve == "typical"
        rows.append(
            (
                f"{group.count} x {group.type}",
                mark("unit_capacity", f"{rounded(group.unit_capacity / W_PER_KW)} kW")
                + words.output_limit(group),
                mark("rated_discharge", words.discharge(group.rated_discharge)),
                mark("rated_head", words.head(group.rated_head)),
                words.percent(group.minimum_share) + words.starting(group),
                "typical of the type" if typical else _given(group),
            )
        )
    return rows


def _given(group: UnitGroup) -> str:
    over = " over heads" if isinstance(group.curve, HillChart) else ""
    return f"given{over}, best {group.curve.best:.3g}"


def _assumptions(estimate: SiteEstimate) -> list[tuple[str, list[str]]]:
    site = estimate.site
    lists = [
        ("Filled in by the tool", [f"{note.key}: {note.text}" for note in filled_in(site)]),
        ("Derived from the rest", to_derive(site)),
        ("Left out of the calculation", [f"{note.key}: {note.text}" for note in left_out(site)]),
        ("Stated without a source, so taken as assumptions", without_source(site)),
    ]
    return [(title, entries) for title, entries in lists if entries]


def _years(estimate: SiteEstimate) -> Rows:
    mean, filled = estimate.mean_annual_energy_mwh, estimate.filled_days
    return [
        (
            words.year_name(estimate, year)
            + (f" ({filled[year]} d filled)" if filled[year] else ""),
            rounded(mwh),
            f"{100 * (mwh / mean - 1):+.0f} %" if mean else "",
        )
        for year, mwh in estimate.yearly_energy_mwh.items()
    ]


def _river(estimate: SiteEstimate) -> dict[str, Any]:
    return {
        "mean": words.discharge(float(estimate.scheme.valid_discharge.mean())),
        "kept": words.discharge(estimate.environmental_flow_mean_m3s),
        "exceeded": [(p, rounded(q)) for p, q in estimate.exceedance_discharge_m3s.items()],
        "characteristic": [
            (days, rounded(q)) for days, q in estimate.characteristic_discharge_m3s.items()
        ],
    }


def _hours(estimate: SiteEstimate) -> Rows:
    names = {
        "running": "running",
        "too_little_water": "standing: too little water",
        "shutdown": "standing: shut down in high water",
        "low_head": "standing: too little head",
        "outage": "standing: units out of service",
    }
    hours = {cause: float(h.sum(axis=1).mean()) for cause, h in hours_by_cause(estimate).items()}
    total = sum(hours.values())
    return [
        (names[cause], rounded(value) if value else "0", f"{100 * value / total:.1f} %")
        for cause, value in hours.items()
    ]


def _ledger(estimate: SiteEstimate) -> Rows:
    rows = estimate.ledger_mwh
    gross = rows[0][1]
    return [
        (
            LEDGER_NAMES[step],
            ("-" if mwh < 0 else "") + rounded(abs(mwh)),
            f"{100 * mwh / gross:.1f} %" if gross else "",
        )
        for step, mwh in rows
        if abs(mwh) > UNSEEN * gross or step in ("gross", "net")
    ]


def _provenance(estimate: SiteEstimate) -> Rows:
    site = estimate.site
    read = {site.path.name: site.sha256}
    for record in (estimate.measured, estimate.reference):
        read |= {} if record is None else digests(record.receipt)
    return [
        ("Computed by", f"hydroyield {hydroyield.__version__}"),
        ("Computed on", datetime.date.today().isoformat()),
        *((f"SHA-256 of {name.rpartition('/')[2]}", digest) for name, digest in read.items()),
    ]


def _other_readings(estimate: SiteEstimate) -> Rows:
    """What each doubt about the record would change."""
    return [
        (
            run.treatment,
            "no year left" if run.energy_mwh is None else rounded(run.energy_mwh),
            "" if run.change is None else f"{100 * run.change:+.1f} %",
        )
        for run in estimate.reruns
    ]
