"""The page of a comparison of plant options."""

from __future__ import annotations

import datetime
from collections.abc import Iterator, Sequence
from itertools import groupby
from typing import Any

import numpy as np

import hydroyield
from hydroyield.comparison.compared import PlantComparison
from hydroyield.options.option import Option
from hydroyield.report.comparison_tables import (
    MOST_ROWS,
    cost_rows,
    difference_rows,
    notes,
    page_tables,
    refused,
)
from hydroyield.report.comparison_words import (
    answer,
    choice_rows,
    option_name,
    real_differences,
    season_rows,
)
from hydroyield.report.drawn import DrawnFigure, rendered
from hydroyield.report.figures.options import ChosenPower, Family, OptionFacts
from hydroyield.report.option_tables import comparison_result
from hydroyield.report.result import CAUTION
from hydroyield.site.option_assembly import options_of
from hydroyield.site.option_writing import turbines_text

METHODS = (
    (
        "Options",
        "Every combination of the machines, splits, design discharges and pipes that the site file "
        "lists, each computed as fully as an estimate: dispatch of the units, losses, outages, "
        "environmental flow. Rated head and capacity follow from the design discharge of each.",
    ),
    (
        "Energy of a further kW",
        "Energy less that of the next smaller option of the same machine, split and pipe, over the "
        "capacity between them.",
    ),
    (
        "Best size",
        "A bounded search (Brent 1973) between the sizes listed, and the range around it that "
        "gives 99 % of the best.",
    ),
    (
        "Differences",
        "Options share the years of the record, so energies are compared year by year, with "
        "Student's t and the years' autocorrelation. Machines differ from their curves by an "
        "offset of their type, one of their size, and a tilt towards part load. As the best of "
        "many is compared with all, the bound holds for all comparisons together.",
    ),
    (
        "Money",
        "Only from the costs and prices of the site file. Levelised cost by discounted costs over "
        "discounted energy (Short, Packey and Holt 1995), without the grant; net present value, "
        "internal rate of return and payback of what the owner pays.",
    ),
)


def comparison_page(found: PlantComparison, figures: Sequence[DrawnFigure]) -> str:
    """The page as HTML, self-contained; all text of the user is escaped."""
    return rendered("comparison.html.j2", comparison_page_data(found, figures))


def comparison_page_data(found: PlantComparison, figures: Sequence[DrawnFigure]) -> dict[str, Any]:
    """Everything that the page shows, as plain data."""
    methods = [entry for entry in METHODS if entry[0] != "Money" or found.economics]
    return {
        "name": found.site.name,
        "answer": answer(found),
        "caution": CAUTION,
        "choices": choice_rows(found),
        "real": real_differences(found),
        "warnings": [(check.outcome, check.message) for check in found.warnings()],
        "passed": [check.message for check in found.checks if check.outcome == "pass"],
        "other_readings": [],
        "differences": difference_rows(found),
        "figures": figures,
        "tables": page_tables(found),
        "limited": not all(found.within_limits),
        "more_rows": max(0, len(found.options) - MOST_ROWS),
        "costs": list(cost_rows(found)),
        "notes": notes(found),
        "refused": refused(found),
        "seasons": list(season_rows(found)),
        "sensitivity": list(_sensitivity(found)),
        "blocks": [
            (option_name(option), _block(found, option), f"--write {option.number}")
            for option in chosen_options(found)
        ],
        "site_file": found.site.path.name,
        "methods": methods,
        "provenance": [
            ("Computed by", f"hydroyield {hydroyield.__version__}"),
            ("Computed on", datetime.date.today().isoformat()),
            *(
                (f"SHA-256 of {name.rpartition('/')[2]}", digest)
                for name, digest in comparison_result(found)["provenance"]["sha256"].items()
            ),
        ],
    }


def chosen_options(found: PlantComparison) -> list[Option]:
    """The best by each aim, each once."""
    chosen = [choice.option for choice in found.choices if choice.option is not None]
    return list({option.number: option for option in chosen}.values())


def _block(found: PlantComparison, option: Option) -> str:
    return turbines_text(found.trial.turbines(option.combination))


def _sensitivity(
    found: PlantComparison,
) -> Iterator[tuple[str, str, list[tuple[str, str]]]]:
    """The best option by the aims of money, with other prices and capital costs."""
    for price, capital, choices in found.other_prices:
        best = [
            (choice.aim.words, "none" if choice.option is None else str(choice.option.number))
            for choice in choices
        ]
        yield f"{100 * price:.0f} %", f"{100 * capital:.0f} %", best


# --- figures --------------------------------------------------------------------------------------


def option_facts(found: PlantComparison) -> OptionFacts:
    """What the figures show."""
    marginal = dict(zip((o.number for o in found.options), found.marginal, strict=True))
    on = zip(found.options, found.on_frontier, strict=True)
    return OptionFacts(
        families=tuple(_families(found.options, marginal)),
        on_frontier=frozenset(option.number for option, beaten_by_none in on if beaten_by_none),
        wanted=options_of(found.site).wanted_capacity_factor,
        chosen=tuple(_power(found, option) for option in chosen_options(found)),
    )


def _families(options: Sequence[Option], marginal: dict[int, float | None]) -> Iterator[Family]:
    def name(option: Option) -> tuple[Any, ...]:
        return tuple(map(str, option.family))

    for _, members in groupby(sorted(options, key=name), key=name):
        rising = sorted(members, key=lambda option: option.installed_capacity)
        first = rising[0].combination
        known = [marginal[option.number] for option in rising]
        yield Family(
            type=rising[0].machine,
            split=first.split_text,
            count=first.unit_count,
            pipe="" if first.pipe_diameter is None else f", {first.pipe_diameter:g} m pipe",
            numbers=np.array([option.number for option in rising]),
            capacity=np.array([option.installed_capacity for option in rising]),
            energy=np.array([option.mean_annual_energy for option in rising]),
            factor=np.array([option.capacity_factor for option in rising]),
            marginal=np.array([np.nan if value is None else value for value in known]),
        )


def _power(found: PlantComparison, option: Option) -> ChosenPower:
    curve = found.trial.estimate(option.combination).power_duration().to_numpy()
    return ChosenPower(f"option {option.number}", curve[:, 0], curve[:, 1])
