"""Options as tables and as the text of `result.json`: one row an option."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import asdict
from typing import TYPE_CHECKING, Any

import numpy as np

import hydroyield
from hydroyield.comparison.compared import PlantComparison
from hydroyield.options.differences import Difference, Differences
from hydroyield.options.option import Option
from hydroyield.options.ranking import Choice
from hydroyield.report.record_result import digests
from hydroyield.report.result import CAUTION, FORMAT
from hydroyield.river.years import MONTH_NAMES

if TYPE_CHECKING:
    import pandas as pd


def option_rows(found: PlantComparison) -> list[dict[str, Any]]:
    """One row of numbers for each option; None where a number cannot be."""
    return [option_row(found, index) for index in range(len(found.options))]


def option_row(found: PlantComparison, index: int) -> dict[str, Any]:
    """The numbers of one option, by its place in the list."""
    option = found.options[index]
    row = _row(found, option)
    row["marginal_energy_kwh_per_kw"] = found.marginal[index]
    row["on_frontier"] = int(found.on_frontier[index])
    row["within_limits"] = int(found.within_limits[index])
    if found.economics:
        row |= _money(found, index)
    row["notes"] = "; ".join(option.notes)
    return row


def _row(found: PlantComparison, option: Option) -> dict[str, Any]:
    mix, seasons = option.combination, found.seasons
    yearly, monthly = option.yearly_energy, option.monthly_energy
    has_years = bool(seasons.years)

    def quarter(months: Sequence[int]) -> float | None:
        return float(sum(monthly[month - 1] for month in months)) if has_years else None

    def year(index: int) -> float | None:
        return float(yearly[index]) if has_years else None

    return {
        "option": option.number,
        "unit_count": mix.unit_count,
        "split": mix.split_text,
        "type": option.type,
        "machine": option.machine,
        "unit_discharge_m3s": mix.largest_unit,
        "design_discharge_m3s": mix.design_discharge,
        "pipe_diameter_m": mix.pipe_diameter,
        "rated_head_m": option.rated_head,
        "installed_capacity_kw": option.installed_capacity,
        "mean_annual_energy_mwh": option.mean_annual_energy,
        "capacity_factor": option.capacity_factor,
        "full_load_hours": option.full_load_hours,
        "used_share": option.used_share,
        "standing_hours": option.standing_hours,
        "driest_quarter_energy_mwh": quarter(seasons.driest_quarter),
        "wettest_quarter_energy_mwh": quarter(seasons.wettest_quarter),
        "dry_year_energy_mwh": year(seasons.dry),
        "median_year_energy_mwh": year(seasons.median),
        "wet_year_energy_mwh": year(seasons.wet),
    }


def _money(found: PlantComparison, index: int) -> dict[str, Any]:
    money = found.economics[index]
    return {
        "capital_cost": money.capital,
        "levelised_cost_per_kwh": money.levelised_cost,
        "net_present_value": money.net_present_value,
        "internal_rate_of_return_share": money.internal_rate_of_return,
        "simple_payback_years": money.simple_payback,
    }


def options_table(found: PlantComparison) -> pd.DataFrame:
    """The rows as a table."""
    import pandas as pd

    return pd.DataFrame(option_rows(found))


def refused_table(found: PlantComparison) -> pd.DataFrame:
    """Combinations that are no plants: `option`, what it would have been, and `reason`."""
    import pandas as pd

    columns = ["option", "unit_count", "split", "type", "machine", "design_discharge_m3s", "reason"]
    return pd.DataFrame(
        [
            (
                each.number,
                each.combination.unit_count,
                each.combination.split_text,
                each.type,
                each.machine,
                each.combination.design_discharge,
                each.reason,
            )
            for each in found.refused
        ],
        columns=columns,
    )


def comparison_result(found: PlantComparison) -> dict[str, Any]:
    """Everything that `result.json` holds of a comparison."""
    site, seasons = found.site, found.seasons
    return {
        "format": FORMAT,
        "site": {"name": site.name},
        "options": option_rows(found),
        "refused": refused_table(found).to_dict("records"),
        "years_used": list(seasons.years),
        "dry_year": _year(found, seasons.dry),
        "median_year": _year(found, seasons.median),
        "wet_year": _year(found, seasons.wet),
        "driest_quarter": [MONTH_NAMES[month - 1] for month in seasons.driest_quarter],
        "wettest_quarter": [MONTH_NAMES[month - 1] for month in seasons.wettest_quarter],
        "best": [
            {
                "aim": choice.aim.name,
                "option": _number(choice),
                "sizing": _sizing(found, choice.aim.name),
            }
            for choice in found.choices
        ],
        "other_prices": [
            {
                "price_factor": price,
                "capital_factor": capital,
                "best": [{"aim": choice.aim.name, "option": _number(choice)} for choice in choices],
            }
            for price, capital, choices in found.other_prices
        ],
        "differences": None if found.differences is None else _differences(found.differences),
        "checks": [asdict(check) for check in found.checks],
        "caution": CAUTION,
        "provenance": {
            "version": hydroyield.__version__,
            "sha256": {
                site.path.name: site.sha256,
                **(digests(found.measured.receipt) if found.measured else {}),
                **(digests(found.reference.receipt) if found.reference else {}),
            },
            "seed": None if found.differences is None else found.differences.seed,
        },
    }


def _number(choice: Choice) -> int | None:
    return None if choice.option is None else choice.option.number


def _year(found: PlantComparison, index: int) -> str | None:
    return found.seasons.years[index] if found.seasons.years else None


def _sizing(found: PlantComparison, aim: str) -> dict[str, Any] | None:
    sizing = found.sizings.get(aim)
    if sizing is None:
        return None
    return {
        "design_discharge_m3s": sizing.best,
        "within_one_percent_from_m3s": sizing.low,
        "within_one_percent_to_m3s": sizing.high,
        "at_end": sizing.at_end,
        "at_limit": sizing.at_limit,
    }


def _differences(found: Differences) -> dict[str, Any]:
    return {
        "best_option": found.best,
        "confidence_share": found.confidence,
        "critical_chance_share": found.critical_chance,
        "indistinguishable_options": list(found.indistinguishable),
        "against_best": [_difference(each) for each in found.against],
        "among_the_largest": [_difference(each) for each in found.pairs],
    }


def _difference(each: Difference) -> dict[str, Any]:
    return {
        "first_option": each.first,
        "second_option": each.second,
        "difference_mwh": each.mean,
        "year_error_mwh": each.year_error,
        "machine_error_mwh": each.machine_error,
        "standard_error_mwh": each.standard_error,
        "low_mwh": None if np.isinf(each.low) else each.low,
        "high_mwh": None if np.isinf(each.high) else each.high,
        "chance_share": each.chance,
        "real": each.real,
    }
