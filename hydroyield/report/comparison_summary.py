"""What the terminal shows of a comparison."""

from __future__ import annotations

from rich.table import Table
from rich.text import Text

from hydroyield.comparison.compared import PlantComparison
from hydroyield.quantities import rounded
from hydroyield.report.comparison_words import DIGITS, answer, choice_rows, marked, real_differences
from hydroyield.report.result import CAUTION
from hydroyield.report.summary import checks_found, default_console

MOST_ROWS = 15  # of the options with the most energy


def print_comparison(found: PlantComparison) -> None:
    """Print the best options: in colour where a terminal is, plain where none is."""
    console = default_console()
    console.print(Text(found.site.name, style="bold"))
    console.print(Text(answer(found)))
    console.print()
    console.print(_best(found))
    console.print()
    console.print(_most_energy(found))
    if not all(found.within_limits):
        console.print(Text("Options in brackets do not keep the limits."))
    if differences := real_differences(found):
        console.print()
        console.print(Text(differences))
    console.print()
    for part in checks_found(found.checks):
        console.print(part)
    console.print()
    console.print(Text(CAUTION))


def _best(found: PlantComparison) -> Table:
    table = Table(box=None, pad_edge=False, padding=(0, 2, 0, 0))
    for name in ("Best by", "Option", "Energy", "Factor", "Best size", "Within 1 %"):
        table.add_column(name)
    for row in choice_rows(found):
        table.add_row(*map(Text, row))
    return table


def _most_energy(found: PlantComparison) -> Table:
    """The options with the most energy; all where there are few. Brackets: outside the limits."""
    options = zip(found.options, found.within_limits, strict=True)
    most = sorted(options, key=lambda pair: -pair[0].mean_annual_energy)[:MOST_ROWS]
    table = Table(box=None, pad_edge=False, padding=(0, 2, 0, 0))
    table.add_column("Option", justify="right")
    table.add_column("Units")
    for name in ("m3/s", "kW", "MWh a year", "Factor"):
        table.add_column(name, justify="right")
    for option, within_limits in most:
        mix = option.combination
        table.add_row(
            marked(option.number, within_limits),
            mix.units(option.machine),
            rounded(mix.design_discharge),
            rounded(option.installed_capacity, DIGITS),
            rounded(option.mean_annual_energy, DIGITS),
            f"{100 * option.capacity_factor:.1f} %",
        )
    return table
