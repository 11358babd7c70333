"""What a site file leaves open: filled in, derived or left out, in words.

Only what is listed here is filled in; whatever else a file does not state is left out of the
calculation and named by a check.
"""

from __future__ import annotations

from dataclasses import dataclass

from hydroyield.hydraulics.water import STANDARD_DENSITY, STANDARD_GRAVITY, USUAL_TEMPERATURE
from hydroyield.powerhouse import machine_types
from hydroyield.river.years import MONTH_NAMES
from hydroyield.site.faults import KeyPath, key_text
from hydroyield.site.models import SiteFile
from hydroyield.site.reading import SiteDescription


@dataclass(frozen=True)
class Note:
    """Something that the site file does not state.

    key : path of the key as text
    text : what was done about it
    """

    key: str
    text: str


def filled_in(site: SiteDescription) -> list[Note]:
    """Values that the tool filled in, as it does for these keys and no others."""
    model = site.model
    notes = [
        *(_filled_in_for_years(site) if model.discharge.record is not None else ()),
        (("head", "tailwater", "follows"), model.head.tailwater.follows),
        (("head", "minimum_net_head"), "any net head above 0"),
        (("site", "water_temperature"), _without_temperature(model)),
    ]
    if len(model.environmental_flow) > 1:
        notes.append((("environmental_flow_combination",), "the largest rule applies"))
    if model.site.latitude is None:
        notes.append((("site", "latitude"), f"gravity {STANDARD_GRAVITY:g} m/s2"))
    else:
        notes.append((("site", "altitude"), "0 m"))
    transfer = model.discharge.transfer
    if transfer is not None and transfer.method == "area_ratio":
        exponent = f"{transfer.exponent:g}"
        notes.append((("discharge", "transfer", "exponent"), exponent))
    found = [Note(key_text(path), text) for path, text in notes if not site.is_given(path)]
    return found + _filled_in_by_type(site)


def _without_temperature(model: SiteFile) -> str:
    losses = [*model.waterway, *(loss for group in model.turbines for loss in group.waterway)]
    pipes = any(loss.pipe is not None for loss in losses)
    viscosity = f", viscosity of {USUAL_TEMPERATURE:g} degC" if pipes else ""
    return f"density {STANDARD_DENSITY:g} kg/m3{viscosity}"


def _filled_in_for_years(site: SiteDescription) -> list[tuple[KeyPath, str]]:
    discharge = site.model.discharge
    return [
        (("discharge", "year_start_month"), MONTH_NAMES[discharge.year_start_month - 1]),
        (
            ("discharge", "minimum_month_coverage"),
            f"{100 * discharge.minimum_month_coverage:g} %",
        ),
    ]


def _filled_in_by_type(site: SiteDescription) -> list[Note]:
    notes = []
    for number, group in enumerate(site.model.turbines):
        typical = machine_types().get(group.type)
        if typical is None:
            continue
        path = ("turbines", number)
        if group.minimum_discharge is None:
            least = 100 * typical.minimum_discharge / (group.jets or 1)
            of_jets = ", of one jet" if group.jets else ""
            share = f"{least:g} % of full discharge, usual for the type{of_jets}"
            notes.append(Note(key_text((*path, "minimum_discharge")), share))
        if group.efficiency is None or group.efficiency == "typical":
            notes.append(
                Note(key_text((*path, "efficiency")), f"typical curve of the type {group.type}")
            )
    return notes


def to_derive(site: SiteDescription) -> list[str]:
    """Keys of rated values that are derived from the rest."""
    return [
        key_text(("turbines", number, key))
        for number, group in enumerate(site.model.turbines)
        for key in ("rated_head", "rated_discharge", "unit_capacity")
        if getattr(group, key) is None
    ]


def left_out(site: SiteDescription) -> list[Note]:
    """What the calculation does without, because the file does not state it."""
    model = site.model
    electrical, operation = model.electrical, model.operation
    absent = [
        (
            not model.environmental_flow,
            "environmental_flow",
            "all water is offered to the turbines",
        ),
        (not model.abstractions, "abstractions", "nobody else takes water"),
        (model.discharge.transfer is None, "discharge.transfer", "the record counts as the site's"),
        (
            not model.waterway and not any(group.waterway for group in model.turbines),
            "waterway",
            "no head is lost on the way to the turbines",
        ),
        (electrical.drive_efficiency is None, "electrical.drive_efficiency", "no loss"),
        (electrical.generator_efficiency is None, "electrical.generator_efficiency", "no loss"),
        (
            electrical.transformer_efficiency is None
            and electrical.transformer_no_load_loss is None
            and electrical.transformer_load_loss is None,
            "electrical.transformer_efficiency",
            "no loss",
        ),
        (electrical.own_use is None, "electrical.own_use", "the plant itself uses nothing"),
        (electrical.export_limit is None, "electrical.export_limit", "the grid takes everything"),
        (operation.shutdown_above is None, "operation.shutdown_above", "runs in any flood"),
        (not _has_outages(model), "outages", "every unit is available at all times"),
    ]
    return [Note(key, text) for missing, key, text in absent if missing]


def _has_outages(model: SiteFile) -> bool:
    keys = ("planned_outage", "forced_outage_rate", "common_outage_rate", "standstill", "closed")
    return any(getattr(model.operation, key) is not None for key in keys)


def without_source(site: SiteDescription) -> list[str]:
    """Blocks that do not say where their values come from, so that they count as assumptions."""
    model = site.model
    blocks = {
        "site": model.site,
        "discharge": model.discharge,
        "head": model.head,
        "electrical": model.electrical,
        "operation": model.operation,
        **{f"environmental_flow[{n}]": rule for n, rule in enumerate(model.environmental_flow)},
        **{f"abstractions[{n}]": taken for n, taken in enumerate(model.abstractions)},
        **{f"waterway[{n}]": loss for n, loss in enumerate(model.waterway)},
        **{f"turbines[{n}]": group for n, group in enumerate(model.turbines)},
    }
    written = {name for name in blocks if "[" in name or site.is_given((name,))}
    return [name for name, block in blocks.items() if name in written and not block.source]
