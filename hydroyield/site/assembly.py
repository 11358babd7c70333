"""From a described site and its record to the scheme that is computed."""

from __future__ import annotations

from dataclasses import dataclass, replace
from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray

from hydroyield.energy.rating import (
    RatedState,
    RatingError,
    Setting,
    UnitSpecification,
    rate_units,
)
from hydroyield.energy.scheme import Scheme
from hydroyield.errors import SiteFileError
from hydroyield.hydraulics import (
    FixedLevel,
    Heads,
    LevelTable,
    NormalDepth,
    StageDischarge,
    Weir,
    density,
)
from hydroyield.hydraulics.levels import Level
from hydroyield.hydraulics.losses import racks_of_seasons
from hydroyield.hydraulics.rating_fit import fit_rating
from hydroyield.hydraulics.water import STANDARD_DENSITY
from hydroyield.powerhouse import (
    EfficiencyCurve,
    Electrical,
    HillChart,
    JetCurve,
    LoadCurve,
    OutputLimit,
    Plant,
    machine_types,
)
from hydroyield.river import Abstraction, InflowShare, InflowSteps, WaterRules, quantile
from hydroyield.river.presets import PRESETS
from hydroyield.river.reserve import ALL_YEAR, InflowRule
from hydroyield.site.head_models import Head, Headwater, RiverLevel
from hydroyield.site.models import Site, SiteFile
from hydroyield.site.outage_assembly import outages_of
from hydroyield.site.physics import WIDE_RANGE, capacity_fault, dry_head_faults, starting_fault
from hydroyield.site.plant_models import EfficiencyTable, TurbineGroup
from hydroyield.site.reading import SiteDescription, read_site_file
from hydroyield.site.river_assembly import RiverAtSite, inflow_below_intake
from hydroyield.site.waterway_assembly import site_gravity, waterway_of

Floats = NDArray[np.float64]
MONTHS_PER_YEAR = 12


@dataclass(frozen=True)
class Assembled:
    """A scheme, and what had to be derived for it.

    scheme : ready to be computed
    rated_state : where rated values were derived
    river : where the scheme's discharge comes from
    """

    scheme: Scheme
    rated_state: RatedState
    river: RiverAtSite


def read_site(path: str | Path) -> SiteDescription:
    """Read a site file and hold its blocks against each other.

    Raises SiteFileError with every fault found: first those of shape, and where there are none
    those of physics that show without the record.
    """
    site = read_site_file(path)
    model = site.model
    specific_weight = site_density(model.site) * site_gravity(model.site)
    faults = dry_head_faults(site, levels(model), WIDE_RANGE)
    for number, group in enumerate(model.turbines):
        faults += capacity_fault(
            site, number, group.unit_capacity, group.rated_discharge, group.rated_head,
            specific_weight,
        )  # fmt: skip
        faults += starting_fault(site, number, group.starting_discharge, _minimum_of(group))
    if faults:
        raise SiteFileError(sorted(faults, key=lambda fault: fault.line or 0))
    return site


def assemble(site: SiteDescription, river: RiverAtSite) -> Assembled:
    """Build the scheme.

    river : discharge at the site, from `river_at_site`

    Raises SiteFileError with the faults that show only with the record: no head at any of its
    discharges, a rated value that cannot be derived, a capacity above what the water holds.
    """
    model, valid = site.model, river.valid_discharge
    rules = water_rules(model, valid)
    heads = levels(model, rules, valid)
    faults = dry_head_faults(site, heads, np.linspace(0, valid.max(), 400))
    if faults:
        raise SiteFileError(faults)
    plant, state = _plant(site, rules, heads, float(valid.max()))
    scheme = Scheme(
        dates=river.dates,
        discharge=river.discharge,
        rules=rules,
        heads=heads,
        plant=plant,
        year_start_month=model.discharge.year_start_month,
        minimum_month_coverage=model.discharge.minimum_month_coverage,
        filled=river.filled,
        outages=outages_of(site),
    )
    return Assembled(scheme, state, river)


def with_other_river(site: SiteDescription, scheme: Scheme, river: RiverAtSite) -> Scheme:
    """The same plant at another series of the river; rules that use its statistics follow it."""
    valid = river.valid_discharge
    rules = water_rules(site.model, valid)
    return replace(
        scheme,
        dates=river.dates,
        discharge=river.discharge,
        filled=river.filled,
        rules=rules,
        heads=levels(site.model, rules, valid),
    )


# --- the river ----------------------------------------------------------------------------------


def water_rules(model: SiteFile, valid_discharge: Floats) -> WaterRules:
    """The rules of a site in numbers; statistics are those of all valid days at the site."""
    fixed: list[list[float]] = []
    by_inflow: list[InflowRule] = []
    held = rule_months(model)
    for rule, months in zip(model.environmental_flow, held, strict=True):
        if rule.rule == "inflow_share":
            most = np.inf if rule.maximum_take is None else rule.maximum_take
            by_inflow.append(InflowShare(rule.share, rule.above, most, months))
        elif rule.rule == "steps":
            inflows, flows = zip(*rule.steps, strict=True)
            by_inflow.append(InflowSteps(inflows, flows, months))
        else:
            twelve = _twelve(rule, valid_discharge)
            fixed.append([q if m in months else 0.0 for m, q in enumerate(twelve, 1)])
    racks = waterway_of(model.waterway, model.site).racks_by_month
    summed = model.environmental_flow_combination == "sum"
    return WaterRules.by_month(fixed, by_inflow, abstractions(model), also=[racks], summed=summed)


def rule_months(model: SiteFile) -> list[tuple[int, ...]]:
    """Months in which each rule for the environmental flow counts.

    By priority a rule counts only in months that no rule before it holds in.
    """
    named = [rule.months or ALL_YEAR for rule in model.environmental_flow]
    if model.environmental_flow_combination != "priority":
        return named
    taken: set[int] = set()
    left = []
    for months in named:
        left.append(tuple(month for month in months if month not in taken))
        taken |= set(months)
    return left


def _twelve(rule: Any, valid_discharge: Floats) -> list[float]:
    """Discharge that a rule keeps in each month, January first [m3/s]."""
    if rule.rule == "preset":
        return PRESETS[rule.name].flows(valid_discharge)
    if rule.rule == "monthly":
        return list(rule.discharge)
    if rule.rule == "constant":
        flow = rule.discharge
    elif rule.rule == "exceedance":
        flow = float(quantile(valid_discharge, rule.percent))
    else:
        flow = rule.share * float(valid_discharge.mean())
    return [flow] * MONTHS_PER_YEAR


def abstractions(model: SiteFile) -> list[Abstraction]:
    """Other water that does not reach the turbines."""
    return [
        Abstraction(
            taken.name,
            taken.discharge,
            taken.months or tuple(range(1, MONTHS_PER_YEAR + 1)),
            taken.counts_as_environmental_flow,
            taken.returns,
        )
        for taken in model.abstractions
    ]


# --- levels and losses --------------------------------------------------------------------------


def levels(
    model: SiteFile, rules: WaterRules | None = None, valid_discharge: Floats | None = None
) -> Heads:
    """Headwater, tailwater and losses.

    rules : whose seasons the blockage of trash racks follows; without them racks are left out
    valid_discharge : of the river at the site [m3/s]; without it nothing joins below the intake
    """
    inflow = 0.0 if valid_discharge is None else inflow_below_intake(model, valid_discharge)
    way = waterway_of(model.waterway, model.site)
    racks = () if rules is None else racks_of_seasons(way, rules.month_of_season)
    head: Head = model.head
    return Heads(
        headwater=_headwater(head.headwater),
        tailwater=_tailwater(head.tailwater),
        follows_turbine=head.tailwater.follows != "river",
        river_level=None if head.tailwater.river is None else _tailwater(head.tailwater.river),
        lowest_tailwater=-np.inf if head.tailwater.not_below is None else head.tailwater.not_below,
        waterway=way,
        rack_of_season=racks,
        inflow_below_intake=inflow,
    )


def _table(pairs: tuple[tuple[float, float], ...]) -> LevelTable:
    discharges, heights = zip(*pairs, strict=True)
    return LevelTable(tuple(discharges), tuple(heights))


def _headwater(form: Headwater) -> Level:
    if form.weir is not None:
        weir = form.weir
        return Weir(weir.crest, weir.length, weir.coefficient, weir.drowned)
    if form.table is not None:
        return _table(form.table)
    assert form.level is not None  # exactly one of them is given
    return FixedLevel(form.level)


def _tailwater(form: RiverLevel) -> Level:
    if form.gaugings is not None:
        return fit_rating(form.gaugings)
    if form.rating is not None:
        return StageDischarge(form.rating.zero_level, form.rating.coefficient, form.rating.exponent)
    if form.channel is not None:
        channel = form.channel
        return NormalDepth(
            channel.bed_level,
            channel.bottom_width,
            channel.side_slope,
            channel.slope,
            channel.manning_n,
        )
    if form.table is not None:
        return _table(form.table)
    assert form.level is not None  # exactly one of them is given
    return FixedLevel(form.level)


# --- the plant ----------------------------------------------------------------------------------


def site_density(site: Site) -> float:
    """Density of the water [kg/m3]; 1000 where no temperature is given."""
    if site.water_temperature is None:
        return STANDARD_DENSITY
    return density(site.water_temperature)


def electrical(model: SiteFile) -> Electrical:
    """From shaft to grid; what is left out loses nothing."""
    given = model.electrical

    def or_one(efficiency: float | None) -> float:
        return 1.0 if efficiency is None else efficiency

    generator, curve = given.generator_efficiency, None
    if isinstance(generator, tuple):
        loads, efficiencies = zip(*generator, strict=True)
        curve = LoadCurve(EfficiencyCurve(loads, efficiencies))
        generator = float(curve.curve(np.array(1.0)))
    return Electrical(
        drive=or_one(given.drive_efficiency),
        generator=or_one(generator),
        transformer=or_one(given.transformer_efficiency),
        own_use=given.own_use or 0.0,
        export_limit=given.export_limit,
        load_curve=curve,
        standing_use=given.standing_use or 0.0,
        no_load_loss=given.transformer_no_load_loss or 0.0,
        load_loss=given.transformer_load_loss or 0.0,
    )


def efficiency_curve(group: TurbineGroup) -> EfficiencyCurve | JetCurve | HillChart:
    """The curve or table given, or the typical curve of the type, with jets that close."""
    points = group.efficiency
    if isinstance(points, EfficiencyTable):
        return HillChart(points.heads, points.discharges, points.values)
    if points is None or isinstance(points, str):
        points = machine_types()[group.type].curve
    shares, efficiencies = zip(*points, strict=True)
    curve = EfficiencyCurve(tuple(shares), tuple(efficiencies))
    return curve if group.jets is None else JetCurve(curve, group.jets)


def _output_limit(group: TurbineGroup) -> OutputLimit | None:
    if group.output_limit is None:
        return None
    heads, powers = zip(*group.output_limit, strict=True)
    return OutputLimit(heads, powers)


def minimum_share(kind: str, given: float | None, jets: int | None) -> float:
    """The minimum discharge given, or that of the type, as a share of full discharge.

    kind : type of the turbine, with typical values where none is given
    """
    if given is None:
        return machine_types()[kind].minimum_discharge / (jets or 1)
    return given


def _minimum_of(group: TurbineGroup) -> float:
    return minimum_share(group.type, group.minimum_discharge, group.jets)


def _plant(
    site: SiteDescription, rules: WaterRules, heads: Heads, highest_discharge: float
) -> tuple[Plant, RatedState]:
    model = site.model
    chain = electrical(model)
    water, fall = site_density(model.site), site_gravity(model.site)
    units = [
        UnitSpecification(
            group.count,
            group.type,
            group.rated_discharge,
            group.rated_head,
            group.unit_capacity,
            _minimum_of(group),
            efficiency_curve(group),
            group.axis_level,
            waterway_of(group.waterway, model.site),
            _output_limit(group),
            group.starting_discharge or 0.0,
        )
        for group in model.turbines
    ]
    setting = Setting(rules, heads, highest_discharge, water * fall * chain.at_terminals)
    try:
        groups, state = rate_units(units, setting)
    except RatingError as error:
        path = ("turbines", error.group, error.key)
        raise SiteFileError([site.fault(path, str(error))]) from None
    faults = [
        fault
        for number, group in enumerate(groups)
        for fault in capacity_fault(
            site, number, group.unit_capacity, group.rated_discharge, group.rated_head,
            water * fall,
        )
    ]  # fmt: skip
    if faults:
        raise SiteFileError(faults)
    capacity = sum(group.count * group.unit_capacity for group in groups)
    return Plant(
        groups=groups,
        electrical=replace(chain, load_loss_at=capacity),
        density=water,
        gravity=fall,
        minimum_net_head=model.head.minimum_net_head or 0.0,
        shutdown_above=model.operation.shutdown_above,
    ), state
