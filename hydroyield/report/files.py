"""The files of an estimate."""

from __future__ import annotations

import json
from collections.abc import Sequence
from pathlib import Path
from typing import TYPE_CHECKING, Any

from hydroyield.energy.standing import standing_table
from hydroyield.jobs import GaugeRecord, SiteEstimate
from hydroyield.report.progress import Steps
from hydroyield.report.record_result import gauge_result
from hydroyield.report.result import result
from hydroyield.report.river_tables import write_river_tables
from hydroyield.river.views import RiverViews

if TYPE_CHECKING:
    from hydroyield.report.drawn import DrawnFigure
    from hydroyield.report.figures import FigureSpec
    from hydroyield.report.figures.facts import Facts
    from hydroyield.report.figures.options import OptionFacts

RESULT, CURVES, POWER_DURATION = "result.json", "curves.csv", "power_duration.csv"
STANDING = "standing.csv"
PAGE, FIGURES_FOLDER = "report.html", "figures"


def result_text(estimate: SiteEstimate) -> str:
    """The result as the text of a JSON file."""
    return _json(result(estimate))


def _json(facts: dict[str, Any]) -> str:
    return json.dumps(facts, indent=2, allow_nan=False, ensure_ascii=False) + "\n"


def write_tables(estimate: SiteEstimate, folder: Path) -> None:
    """Write result.json and the tables into an existing folder."""
    (folder / RESULT).write_text(result_text(estimate), "utf-8")
    if estimate.views is not None:
        write_river_tables(estimate.views, folder)
        standing = standing_table(estimate)
        standing.to_csv(folder / STANDING, index=False, float_format="%.7g")
    # seven digits are more than any input has; the file stays readable
    estimate.curves().to_csv(folder / CURVES, index=False, float_format="%.7g")
    estimate.power_duration().to_csv(folder / POWER_DURATION, index=False, float_format="%.10g")


def write_page(estimate: SiteEstimate, folder: Path, steps: Steps) -> None:
    """Write the figures and the page into an existing folder."""
    from hydroyield.report.figures import figures_of
    from hydroyield.report.figures.facts import Facts
    from hydroyield.report.page import page

    facts = Facts(estimate)
    drawn = write_figures_of(figures_of(facts), facts, folder, steps)
    (folder / PAGE).write_text(page(estimate, drawn), "utf-8")


def write_figures_of(
    specs: Sequence[FigureSpec],
    facts: Facts | RiverViews | OptionFacts,
    folder: Path,
    steps: Steps,
) -> list[DrawnFigure]:
    """Write figures into the folder for them, and return them for a page."""
    from hydroyield.report.drawn import DrawnFigure
    from hydroyield.report.figures import figure_svg

    (folder / FIGURES_FOLDER).mkdir(exist_ok=True)
    drawn = []
    for spec in specs:
        svg = figure_svg(spec, facts)
        (folder / FIGURES_FOLDER / f"{spec.name}.svg").write_text(svg, "utf-8")
        drawn.append(DrawnFigure(spec.name, spec.title, spec.alt_text(facts), svg))
        steps.done(spec.title)
    return drawn


def record_result_text(gauge: GaugeRecord) -> str:
    """The result of a record alone as the text of a JSON file."""
    return _json(gauge_result(gauge))


def write_record_tables(gauge: GaugeRecord, folder: Path) -> None:
    """Write result.json and the tables of a record into an existing folder."""
    (folder / RESULT).write_text(record_result_text(gauge), "utf-8")
    write_river_tables(gauge.views, folder)


def write_record_page(gauge: GaugeRecord, folder: Path, steps: Steps) -> None:
    """Write the figures and the page of a record into an existing folder."""
    from hydroyield.report.figures import RECORD_FIGURES
    from hydroyield.report.record_page import record_page

    drawn = write_figures_of(RECORD_FIGURES, gauge.views, folder, steps)
    (folder / PAGE).write_text(record_page(gauge, drawn), "utf-8")


def figure_count(*, of_record: bool = False) -> int:
    """Steps that writing a page counts, at most."""
    from hydroyield.report.figures import FIGURES, RECORD_FIGURES

    return len(RECORD_FIGURES if of_record else FIGURES)
