"""Gross and net head, against the river's discharge and along the duration curve."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from hydroyield.report.figures import style
from hydroyield.report.figures.data import Curve, HeadCurve
from hydroyield.report.figures.labels import HEIGHT, Labels

if TYPE_CHECKING:
    from matplotlib.artist import Artist
    from matplotlib.axes import Axes

Floats = NDArray[np.float64]

HEAD = "Head, m"
TIME = "Share of the time with this discharge or more, %"


def draw_head_by_discharge(ax: Axes, heads: HeadCurve) -> dict[str, Artist]:
    """Gross and net head against river discharge. Returns both lines and the loss between them."""
    style.log_scale(ax, "x", *_river_limits(heads.river))
    words = style.line_limits(ax, float(heads.net_head.min()), _highest(heads.gross_head))
    style.name_axes(ax, "River discharge, m³/s (logarithmic)", HEAD + words)
    labels = Labels(ax)
    _mark_limits(ax, labels, heads)
    drawn = _draw_heads(ax, labels, heads.river, heads.gross_head, heads.net_head)
    labels.key()
    return drawn


def draw_head_duration(ax: Axes, curve: Curve) -> dict[str, Artist]:
    """Gross and net head along the duration curve of the river. Returns lines and loss."""
    style.percent_of_time(ax)
    words = style.line_limits(ax, float(curve.net_head.min()), _highest(curve.gross_head))
    style.name_axes(ax, TIME, HEAD + words)
    labels = Labels(ax)
    drawn = _draw_heads(ax, labels, curve.exceedance, curve.gross_head, curve.net_head)
    labels.key()
    return drawn


def _draw_heads(
    ax: Axes, labels: Labels, x: Floats, gross: Floats, net: Floats
) -> dict[str, Artist]:
    loss = ax.fill_between(x, net, gross, color=style.PALE_BLUE, linewidth=0)
    (upper,) = ax.plot(x, gross, color=style.INK, linewidth=1.2, linestyle=(0, (5, 2)))
    (lower,) = ax.plot(x, net, color=style.BLUE, linewidth=2.0)
    if np.allclose(gross, net, rtol=1e-3):
        labels.along(x, gross, "gross and net head, as good as equal", lower)
    else:
        labels.along(x, gross, "gross head", upper)
        labels.along(x, net, "net head", lower, above=False, color=style.BLUE)
    return {"gross": upper, "net": lower, "loss": loss}


def _river_limits(river: Floats) -> tuple[float, float]:
    low, high = float(river[0]), float(river[-1])
    return (low, high) if high > 5 * low else style.log_limits(river)


def _highest(gross: Floats) -> float:
    return max(float(gross.max()), 0.1)


def _mark_limits(ax: Axes, labels: Labels, heads: HeadCurve) -> None:
    low, high = ax.get_ylim()
    if low < heads.least_head < high:
        labels.keep_clear(y=heads.least_head)
        line = ax.axhline(
            heads.least_head, color=style.VERMILLION, linewidth=1, linestyle=(0, (1, 2))
        )
        text = f"least net head {style.quantity(heads.least_head, 'm')}"
        level = np.full(heads.river.size, heads.least_head)
        labels.along(heads.river, level, text, line, above=False, color=style.DARK_VERMILLION)
    stop = heads.shutdown_above
    if stop is not None and heads.river[0] < stop < heads.river[-1]:
        labels.keep_clear(x=stop)
        ax.axvline(stop, color=style.GREY, linewidth=0.8, linestyle=(0, (4, 3)))
        text = f"shut down above {style.quantity(stop, 'm³/s')}"
        across = labels.dots(np.array([stop]), np.array([high]))[0][0]
        width = labels.width(text)
        bottom = labels.frame[3] - HEIGHT
        for left in (across + 4, across - 4 - width):
            if labels.put(text, left, bottom, color=style.GREY) is not None:
                break


def alt_head_by_discharge(heads: HeadCurve) -> str:
    """The figure in a sentence or two."""
    first, last = (style.quantity(float(heads.river[end]), "m³/s") for end in (0, -1))
    gross = [style.quantity(float(heads.gross_head[end]), "m") for end in (0, -1)]
    largest = float((heads.gross_head - heads.net_head).max())
    lost = f"takes at most {style.quantity(largest, 'm')} of it" if largest > 0 else "takes none"
    return (
        f"Head against river discharge: gross head is {gross[0]} at {first} and {gross[1]} at "
        f"{last}; the waterway {lost}."
    )


def alt_head_duration(curve: Curve) -> str:
    """The figure in a sentence or two."""
    shown = [5.0, 50.0, 95.0]
    net = np.interp(shown, curve.exceedance, curve.net_head)
    texts = [style.quantity(float(value), "m") for value in net]
    return (
        "Head along the duration curve of the river: net head is "
        f"{texts[0]}, {texts[1]} and {texts[2]} at discharges exceeded 5, 50 and 95 % of the time."
    )
