"""The figures: what is drawn is what the estimate holds, every text can be read, bytes repeat."""

from __future__ import annotations

import datetime
import math
import re
import subprocess
import sys
import xml.etree.ElementTree as ElementTree
from collections.abc import Callable, Iterator
from functools import cache
from io import StringIO
from pathlib import Path
from typing import Any

import matplotlib
import numpy as np
import pytest
import twin_sites
import yaml
from matplotlib.axes import Axes
from matplotlib.backends.backend_svg import FigureCanvasSVG, RendererSVG
from matplotlib.figure import Figure
from matplotlib.transforms import Bbox

import hydroyield
from hydroyield.jobs import SiteEstimate
from hydroyield.report.figures import (
    FIGURES,
    FigureSpec,
    draw_figure,
    energy,
    figure_svg,
    heads,
    plant,
    river,
    style,
    write_figures,
)
from hydroyield.report.figures.data import (
    MonthEnergies,
    YearEnergies,
    ledger_bars,
    months_in_words,
    thinned,
    typical_years,
)
from hydroyield.report.figures.facts import Facts

DEMO = Path(__file__).parents[2] / "demo_sites" / "quernholm_weir" / "site.yaml"
SVG = "{http://www.w3.org/2000/svg}"
figures = pytest.mark.parametrize("spec", FIGURES, ids=lambda spec: spec.name)

# --- sites -------------------------------------------------------------------------------------

PLAIN_UNIT = {
    "count": 1,
    "type": "other",
    "rated_discharge": 5.0,
    "rated_head": 10.0,
    "minimum_discharge": 0.1,
    "efficiency": [[0.0, 0.85], [1.0, 0.85]],
}


def plain_site(folder: Path, days: list[float], **blocks: object) -> Path:
    """One plain unit at 10 m from October 1951 on; `blocks` replace or add parts of the file."""
    site = {
        "format": 1,
        "site": {"name": "Test"},
        "discharge": {"record": {"file": "q.csv", "unit": "m3/s"}},
        "head": {"headwater": {"level": 20.0}, "tailwater": {"level": 10.0}},
        "turbines": [PLAIN_UNIT],
    } | blocks
    first = datetime.date(1951, 10, 1)
    rows = [f"{first + datetime.timedelta(days=i)},{value}" for i, value in enumerate(days)]
    (folder / "q.csv").write_text("date,discharge\n" + "\n".join(rows) + "\n")
    path = folder / "site.yaml"
    path.write_text(yaml.safe_dump(site))
    return path


def one_steady_year(folder: Path) -> Path:
    return plain_site(folder, [4.0] * 365)


def one_unsteady_year(folder: Path) -> Path:
    return plain_site(folder, [4.0 + 3 * math.sin(i / 20) for i in range(365)])


def two_years(folder: Path) -> Path:
    return plain_site(folder, [4.0 + i / 365 for i in range(730)])


def dry_river(folder: Path) -> Path:
    return plain_site(folder, [0.0] * 365)


def river_that_dries_up(folder: Path) -> Path:
    return plain_site(folder, [max(0.0, 5 * math.sin(i / 30)) for i in range(730)])


def plant_that_always_stands(folder: Path) -> Path:
    rules = [{"rule": "constant", "discharge": 50.0}]
    days = [4.0 + 3 * math.sin(i / 20) for i in range(730)]
    return plain_site(folder, days, environmental_flow=rules)


def sixty_years(folder: Path) -> Path:
    return plain_site(folder, [4.0 + 3 * math.sin(i / 57) for i in range(60 * 365 + 15)])


def large_river(folder: Path) -> Path:
    unit = PLAIN_UNIT | {"count": 6, "rated_discharge": 400.0}
    days = [3000 + 2900 * math.sin(i / 57) for i in range(1461)]
    return plain_site(folder, days, turbines=[unit])


def tiny_brook(folder: Path) -> Path:
    unit = PLAIN_UNIT | {"rated_discharge": 0.004}
    days = [round(0.003 + 0.0029 * math.sin(i / 57), 5) for i in range(1461)]
    return plain_site(folder, days, turbines=[unit])


DEGENERATE: tuple[Callable[[Path], Path], ...] = (
    one_steady_year,
    dry_river,
    plant_that_always_stands,
    sixty_years,
)
LESS_EXTREME: tuple[Callable[[Path], Path], ...] = (
    one_unsteady_year,
    two_years,
    river_that_dries_up,
    large_river,
    tiny_brook,
)
TWINS = (
    "two_peltons",
    "weir_and_abstractions",
    "several_flow_rules",
    "screw_and_kaplan",
    "flood_limits",
    "turbine_tailrace",
)


def slow(case: Any) -> Any:
    return pytest.param(case, marks=pytest.mark.slow)


some_figures = pytest.mark.parametrize(  # the others with the slow tests
    "spec", [*FIGURES[:4], *map(slow, FIGURES[4:])], ids=lambda spec: spec.name
)


@cache
def demo() -> Facts:
    return Facts(hydroyield.estimate(hydroyield.read_site(DEMO)))


@cache
def demo_svg(spec: FigureSpec) -> str:
    return figure_svg(spec, demo())


@pytest.fixture
def facts() -> Facts:
    return demo()


@pytest.fixture
def estimate(facts: Facts) -> SiteEstimate:
    assert isinstance(facts.estimate, SiteEstimate)
    return facts.estimate


@pytest.fixture
def ax() -> Iterator[Axes]:
    with style.drawing("test"):
        figure = Figure(figsize=(7.6, 4.2), dpi=style.DPI)
        FigureCanvasSVG(figure)
        yield figure.subplots()


@pytest.fixture
def pair() -> Iterator[list[Axes]]:
    with style.drawing("test"):
        figure = Figure(figsize=(7.6, 5.0), dpi=style.DPI)
        FigureCanvasSVG(figure)
        yield list(figure.subplots(2, 1, sharex=True))


def outline(area: Any) -> np.ndarray:
    """Corners of a filled area."""
    return np.concatenate([path.vertices for path in area.get_paths()])


def assert_holds(x: Any, y: Any, points_x: Any, points_y: Any) -> None:
    """A line passes through all the points, and through few others."""
    drawn = set(zip(x.tolist(), y.tolist(), strict=True))
    points = set(zip(points_x.tolist(), points_y.tolist(), strict=True))
    assert points <= drawn
    assert len(drawn) < 1.1 * len(points)


def area_of(filled: Any) -> float:
    """Area of the polygons of a filled area, by the shoelace formula."""
    total = 0.0
    for path in filled.get_paths():
        x, y = path.vertices.T
        total += abs(float((x * np.roll(y, -1) - np.roll(x, -1) * y).sum())) / 2
    return total


# --- the drawn data ----------------------------------------------------------------------------


def test_duration_curve_draws_the_river_and_stacks_to_it(ax: Axes, facts: Facts) -> None:
    table = facts.estimate.curves()
    table = table[table["month"] == 0]
    drawn: Any = river.draw_duration(ax, facts.curve)
    x, y = drawn["river"].get_xydata().T
    assert_holds(x, y, table["exceedance_percent"], table["river_discharge_m3s"])
    assert (x[0], x[-1]) == (0, 100)
    assert outline(drawn["left_over"])[:, 1].max() == pytest.approx(y.max())
    parts = facts.curve.reserved + facts.curve.turbined + facts.curve.left_over
    np.testing.assert_allclose(parts, y, rtol=1e-12)
    assert all((part >= -1e-9).all() for part in (facts.curve.reserved, facts.curve.left_over))


def test_duration_curve_marks_the_mean_and_the_low_discharge(ax: Axes, facts: Facts) -> None:
    drawn: Any = river.draw_duration(ax, facts.curve)
    days = facts.estimate.scheme.valid_discharge
    assert drawn["mean"].get_ydata()[0] == pytest.approx(np.mean(days))
    assert drawn["low"].get_xydata()[0] == pytest.approx(
        [95, facts.estimate.exceedance_discharge_m3s["95"]]
    )


def test_heads_along_the_duration_curve_are_those_of_the_table(ax: Axes, facts: Facts) -> None:
    table = facts.estimate.curves()
    table = table[table["month"] == 0]
    drawn: Any = heads.draw_head_duration(ax, facts.curve)
    for name in ("gross", "net"):
        x, y = drawn[name].get_xydata().T
        assert_holds(x, y, table["exceedance_percent"], table[f"{name}_head_m"])


def test_heads_against_discharge_agree_with_levels_by_hand(ax: Axes, facts: Facts) -> None:
    """By hand from the site file: 74.35 m less 71.74 m at 12 m3/s, less 72.69 m at 50 m3/s."""
    drawn: Any = heads.draw_head_by_discharge(ax, facts.heads)
    x, gross = drawn["gross"].get_xydata().T
    assert np.interp([12, 50], x, gross) == pytest.approx([2.61, 1.66], abs=2e-3)
    net = drawn["net"].get_ydata()
    assert (net <= gross + 1e-12).all()
    assert (gross - net).max() == pytest.approx(0.00042 * 12**2, rel=0.02)  # full opening


def test_the_shaded_power_is_the_annual_energy(ax: Axes, facts: Facts) -> None:
    drawn: Any = plant.draw_power_duration(ax, facts.power)
    mean_kw = area_of(drawn["energy"]) / 100
    hours = facts.estimate.cells.hours_per_year
    expected = facts.estimate.mean_annual_energy_mwh
    assert mean_kw * hours / 1000 == pytest.approx(expected, rel=1e-3)
    assert drawn["capacity"].get_ydata()[0] == 260
    assert drawn["export_limit"].get_ydata()[0] == pytest.approx(225)


def test_units_running_can_carry_the_discharge(pair: list[Axes], facts: Facts) -> None:
    """So many units carry the discharge, each between its least and its full opening."""
    drawn: Any = plant.draw_units(pair, facts.units)
    x, running = drawn["running"].get_xydata().T
    assert set(running.tolist()) == {0, 1, 2}
    table = facts.estimate.curves()
    own = table[table["month"] == 1]  # all from January to September are alike
    at = dict(zip(x.tolist(), running.tolist(), strict=True))
    running = np.array([at[share] for share in own["exceedance_percent"]])
    turbined = own["turbine_discharge_m3s"].to_numpy()
    full = 6.0 * np.sqrt(own["net_head_m"].to_numpy() / 2.5)
    assert (turbined <= running * full * (1 + 1e-6)).all()
    assert (turbined >= running * 0.18 * full * (1 - 1e-6)).all()
    mean = table.loc[table["month"] == 0, "turbine_discharge_m3s"]
    assert outline(drawn["turbined"])[:, 1].max() == pytest.approx(mean.max())


def test_efficiency_is_a_product_worked_out_by_hand(tmp_path: Path, ax: Axes) -> None:
    """No losses of head: turbine 0.85, generator 0.9, transformer 0.98 at every discharge."""
    electrical = {"generator_efficiency": 0.9, "transformer_efficiency": 0.98}
    days = [1.0 + i / 100 for i in range(365)]
    path = plain_site(tmp_path, days, electrical=electrical)
    curve = Facts(hydroyield.estimate(hydroyield.read_site(path))).efficiency
    drawn: Any = plant.draw_efficiency(ax, curve)
    expected = 100 * 0.85 * 0.9 * 0.98
    efficiency = drawn["all_used"].get_ydata()
    assert efficiency[np.isfinite(efficiency)] == pytest.approx(expected, rel=1e-4)
    assert np.isfinite(efficiency).sum() > 100
    assert drawn["mean"].get_ydata()[0] == pytest.approx(expected, rel=1e-4)


def test_a_plant_that_never_runs_has_no_efficiency(tmp_path: Path, ax: Axes) -> None:
    path = plant_that_always_stands(tmp_path)
    curve = Facts(hydroyield.estimate(hydroyield.read_site(path))).efficiency
    assert plant.draw_efficiency(ax, curve) == {}
    assert [text.get_text() for text in ax.texts] == ["the plant never runs"]
    assert plant.alt_efficiency(curve).endswith("the plant never runs.")


def test_bars_of_years_are_the_energies_and_gaps_are_shown(ax: Axes, facts: Facts) -> None:
    drawn: Any = energy.draw_years(ax, facts.years)
    yearly = facts.estimate.yearly_energy_mwh
    assert drawn["1995/96"].get_height() == yearly["1996"]
    assert drawn["2022/23"].get_height() == yearly["2023"]
    assert list(drawn) == [*facts.years.names, "mean"]
    assert drawn["2001/02"].get_hatch()
    assert drawn["mean"].get_ydata()[0] == pytest.approx(facts.estimate.mean_annual_energy_mwh)
    assert [name for name, artist in drawn.items() if name != "mean" and artist.get_hatch()] == [
        "2001/02"
    ]


def test_months_show_mean_range_and_every_year(ax: Axes) -> None:
    """Eleven years of 0 to 10 MWh in each month: mean 5, 10 and 90 % at 1 and 9."""
    grid = np.tile(np.arange(11.0)[:, None], 12)
    drawn: Any = energy.draw_months(ax, MonthEnergies(tuple("ABCDEFGHIJKL"), grid))
    assert [bar.get_height() for bar in drawn["mean"]] == [5.0] * 12
    low, high = np.array(drawn["range"][0].get_segments())[:, :, 1].T
    assert low == pytest.approx(1.0)
    assert high == pytest.approx(9.0)
    dots = drawn["years"][0].get_xydata()
    assert dots.shape == (132, 2)
    np.testing.assert_array_equal(dots[:11, 1], np.arange(11))
    assert (np.diff(dots[:11, 0]) > 0).all()


def test_months_follow_the_hydrological_year(facts: Facts) -> None:
    means = facts.estimate.monthly_energy_mwh
    assert facts.months.names[0] == "Oct"
    assert facts.months.mean == pytest.approx([*means[9:], *means[:9]])


def test_the_ledger_steps_down_to_the_net(ax: Axes, facts: Facts) -> None:
    drawn: Any = energy.draw_ledger(ax, facts.ledger)
    rows = dict(facts.estimate.ledger_mwh)
    seen = {step for step, mwh in rows.items() if abs(mwh) > 1e-4 * rows["gross"]}
    assert seen <= set(drawn) <= {step for step, mwh in rows.items() if mwh}
    assert drawn["gross"].get_width() == rows["gross"]
    assert drawn["net"].get_width() == pytest.approx(facts.estimate.mean_annual_energy_mwh)
    last = facts.ledger[-2]
    assert last.end == pytest.approx(rows["net"], rel=1e-3)


def test_ledger_bars_begin_where_the_one_before_ends() -> None:
    rows = [("gross", 10.0), ("reserved", -4.0), ("shutdown", 0.0), ("levels", 1.0), ("net", 7.0)]
    bars = ledger_bars(rows)
    assert [(bar.step, bar.start, bar.end) for bar in bars] == [
        ("gross", 0.0, 10.0),
        ("reserved", 10.0, 6.0),
        ("levels", 6.0, 7.0),
        ("net", 0.0, 7.0),
    ]


def test_hydrographs_show_the_days_of_the_record(facts: Facts) -> None:
    scheme = facts.estimate.scheme
    for year in facts.hydrographs:
        start = np.datetime64(f"{year.name[:4]}-10-01")
        first = int(np.flatnonzero(scheme.dates == start)[0])
        days = scheme.discharge[first : first + year.river.size]
        np.testing.assert_array_equal(year.river, days)
        month = (start + np.arange(year.river.size)).astype("datetime64[M]").astype(int) % 12
        season = scheme.rules.season_of_month[month]
        known = ~np.isnan(days)
        run = scheme.operate(days[known], season[known])
        np.testing.assert_allclose(year.turbined[known], run.turbined, rtol=1e-3, atol=1e-3)


def test_hydrographs_draw_river_remaining_and_turbined(facts: Facts) -> None:
    with style.drawing("test"):
        axes = list(Figure(figsize=(7.6, 6.4), dpi=style.DPI).subplots(3, 1, sharex=True))
        drawn: Any = river.draw_hydrographs(axes, facts.hydrographs)
    for year, artists in zip(facts.hydrographs, drawn, strict=True):
        np.testing.assert_array_equal(artists["river"].get_ydata(), year.river)
        np.testing.assert_allclose(
            artists["remaining"].get_ydata() + year.turbined, year.river, rtol=1e-12
        )
    assert len({ax.get_ylim() for ax in axes}) == 1


@pytest.mark.parametrize(
    ("energies", "expected"),
    [
        ([3.0], [("only year", 0)]),
        ([3.0, 2.0], [("least energy", 1), ("most energy", 0)]),
        (
            [5.0, 1.0, 9.0, 4.0, 6.0],
            [("least energy", 1), ("median energy", 0), ("most energy", 2)],
        ),
        ([0.0, 0.0, 0.0], [("least energy", 0), ("median energy", 1), ("most energy", 2)]),
    ],
)
def test_typical_years(energies: list[float], expected: list[tuple[str, int]]) -> None:
    assert typical_years(np.array(energies)) == expected


@pytest.mark.parametrize(
    ("months", "words"),
    [
        ([0], "Jan"),
        ([0, 5, 6, 7], "Jan, Jun to Aug"),
        ([0, 1, 8, 11], "Dec to Feb, Sep"),
        (list(range(12)), "Jan to Dec"),
    ],
)
def test_months_in_words(months: list[int], words: str) -> None:
    assert months_in_words(months) == words


def test_thinning_keeps_the_ends_and_the_area() -> None:
    x = np.linspace(0, 100, 20001)
    y = 300 * np.exp(-x / 30)
    few_x, few_y = thinned(x, y)
    assert few_x.size < 2500
    assert (few_x[0], few_x[-1]) == (0, 100)
    exact = 300 * 30 * (1 - math.exp(-100 / 30))
    assert (np.diff(few_x) * (few_y[1:] + few_y[:-1]) / 2).sum() == pytest.approx(exact, rel=1e-3)


# --- words -------------------------------------------------------------------------------------


@figures
def test_alt_texts_are_sentences_with_numbers(spec: FigureSpec, facts: Facts) -> None:
    text = spec.alt_text(facts.estimate)
    assert text.endswith(".")
    assert len(re.findall(r"\d+", text)) >= 3
    assert "nan" not in text
    assert 1 <= len(re.findall(r"[a-z%)]\.( |$)", text)) <= 2 or spec.name == "energy_by_year"


def test_alt_texts_carry_the_headline(estimate: SiteEstimate, facts: Facts) -> None:
    by_name = {spec.name: spec.alt_text(facts) for spec in FIGURES}
    assert "955 MWh" in by_name["power_duration"]
    assert "955 MWh" in by_name["energy_by_year"]
    assert "2001/02" in by_name["energy_by_year"]
    assert "955 MWh delivered" in by_name["ledger"]
    assert round(estimate.mean_annual_energy_mwh) == 955


def test_one_discharge_all_the_time_is_drawn_over_all_the_time(tmp_path: Path) -> None:
    """By hand: 4 m3/s all year, all of it used; the days that last are not a single point."""
    facts = Facts(hydroyield.estimate(hydroyield.read_site(one_steady_year(tmp_path))))
    assert facts.curve.exceedance[[0, -1]].tolist() == [0, 100]
    assert set(facts.curve.turbined.tolist()) == {4.0}
    assert "in about 100 % of the time" in river.alt_duration(facts.curve)


def test_a_discharge_that_lasts_is_drawn_level(tmp_path: Path) -> None:
    """Two in three days carry 2 m3/s: level from a third of the time on, not a slope to its end.

    Of 399 days each stands for a quarter of a per cent, so that no row lies between two days.
    """
    path = plain_site(tmp_path, [2.0 if i % 3 else 4.0 + i / 1000 for i in range(399)])
    curve = Facts(hydroyield.estimate(hydroyield.read_site(path))).curve
    level = curve.exceedance[curve.river == 2.0]
    assert level.min() == pytest.approx(100 / 3, abs=0.5)
    assert level.max() == 100


def test_alt_text_of_years_names_what_was_left_out() -> None:
    years = YearEnergies(("1990/91", "1991/92", "1992/93"), np.array([10.0, np.nan, 30.0]))
    text = energy.alt_years(years)
    assert "mean of 2 years 20.0 MWh" in text
    assert "1991/92" in text


# --- what the drawing looks like ---------------------------------------------------------------


class TextRecorder(RendererSVG):
    """Draws, and remembers where each text came to stand."""

    def __init__(self, width: float, height: float) -> None:
        self.drawing = StringIO()
        super().__init__(width, height, self.drawing, image_dpi=style.DPI)
        self.boxes: dict[int, tuple[str, Bbox]] = {}

    def draw_text(self, gc: Any, x: Any, y: Any, s: Any, *rest: Any, **more: Any) -> None:
        text = more.get("mtext")
        if text is not None and s.strip():
            self.boxes[id(text)] = (text.get_text(), Bbox.frozen(text.get_window_extent(self)))
        super().draw_text(gc, x, y, s, *rest, **more)


def assert_texts_can_be_read(spec: FigureSpec, facts: Facts) -> str:
    """No text meets another or leaves the figure. Returns the drawing."""
    with style.drawing(spec.name):
        figure = draw_figure(spec, facts)
        width, height = (inches * style.DPI for inches in spec.size)
        recorder = TextRecorder(width, height)
        figure.draw(recorder)
    boxes = list(recorder.boxes.values())
    assert len(boxes) > 5
    for text, box in boxes:
        assert box.x0 >= 0, text
        assert box.y0 >= 0, text
        assert box.x1 <= width, text
        assert box.y1 <= height, text
    for number, (text, box) in enumerate(boxes):
        for other, taken in boxes[number + 1 :]:
            across = min(box.x1, taken.x1) - max(box.x0, taken.x0)
            up = min(box.y1, taken.y1) - max(box.y0, taken.y0)
            assert across <= 0.5 or up <= 1.5, (text, other)
    return recorder.drawing.getvalue()


@some_figures
def test_texts_of_the_demo_can_be_read(spec: FigureSpec, facts: Facts) -> None:
    assert_texts_can_be_read(spec, facts)


@pytest.mark.parametrize("name", [slow(name) for name in TWINS])
def test_texts_can_be_read_at_other_sites(name: str, tmp_path: Path) -> None:
    path = twin_sites.SITES[name](tmp_path)
    facts = Facts(hydroyield.estimate(hydroyield.read_site(path)))
    for spec in FIGURES:
        assert_texts_can_be_read(spec, facts)


@pytest.mark.parametrize(
    "site",
    [slow(site) for site in (*DEGENERATE, *LESS_EXTREME)],
    ids=lambda site: site.__name__,
)
def test_extreme_sites_give_figures_that_can_be_read(
    site: Callable[[Path], Path], tmp_path: Path
) -> None:
    facts = Facts(hydroyield.estimate(hydroyield.read_site(site(tmp_path))))
    for spec in FIGURES:
        drawing = assert_texts_can_be_read(spec, facts)
        assert not re.search(r"\b(nan|inf)\b", drawing)
        assert "nan" not in spec.alt_text(facts)


@figures
def test_every_axis_names_its_unit(spec: FigureSpec, facts: Facts) -> None:
    with style.drawing(spec.name):
        figure = draw_figure(spec, facts)
    units = ("m³/s", ", m", "kW", "MWh", "%", "year", "Month", "Number")
    lowest = figure.axes[-1]
    assert any(unit in lowest.get_xlabel() for unit in units)
    for ax in figure.axes:
        if spec.name != "ledger":  # its rows are named
            assert any(unit in ax.get_ylabel() for unit in units)


def lightness(colour: str) -> float:
    """Lightness L* of CIE 1976, 0 to 100, of an sRGB colour (IEC 61966-2-1)."""
    channels = np.array([int(colour[i : i + 2], 16) / 255 for i in (1, 3, 5)])
    linear = np.where(channels <= 0.04045, channels / 12.92, ((channels + 0.055) / 1.055) ** 2.4)
    luminance = float(linear @ [0.2126, 0.7152, 0.0722])
    return 116 * luminance ** (1 / 3) - 16 if luminance > 0.008856 else 903.3 * luminance


def test_neighbouring_areas_differ_in_lightness() -> None:
    assert abs(lightness(style.BLUE) - lightness(style.PALE_GREEN)) > 30
    assert abs(lightness(style.BLUE) - lightness(style.PALE_GREY)) > 30
    assert abs(lightness(style.BLUE) - lightness(style.ORANGE)) > 20
    assert lightness("#ffffff") == pytest.approx(100, abs=0.01)


@pytest.mark.parametrize("ink", ["INK", "GREY", "BLUE", "DARK_VERMILLION"])
def test_letters_have_contrast_enough_to_be_read(ink: str) -> None:
    """Contrast of 4.5 to 1 with the paper: WCAG 2.2, success criterion 1.4.3."""
    luminance = ((lightness(getattr(style, ink)) + 16) / 116) ** 3
    assert 1.05 / (luminance + 0.05) >= 4.5


# --- the files ---------------------------------------------------------------------------------


@pytest.mark.slow
def test_files_are_written_and_repeat_to_the_byte(tmp_path: Path, facts: Facts) -> None:
    write_figures(facts.estimate, tmp_path)
    files = sorted(path.name for path in tmp_path.iterdir())
    assert files == sorted(f"{spec.name}.svg" for spec in FIGURES)
    for spec in FIGURES:
        assert (tmp_path / f"{spec.name}.svg").read_bytes() == demo_svg(spec).encode()


@some_figures
def test_the_svg_is_vector_text_on_light_paper(spec: FigureSpec, facts: Facts) -> None:
    svg = demo_svg(spec)
    root = ElementTree.fromstring(svg)
    assert root.tag == f"{SVG}svg"
    assert root.get("role") == "img"
    assert root.findtext(f"{SVG}title") == spec.title
    assert root.findtext(f"{SVG}desc") == spec.alt_text(facts)
    texts = ["".join(element.itertext()) for element in root.iter(f"{SVG}text")]
    assert spec.title in texts
    assert not list(root.iter(f"{SVG}image"))
    assert f"fill: {style.PAPER.lower()}" in svg
    assert "sans-serif" in svg
    assert "<style" not in svg
    assert not re.search(r"dc:date|<\?xml|<!DOCTYPE", svg)
    assert len(svg) < 200_000


@pytest.mark.slow
def test_ids_stay_apart_when_all_figures_share_a_page() -> None:
    ids: list[str] = []
    for spec in FIGURES:
        svg = demo_svg(spec)
        root = ElementTree.fromstring(svg)
        own = [element.get("id") for element in root.iter() if element.get("id")]
        ids += [name for name in own if name]
        known = set(own)
        for reference in re.findall(r'(?:href="|url\()#([^")]+)', svg):
            assert reference in known
    assert len(ids) == len(set(ids))


def test_the_settings_of_the_user_neither_show_nor_change(facts: Facts) -> None:
    plain = figure_svg(FIGURES[0], facts)
    with matplotlib.rc_context({"font.size": 20, "axes.grid": True, "svg.hashsalt": "x"}):
        before = dict(matplotlib.rcParams)
        assert figure_svg(FIGURES[0], facts) == plain
        assert dict(matplotlib.rcParams) == before


def test_the_drawing_library_is_imported_only_to_draw() -> None:
    code = (
        "import sys, hydroyield.report.figures as f;"
        "assert f.FIGURES; assert 'matplotlib' not in sys.modules"
    )
    subprocess.run([sys.executable, "-c", code], check=True)
