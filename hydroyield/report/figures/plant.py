"""The plant: power along the year, turbine discharge and units, efficiency from water to grid."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING, Any

import numpy as np

from hydroyield.report.figures import style
from hydroyield.report.figures.data import EfficiencyCurve, PowerCurve, UnitCurve, share_of_time
from hydroyield.report.figures.labels import HEIGHT, Labels

if TYPE_CHECKING:
    from matplotlib.artist import Artist
    from matplotlib.axes import Axes


def draw_power_duration(ax: Axes, curve: PowerCurve) -> dict[str, Artist]:
    """Power duration curve, the area beneath it being the annual energy.

    Returns the area `energy`, the lines `power`, `capacity` and, with a limit, `export_limit`.
    """
    style.percent_of_time(ax)
    highest = max(curve.capacity, curve.power.max(), curve.export_limit or 0.0)
    ax.set_ylim(0, 1.15 * highest)
    style.numbers(ax, "y")
    style.name_axes(ax, "Share of the time with this power or more, %", "Net power, kW")
    labels = Labels(ax)
    area = ax.fill_between(curve.exceedance, 0, curve.power, color=style.PALE_BLUE, linewidth=0)
    (line,) = ax.plot(curve.exceedance, curve.power, color=style.BLUE)
    drawn: dict[str, Artist] = {"energy": area, "power": line}
    drawn |= _draw_limits(ax, labels, curve)
    text = f"{style.quantity(curve.energy, 'MWh')} a year"
    labels.in_band(curve.exceedance, np.zeros(curve.power.size), curve.power, text, area)
    labels.key()
    return drawn


def _draw_limits(ax: Axes, labels: Labels, curve: PowerCurve) -> dict[str, Artist]:
    """Capacity and export limit; the higher is named above its line, the lower below."""
    limits: dict[str, tuple[float, str, str, Any]] = {
        "capacity": (curve.capacity, "installed capacity", style.INK, (0, (6, 3)))
    }
    if curve.export_limit is not None:
        limits["export_limit"] = (
            curve.export_limit, "export limit", style.VERMILLION, (0, (1, 1.5))
        )  # fmt: skip
    top = max(value for value, *_ in limits.values())
    drawn: dict[str, Artist] = {}
    for name, (value, text, ink, dash) in limits.items():
        drawn[name] = ax.axhline(value, color=ink, linewidth=1.2, linestyle=dash)
        text = f"{text} {style.quantity(value, 'kW')}"
        up = labels.dots(np.array([0.0]), np.array([value]))[1][0]
        bottom = up + 2 if value == top else up - HEIGHT - 3
        ink = style.DARK_VERMILLION if ink == style.VERMILLION else ink
        labels.put(text, labels.frame[2] - labels.width(text), bottom, color=ink)
    return drawn


def alt_power_duration(curve: PowerCurve) -> str:
    """The figure in a sentence or two."""
    running = curve.exceedance[curve.power > 0]
    share = float(running.max()) if running.size else 0.0
    half = float(np.interp(50, curve.exceedance, curve.power))
    limit = "" if curve.export_limit is None else (
        f"; the export limit is {style.quantity(curve.export_limit, 'kW')}"
    )  # fmt: skip
    return (
        f"Power duration curve: {style.quantity(curve.energy, 'MWh')} a year from "
        f"{style.quantity(curve.capacity, 'kW')} installed{limit}. The plant delivers in "
        f"{share:.0f} % of the time, and {style.quantity(half, 'kW')} or more in half of it."
    )


def draw_units(axes: Sequence[Axes], curve: UnitCurve) -> dict[str, Artist]:
    """Turbine discharge, and below it the units running, along the duration curve.

    axes : two, one above the other

    Returns the area `turbined` and the lines `offered`, `rated` and `running`.
    """
    upper, lower = axes
    drawn = _draw_turbined(upper, curve)
    style.name_axes(lower, "Share of the time with this discharge or more, %", _units(curve))
    lower.set_ylim(0, curve.count + 0.25)
    lower.set_yticks(range(0, curve.count + 1, max(1, round(curve.count / 4))))
    drawn["running_area"] = lower.fill_between(
        curve.exceedance, 0, curve.running, step="mid", color=style.PALE_BLUE, linewidth=0
    )
    (drawn["running"],) = lower.step(curve.exceedance, curve.running, where="mid", color=style.BLUE)
    return drawn


def _units(curve: UnitCurve) -> str:
    return "Number of units running" + (f" ({curve.months})" if curve.months else "")


def _draw_turbined(ax: Axes, curve: UnitCurve) -> dict[str, Artist]:
    style.percent_of_time(ax)
    ax.set_ylim(0, 1.3 * max(curve.rated, curve.turbined.max()))
    style.numbers(ax, "y")
    style.name_axes(ax, "", "Discharge, m³/s" + (" (mean of the months)" if curve.months else ""))
    labels = Labels(ax)
    area = ax.fill_between(curve.exceedance, 0, curve.turbined, color=style.BLUE, linewidth=0)
    (offered,) = ax.plot(
        curve.exceedance, curve.offered, color=style.INK, linewidth=1.2, linestyle=(0, (5, 2))
    )
    rated = ax.axhline(curve.rated, color=style.VERMILLION, linewidth=1.0, linestyle=(0, (1, 1.5)))
    text = f"all units at rated discharge {style.quantity(curve.rated, 'm³/s')}"
    up = labels.dots(np.array([0.0]), np.array([curve.rated]))[1][0]
    labels.put(text, labels.frame[2] - labels.width(text), up + 2, color=style.DARK_VERMILLION)
    labels.keep_clear(y=curve.rated)
    zero = np.zeros(curve.turbined.size)
    if curve.turbined.any():
        labels.in_band(
            curve.exceedance, zero, curve.turbined, "through the turbines", area, color="white"
        )
    labels.along(curve.exceedance, curve.offered, "offered to them", offered)
    labels.key()
    return {"turbined": area, "offered": offered, "rated": rated}


def alt_units(curve: UnitCurve) -> str:
    """The figure in a sentence or two."""
    most = style.quantity(float(curve.turbined.max()), "m³/s")
    full = share_of_time(curve.exceedance, curve.running == curve.count)
    when = f" (states of {curve.months})" if curve.months else ""
    units = {1: "the unit runs", 2: "both units run"}.get(
        curve.count, f"all {curve.count} units run"
    )
    return (
        f"Turbine discharge along the duration curve of the river: at most {most} of the "
        f"{style.quantity(curve.rated, 'm³/s')} for which the plant is rated; {units} in about "
        f"{full:.0f} % of the time{when}."
    )


def draw_efficiency(ax: Axes, curve: EfficiencyCurve) -> dict[str, Artist]:
    """Efficiency from the turbined water at gross head to the grid, against turbine discharge.

    Returns the lines `mean`, `all_used` and `spilling`; nothing where there is no energy.
    """
    known = curve.efficiency[np.isfinite(curve.efficiency)]
    ax.set_xlim(0, 1.05 * (float(curve.turbined.max()) or 1.0))
    ax.set_ylim(10 * np.floor(max(0.0, known.min() - 10) / 10) if known.size else 0.0, 100)
    style.numbers(ax, "x", "y")
    low = ax.get_ylim()[0]
    months = f" (states of {curve.months})" if curve.months else ""
    cut = f" (axis from {low:.0f})" if low > 0 else ""
    style.name_axes(
        ax,
        "Turbine discharge, m³/s" + months,
        "Grid power / water power at gross head, %" + cut,
    )
    labels = Labels(ax)
    if not np.isfinite(curve.mean):
        ax.text(0.5, 0.5, "the plant never runs", transform=ax.transAxes, ha="center")
        return {}
    drawn: dict[str, Artist] = {"mean": _draw_mean(ax, labels, curve.mean)}
    labels.keep_off(curve.turbined, curve.efficiency)
    drawn["all_used"] = _draw_branch(ax, labels, curve, spilling=False)
    drawn["spilling"] = _draw_branch(ax, labels, curve, spilling=True)
    labels.key()
    return drawn


def _draw_mean(ax: Axes, labels: Labels, mean: float) -> Artist:
    labels.keep_clear(y=mean)
    text = f"mean of\nthe years\n{mean:.0f} %"
    ax.annotate(
        text, (1, mean), xycoords=("axes fraction", "data"), xytext=(4, 0),
        textcoords="offset points", va="center", color=style.GREY,
    )  # fmt: skip
    return ax.axhline(mean, color=style.GREY, linewidth=0.9, linestyle=(0, (4, 3)))


def _draw_branch(ax: Axes, labels: Labels, curve: EfficiencyCurve, spilling: bool) -> Artist:
    """The states in which all the water is used, or those in which the river offers more."""
    ink, letters, dash, width, text = (
        (style.VERMILLION, style.DARK_VERMILLION, (0, (4, 1.5)), 1.4, "more offered than used")
        if spilling
        else (style.BLUE, style.BLUE, "-", 2.0, "all offered water used")
    )
    efficiency = np.where(curve.spilling == spilling, curve.efficiency, np.nan)
    (line,) = ax.plot(curve.turbined, efficiency, color=ink, linestyle=dash, linewidth=width)
    known = np.isfinite(efficiency)
    across, up = curve.turbined[known], efficiency[known]
    if across.size and max(map(np.ptp, labels.dots(across, up))) > 6:  # else a dot at most
        labels.along(across, up, text, line, above=not spilling, color=letters)
    return line


def alt_efficiency(curve: EfficiencyCurve) -> str:
    """The figure in a sentence or two."""
    if not np.isfinite(curve.efficiency).any() or not np.isfinite(curve.mean):
        return "Plant efficiency against turbine discharge: the plant never runs."
    best = int(np.nanargmax(curve.efficiency))
    return (
        "Plant efficiency from the turbined water at gross head to the grid: at best "
        f"{curve.efficiency[best]:.0f} %, at {style.quantity(float(curve.turbined[best]), 'm³/s')};"
        f" {curve.mean:.0f} % over the years used."
    )
