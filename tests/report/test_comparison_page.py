"""The page and the figures of a comparison: what they say and draw, against the options."""

from __future__ import annotations

import re
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from matplotlib.backends.backend_svg import FigureCanvasSVG
from matplotlib.figure import Figure
from option_sites import river, write_site
from test_page import Balance

from hydroyield import jobs
from hydroyield.comparison.compared import PlantComparison
from hydroyield.quantities import rounded
from hydroyield.report.comparison_page import comparison_page, comparison_page_data, option_facts
from hydroyield.report.comparison_tables import cost_rows, notes, page_tables, refused
from hydroyield.report.drawn import DrawnFigure
from hydroyield.report.figures import COMPARISON_FIGURES, figure_svg, style
from hydroyield.report.figures.options import OptionFacts
from hydroyield.site.assembly import read_site

OPTIONS = """
unit_counts: [1, 2]
types: [kaplan, propeller, other]
design_discharges: [3, 5, 9]
wanted_capacity_factor: 30 %
"""
COST = (
    "cost: {currency: EUR, fixed: 90000, per_kw: 2500, energy_price: {apr-sep: 0.09, oct-mar: "
    "0.13}, yearly: 700, yearly_share: 1 %, life: 25, discount_rate: 4 %, grant_share: 20 %, "
    "source: two offers}"
)
STEEP = "waterway: [{loss_coefficient: 0.06}]\n"  # takes the head of 4 m at 8.2 m3/s


def compared(folder: Path, options: str = OPTIONS, more: str = STEEP + COST) -> PlantComparison:
    return jobs.compare(read_site(write_site(folder, river(6), options, minimum="0.2", more=more)))


@pytest.fixture(scope="module")
def found(tmp_path_factory: pytest.TempPathFactory) -> PlantComparison:
    return compared(tmp_path_factory.mktemp("options"))


def drawn(found: PlantComparison) -> list[DrawnFigure]:
    facts = option_facts(found)
    return [
        DrawnFigure(spec.name, spec.title, spec.alt_text(facts), figure_svg(spec, facts))
        for spec in COMPARISON_FIGURES
    ]


# --- the page -------------------------------------------------------------------------------------


def test_elements_are_closed_and_nothing_is_fetched(found: PlantComparison) -> None:
    text = comparison_page(found, drawn(found))
    parser = Balance()
    parser.feed(text)
    assert parser.open == []
    assert len(parser.ids) == len(set(parser.ids))
    for target in re.findall(r'href="#([^"]+)"', text):
        assert target in parser.ids
    assert not re.search(r"""(src|href)\s*=\s*["'](?!#|data:)""", text)
    assert "default-src 'none'" in text
    assert "Caution." in text
    for spec in COMPARISON_FIGURES:
        assert spec.title in text


def test_user_text_is_escaped(tmp_path: Path) -> None:
    path = write_site(tmp_path, river(1), "unit_counts: [1]\nexceedances: [30, 50]", more=COST)
    text = path.read_text("utf-8").replace("Two Mills", '"<script>alert(1)</script>"')
    path.write_text(text.replace("two offers", "'<img src=x>'").replace("EUR", "'<b>EUR</b>'"))
    shown = comparison_page(jobs.compare(read_site(path)), [])
    for tag in ("<script", "<img", "<b>EUR"):
        assert tag not in shown
    for escaped in ("&lt;script&gt;alert(1)", "&lt;img src=x&gt;", "&lt;b&gt;EUR"):
        assert escaped in shown


def column(found: PlantComparison, table: int, name: str) -> list[str]:
    shown = page_tables(found)[table]
    return [cells[shown.columns.index(name)] for _, cells in shown.rows]


def test_the_tables_hold_every_option(found: PlantComparison) -> None:
    assert [table.title.split(",")[0] for table in page_tables(found)] == [
        "Size and energy", "Energy of seasons and years", "Money",
    ]  # fmt: skip
    energies = [rounded(option.mean_annual_energy, 4) for option in found.options]
    assert column(found, 0, "MWh a year") == energies
    units = [option.combination.units(option.type) for option in found.options]
    assert units[:1] + units[-1:] == ["1 x kaplan", "2 x propeller"]
    for table in page_tables(found):
        assert [cells[0] for _, cells in table.rows] == units
        numbers = [int(number.rstrip("*")) for number, _ in table.rows]
        assert numbers == [option.number for option in found.options]
        starred = {number for number, _ in table.rows if number.endswith("*")}
        assert len(starred) == sum(found.on_frontier)
        assert all(len(cells) == len(table.columns) for _, cells in table.rows)
        assert len(table.columns) <= 11  # what a printed page has room for


def test_money_is_told_with_what_it_rests_on(found: PlantComparison) -> None:
    values = [rounded(money.net_present_value, 3) for money in found.economics]
    assert column(found, 2, "Net present value") == values
    assert dict(cost_rows(found)) == {
        "Capital, EUR": "90\u202f000 for every option; 2\u202f500 for a kW",
        "Operation a year, EUR": "700 and 1 % of the capital",
        "Price of a kWh": "0.13 in October to March; 0.09 in April to September",
        "Years counted": "25, at a discount rate of 4 %",
        "Grant": "20 % of the capital",
        "Source": "two offers",
    }


def test_without_costs_the_page_is_silent_about_money(tmp_path: Path) -> None:
    found = compared(tmp_path, "unit_counts: [1]\nexceedances: [30, 50]", more="")
    text = comparison_page(found, [])
    assert len(page_tables(found)) == 2
    for word in ("Money", "Net present", "apital", "price", "Payback", "evelised"):
        assert word not in text


def test_what_is_refused_and_noted_stands_with_its_reason(found: PlantComparison) -> None:
    """Of one type nothing is known; 9 m3/s lose all head; small typical machines are noted."""
    reasons = {reason: numbers for numbers, reason in refused(found)}
    (unknown,) = (numbers for reason, numbers in reasons.items() if "typical values" in reason)
    assert unknown.count("other") == 6
    lost = [reason for reason in reasons if "no net head is left" in reason]
    assert lost
    small = [  # the curve of the kaplan is given
        option.number
        for option in found.options
        if option.type == "propeller"
        and option.installed_capacity / option.combination.unit_count < 100
    ]
    assert small
    assert (", ".join(map(str, small))) in [
        those for those, note in notes(found) if "smaller ones reach" in note
    ]


def test_the_block_to_paste_is_that_of_the_written_site(found: PlantComparison) -> None:
    data = comparison_page_data(found, [])
    chosen = {choice.option.number for choice in found.choices if choice.option is not None}
    assert len(data["blocks"]) == len(chosen)
    for _, block, command in data["blocks"]:
        number = int(command.removeprefix("--write "))
        assert number in chosen
        written = jobs.write_option(found.site, number)["site.yaml"].decode()
        assert block in written


def test_the_answer_says_what_cannot_be_told_apart(found: PlantComparison) -> None:
    assert found.differences is not None
    close = len(found.differences.indistinguishable)
    text = comparison_page_data(found, [])["answer"]
    assert f"{len(found.options)} options computed" in text
    assert ("be told apart" in text) == bool(close)


# --- the figures ----------------------------------------------------------------------------------


def test_energy_is_drawn_as_it_is(found: PlantComparison) -> None:
    facts = option_facts(found)
    artists = drawn_by("options_energy", facts)
    energy = {option.number: option for option in found.options}
    seen = 0
    for number, family in enumerate(facts.families):
        x, y = artists[f"energy_{number}"].get_data()
        _, factor = artists[f"factor_{number}"].get_data()
        for at, own in enumerate(family.numbers):
            option = energy[int(own)]
            assert x[at] == option.installed_capacity
            assert y[at] == option.mean_annual_energy
            assert factor[at] == pytest.approx(100 * option.capacity_factor)
            assert family.type == option.type
            seen += 1
    assert seen == len(found.options)


def test_further_energy_frontier_and_power_are_drawn_as_they_are(found: PlantComparison) -> None:
    facts = option_facts(found)
    marginal = [value for value in found.marginal if value is not None]
    artists = drawn_by("options_marginal", facts)
    lines = [artist.get_ydata() for name, artist in artists.items() if name != "wanted"]
    shown = np.concatenate(lines)
    assert sorted(shown[np.isfinite(shown)]) == pytest.approx(sorted(marginal))
    assert artists["wanted"].get_ydata()[0] == pytest.approx(0.3 * 8766)
    x, _ = drawn_by("options_frontier", facts)["frontier"].get_data()
    on = [
        o.installed_capacity for o, on in zip(found.options, found.on_frontier, strict=True) if on
    ]
    assert list(x) == sorted(on)
    power = drawn_by("options_power", facts)
    for number, curve in enumerate(facts.chosen):
        _, y = power[f"chosen_{number}"].get_data()
        option = next(o for o in found.options if f"option {o.number}" == curve.name)
        assert y.max() <= option.installed_capacity * (1 + 1e-9)
        area = np.trapezoid(y, curve.exceedance / 100) * 8.766
        assert area == pytest.approx(option.mean_annual_energy, rel=0.01)


def drawn_by(name: str, facts: OptionFacts) -> dict[str, Any]:
    """What a figure draws, by name."""
    (spec,) = (spec for spec in COMPARISON_FIGURES if spec.name == name)
    with style.drawing("test"):
        figure = Figure(figsize=spec.size, dpi=style.DPI)
        FigureCanvasSVG(figure)
        axes = figure.subplots(2, 1) if spec.heights else figure.subplots()
        return dict(spec.draw(axes, facts))


def test_alt_texts_carry_the_numbers(found: PlantComparison) -> None:
    facts = option_facts(found)
    most = max(option.mean_annual_energy for option in found.options)
    texts = [spec.alt_text(facts) for spec in COMPARISON_FIGURES]
    assert f"{len(found.options)} options" in texts[0]
    assert any(rounded(most) in text for text in texts)
    for option in found.options:
        if found.on_frontier[found.options.index(option)]:
            assert re.search(rf"\b{option.number}\b", texts[2])


def test_one_option_alone_gives_figures_too(tmp_path: Path) -> None:
    found = compared(tmp_path, "unit_counts: [1]\ndesign_discharges: [3]", more="")
    assert found.differences is None
    text = comparison_page(found, drawn(found))
    assert "one option only" in text
    assert "one size only" in text
