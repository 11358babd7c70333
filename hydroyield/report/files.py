"""The files of an estimate."""

from __future__ import annotations

import json
from pathlib import Path

from hydroyield.jobs import SiteEstimate
from hydroyield.report.progress import Steps
from hydroyield.report.result import result

RESULT, CURVES, POWER_DURATION = "result.json", "curves.csv", "power_duration.csv"
PAGE, FIGURES_FOLDER = "report.html", "figures"


def result_text(estimate: SiteEstimate) -> str:
    """The result as the text of a JSON file."""
    return json.dumps(result(estimate), indent=2, allow_nan=False, ensure_ascii=False) + "\n"


def write_tables(estimate: SiteEstimate, folder: Path) -> None:
    """Write result.json and the tables into an existing folder."""
    (folder / RESULT).write_text(result_text(estimate), "utf-8")
    # seven digits are more than any input has; the file stays readable
    estimate.curves().to_csv(folder / CURVES, index=False, float_format="%.7g")
    estimate.power_duration().to_csv(folder / POWER_DURATION, index=False, float_format="%.10g")


def write_page(estimate: SiteEstimate, folder: Path, steps: Steps) -> None:
    """Write the figures and the page into an existing folder."""
    from hydroyield.report.figures import FIGURES, figure_svg
    from hydroyield.report.figures.facts import Facts
    from hydroyield.report.page import DrawnFigure, page

    facts, drawn = Facts(estimate), []
    (folder / FIGURES_FOLDER).mkdir()
    for spec in FIGURES:
        svg = figure_svg(spec, facts)
        (folder / FIGURES_FOLDER / f"{spec.name}.svg").write_text(svg, "utf-8")
        drawn.append(DrawnFigure(spec.name, spec.title, spec.alt_text(facts), svg))
        steps.done(spec.title)
    (folder / PAGE).write_text(page(estimate, drawn), "utf-8")


def steps_of_page() -> int:
    """Steps that `write_page` counts."""
    from hydroyield.report.figures import FIGURES

    return len(FIGURES)
