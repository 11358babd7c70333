"""What the terminal shows of a discharge record alone."""

from __future__ import annotations

from collections.abc import Iterator
from typing import TYPE_CHECKING

from hydroyield.jobs import GaugeRecord
from hydroyield.quantities import rounded
from hydroyield.report.record_result import RECORD_CAUTION
from hydroyield.report.record_words import Rows, receipt_rows, river_rows
from hydroyield.report.summary import checks_found, default_console, facts_table
from hydroyield.river.duration import usual_exceedances
from hydroyield.river.years import span

if TYPE_CHECKING:
    from rich.console import Console, RenderableType


def print_record_summary(gauge: GaugeRecord, console: Console | None = None) -> None:
    """Print the summary: in colour where a terminal is, plain where none is."""
    console = console or default_console()
    for part in record_summary(gauge):
        console.print(part)


def record_summary(gauge: GaugeRecord) -> Iterator[RenderableType]:
    """The parts of the summary. Text of the file is shown as it is, never as markup."""
    from rich.text import Text

    yield facts_table(receipt_rows(gauge.record))
    yield ""
    yield facts_table(_river(gauge))
    yield ""
    yield from checks_found(gauge.checks)
    yield ""
    yield Text(RECORD_CAUTION)


def _river(gauge: GaugeRecord) -> Rows:
    views = gauge.views
    found, years = usual_exceedances(views.valid), views.complete_years
    shown = ", ".join(f"Q{p} {rounded(found[p])}" for p in ("5", "30", "50", "70", "95"))
    spans = [span(year, views.start_month) for year in years]
    return [
        ("Mean discharge", f"{rounded(float(views.valid.mean()))} m3/s"),
        ("Exceeded", f"{shown} m3/s"),
        ("Complete years", f"{len(spans)}, {spans[0]} to {spans[-1]}" if spans else "none"),
        *river_rows(views),
    ]
