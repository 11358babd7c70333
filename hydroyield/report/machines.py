"""Which types of machine suit a site: as plain data, and for people."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import asdict
from typing import Any

from hydroyield.evidence.suitable import Suitability
from hydroyield.quantities import rounded
from hydroyield.report.result import CAUTION
from hydroyield.report.summary import default_console


def machines_facts(found: Sequence[Suitability]) -> dict[str, Any]:
    """Everything that `machines --json` prints."""
    return {"format": 1, "machines": [asdict(fit) for fit in found], "caution": CAUTION}


def print_machines(found: Sequence[Suitability]) -> None:
    """A table in the terminal, plain where none is."""
    from rich.table import Table
    from rich.text import Text

    console = default_console()
    table = Table(box=None, pad_edge=False, padding=(0, 2, 0, 0))
    for name, justify in (("Type", "left"), ("Suits", "left"), ("MWh a year", "right")):
        table.add_column(name, justify=justify, no_wrap=True)  # type: ignore[arg-type]
    table.add_column("Why")
    for fit in found:
        energy = "" if fit.energy_mwh is None else rounded(fit.energy_mwh)
        suits = Text("yes", style="green") if fit.suits else Text("no", style="yellow")
        table.add_row(fit.type, suits, energy, Text(fit.reason))
    console.print(table)
    console.print(
        Text(
            "\nEnergy with typical curves (common practice), sizes and count as in the site file. "
            "Head ranges are advisory. " + CAUTION
        )
    )
