"""The record itself: all of its days, its gaps, its years, its months, its mass curve."""

from __future__ import annotations

from itertools import pairwise
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from hydroyield.report.figures import style
from hydroyield.report.figures.labels import Labels
from hydroyield.river.views import CURVE_PERCENT, RiverViews
from hydroyield.river.years import MONTH_NAMES, count_months, months_in_order, span

if TYPE_CHECKING:
    from matplotlib.artist import Artist
    from matplotlib.axes import Axes

Floats = NDArray[np.float64]

COLUMNS = 500  # parts into which a long record is cut for drawing
DAYS_PER_YEAR = 365.2425
FAN = ((5, 95), (25, 75))  # % exceeded, of the days of a month


def _decimal_years(views: RiverViews) -> Floats:
    """(n,) dates as decimal years, close enough for a drawing."""
    return 1970 + views.dates.astype(np.int64) / DAYS_PER_YEAR


def _calendar_axis(ax: Axes, years: Floats) -> None:
    from matplotlib.ticker import FuncFormatter, MaxNLocator

    ax.set_xlim(years[0], years[-1] + 1 / DAYS_PER_YEAR)
    ax.xaxis.set_major_locator(MaxNLocator(9, integer=True, steps=[1, 2, 5, 10]))
    ax.xaxis.set_major_formatter(FuncFormatter(lambda value, _: f"{value:.0f}"))


# --- all days -----------------------------------------------------------------------------------


def draw_days(ax: Axes, views: RiverViews) -> dict[str, Artist]:
    """Every day; of a long record the range and the mean of a few days at a time.

    Returns the area `range`, the line `mean`, and `filled` where days were filled.
    """
    time, flow = _decimal_years(views), views.discharge
    ends = np.unique(np.linspace(0, flow.size, min(COLUMNS, flow.size) + 1).astype(int))
    parts = [flow[a:b] for a, b in pairwise(ends)]
    known = np.array([bool((~np.isnan(part)).any()) for part in parts])
    least, mean, most = (
        np.array([of(part) if any_ else np.nan for part, any_ in zip(parts, known, strict=True)])
        for of in (np.nanmin, np.nanmean, np.nanmax)
    )
    middle = (time[ends[:-1]] + time[ends[1:] - 1]) / 2
    low, high = style.log_limits(views.valid)
    style.log_scale(ax, "y", low, high)
    _calendar_axis(ax, time)
    style.name_axes(ax, "Calendar year", "Discharge, m³/s (logarithmic)")
    area = ax.fill_between(
        middle, np.maximum(least, low / 10), np.maximum(most, low / 10),
        color=style.PALE_BLUE, linewidth=0.5,
    )  # fmt: skip
    (line,) = ax.plot(middle, np.maximum(mean, low / 10), color=style.BLUE, linewidth=0.9)
    drawn: dict[str, Artist] = {"range": area, "mean": line}
    key = [(area, f"range of {_part_days(ends)}"), (line, "mean")]
    if views.filled is not None and views.filled.any():
        drawn["filled"] = ax.fill_between(
            time, low, low * (high / low) ** 0.03, where=list(views.filled), color=style.ORANGE,
            linewidth=0.8,
        )  # fmt: skip
        key.append((drawn["filled"], "filled from a reference"))
    Labels(ax).key(*key)
    return drawn


def _part_days(ends: NDArray[np.int64]) -> str:
    days = round(float(np.diff(ends).mean()))
    return "each day" if days == 1 else f"{days} days"


def alt_days(views: RiverViews) -> str:
    """The figure in a sentence or two."""
    low, mean, high = views.valid.min(), views.valid.mean(), views.valid.max()
    filled = 0 if views.filled is None else int(views.filled.sum())
    return (
        f"Daily discharge from {views.dates[0]} to {views.dates[-1]}: least "
        f"{style.quantity(float(low), 'm³/s')}, mean {style.quantity(float(mean), 'm³/s')}, most "
        f"{style.quantity(float(high), 'm³/s')}."
        + (f" {filled} days are filled from a reference." if filled else "")
    )


# --- gaps ---------------------------------------------------------------------------------------


def draw_gaps(ax: Axes, views: RiverViews) -> dict[str, Artist]:
    """Days with a value in each month of each hydrological year.

    Returns `months`, the mesh; its values are the share of days measured, and 2 where all days
    that have a value are filled from a reference.
    """
    from matplotlib.colors import BoundaryNorm, ListedColormap
    from matplotlib.patches import Patch

    table, measured = views.months, _measured(views)
    order = [month - 1 for month in months_in_order(views.start_month)]
    share = (measured / table.days)[:, order]
    share[(measured == 0)[:, order] & (table.valid > 0)[:, order]] = 2.0
    years = table.years
    colours = ["#FFFFFF", style.BLUE, style.PALE_BLUE, style.ORANGE]
    mesh = ax.pcolormesh(
        np.arange(13), np.append(years, years[-1] + 1) - 0.5, share,
        cmap=ListedColormap(colours),
        norm=BoundaryNorm([-0.5, 1e-9, views.minimum_coverage - 1e-9, 1.5, 2.5], 4),
        edgecolors=style.RULE, linewidth=0.4,
    )  # fmt: skip
    ax.set_ylim(years[-1] + 0.5, years[0] - 0.5)
    ax.set_xticks(np.arange(12) + 0.5, [MONTH_NAMES[month][:3] for month in order])
    ax.tick_params(axis="x", length=0)
    ax.set_xlabel("Month of the hydrological year")
    ax.set_ylabel("Hydrological year", rotation=0, ha="left", va="bottom")
    ax.yaxis.set_label_coords(0.0, 1 + 5 / ax.get_window_extent().height)
    step = max(1, -(-years.size // 12))
    shown = years[::step]
    ax.set_yticks(shown, [span(int(year), views.start_month) for year in shown])
    texts = ("no value", "too few measured", "enough days", "filled from a reference")
    used = [0, 1, 2] + ([3] if (share == 2).any() else [])
    handles: list[Any] = [
        Patch(facecolor=colours[k], edgecolor=style.GREY, linewidth=0.5) for k in used
    ]
    ax.legend(
        handles, [texts[k] for k in used], loc="lower right", bbox_to_anchor=(1.0, 1.0),
        ncols=len(used), handlelength=1.2, columnspacing=1.2, borderaxespad=0.1,
    )  # fmt: skip
    return {"months": mesh}


def _measured(views: RiverViews) -> NDArray[np.int64]:
    """(y, 12) days with a value that was not filled."""
    has_value = ~np.isnan(views.discharge)
    if views.filled is not None:
        has_value &= ~views.filled
    return count_months(views.calendar, has_value).valid


def alt_gaps(views: RiverViews) -> str:
    """The figure in a sentence."""
    missing = int(np.isnan(views.discharge).sum())
    return (
        f"Days with a value by month and hydrological year: {missing} of {views.dates.size} days "
        f"have none; {len(views.complete_years)} of {views.months.years.size} years have enough in "
        "every month."
    )


# --- years --------------------------------------------------------------------------------------


def draw_annual(ax: Axes, views: RiverViews) -> dict[str, Artist]:
    """Duration curves of the years as bands, of all days, and of the last complete year.

    Returns the areas `all_years` and `most_years`, and the lines `median`, `all_days`, `last`;
    without complete years the line `all_days` alone.
    """
    curves = views.annual
    shown = [views.whole_curve, *([curves.discharge.ravel()] if curves.years.size else [])]
    low, high = style.log_limits(*shown)
    style.percent_of_time(ax)
    style.log_scale(ax, "y", low, high)
    style.name_axes(
        ax, "Share of the time with this discharge or more, %", "Discharge, m³/s (logarithmic)"
    )
    drawn: dict[str, Artist] = {}
    key: list[tuple[Artist, str]] = []
    floor = low / 10
    if curves.years.size:
        for name, share, colour, text in (
            ("all_years", 1.0, style.PALE_GREY, "years"),
            ("most_years", 0.8, style.PALE_BLUE, "8 of 10"),
        ):
            lower, upper = (np.maximum(floor, band) for band in curves.band(share))
            drawn[name] = ax.fill_between(CURVE_PERCENT, lower, upper, color=colour, linewidth=0)
            key.append((drawn[name], text))
        (drawn["median"],) = ax.plot(
            CURVE_PERCENT, np.maximum(floor, curves.median()), color=style.BLUE
        )
        (drawn["last"],) = ax.plot(
            CURVE_PERCENT, np.maximum(floor, curves.discharge[-1]), color=style.DARK_VERMILLION,
            linewidth=1.1, linestyle=(0, (4, 2)),
        )  # fmt: skip
        last = span(int(curves.years[-1]), views.start_month)
        key += [(drawn["median"], "median"), (drawn["last"], last)]
    (drawn["all_days"],) = ax.plot(
        CURVE_PERCENT, np.maximum(floor, views.whole_curve), color=style.INK
    )
    Labels(ax).key(*key, (drawn["all_days"], "all days"))
    return drawn


def alt_annual(views: RiverViews) -> str:
    """The figure in a sentence or two."""
    curves = views.annual
    if not curves.years.size:
        return "Duration curve of all days; no year has enough days in every month."
    low, high = curves.band(1.0)
    middle = int(np.searchsorted(CURVE_PERCENT, 50))
    last = int(curves.years[-1])
    return (
        f"Duration curves of {curves.years.size} years: the discharge exceeded half of the time "
        f"lies between {style.quantity(float(low[middle]), 'm³/s')} and "
        f"{style.quantity(float(high[middle]), 'm³/s')}. The last complete year, "
        f"{span(last, views.start_month)}, was wetter than or as wet as "
        f"{100 * curves.position(last):.0f} % of them."
    )


# --- months -------------------------------------------------------------------------------------


def draw_months(ax: Axes, views: RiverViews) -> dict[str, Artist]:
    """The spread of daily discharge in each calendar month.

    Returns the bars `wide` (5 to 95 % of the days) and `narrow` (25 to 75 %), and the line
    `median`.
    """
    order = [month - 1 for month in months_in_order(views.start_month)]
    place = np.arange(12)
    curves = views.monthly[order]
    low, high = style.log_limits(*(_at(curves, p) for pair in FAN for p in pair))
    style.log_scale(ax, "y", low, high)
    ax.set_xlim(-0.6, 11.6)
    ax.set_xticks(place, [MONTH_NAMES[month][:3] for month in order])
    ax.tick_params(axis="x", length=0)
    style.name_axes(ax, "Month of the hydrological year", "Discharge, m³/s (logarithmic)")
    drawn: dict[str, Artist] = {}
    key: list[tuple[Artist, str]] = []
    looks = (("wide", style.PALE_BLUE, 0.7), ("narrow", style.BLUE, 0.45))
    for (name, colour, width), (rare, common) in zip(looks, FAN, strict=True):
        bottom, top = (np.maximum(low / 10, _at(curves, p)) for p in (common, rare))
        bars = ax.bar(place, top - bottom, width, bottom, color=colour)
        drawn[name] = bars.patches[0]
        key.append((bars.patches[0], f"{common - rare} % of the days"))
    (drawn["median"],) = ax.plot(
        place, _at(curves, 50), color=style.INK, marker="_", markersize=14, linestyle="none"
    )
    Labels(ax).key(*key, (drawn["median"], "median"))
    return drawn


def _at(curves: Floats, percent: float) -> Floats:
    return np.asarray(curves[:, int(np.searchsorted(CURVE_PERCENT, percent))])


def alt_months(views: RiverViews) -> str:
    """The figure in a sentence."""
    means = views.monthly_mean
    wet, dry = int(np.nanargmax(means)), int(np.nanargmin(means))
    return (
        f"Daily discharge by calendar month: {MONTH_NAMES[wet]} is the wettest with a mean of "
        f"{style.quantity(float(means[wet]), 'm³/s')}, {MONTH_NAMES[dry]} the driest with "
        f"{style.quantity(float(means[dry]), 'm³/s')}."
    )


# --- mass curve ---------------------------------------------------------------------------------


def draw_mass(ax: Axes, views: RiverViews) -> dict[str, Artist]:
    """Cumulative volume less that of the mean flow, with its extreme tangents.

    Returns the line `departure`, and the level lines `highest` and `lowest`.
    """
    curve, time = views.mass_curve, _decimal_years(views)
    volume = np.concatenate([[0.0], curve.departure]) / 1e6
    steps = np.unique(np.linspace(0, volume.size - 1, min(4 * COLUMNS, volume.size)).astype(int))
    start = np.concatenate([[time[0]], time + 1 / DAYS_PER_YEAR])
    _calendar_axis(ax, time)
    (line,) = ax.plot(start[steps], volume[steps], color=style.BLUE, linewidth=1.1)
    room = 0.12 * max(float(np.ptp(volume)), 1e-9)
    ax.set_ylim(volume.min() - room, volume.max() + room)
    style.numbers(ax, "y")
    style.name_axes(ax, "Calendar year", "Volume above that of the mean flow, million m³")
    drawn: dict[str, Artist] = {"departure": line}
    for name, level in (("highest", volume.max()), ("lowest", volume.min())):
        drawn[name] = ax.axhline(level, color=style.GREY, linewidth=0.9, linestyle=(0, (4, 3)))
    Labels(ax).key((drawn["highest"], "extreme tangents, parallel to the mean flow"))
    return drawn


def alt_mass(views: RiverViews) -> str:
    """The figure in a sentence."""
    curve = views.mass_curve
    return (
        f"Mass curve less the mean flow of {style.quantity(curve.mean, 'm³/s')}: its extreme "
        f"tangents, at {curve.highest} and {curve.lowest}, lie "
        f"{style.quantity(curve.storage / 1e6, 'million m³')} apart, the storage that would even "
        "the flow out."
    )
