"""The page of a discharge record alone: what to see before anything else."""

from __future__ import annotations

import datetime
from collections.abc import Sequence
from typing import Any

import hydroyield
from hydroyield.jobs import GaugeRecord
from hydroyield.quantities import rounded
from hydroyield.report.drawn import DrawnFigure, rendered
from hydroyield.report.record_result import RECORD_CAUTION, digests
from hydroyield.report.record_words import Rows, receipt_rows, river_rows, year_rows
from hydroyield.river.duration import usual_characteristic, usual_exceedances

METHODS = (
    (
        "Daily means",
        "A daily value belongs to its printed date. Finer values are joined by straight lines in "
        "time, gaps up to three usual steps are bridged, and a day counts when 90 % of it is "
        "covered.",
    ),
    (
        "Duration curves",
        "All valid days; plotting positions m/(N+1) (Weibull), linear between ranks. Curves of "
        "single years give the bands (Vogel and Fennessey 1994).",
    ),
    (
        "Low flow",
        "Smallest mean of seven days in each year, the years beginning with the wettest month so "
        "that no dry season is cut in two.",
    ),
    (
        "Mass curve",
        "Cumulative volume less that of the mean flow; missing days count as mean. The range "
        "between its extreme tangents is the storage that would fully even the flow out (Rippl "
        "1883).",
    ),
)


def record_page(gauge: GaugeRecord, figures: Sequence[DrawnFigure]) -> str:
    """The page as HTML, self-contained; all text of the file is escaped."""
    return rendered("record.html.j2", record_page_data(gauge, figures))


def record_page_data(gauge: GaugeRecord, figures: Sequence[DrawnFigure]) -> dict[str, Any]:
    """Everything that the page shows, as plain data."""
    views, receipt = gauge.views, gauge.record.receipt
    warnings = gauge.warnings()
    return {
        "name": receipt.station or receipt.file.rpartition("/")[2],
        "answer": _answer(gauge),
        "headline": _headline(gauge),
        "caution": RECORD_CAUTION,
        "warnings": [(check.outcome, check.message) for check in warnings],
        "passed": [check.message for check in gauge.checks if check.outcome == "pass"],
        "other_readings": [],
        "basis": receipt_rows(gauge.record),
        "figures": figures,
        "river": {
            "mean": f"{rounded(float(views.valid.mean()))} m3/s",
            "kept": "",
            "exceeded": [(p, rounded(q)) for p, q in usual_exceedances(views.valid).items()],
            "characteristic": [
                (days, rounded(q)) for days, q in usual_characteristic(views.valid).items()
            ],
        },
        "river_years": year_rows(views),
        "river_facts": river_rows(views),
        "methods": METHODS,
        "provenance": [
            ("Computed by", f"hydroyield {hydroyield.__version__}"),
            ("Computed on", datetime.date.today().isoformat()),
            *(
                (f"SHA-256 of {name.rpartition('/')[2]}", digest)
                for name, digest in digests(receipt).items()
            ),
        ],
    }


def _answer(gauge: GaugeRecord) -> str:
    receipt, views = gauge.record.receipt, gauge.views
    years = len(views.complete_years)
    return (
        f"{receipt.days} days with a value from {receipt.first} to {receipt.last}, "
        f"{receipt.missing_days} days missing; {years} complete "
        f"{'year' if years == 1 else 'years'}."
    )


def _headline(gauge: GaugeRecord) -> Rows:
    valid = gauge.views.valid
    found = usual_exceedances(valid)
    return [
        ("Mean discharge", f"{rounded(float(valid.mean()))} m3/s", "all valid days"),
        ("Q50", f"{rounded(found['50'])} m3/s", "exceeded half of the time"),
        ("Q95", f"{rounded(found['95'])} m3/s", "exceeded 95 % of the time"),
        ("Complete years", str(len(gauge.views.complete_years)), "enough days in every month"),
    ]
