"""Figures of an estimate as SVG: vector graphics with the text kept as text.

    write_figures(estimate, folder)

`FIGURES` lists them. The drawing library is imported when the first figure is drawn.
"""

from __future__ import annotations

import re
from collections.abc import Callable
from dataclasses import dataclass
from io import StringIO
from pathlib import Path
from typing import TYPE_CHECKING, Any
from xml.sax.saxutils import escape

from hydroyield.energy import Estimate
from hydroyield.report.figures import energy, gauge, heads, options, plant, river, style
from hydroyield.report.figures.facts import Facts, as_facts
from hydroyield.report.figures.options import OptionFacts
from hydroyield.river.views import RiverViews

if TYPE_CHECKING:
    from matplotlib.figure import Figure

TOP, BOTTOM = 0.68, 0.58  # margins [in]

LINES = "stroke-linejoin: round; stroke-linecap: butt"
# a style sheet for everything, which would reach beyond the figure when it stands within a page
_SHEET = re.compile(r"\s*<defs>\s*<style[^>]*>\*\{[^}]*\}</style>\s*</defs>")
_PATH = re.compile(r' d="[^"]*"')
_DECIMALS = re.compile(r"(\.\d\d)\d+")  # a hundredth of a point is finer than any screen


@dataclass(frozen=True)
class FigureSpec:
    """A figure.

    name : stem of its file
    title : above the drawing
    part : what it shows of an estimate, or of a record alone
    draw : (axes, part) -> what was drawn; gets a list of axes where it has several
    alt : (part) -> one or two sentences for those who cannot see it
    size : width and height [in]
    left, right : margins [in]
    heights : (part) -> relative heights of its axes, top first; None for a single one
    needs_days : whether it shows single days, which a duration table does not know
    """

    name: str
    title: str
    part: Callable[[Any], Any]
    draw: Callable[[Any, Any], Any]
    alt: Callable[[Any], str]
    size: tuple[float, float] = (7.6, 4.2)
    left: float = 0.72
    right: float = 0.3
    heights: Callable[[Any], tuple[float, ...]] | None = None
    needs_days: bool = False

    def alt_text(self, estimate: Estimate | Facts | RiverViews | OptionFacts) -> str:
        """One or two sentences with the numbers, for those who cannot see the figure."""
        return self.alt(self.part(as_facts(estimate)))


def _views(facts: Facts | RiverViews) -> RiverViews:
    """The record, of an estimate or alone."""
    return facts if isinstance(facts, RiverViews) else facts.views


RECORD_FIGURES: tuple[FigureSpec, ...] = (
    FigureSpec(
        "record_days",
        "The record, day by day",
        _views,
        gauge.draw_days,
        gauge.alt_days,
        needs_days=True,
    ),
    FigureSpec(
        "record_gaps",
        "Months with and without values",
        _views,
        gauge.draw_gaps,
        gauge.alt_gaps,
        size=(7.6, 4.8),
        needs_days=True,
    ),
    FigureSpec(
        "annual_duration",
        "Duration curves of the years",
        _views,
        gauge.draw_annual,
        gauge.alt_annual,
        needs_days=True,
    ),
    FigureSpec(
        "monthly_discharge",
        "Discharge by month",
        _views,
        gauge.draw_months,
        gauge.alt_months,
        needs_days=True,
    ),
    FigureSpec(
        "mass_curve",
        "Mass curve less the mean flow",
        _views,
        gauge.draw_mass,
        gauge.alt_mass,
        needs_days=True,
    ),
)

FIGURES: tuple[FigureSpec, ...] = (
    FigureSpec(
        "duration_curve",
        "Duration curve of the river, and what becomes of the water",
        lambda facts: facts.curve,
        river.draw_duration,
        river.alt_duration,
    ),
    FigureSpec(
        "head_by_discharge",
        "Head against the discharge of the river",
        lambda facts: facts.heads,
        heads.draw_head_by_discharge,
        heads.alt_head_by_discharge,
    ),
    FigureSpec(
        "head_duration",
        "Head along the duration curve",
        lambda facts: facts.curve,
        heads.draw_head_duration,
        heads.alt_head_duration,
    ),
    FigureSpec(
        "power_duration",
        "Power duration curve",
        lambda facts: facts.power,
        plant.draw_power_duration,
        plant.alt_power_duration,
    ),
    FigureSpec(
        "units",
        "Turbine discharge and units running along the duration curve",
        lambda facts: facts.units,
        plant.draw_units,
        plant.alt_units,
        size=(7.6, 5.0),
        heights=lambda _: (3.0, 1.0),
    ),
    FigureSpec(
        "efficiency",
        "Plant efficiency from water to grid",
        lambda facts: facts.efficiency,
        plant.draw_efficiency,
        plant.alt_efficiency,
        right=0.95,
    ),
    FigureSpec(
        "energy_by_year",
        "Energy by year",
        lambda facts: facts.years,
        energy.draw_years,
        energy.alt_years,
        right=1.05,
        needs_days=True,
    ),
    FigureSpec(
        "energy_by_month",
        "Energy by month",
        lambda facts: facts.months,
        energy.draw_months,
        energy.alt_months,
        needs_days=True,
    ),
    FigureSpec(
        "ledger",
        "From all the water to the energy delivered",
        lambda facts: facts.ledger,
        energy.draw_ledger,
        energy.alt_ledger,
        size=(7.6, 4.8),
        left=2.45,
        right=1.45,
    ),
    FigureSpec(
        "hydrographs",
        "Daily discharge and what the plant takes",
        lambda facts: facts.hydrographs,
        river.draw_hydrographs,
        river.alt_hydrographs,
        size=(7.6, 6.4),
        heights=lambda years: (1.0,) * len(years),
        needs_days=True,
    ),
    *RECORD_FIGURES,
)


WIDE_KEY = 1.75  # [in], right of the axes

COMPARISON_FIGURES: tuple[FigureSpec, ...] = (
    FigureSpec(
        "options_energy",
        "Energy and capacity factor of the options",
        lambda facts: facts,
        options.draw_energy,
        options.alt_energy,
        size=(7.6, 6.0),
        right=WIDE_KEY,
        heights=lambda _: (1.6, 1.0),
    ),
    FigureSpec(
        "options_marginal",
        "What a further kW brings",
        lambda facts: facts,
        options.draw_marginal,
        options.alt_marginal,
        right=WIDE_KEY,
    ),
    FigureSpec(
        "options_frontier",
        "Options that no other beats",
        lambda facts: facts,
        options.draw_frontier,
        options.alt_frontier,
    ),
    FigureSpec(
        "options_power",
        "Power duration curves of the chosen options",
        lambda facts: facts,
        options.draw_chosen,
        options.alt_chosen,
    ),
)


def figures_of(estimate: Estimate | Facts) -> list[FigureSpec]:
    """The figures that an estimate has; without days those of days are missing."""
    has_days = as_facts(estimate).estimate.has_years
    return [spec for spec in FIGURES if has_days or not spec.needs_days]


def write_figures(estimate: Estimate | Facts, folder: Path) -> None:
    """Write every figure as NAME.svg into an existing folder."""
    facts = as_facts(estimate)
    for spec in figures_of(facts):
        (folder / f"{spec.name}.svg").write_text(figure_svg(spec, facts), "utf-8")


def figure_svg(spec: FigureSpec, estimate: Estimate | Facts | RiverViews | OptionFacts) -> str:
    """A figure as the text of an SVG element, the same on every run.

    It can stand in a file of its own or within a page: ids carry the name of the figure, and
    title and description are there for screen readers. The background is always light.
    """
    facts = as_facts(estimate)
    text = StringIO()
    with style.drawing(spec.name):
        figure = draw_figure(spec, facts)
        silent = dict.fromkeys(("Date", "Creator", "Format", "Type"))
        figure.savefig(text, format="svg", metadata=silent)
    return _dressed(text.getvalue(), spec, spec.alt_text(facts))


def draw_figure(spec: FigureSpec, estimate: Estimate | Facts | RiverViews | OptionFacts) -> Figure:
    """Draw a figure; to be called within `style.drawing`."""
    from matplotlib.backends.backend_svg import FigureCanvasSVG
    from matplotlib.figure import Figure

    part = spec.part(as_facts(estimate))
    width, height = spec.size
    figure = Figure(figsize=spec.size, dpi=style.DPI)
    FigureCanvasSVG(figure)
    ratios = (1.0,) if spec.heights is None else spec.heights(part)
    frame = {
        "left": spec.left / width,
        "right": 1 - spec.right / width,
        "bottom": BOTTOM / height,
        "top": 1 - TOP / height,
        "hspace": 0.32,
        "height_ratios": ratios,
    }
    axes = figure.subplots(len(ratios), 1, sharex=True, squeeze=False, gridspec_kw=frame)[:, 0]
    figure.text(
        0.16 / width, 1 - 0.12 / height, spec.title, size=style.TITLE_SIZE, weight="bold", va="top"
    )
    spec.draw(axes[0] if spec.heights is None else list(axes), part)
    return figure


def _dressed(svg: str, spec: FigureSpec, alt: str) -> str:
    """The bare element, with names of its own and words for screen readers."""
    svg = svg[svg.index("<svg") :]
    svg = re.sub(r'( id="|href="#|url\(#)', rf"\g<1>{spec.name}-", svg)
    svg = _PATH.sub(lambda path: _DECIMALS.sub(r"\1", path[0]), svg)
    words = f"<title>{escape(spec.title)}</title>\n <desc>{escape(alt)}</desc>"
    svg = _SHEET.sub("", svg, count=1)
    head, rest = svg.split(">", 1)
    return f'{head} role="img" style="{LINES}">\n {words}{rest}'
