"""Tables of all options on the page: size and energy, seasons, money, and what to note."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Iterator, Sequence
from dataclasses import dataclass
from typing import Any

from hydroyield.comparison.compared import PlantComparison
from hydroyield.quantities import rounded
from hydroyield.report import words
from hydroyield.report.comparison_words import DIGITS, marked
from hydroyield.report.option_tables import option_row
from hydroyield.site.option_assembly import options_of

MOST_ROWS = 400  # of a table on the page; options.csv has them all

Row = dict[str, Any]
Column = tuple[str, Callable[[Row], str]]


@dataclass(frozen=True)
class PageTable:
    """A table with a row for each option.

    title : above it
    columns : headings, without that of the number
    rows : (number, with an asterisk on the frontier, in brackets outside the limits; cells)
    """

    title: str
    columns: list[str]
    rows: list[tuple[str, list[str]]]


def page_tables(found: PlantComparison) -> list[PageTable]:
    """The tables of the page; narrow enough to be printed."""
    rows = [
        option_row(found, index) | {"units": option.combination.units(option.machine)}
        for index, option in enumerate(found.options[:MOST_ROWS])
    ]
    units: Column = ("Units", lambda row: str(row["units"]))
    tables = [
        _table("Size and energy", [units, *_size(found)], rows),
        _table("Energy of seasons and years, MWh", [units, *SEASONS], rows),
    ]
    if found.economics:
        tables.append(_table("Money", [units, *_money(found)], rows))
    return tables


def _table(title: str, columns: Sequence[Column], rows: Sequence[Row]) -> PageTable:
    cells = [[text(row) for _, text in columns] for row in rows]
    numbers = [
        marked(row["option"], bool(row["within_limits"])) + ("*" if row["on_frontier"] else "")
        for row in rows
    ]
    return PageTable(title, [name for name, _ in columns], list(zip(numbers, cells, strict=True)))


def _size(found: PlantComparison) -> Iterator[Column]:
    yield "Together, m3/s", _plain("design_discharge_m3s")
    if options_of(found.site).pipe_diameters:
        yield "Pipe, m", lambda row: f"{row['pipe_diameter_m']:g}"
    yield "Rated head, m", _plain("rated_head_m")
    yield "Capacity, kW", _plain("installed_capacity_kw", DIGITS)
    yield "MWh a year", _plain("mean_annual_energy_mwh", DIGITS)
    yield "Capacity factor", _percent("capacity_factor", 1)
    yield "Full-load hours", lambda row: f"{row['full_load_hours']:.0f}"
    yield "Water used", _percent("used_share", 0)
    yield "kWh of a further kW", _plain("marginal_energy_kwh_per_kw")


def _money(found: PlantComparison) -> Iterator[Column]:
    cost = found.site.model.cost
    assert cost is not None  # there are no economics without
    yield f"Capital, {cost.currency}", _plain("capital_cost")
    yield "Cost of a kWh", _plain("levelised_cost_per_kwh")
    if cost.energy_price is not None:
        yield "Net present value", _plain("net_present_value")
        yield "Rate of return", _percent("internal_rate_of_return_share", 1)
        yield "Payback, years", _plain("simple_payback_years")


def _plain(key: str, digits: int = 3) -> Callable[[Row], str]:
    def text(row: Row) -> str:
        value = row[key]
        return "" if value is None else rounded(value, digits)

    return text


def _percent(key: str, digits: int) -> Callable[[Row], str]:
    return lambda row: "" if row[key] is None else f"{100 * row[key]:.{digits}f} %"


SEASONS: tuple[Column, ...] = (
    ("Driest quarter", _plain("driest_quarter_energy_mwh")),
    ("Wettest quarter", _plain("wettest_quarter_energy_mwh")),
    ("Dry year", _plain("dry_year_energy_mwh", DIGITS)),
    ("Median year", _plain("median_year_energy_mwh", DIGITS)),
    ("Wet year", _plain("wet_year_energy_mwh", DIGITS)),
    ("Standing, h a year", lambda row: f"{row['standing_hours']:.0f}"),
)


def cost_rows(found: PlantComparison) -> Iterator[tuple[str, str]]:
    """Costs and prices as the site file states them; none without."""
    cost = found.site.model.cost
    if cost is None:
        return
    capital = [
        (cost.fixed, "for every option"),
        (cost.per_kw, "for a kW"),
        (cost.per_unit, "for a unit"),
    ]
    parts = [f"{_money_text(value)} {of_what}" for value, of_what in capital if value]
    if isinstance(cost.per_pipe_metre, tuple):
        pairs = [f"{_money_text(each)} at {bore:g} m" for bore, each in cost.per_pipe_metre]
        parts.append(f"for a metre of pipe {', '.join(pairs)}")
    elif cost.per_pipe_metre:
        parts.append(f"{_money_text(cost.per_pipe_metre)} for a metre of pipe")
    yield f"Capital, {cost.currency}", "; ".join(parts)
    yearly = [_money_text(cost.yearly)] if cost.yearly or not cost.yearly_share else []
    if cost.yearly_share:
        yearly.append(f"{100 * cost.yearly_share:g} % of the capital")
    yield f"Operation a year, {cost.currency}", " and ".join(yearly)
    yield "Price of a kWh", _price(cost.energy_price)
    yield "Years counted", f"{cost.life}, at a discount rate of {100 * cost.discount_rate:g} %"
    yield "Grant", f"{100 * cost.grant_share:g} % of the capital" if cost.grant_share else "none"
    if found.site.model.operation.degradation:
        share = 100 * found.site.model.operation.degradation
        yield "Ageing", f"{share:g} % less energy each year"
    yield "Source", cost.source or "none stated; the values count as assumptions"


def _money_text(value: float) -> str:
    """An amount as the user wrote it, thousands set apart."""
    return f"{value:,.12g}".replace(",", "\u202f")


def _price(prices: tuple[float, ...] | None) -> str:
    """One price, or each with its months."""
    if prices is None:
        return "none stated, so nothing is said of income"
    months: dict[float, list[int]] = {}
    for month, price in enumerate(prices, 1):
        months.setdefault(price, []).append(month)
    if len(months) == 1:
        return f"{prices[0]:g}"
    return "; ".join(f"{price:g} in {words.months(tuple(of))}" for price, of in months.items())


def notes(found: PlantComparison) -> list[tuple[str, str]]:
    """(numbers of the options, what speaks against them), each reason once."""
    return _by_reason((note, option.number) for option in found.options for note in option.notes)


def refused(found: PlantComparison) -> list[tuple[str, str]]:
    """(numbers and names of the combinations that are no plants, why), each reason once."""
    return _by_reason(
        (
            each.reason,
            f"{each.number} ({each.combination.units(each.machine)}, "
            f"{words.discharge(each.combination.design_discharge)})",
        )
        for each in found.refused
    )


def _by_reason(found: Iterable[tuple[str, object]]) -> list[tuple[str, str]]:
    reasons: dict[str, list[str]] = {}
    for reason, of in found:
        reasons.setdefault(reason, []).append(str(of))
    return [(", ".join(those), reason) for reason, those in reasons.items()]


def difference_rows(found: PlantComparison) -> list[tuple[str, ...]]:
    """(options, difference, its standard error, whether it is real) among those of most energy."""
    pairs = found.differences.pairs if found.differences is not None else ()
    return [
        (
            f"{each.first} less {each.second}",
            rounded(each.mean),
            rounded(each.standard_error),
            "yes" if each.real else "no",
        )
        for each in pairs
    ]
