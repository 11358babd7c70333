"""What the terminal shows: the answer, what it rests on, and what to look at."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Sequence
from typing import TYPE_CHECKING

from hydroyield.checks import Check
from hydroyield.jobs import SiteEstimate, not_passed
from hydroyield.quantities import rounded
from hydroyield.report import words
from hydroyield.report.result import CAUTION
from hydroyield.river.years import MONTH_NAMES, months_in_order

if TYPE_CHECKING:
    from rich.console import Console, RenderableType
    from rich.table import Table

WIDTH_WITHOUT_TERMINAL = 100  # columns
UNSEEN = 1e-9  # share of the gross energy, rounding alone
STYLE_OF_OUTCOME = {"warn": "yellow", "fail": "bold red"}

LEDGER_NAMES = {
    "gross": "all the water, at the reference head",
    "reserved": "stays in the river or is taken by others",
    "shutdown": "offered while shut down for high discharge",
    "no_admissible_head": "offered without enough head",
    "above_full_discharge": "above what all units can pass",
    "capacity_limit": "cannot be used at full capacity",
    "below_minimum_or_unused": "below the minimum discharge, or unused",
    "outage": "units out of service",
    "levels": "head that differs from the reference head",
    "waterway": "losses of the waterway",
    "turbine": "losses of the turbines",
    "drive_and_generator": "losses of drive and generator",
    "transformer": "losses of the transformer",
    "own_use": "own use",
    "export_limit": "above the export limit",
    "imports": "taken from the grid while standing",
    "net": "delivered",
}


def print_summary(estimate: SiteEstimate, console: Console | None = None) -> None:
    """Print the summary: in colour where a terminal is, plain where none is."""
    console = console or default_console()
    for part in summary(estimate):
        console.print(part)


def default_console() -> Console:
    """A console that is as wide as the terminal, and of a fixed width where none is."""
    from rich.console import Console

    console = Console(highlight=False)
    return (
        console if console.is_terminal else Console(highlight=False, width=WIDTH_WITHOUT_TERMINAL)
    )


def summary(estimate: SiteEstimate) -> Iterator[RenderableType]:
    """The parts of the summary. User text is shown as it is, never as markup."""
    from rich.text import Text

    yield Text(estimate.site.name, style="bold")
    yield facts_table(_facts(estimate))
    yield ""
    if estimate.has_years:
        yield _months(estimate)
        yield ""
    yield Text(
        "From gross to net, MWh a year; water valued at a head of "
        + words.head(estimate.reference_head_m),
        style="bold",
    )
    yield _ledger(estimate)
    yield ""
    yield from checks_found(estimate.checks)
    yield ""
    yield Text(CAUTION)


def facts_table(rows: Iterable[tuple[str, ...]]) -> Table:
    """(what, value) in two columns."""
    table = _plain_table("bold", "")
    for name, value in rows:
        table.add_row(name, _text(value))
    return table


def _facts(estimate: SiteEstimate) -> Iterator[tuple[str, str]]:
    units = " + ".join(f"{g.count} x {g.type}" for g in estimate.scheme.plant.groups)
    yield "Mean annual energy", words.energy(estimate.mean_annual_energy_mwh)
    if words.filled(estimate):
        yield "", words.filled(estimate)
    if words.gain(estimate):
        yield "Gain", words.gain(estimate)
    if words.metered(estimate):
        yield "Metered", words.metered(estimate)
    if words.ageing(estimate):
        yield "As it ages", words.ageing(estimate)
    yield "Capacity factor", words.percent(estimate.capacity_factor)
    yield "Installed capacity", f"{rounded(estimate.installed_capacity_kw)} kW, {units}"
    yield "Most delivered", f"{rounded(estimate.maximum_net_power_kw)} kW"
    if estimate.has_years:
        yield from _years(estimate)
    yield "Record", _record(estimate)
    q = estimate.exceedance_discharge_m3s
    mean = float(estimate.scheme.valid_discharge.mean())
    yield (
        "River at the site",
        f"mean {words.discharge(mean)}, Q50 {words.discharge(q['50'])}, "
        f"Q95 {words.discharge(q['95'])}",
    )
    yield "Kept in the river", f"{words.discharge(estimate.environmental_flow_mean_m3s)} on average"


def _years(estimate: SiteEstimate) -> Iterator[tuple[str, str]]:
    ranked, out = words.ranked_years(estimate), len(estimate.years_left_out)
    (driest, least), (wettest, most) = ranked[0], ranked[-1]
    first, last = (words.year_name(estimate, estimate.years_used[i]) for i in (0, -1))
    left_out = f"; {out} left out" if out else ""
    yield "Years", f"{len(estimate.years_used)} used, {first} to {last}{left_out}"
    yield (
        "Driest and wettest",
        f"{words.energy(least)} ({words.year_name(estimate, driest)}), "
        f"{words.energy(most)} ({words.year_name(estimate, wettest)})",
    )


def _record(estimate: SiteEstimate) -> str:
    record = estimate.record
    if record is None:
        return "none: a duration table, so no energy by year and month"
    days = f"{record.first} to {record.last}, {record.missing_days} days missing"
    return f"{record.file}, {days}"


def _text(value: str) -> RenderableType:
    from rich.text import Text

    return Text(value, overflow="fold")


def _plain_table(*styles: str) -> Table:
    from rich.table import Table

    table = Table(box=None, show_header=False, pad_edge=False, padding=(0, 2, 0, 0))
    for style in styles:
        table.add_column(style=style)
    return table


def _months(estimate: SiteEstimate) -> Table:
    from rich.table import Table

    means = estimate.monthly_energy_mwh
    order = [month - 1 for month in months_in_order(estimate.scheme.year_start_month)]
    table = Table(
        title="Energy by month, MWh", title_justify="left", title_style="bold",
        box=None, pad_edge=False, padding=(0, 1, 0, 0),
    )  # fmt: skip
    for month in order:
        table.add_column(MONTH_NAMES[month][:3], justify="right", no_wrap=True)
    table.add_row(*(rounded(means[month]) for month in order))
    return table


def _ledger(estimate: SiteEstimate) -> Table:
    table = _plain_table("")
    for _ in range(2):
        table.add_column(justify="right", no_wrap=True)
    rows = estimate.ledger_mwh
    gross = rows[0][1]
    for step, mwh in rows:
        total = step in ("gross", "net")
        if abs(mwh) > UNSEEN * gross or total:
            sign = "" if total else ("+" if mwh > 0 else "-")
            share = f"{100 * mwh / gross:.1f} %" if gross else ""
            style = "bold" if total else ""
            table.add_row(LEDGER_NAMES[step], sign + rounded(abs(mwh)), share, style=style)
    return table


def checks_found(checks: Sequence[Check]) -> Iterator[RenderableType]:
    """How many checks passed, and those that did not."""
    from rich.text import Text

    found = not_passed(checks)
    yield Text(f"Checks: {len(checks) - len(found)} passed, {len(found)} to look at", style="bold")
    table = _plain_table("", "")
    for check in found:
        outcome = Text(check.outcome, style=STYLE_OF_OUTCOME[check.outcome])
        table.add_row(outcome, _text(check.message))
    if found:
        yield table
