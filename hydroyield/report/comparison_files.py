"""The files of a comparison."""

from __future__ import annotations

import json
from pathlib import Path

from hydroyield.comparison.compared import PlantComparison
from hydroyield.report.files import PAGE, RESULT, write_figures_of
from hydroyield.report.option_tables import comparison_result, options_table, refused_table
from hydroyield.report.progress import Steps

OPTIONS, REFUSED = "options.csv", "refused.csv"


def comparison_text(found: PlantComparison) -> str:
    """The result as the text of a JSON file."""
    facts = comparison_result(found)
    return json.dumps(facts, indent=2, allow_nan=False, ensure_ascii=False) + "\n"


def write_comparison_tables(found: PlantComparison, folder: Path) -> None:
    """Write result.json and the tables into an existing folder."""
    (folder / RESULT).write_text(comparison_text(found), "utf-8")
    # ten digits: a row is held against the estimate of the same plant
    options_table(found).to_csv(folder / OPTIONS, index=False, float_format="%.10g")
    if found.refused:
        refused_table(found).to_csv(folder / REFUSED, index=False, float_format="%.10g")


def write_comparison_page(found: PlantComparison, folder: Path, steps: Steps) -> None:
    """Write the figures and the page into an existing folder."""
    from hydroyield.report.comparison_page import comparison_page, option_facts
    from hydroyield.report.figures import COMPARISON_FIGURES

    facts = option_facts(found)
    drawn = write_figures_of(COMPARISON_FIGURES, facts, folder, steps)
    (folder / PAGE).write_text(comparison_page(found, drawn), "utf-8")


def comparison_figure_count() -> int:
    """Steps that writing the page counts."""
    from hydroyield.report.figures import COMPARISON_FIGURES

    return len(COMPARISON_FIGURES)
