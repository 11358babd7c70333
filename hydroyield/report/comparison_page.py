"""The page of a comparison of plant options."""

from __future__ import annotations

import datetime
from collections.abc import Iterator, Sequence
from itertools import groupby
from typing import Any

import numpy as np

import hydroyield
from hydroyield.comparison.compared import PlantComparison
from hydroyield.options.differences import in_words
from hydroyield.options.option import Option
from hydroyield.quantities import rounded
from hydroyield.report import words
from hydroyield.report.comparison_words import (
    DIGITS,
    answer,
    choice_rows,
    option_name,
    season_rows,
)
from hydroyield.report.drawn import DrawnFigure, rendered
from hydroyield.report.figures.options import ChosenPower, Family, OptionFacts
from hydroyield.report.option_tables import comparison_result, option_row
from hydroyield.report.result import CAUTION
from hydroyield.site.option_assembly import options_of
from hydroyield.site.option_writing import turbines_text

MOST_ROWS = 400  # of the table on the page; options.csv has them all

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
        "real": "" if found.differences is None else in_words(found.differences),
        "warnings": [(check.outcome, check.message) for check in found.warnings()],
        "passed": [check.message for check in found.checks if check.outcome == "pass"],
        "other_readings": [],
        "differences": list(_difference_rows(found)),
        "figures": figures,
        "columns": _columns(found),
        "rows": [_row(found, index) for index in range(min(len(found.options), MOST_ROWS))],
        "more_rows": max(0, len(found.options) - MOST_ROWS),
        "refused": [
            (
                str(each.number),
                f"{each.type} {each.combination.split_text}",
                words.discharge(each.combination.design_discharge),
                each.reason,
            )
            for each in found.refused
        ],
        "seasons": list(season_rows(found)),
        "sensitivity": list(_sensitivity(found)),
        "currency": found.site.model.cost.currency if found.site.model.cost else "",
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


# --- tables ---------------------------------------------------------------------------------------


def _columns(found: PlantComparison) -> list[str]:
    money = [f"Cost of a kWh, {found.site.model.cost.currency}"] if found.site.model.cost else []
    if found.economics and found.economics[0].net_present_value is not None:
        money += ["Net present value", "Rate of return", "Payback, years"]
    pipe = ["Pipe, m"] if options_of(found.site).pipe_diameters else []
    return [
        "Units", "Together, m3/s", *pipe, "Capacity, kW", "MWh a year", "Capacity factor",
        "Full-load hours", "Water used", "Driest quarter", "Wettest quarter", "Standing, h",
        "Dry year", "Median year", "Wet year", "kWh of a further kW", *money, "Note",
    ]  # fmt: skip


def _row(found: PlantComparison, index: int) -> dict[str, Any]:
    option = found.options[index]
    facts = comparison_row(found, index)
    return {
        "number": option.number,
        "on_frontier": found.on_frontier[index],
        "cells": facts,
        "note": "; ".join(option.notes),
    }


def comparison_row(found: PlantComparison, index: int) -> list[str]:
    """The cells of an option, as the columns say."""
    row, option = option_row(found, index), found.options[index]
    cells = [f"{option.type} {row['split']}", rounded(row["design_discharge_m3s"])]
    if options_of(found.site).pipe_diameters:
        cells.append(f"{row['pipe_diameter_m']:g}")
    cells += [
        _number(row["installed_capacity_kw"], DIGITS),
        _number(row["mean_annual_energy_mwh"], DIGITS),
        f"{100 * row['capacity_factor']:.1f} %",
        f"{row['full_load_hours']:.0f}",
        f"{100 * row['used_share']:.0f} %",
        _number(row["driest_quarter_energy_mwh"]),
        _number(row["wettest_quarter_energy_mwh"]),
        f"{row['standing_hours']:.0f}",
        _number(row["dry_year_energy_mwh"], DIGITS),
        _number(row["median_year_energy_mwh"], DIGITS),
        _number(row["wet_year_energy_mwh"], DIGITS),
        _number(row["marginal_energy_kwh_per_kw"]),
    ]
    if found.economics:
        cells.append(_number(row["levelised_cost_per_kwh"]))
        if found.economics[0].net_present_value is not None:
            rate = row["internal_rate_of_return_share"]
            cells += [
                _number(row["net_present_value"], DIGITS),
                "" if rate is None else f"{100 * rate:.1f} %",
                _number(row["simple_payback_years"]),
            ]
    return cells


def _number(value: float | None, digits: int = 3) -> str:
    return "" if value is None else rounded(value, digits)


def _difference_rows(found: PlantComparison) -> Iterator[tuple[str, ...]]:
    """Differences among the options with the most energy."""
    for each in found.differences.pairs if found.differences is not None else ():
        yield (
            f"{each.first} less {each.second}",
            rounded(each.mean),
            rounded(each.standard_error),
            "yes" if each.real else "no",
        )


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
            type=rising[0].type,
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
