"""The plausibility audit: every check of a result, in the order in which water becomes energy."""

from __future__ import annotations

from collections.abc import Iterator, Sequence

import numpy as np

from hydroyield.checks import Check, warn_unless
from hydroyield.energy import Estimate
from hydroyield.evidence.doubts import Doubt, Rerun, doubt_checks
from hydroyield.evidence.machines import machine_checks
from hydroyield.evidence.metering import metering_checks
from hydroyield.evidence.other_days import day_checks
from hydroyield.evidence.outages import outage_checks
from hydroyield.evidence.waterway import waterway_checks
from hydroyield.hydraulics import Weir
from hydroyield.hydraulics.levels import range_covered
from hydroyield.hydraulics.rating_fit import FittedRating
from hydroyield.record import Record
from hydroyield.river.presets import PRESETS
from hydroyield.site.assembly import Assembled, rule_months
from hydroyield.site.notes import left_out, without_source
from hydroyield.site.reading import SiteDescription
from hydroyield.site.river_assembly import river_checks

FEWEST_YEARS = 10  # common practice: fewer years do not show the spread of wet and dry
USUAL_CAPACITY_FACTOR = (0.2, 0.85)  # run-of-river plants, common practice
LARGEST_RATING_ERROR = 0.1  # of the discharge (common practice)
LARGEST_SHARE_OUTSIDE = 0.02  # of the days beyond a surveyed level


def audit(
    site: SiteDescription,
    record: Record | None,
    assembled: Assembled,
    estimate: Estimate,
    doubts: Sequence[Doubt],
    reruns: Sequence[Rerun],
) -> tuple[Check, ...]:
    """Hold a result and its input against what is usual.

    record : at the gauge, as it was read; None with a duration table
    doubts, reruns : about the record, and what they would change
    """
    return (
        *(_of_record(record, assembled, estimate) if record is not None else ()),
        *doubt_checks(doubts, reruns),
        *river_checks(site.model, assembled.river),
        *_levels(estimate),
        *_left_out(site),
        *_presets(site),
        *_idle_rules(site),
        *waterway_checks(site.model, estimate),
        *outage_checks(site, estimate),
        *metering_checks(site, estimate),
        *machine_checks(site, assembled, estimate),
        _energy(estimate),
        _capacity_factor(estimate),
        _cross_check(estimate),
        _sources(site),
    )


def _of_record(record: Record, assembled: Assembled, estimate: Estimate) -> Iterator[Check]:
    yield from record.receipt.checks
    yield _years(estimate)
    yield from day_checks(record, assembled.river.transfer.factor, estimate)


def _years(estimate: Estimate) -> Check:
    used, out = len(estimate.years_used), len(estimate.years_left_out)
    rest = f", {out} left out" if out else ""
    return warn_unless(
        "years_used",
        used >= FEWEST_YEARS,
        used,
        FEWEST_YEARS,
        f"{used} hydrological years used{rest}.",
        f"Only {used} hydrological years used{rest}; a run of wet or dry years can hide in so few "
        "(common practice asks for 10). Lengthen the record if a longer one exists nearby.",
    )


def _levels(estimate: Estimate) -> Iterator[Check]:
    scheme, cells, run = estimate.scheme, estimate.cells, estimate.operation
    rules = scheme.rules
    in_river = scheme.heads.below(cells.discharge, rules.unreturned[cells.season])
    followed = run.turbined if scheme.heads.follows_turbine else in_river
    for side, level, seen in (
        ("headwater", scheme.heads.headwater, cells.discharge),
        ("tailwater", scheme.heads.tailwater, followed),
    ):
        covered = range_covered(level)
        if covered is None:
            continue
        low, high = covered
        outside = (seen > high) | (seen < low)
        share = cells.mean(outside.astype(np.float64))
        yield warn_unless(
            f"{side}_table_range",
            share <= LARGEST_SHARE_OUTSIDE,
            share,
            LARGEST_SHARE_OUTSIDE,
            f"The survey of the {side} covers {1 - share:.1%} of the time.",
            f"The {side} was surveyed at {low:.3g} to {high:.3g} m3/s, and {share:.1%} of the time "
            f"lies outside, where {_beyond(level)}. Survey levels at more discharges.",
        )
    below = {"tailwater": scheme.heads.tailwater, "river": scheme.heads.river_level}
    for side, found in below.items():
        if isinstance(found, FittedRating):
            yield _fit(side, found)
    if isinstance(scheme.heads.headwater, Weir) and not scheme.heads.headwater.drowned:
        yield Check(
            "headwater_weir", "pass", None, None,
            "The headwater follows the discharge over a free weir, approach velocity neglected.",
        )  # fmt: skip


def _beyond(level: object) -> str:
    if isinstance(level, FittedRating):
        return "the fitted rating is drawn on"
    return "the first level is held and the last segment extended"


def _presets(site: SiteDescription) -> Iterator[Check]:
    for rule in site.model.environmental_flow:
        if rule.rule == "preset":
            yield Check(
                "preset_rule", "warn", None, None,
                f"The rule {rule.name} is an example ({PRESETS[rule.name].source}), not the law of "
                "the day and not a permit; ask the authority.",
            )  # fmt: skip


def _idle_rules(site: SiteDescription) -> Iterator[Check]:
    """By priority a rule may never have its turn."""
    for number, months in enumerate(rule_months(site.model)):
        if not months:
            yield Check(
                "rule_never_holds", "warn", None, None,
                f"environmental_flow[{number}] never holds: rules before it hold in all of its "
                "months. Move it up, limit their months, or take it out.",
            )  # fmt: skip


def _fit(side: str, found: FittedRating) -> Check:
    """How well a fitted rating holds its gaugings."""
    rating, error = found.rating, found.standard_error
    words = (
        f"The {side} rating fitted to {found.count} gaugings is Q = {rating.coefficient:.4g} "
        f"(h - {rating.zero_level:.3f})^{rating.exponent:.3g}"
    )
    if error is None:
        bad = f"{words}; three gaugings fix it without showing an error. Survey more."
        return Check("rating_fit", "warn", None, LARGEST_RATING_ERROR, bad)
    words += f", standard error {100 * error:.1f} % of the discharge"
    return warn_unless(
        "rating_fit",
        error <= LARGEST_RATING_ERROR,
        error,
        LARGEST_RATING_ERROR,
        f"{words}.",
        f"{words}; look at the gaugings one by one, or survey more.",
    )


_EFFECT_OF_LEAVING_OUT = {
    "environmental_flow": "nearly every permit asks for one; state it",
    "discharge.transfer": "state the catchment areas unless the gauge stands at the site",
    "waterway": "racks, canals and pipes always lose some head; state a loss",
    "electrical.drive_efficiency": "state it unless the turbine drives the generator directly",
    "electrical.generator_efficiency": "no generator is free of loss; state it",
    "electrical.transformer_efficiency": "state it unless the energy is metered before it",
    "electrical.own_use": "state it if it is metered with the energy",
    "outages": "plants stand now and then; the energy of a real plant is lower by a few per cent",
}


def _left_out(site: SiteDescription) -> Iterator[Check]:
    for note in left_out(site):
        name = f"left_out_{note.key.rpartition('.')[2]}"
        effect = _EFFECT_OF_LEAVING_OUT.get(note.key)
        what = f"Not stated: {note.key} ({note.text})"
        yield Check(
            name,
            "warn" if effect else "pass",
            None,
            None,
            f"{what}; {effect}." if effect else f"{what}.",
        )


def _energy(estimate: Estimate) -> Check:
    energy = estimate.mean_annual_energy_mwh
    if energy > 0:
        return Check("energy", "pass", energy, 0.0, "The plant delivers energy.")
    return Check(
        "energy", "fail", energy, 0.0,
        "The plant delivers nothing in any year used; look at the ledger for where the water goes, "
        "and at levels, minimum discharge and environmental flow.",
    )  # fmt: skip


def _capacity_factor(estimate: Estimate) -> Check:
    factor = estimate.capacity_factor
    low, high = USUAL_CAPACITY_FACTOR
    return warn_unless(
        "capacity_factor",
        low <= factor <= high,
        factor,
        low if factor < low else high,
        f"A capacity factor of {factor:.0%} is usual for run-of-river plants.",
        f"A capacity factor of {factor:.0%} is unusual for a run-of-river plant ({low:.0%} to "
        f"{high:.0%}, common practice); look at the size of the units against the river.",
    )


def _cross_check(estimate: Estimate) -> Check:
    direct, integral = estimate.mean_annual_energy_mwh, estimate.duration_integral_energy_mwh
    apart = abs(integral - direct) / direct if direct else abs(integral)
    return warn_unless(
        "duration_integral",
        apart <= 1e-6,
        apart,
        1e-6,
        "The area under the power duration curve gives the same annual energy.",
        f"The area under the power duration curve differs by {apart:.2g}; please report this.",
    )


def _sources(site: SiteDescription) -> Check:
    bare = without_source(site)
    return warn_unless(
        "sources",
        not bare,
        len(bare),
        0,
        "Every block of the site file says where its values come from.",
        f"No source is stated for {', '.join(bare)}; these values count as assumptions. Add "
        "`source:` to each block.",
    )
