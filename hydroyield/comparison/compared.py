"""Options held against each other: which are best, by how much, and whether that is real."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass, replace
from functools import partial

import numpy as np

from hydroyield.checks import Check, warn_unless
from hydroyield.comparison.seasons import Seasons, seasons_of
from hydroyield.comparison.trials import Refused, Trial, evaluated
from hydroyield.errors import Fault, SiteFileError
from hydroyield.options.differences import Candidate, Differences, MachineError, differences
from hydroyield.options.money import Economics, economics
from hydroyield.options.option import Option
from hydroyield.options.ranking import (
    Aim,
    Choice,
    Limits,
    choose,
    energy_aims,
    frontier,
    marginal_energy,
)
from hydroyield.options.sizing import Sizing, best_size
from hydroyield.options.sweep import SizeSweep, scales
from hydroyield.quantities import W_PER_KW, WH_PER_MWH
from hydroyield.record import Record
from hydroyield.site.option_assembly import (
    combinations_of,
    cost_of,
    machines_to_try,
    options_of,
)
from hydroyield.site.option_models import Options
from hydroyield.site.reading import SiteDescription
from hydroyield.site.river_assembly import RiverAtSite


@dataclass(frozen=True)
class PlantComparison:
    """Plant options of a site, held against each other.

    trial : site, river and machines
    measured, reference : the records as they were read; None where there are none
    seasons : which years and quarters are dry and wet
    options : that were computed, in the order of their numbers
    refused : combinations that are no plants
    marginal : of each option [kWh/kW], see `marginal_energy`
    on_frontier : of each option, whether none gives as much energy with less capacity
    economics : of each option; empty without costs
    choices : the best option by each aim
    other_prices : (factor on prices, factor on capital costs, the best by the aims of money)
    sizings : {name of an aim: the best size of the chosen machine, split and pipe}
    differences : which differences in energy are real; None with a single option
    within_limits : of each option, whether it may be chosen
    checks : of the record and of the comparison
    """

    trial: Trial
    measured: Record | None
    reference: Record | None
    seasons: Seasons
    options: tuple[Option, ...]
    refused: tuple[Refused, ...]
    marginal: tuple[float | None, ...]
    on_frontier: tuple[bool, ...]
    economics: tuple[Economics, ...]
    choices: tuple[Choice, ...]
    other_prices: tuple[tuple[float, float, tuple[Choice, ...]], ...]
    sizings: dict[str, Sizing]
    differences: Differences | None
    within_limits: tuple[bool, ...]
    checks: tuple[Check, ...]

    @property
    def site(self) -> SiteDescription:
        return self.trial.site

    def warnings(self) -> list[Check]:
        """The checks that did not pass, failed ones first."""
        found = [check for check in self.checks if check.outcome != "pass"]
        return sorted(found, key=lambda check: check.outcome != "fail")


def compare_plants(
    site: SiteDescription,
    river: RiverAtSite,
    records: tuple[Record | None, Record | None],
    done: Callable[[], None],
) -> PlantComparison:
    """Compute every option of a site file and hold them against each other.

    river : at the site
    records : the record and the reference as they were read
    done : called after each option

    Raises NoUsableYearError, and SiteFileError where no option is a plant.
    """
    trial = Trial(site, river, tuple(machines_to_try(site)))
    seasons = seasons_of(site, river)
    found = evaluated(trial, combinations_of(site, river.valid_discharge), done)
    options = tuple(each for each in found if isinstance(each, Option))
    refused = tuple(each for each in found if isinstance(each, Refused))
    if not options:
        raise SiteFileError([_nothing_left(site, refused)])
    wanted = options_of(site)
    found_economics = economics_of(site, options)
    limits = _limits(wanted)
    aims = [
        *energy_aims(wanted.wanted_capacity_factor),
        *money_aims(site),
    ]
    choices = tuple(choose(aim, options, limits) for aim in aims)
    capacity = np.array([option.installed_capacity for option in options])
    energy = np.array([option.mean_annual_energy for option in options])
    return PlantComparison(
        trial=trial,
        measured=records[0],
        reference=records[1],
        seasons=seasons,
        options=options,
        refused=refused,
        marginal=tuple(marginal_energy(options)),
        on_frontier=tuple(map(bool, frontier(capacity, energy))),
        economics=found_economics,
        choices=choices,
        other_prices=tuple(_other_prices(site, options, limits)),
        sizings=dict(_sizings(trial, options, choices, limits)),
        differences=_differences(wanted, seasons, options, limits),
        within_limits=tuple(map(limits.allow, options)),
        checks=tuple(_checks(records[0], options, refused, choices)),
    )


def _limits(wanted: Options) -> Limits:
    most = wanted.maximum_capacity
    return Limits(wanted.minimum_capacity_factor, None if most is None else most / W_PER_KW)


def _nothing_left(site: SiteDescription, refused: Sequence[Refused]) -> Fault:
    reasons = list(dict.fromkeys(each.reason for each in refused))
    more = f"; and {len(reasons) - 3} more reasons" if len(reasons) > 3 else ""
    return site.fault(
        ("options",),
        f"none of the {len(refused)} combinations is a plant ({'; '.join(reasons[:3])}{more}); "
        "list other sizes or types",
    )


# --- money ----------------------------------------------------------------------------------------

OTHER_PRICES = (0.8, 1.0, 1.2)  # times those of the site file, for the sensitivity of the ranking


def economics_of(
    site: SiteDescription, options: Sequence[Option], price: float = 1.0, capital: float = 1.0
) -> tuple[Economics, ...]:
    """What each option costs and earns; empty without costs in the site file.

    price, capital : factors on prices and on capital costs
    """
    found = []
    for option in options:
        known = cost_of(site, option.combination.pipe_diameter)
        if known is None:
            return ()
        cost, metres = known
        kwh = option.monthly_energy * WH_PER_MWH / W_PER_KW
        units = option.combination.unit_count
        scaled = cost.scaled(price, capital)
        found.append(economics(scaled, option.installed_capacity, units, metres, kwh))
    return tuple(found)


def money_aims(site: SiteDescription, price: float = 1.0, capital: float = 1.0) -> list[Aim]:
    """Aims that need costs, and where there is a price, income; none without costs."""

    def cheap(option: Option) -> float | None:
        (found,) = economics_of(site, [option], price, capital)
        return None if found.levelised_cost is None else -found.levelised_cost

    def profitable(option: Option) -> float | None:
        (found,) = economics_of(site, [option], price, capital)
        return found.net_present_value

    cost = site.model.cost
    if cost is None:
        return []
    aims = [Aim("lowest_levelised_cost", "the lowest levelised cost of energy", cheap)]
    if cost.energy_price is not None:
        aims.append(Aim("highest_net_present_value", "the highest net present value", profitable))
    return aims


def _other_prices(
    site: SiteDescription, options: Sequence[Option], limits: Limits
) -> Iterator[tuple[float, float, tuple[Choice, ...]]]:
    """The best by the aims of money, with other prices and capital costs."""
    if site.model.cost is None:
        return
    prices = OTHER_PRICES if site.model.cost.energy_price is not None else (1.0,)
    for price in prices:
        for capital in OTHER_PRICES:
            aims = money_aims(site, price, capital)
            yield price, capital, tuple(choose(aim, options, limits) for aim in aims)


# --- sizes and differences ------------------------------------------------------------------------

AGREES = 1e-3  # share by which a sweep over sizes may differ from options computed in full


def _sizings(
    trial: Trial, options: Sequence[Option], choices: Sequence[Choice], limits: Limits
) -> Iterator[tuple[str, Sizing]]:
    """The best size of what each aim chose, between the sizes listed and within the limits."""
    for choice in choices:
        chosen = choice.option
        if chosen is None:
            continue
        family = [option for option in options if option.family == chosen.family]
        sizes = sorted(option.combination.design_discharge for option in family)
        if len(sizes) > 1:
            like = _of_size(trial, chosen, family)
            yield choice.aim.name, best_size(partial(_worth, like, choice.aim, limits), sizes)


def _of_size(
    trial: Trial, chosen: Option, family: Sequence[Option]
) -> Callable[[float], Option | None]:
    """An option like `chosen` of any size: from a sweep where one holds, else computed in full."""
    sweep = _sweep(trial, chosen, family)

    def swept(size: float) -> Option | None:
        assert sweep is not None  # returned only where there is one
        energy = sweep.mean_annual_energy(size)
        return replace(
            chosen,
            combination=replace(chosen.combination, design_discharge=size),
            installed_capacity=sweep.installed_capacity(size),
            energy_by_month=chosen.energy_by_month * (energy / chosen.mean_annual_energy),
        )

    def computed(size: float) -> Option | None:
        tried = trial.option(0, replace(chosen.combination, design_discharge=size))
        return tried if isinstance(tried, Option) else None

    return computed if sweep is None else swept


def _sweep(trial: Trial, chosen: Option, family: Sequence[Option]) -> SizeSweep | None:
    """A sweep that agrees with every option of the family; None where there is none."""
    size = chosen.combination.design_discharge
    full = trial.estimate(chosen.combination)
    if not scales(full.scheme) or not chosen.mean_annual_energy > 0:
        return None
    sweep = SizeSweep(full, size)
    for option in family:
        found = sweep.mean_annual_energy(option.combination.design_discharge)
        if abs(found - option.mean_annual_energy) > AGREES * option.mean_annual_energy:
            return None
    return sweep


def _worth(
    of_size: Callable[[float], Option | None], aim: Aim, limits: Limits, size: float
) -> float | None:
    """What an option of some size is worth; None where there is none that keeps the limits."""
    option = of_size(size)
    return None if option is None or not limits.allow(option) else aim.worth(option)


def _differences(
    wanted: Options, seasons: Seasons, options: Sequence[Option], limits: Limits
) -> Differences | None:
    """Energy of the options that may be chosen, held against the best of them."""
    allowed = [option for option in options if limits.allow(option)]
    if len(allowed) < 2:
        return None
    doubt = wanted.machine_uncertainty
    error = MachineError(
        type_offset=doubt.type_offset,
        size_offset=doubt.size_offset,
        part_load_tilt=doubt.part_load_tilt,
    )
    candidates = [
        Candidate(
            option.number,
            option.mean_annual_energy,
            option.yearly_energy if seasons.years else np.empty(0),
            option.type,
            tuple((size.discharge, size.energy, size.part_load_energy) for size in option.sizes),
            option.combination.machine,
        )
        for option in allowed
    ]
    return differences(candidates, error)


# --- checks ---------------------------------------------------------------------------------------


def _checks(
    record: Record | None,
    options: Sequence[Option],
    refused: Sequence[Refused],
    choices: Sequence[Choice],
) -> Iterator[Check]:
    if record is not None:
        yield from record.receipt.checks
    yield warn_unless(
        "options_refused",
        not refused,
        len(refused),
        0,
        f"All {len(options)} combinations are plants.",
        f"{len(refused)} of {len(options) + len(refused)} combinations are no plants; they are "
        "listed with the reason.",
    )
    noted = sum(bool(option.notes) for option in options)
    yield warn_unless(
        "options_noted",
        not noted,
        noted,
        0,
        "No option is outside what is usual for its type and the water.",
        f"{noted} of {len(options)} options are outside what is usual; the page and "
        "options.csv say why. Look at the notes of an option before it is chosen.",
    )
    for choice in choices:
        yield warn_unless(
            "option_within_limits",
            choice.option is not None,
            None,
            None,
            f"An option for {choice.aim.words} keeps the limits.",
            f"No option for {choice.aim.words} keeps the limits; widen minimum_capacity_factor or "
            "maximum_capacity, or list other sizes.",
        )
