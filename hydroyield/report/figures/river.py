"""The river: its duration curve with what becomes of the water, and single years."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING, Any

import numpy as np

from hydroyield.report.figures import style
from hydroyield.report.figures.data import Curve, Hydrograph, share_of_time
from hydroyield.report.figures.labels import Labels

if TYPE_CHECKING:
    from matplotlib.artist import Artist
    from matplotlib.axes import Axes

USED, RESERVED, LEFT_OVER = "through the turbines", "stays in river or taken by others", "left over"


def draw_duration(ax: Axes, curve: Curve) -> dict[str, Artist]:
    """Duration curve of the river, and beneath it what becomes of the water.

    Returns the areas `reserved`, `used` and `left_over`, and the lines `river` and `mean`.
    """
    low, high = style.log_limits(curve.river)
    style.percent_of_time(ax)
    style.log_scale(ax, "y", low, high)
    style.name_axes(
        ax,
        "Share of the time with this discharge or more, %",
        "Discharge, m³/s (logarithmic)",
    )
    labels = Labels(ax)
    drawn = _draw_marks(ax, labels, curve)
    drawn |= _draw_areas(ax, labels, curve, low)
    (drawn["river"],) = ax.plot(curve.exceedance, curve.river, color=style.INK)
    labels.key()
    return drawn


def _draw_areas(ax: Axes, labels: Labels, curve: Curve, low: float) -> dict[str, Artist]:
    levels = np.maximum(low / 10, np.cumsum([curve.reserved, curve.turbined, curve.left_over], 0))
    floors = [np.full(curve.river.size, low / 10), levels[0], levels[1]]
    looks: dict[str, tuple[str, dict[str, Any], str]] = {
        "reserved": (RESERVED, {"facecolor": style.PALE_GREEN}, style.INK),
        "used": (USED, {"facecolor": style.BLUE}, "white"),
        "left_over": (
            LEFT_OVER,
            {"facecolor": style.PALE_GREY, "hatch": "////", "edgecolor": "#A8B0B8"},
            style.INK,
        ),
    }
    drawn: dict[str, Artist] = {}
    for (name, (text, look, ink)), floor, level in zip(looks.items(), floors, levels, strict=True):
        area = ax.fill_between(curve.exceedance, floor, level, linewidth=0, **look)
        drawn[name] = area
        if (level > floor * (1 + 1e-6)).any():
            paper = {"facecolor": look["facecolor"], "edgecolor": "none", "pad": 1.5}
            labels.in_band(curve.exceedance, floor, level, text, area, color=ink, bbox=paper)
    return drawn


def _draw_marks(ax: Axes, labels: Labels, curve: Curve) -> dict[str, Artist]:
    """The mean as a level line, and the discharge exceeded in 95 % of the time as a dot."""
    mean = ax.axhline(curve.mean_river, color=style.GREY, linewidth=0.9, linestyle=(0, (4, 3)))
    width = labels.width(text := f"mean {style.quantity(curve.mean_river, 'm³/s')}")
    level = labels.dots(np.array([0.0]), np.array([curve.mean_river]))[1][0]
    right = labels.frame[2] - width
    labels.put(text, right, level + 2, color=style.GREY)
    (dot,) = ax.plot(
        [95], [curve.low_river], "o", color=style.INK, markersize=5, zorder=5, clip_on=False
    )
    if curve.low_river > 0:
        _name_low_discharge(labels, curve)
    labels.keep_clear(y=curve.mean_river)
    return {"mean": mean, "low": dot}


def _name_low_discharge(labels: Labels, curve: Curve) -> None:
    text = f"Q95 {style.quantity(curve.low_river, 'm³/s')}"
    (across,), (up,) = labels.dots(np.array([95.0]), np.array([curve.low_river]))
    left = min(across - labels.width(text) / 3, labels.frame[2] - labels.width(text))
    river = labels.dots(curve.exceedance, curve.river)
    clear = float(np.interp(left, *river)) if river[0].size > 1 else float(up)
    for bottom in (max(up, clear) + 5, up + 16, up + 30, up - 26, up - 40):
        if labels.put(text, left, bottom, bbox=PAPER_BOX) is not None:
            break


PAPER_BOX = {"facecolor": style.PAPER, "edgecolor": "none", "pad": 1.0, "alpha": 0.85}


def alt_duration(curve: Curve) -> str:
    """The figure in a sentence or two."""
    mean, low = (style.quantity(value, "m³/s") for value in (curve.mean_river, curve.low_river))
    share = share_of_time(curve.exceedance, curve.turbined > 0)
    return (
        f"Flow duration curve: the mean discharge is {mean}, and {low} is exceeded in 95 % of the "
        f"time. The plant takes water in about {share:.0f} % of the time, at most "
        f"{style.quantity(float(curve.turbined.max()), 'm³/s')}."
    )


def draw_hydrographs(axes: Sequence[Axes], years: Sequence[Hydrograph]) -> list[dict[str, Artist]]:
    """Years of little, median and much energy, one to an axes, all to one scale.

    Returns for each the lines `river` and `remaining`, the area `turbined`, and `filled` where
    days were filled from a reference.
    """
    low, high = _common_limits(years)
    drawn = []
    for ax, year in zip(axes, years, strict=True):
        style.log_scale(ax, "y", low, high, minor=False)
        drawn.append(_draw_year(ax, year, low))
    _name_days(axes, years)
    first = Labels(axes[0])
    names = {"river": "river", "turbined": USED, "remaining": "remaining"}
    filled = [(year["filled"], "filled") for year in drawn if "filled" in year][:1]
    first.key(*((drawn[0][name], text) for name, text in names.items()), *filled)
    return drawn


def _common_limits(years: Sequence[Hydrograph]) -> tuple[float, float]:
    """Limits that show all of the river, and what remains unless next to nothing does."""
    flow = np.concatenate([year.river for year in years])
    remaining = flow - np.concatenate([year.turbined for year in years])
    low = np.min(flow[flow > 0], initial=np.inf)
    return style.log_limits(flow, remaining[remaining > low / 5])


def _draw_year(ax: Axes, year: Hydrograph, low: float) -> dict[str, Artist]:
    day = np.arange(year.river.size)
    rest = np.maximum(low / 10, year.river - year.turbined)
    area = ax.fill_between(day, rest, year.river, color=style.PALE_BLUE, linewidth=0)
    (remaining,) = ax.plot(day, rest, color=style.BLUE, linewidth=1.0, linestyle=(0, (3, 1)))
    (river,) = ax.plot(day, year.river, color=style.INK, linewidth=1.1)
    drawn: dict[str, Artist] = {"river": river, "remaining": remaining, "turbined": area}
    if year.filled is not None and year.filled.any():
        bottom, top = ax.get_ylim()
        strip = bottom * (top / bottom) ** 0.05
        drawn["filled"] = ax.fill_between(
            day, bottom, strip, where=list(year.filled), color=style.ORANGE, linewidth=0.8
        )
    return drawn


def _name_days(axes: Sequence[Axes], years: Sequence[Hydrograph]) -> None:
    for ax, year in zip(axes, years, strict=True):
        text = f"{year.name}, {year.kind}: {style.quantity(year.energy, 'MWh')}"
        style.name_axes(ax, "", "")
        ax.set_title(text, loc="left", y=1.0, fontsize=style.FONT_SIZE, color=style.INK)
        ax.set_ylabel("m³/s", rotation=90, ha="center", va="bottom")
        ax.yaxis.set_label_coords(-0.083, 0.5)
    starts, days = years[-1].month_starts, years[-1].river.size
    ends = (*starts[1:], days)
    axes[-1].set_xlim(0, days - 1)
    axes[-1].set_xticks(starts, labels=[])
    axes[-1].set_xticks(
        [(a + b) / 2 for a, b in zip(starts, ends, strict=True)], years[-1].months, minor=True
    )
    axes[-1].tick_params(axis="x", which="minor", length=0)
    axes[-1].set_xlabel("Month of the hydrological year")


def alt_hydrographs(years: Sequence[Hydrograph]) -> str:
    """The figure in a sentence or two."""
    texts = [
        f"{year.kind}, {year.name}: {style.quantity(year.energy, 'MWh')} and a mean "
        f"river discharge of {style.quantity(float(np.nanmean(year.river)), 'm³/s')}, "
        f"{style.quantity(float(np.nanmean(year.turbined)), 'm³/s')} of it through the turbines"
        for year in years
    ]
    return f"Daily discharge and what the plant takes of it: {'; '.join(texts)}."
