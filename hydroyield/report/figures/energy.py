"""Energy by year and by month, and the way from gross to net."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

import numpy as np

from hydroyield.quantities import rounded
from hydroyield.report.figures import style
from hydroyield.report.figures.data import LedgerBar, MonthEnergies, YearEnergies
from hydroyield.report.figures.labels import HEIGHT, WIDTH, Labels

if TYPE_CHECKING:
    from matplotlib.artist import Artist
    from matplotlib.axes import Axes

FEW_YEARS = 5  # with fewer no range is drawn
BAR = 0.8  # width of the bar of a year


def draw_years(ax: Axes, years: YearEnergies) -> dict[str, Artist]:
    """Energy by year. Returns the bars by year name, the line `mean` and the gaps as `left out`."""
    place = np.arange(len(years.names))
    ax.set_xlim(-0.6, place.size - 0.4)
    ax.set_ylim(0, 1.15 * (float(np.nanmax(years.energy)) or 1.0))
    style.numbers(ax, "y")
    style.name_axes(ax, "Hydrological year", "Energy, MWh a year")
    labels = Labels(ax)
    drawn: dict[str, Artist] = {}
    for at, name, energy in zip(place.tolist(), years.names, years.energy.tolist(), strict=True):
        drawn[name] = _draw_year(ax, at, energy, name in years.filled)
    drawn["mean"] = ax.axhline(years.mean, color=style.INK, linewidth=1.0, linestyle=(0, (4, 3)))
    ax.annotate(
        f"mean\n{style.quantity(years.mean, 'MWh')}", (1, years.mean),
        xycoords=("axes fraction", "data"), xytext=(4, 0), textcoords="offset points", va="center",
    )  # fmt: skip
    _name_values(ax, labels, years)
    every = _step(place.size, labels.frame[2] - labels.frame[0], max(map(len, years.names)))
    ax.set_xticks(place[::every], years.names[::every])
    gaps = np.flatnonzero(np.isnan(years.energy))
    key = [(drawn[name], "with filled days") for name in sorted(years.filled)[:1]]
    if gaps.size:
        key.append((drawn[years.names[gaps[0]]], "left out, too few days with a value"))
    labels.key(*key)
    return drawn


def _draw_year(ax: Axes, at: float, energy: float, filled: bool) -> Artist:
    if np.isnan(energy):
        gap: Artist = ax.axvspan(
            at - BAR / 2, at + BAR / 2, facecolor=style.PAPER, hatch="////", edgecolor="#B4BBC2",
            linewidth=0, zorder=0.5,
        )  # fmt: skip
        return gap
    face = style.PALE_BLUE if filled else style.BLUE
    bar: Artist = ax.bar(at, energy, BAR, color=face, edgecolor=style.BLUE, linewidth=0.9)[0]
    return bar


def _name_values(ax: Axes, labels: Labels, years: YearEnergies) -> None:
    """The value of each year at the foot of its bar, level or upright, where there is room."""
    texts = [rounded(energy) for energy in years.energy.tolist()]
    bar = BAR * (labels.frame[2] - labels.frame[0]) / len(texts)
    upright = max(map(labels.width, texts)) > bar
    if upright and bar < HEIGHT:
        return
    for at in np.flatnonzero(np.isfinite(years.energy)).tolist():
        (up,) = labels.dots(np.array([at]), years.energy[at : at + 1])[1]
        high = up - labels.frame[1]
        inside = high > (labels.width(texts[at]) if upright else HEIGHT) + 6
        ax.annotate(
            texts[at], (at, 0), xytext=(0, 4 if inside else max(0.0, high) + 3),
            textcoords="offset points", ha="center", va="bottom", rotation=90 * upright,
            color="white" if inside and years.names[at] not in years.filled else style.INK,
        )  # fmt: skip


def _step(count: int, width: float, letters: int) -> int:
    """Every how many-th of `count` names there is room for on `width` [pt]."""
    fits = max(1.0, width / ((letters + 1.5) * WIDTH))
    needed = count / fits
    return next(step for step in (1, 2, 3, 4, 5, 10, 20, 25, 50, 100, 1000) if step >= needed)


def alt_years(years: YearEnergies) -> str:
    """The figure in a sentence or two."""
    used = int(np.isfinite(years.energy).sum())
    low, high = int(np.nanargmin(years.energy)), int(np.nanargmax(years.energy))
    left_out = [n for n, e in zip(years.names, years.energy, strict=True) if np.isnan(e)]
    if years.mean == 0:
        text = f"Energy by year: none in any of {used} years used."
    elif used == 1:
        text = f"Energy of the only year used, {years.names[low]}: "
        text += f"{style.quantity(years.mean, 'MWh')}."
    else:
        text = (
            f"Energy by year: from {style.quantity(float(years.energy[low]), 'MWh')} in "
            f"{years.names[low]} to {style.quantity(float(years.energy[high]), 'MWh')} in "
            f"{years.names[high]}, mean of {used} years {style.quantity(years.mean, 'MWh')}."
        )
    if years.filled:
        text += f" {len(years.filled)} of them hold days filled from a reference."
    if left_out:
        shown = ", ".join(left_out[:6])
        more = f" and {len(left_out) - 6} more" if len(left_out) > 6 else ""
        text += f" Left out for too few days with a value: {shown}{more}."
    return text


def draw_months(ax: Axes, months: MonthEnergies) -> dict[str, list[Artist]]:
    """Energy by month: mean, range and single years, the first on the left of each bar.

    Returns lists: the bars `mean` by month, the dots `years` of all months, year by year within
    each, and, with enough years, the lines `range`.
    """
    place = np.arange(12)
    ax.set_xlim(-0.6, 11.6)
    ax.set_ylim(0, 1.08 * (float(months.energy.max()) or 1.0))
    ax.set_xticks(place, months.names)
    style.numbers(ax, "y")
    style.name_axes(ax, "Month", "Energy, MWh a month")
    bars = ax.bar(place, months.mean, 0.78, color=style.PALE_BLUE)
    drawn: dict[str, list[Artist]] = {"mean": list(bars), "years": []}
    key: list[tuple[Artist, str]] = [(bars[0], "mean")]
    count = months.energy.shape[0]
    if count >= FEW_YEARS:
        low, high = months.exceeded(90), months.exceeded(10)
        ranges = ax.vlines(place, low, high, color=style.INK, linewidth=2.4)
        drawn["range"] = [ranges]
        key.append((ranges, "8 of 10 years"))
    aside = np.linspace(-0.3, 0.3, count) if count > 1 else np.zeros(1)
    (dots,) = ax.plot(
        (place[:, None] + aside).ravel(), months.energy.T.ravel(), "o", color=style.VERMILLION,
        markersize=2.6, markeredgewidth=0, clip_on=False,
    )  # fmt: skip
    drawn["years"] = [dots]
    key.append((drawn["years"][0], "single years, first to last"))
    Labels(ax).key(*key)
    return drawn


def alt_months(months: MonthEnergies) -> str:
    """The figure in a sentence or two."""
    mean = months.mean
    high, low = int(mean.argmax()), int(mean.argmin())
    if mean[high] == 0:
        return "Energy by month: none in any month."
    text = (
        f"Energy by month: on average from {style.quantity(float(mean[low]), 'MWh')} in "
        f"{months.names[low]} to {style.quantity(float(mean[high]), 'MWh')} in "
        f"{months.names[high]}."
    )
    if months.energy.shape[0] < FEW_YEARS:
        return text
    lower, upper = months.exceeded(90)[high], months.exceeded(10)[high]
    return (
        f"{text} In eight of ten years {months.names[high]} gives between "
        f"{rounded(float(lower))} and {style.quantity(float(upper), 'MWh')}."
    )


def draw_ledger(ax: Axes, bars: Sequence[LedgerBar]) -> dict[str, Artist]:
    """The way from the energy of all the water to the energy delivered. Returns bars by step."""
    ends = np.array([(bar.start, bar.end) for bar in bars])
    low, high = min(0.0, float(ends.min())), float(ends.max()) or 1.0
    ax.set_xlim(low, low + 1.02 * (high - low))
    ax.set_ylim(len(bars) - 0.4, -0.6)
    ax.set_yticks(range(len(bars)), [bar.label for bar in bars])
    ax.tick_params(axis="y", length=0, labelcolor=style.INK)
    style.numbers(ax, "x")
    style.name_axes(ax, "Energy, MWh a year", "")
    ax.grid(visible=False, axis="y")
    ax.grid(axis="x")
    drawn = {bar.step: _draw_step(ax, at, bar) for at, bar in enumerate(bars)}
    for at, bar in enumerate(bars[:-1]):
        ax.plot([bar.end, bar.end], [at + 0.36, at + 0.64], color=style.GREY, linewidth=0.7)
    _write_values(ax, bars)
    return drawn


def _draw_step(ax: Axes, at: int, bar: LedgerBar) -> Artist:
    ink = style.GREEN if bar.energy > 0 else style.ORANGE
    if bar.step in ("gross", "net"):
        ink = style.BLUE
    patch: Artist = ax.barh(at, bar.end - bar.start, 0.72, left=bar.start, color=ink)[0]
    return patch


def _write_values(ax: Axes, bars: Sequence[LedgerBar]) -> None:
    """Energy, to a ten-thousandth of the gross, and share of the gross as columns on the right."""
    gross = bars[0].energy
    decimals = max(0, 4 - int(np.floor(np.log10(gross)))) if gross > 0 else 1
    _write_row(ax, None, "MWh", "share", style.GREY)
    for at, bar in enumerate(bars):
        gain = "" if bar.step in ("gross", "net") else "+"
        share = _signed(100 * bar.energy / gross, 1, gain) + " %" if gross else ""
        _write_row(ax, at, _signed(bar.energy, decimals, gain), share, style.INK)


def _signed(value: float, decimals: int, gain: str) -> str:
    text = f"{abs(value):,.{decimals}f}".replace(",", "\u202f")
    if not text.strip("0."):
        return text
    return ("−" if value < 0 else gain) + text


def _write_row(ax: Axes, at: float | None, energy: str, share: str, ink: str) -> None:
    """Write a row of the columns; None for `at` is above the axes."""
    place, up = ((1.0, 1.0), 10.0) if at is None else ((1.0, at), 0.0)
    frame = ax.transAxes if at is None else ax.get_yaxis_transform()
    for text, across in ((energy, 50), (share, 97)):
        ax.annotate(
            text, place, xycoords=frame, xytext=(across, up), textcoords="offset points",
            ha="right", va="center", color=ink, annotation_clip=False,
        )  # fmt: skip


def alt_ledger(bars: Sequence[LedgerBar]) -> str:
    """The figure in a sentence or two."""
    gross, net = bars[0].energy, bars[-1].energy
    losses = sorted((bar for bar in bars[1:-1] if bar.energy < 0), key=lambda bar: bar.energy)[:3]
    share = f", {100 * net / gross:.0f} % of it" if gross else ""
    text = (
        f"From {style.quantity(gross, 'MWh')} a year in all the water to "
        f"{style.quantity(net, 'MWh')} delivered{share}."
    )
    if not losses:
        return text
    named = ", ".join(f"{bar.label} ({style.quantity(-bar.energy, 'MWh')})" for bar in losses)
    return f"{text} The largest losses: {named}."
