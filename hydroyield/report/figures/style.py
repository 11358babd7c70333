"""How the figures look: colours, type, axes.

Colours are those of Okabe & Ito (2008, "Color Universal Design"), which people with the common
kinds of colour blindness tell apart, and tints of them. Neighbours differ in lightness, in dash or
in hatching too, so that a grey print can be read.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from contextlib import contextmanager
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from hydroyield.quantities import rounded

if TYPE_CHECKING:
    from matplotlib.axes import Axes

Floats = NDArray[np.float64]

BLUE, ORANGE, GREEN, VERMILLION = "#0072B2", "#E69F00", "#009E73", "#D55E00"
PALE_BLUE, PALE_GREEN, PALE_GREY = "#B9DCF0", "#BFE5D6", "#ECECEC"
DARK_VERMILLION = "#A84A00"  # for letters, which need more contrast
INK, GREY, RULE = "#1F2328", "#57606A", "#D8DEE4"
PAPER = "#FFFFFF"

FONT_SIZE = 9.0  # pt
TITLE_SIZE = 11.0  # pt
DPI = 72  # one dot of the drawing is one point

STYLE: dict[str, Any] = {
    "font.family": "sans-serif",
    "font.sans-serif": ["DejaVu Sans"],  # comes with the drawing library, so always there
    "font.size": FONT_SIZE,
    "svg.fonttype": "none",
    "figure.facecolor": PAPER,
    "axes.facecolor": PAPER,
    "savefig.facecolor": PAPER,
    "text.color": INK,
    "axes.labelcolor": GREY,
    "axes.edgecolor": GREY,
    "axes.linewidth": 0.6,
    "axes.spines.top": False,
    "axes.spines.right": False,
    "axes.axisbelow": True,
    "axes.labelsize": FONT_SIZE,
    "grid.color": RULE,
    "grid.linewidth": 0.6,
    "xtick.color": GREY,
    "ytick.color": GREY,
    "xtick.labelsize": FONT_SIZE,
    "ytick.labelsize": FONT_SIZE,
    "xtick.major.width": 0.6,
    "ytick.major.width": 0.6,
    "xtick.minor.width": 0.4,
    "ytick.minor.width": 0.4,
    "lines.linewidth": 1.6,
    "lines.solid_joinstyle": "round",
    "hatch.linewidth": 0.6,
    "legend.frameon": False,
    "legend.fontsize": FONT_SIZE,
}


@contextmanager
def drawing(salt: str) -> Iterator[None]:
    """Our style alone, whatever the user's own settings; they are back afterwards.

    salt : makes the ids of a drawing the same on every run
    """
    import matplotlib

    plain = {k: v for k, v in matplotlib.rcParamsDefault.items() if not k.startswith("backend")}
    with matplotlib.rc_context(plain | STYLE | {"svg.hashsalt": salt}):  # type: ignore[arg-type]
        yield


def number(value: float, _: object = None) -> str:
    """A number on an axis: no exponent, thousands set apart."""
    if abs(value) >= 1000:
        return f"{value:,.0f}".replace(",", "\u202f")
    return f"{value:.6g}"


def name_axes(ax: Axes, x: str, y: str) -> None:
    """Name both axes; the name of the y axis stands level, above its top."""
    ax.set_xlabel(x)
    ax.set_ylabel(y, rotation=0, ha="left", va="bottom")
    ax.yaxis.set_label_coords(0.0, 1 + 5 / ax.get_window_extent().height)
    ax.grid(axis="y")


def line_limits(ax: Axes, low: float, high: float) -> str:
    """Limits of the y axis for lines: from 0 where values vary much, else close around them.

    Returns words to add to the name of the axis.
    """
    room = 0.3 * max(high - low, 0.05 * high)
    from_zero = low < 0.6 * high or high - low < 0.02 * high
    room = max(room, 0.15 * high) if from_zero else room
    ax.set_ylim(0.0 if from_zero else max(0.0, low - room), high + room)
    numbers(ax, "y")
    return "" if from_zero else " (axis does not begin at 0)"


def percent_of_time(ax: Axes) -> None:
    """The x axis of a duration curve."""
    ax.set_xlim(0, 100)
    ax.set_xticks(range(0, 101, 10))


def numbers(ax: Axes, *which: str) -> None:
    """Plain numbers on the axes named ("x", "y"), and few enough to be read."""
    from matplotlib.ticker import FuncFormatter, MaxNLocator

    for name in which:
        axis = ax.xaxis if name == "x" else ax.yaxis
        axis.set_major_locator(MaxNLocator(6, steps=[1, 2, 2.5, 5, 10]))
        axis.set_major_formatter(FuncFormatter(number))


def log_limits(*values: Floats) -> tuple[float, float]:
    """Limits of a logarithmic axis for all values above 0, over one decade to four."""
    shown = np.concatenate([np.asarray(v)[np.asarray(v) > 0] for v in values])
    if not shown.size:
        return 0.1, 10.0
    low, high = float(shown.min()) / 1.3, float(shown.max()) * 1.3
    return min(max(low, high / 2e4), high / 12), high


def log_scale(ax: Axes, which: str, low: float, high: float, minor: bool = True) -> None:
    """A logarithmic axis with plain numbers at 1, 2, 5 or, over many decades, at fewer."""
    from matplotlib.ticker import FixedLocator, FuncFormatter, NullFormatter

    axis = ax.xaxis if which == "x" else ax.yaxis
    (ax.set_xscale if which == "x" else ax.set_yscale)("log")
    (ax.set_xlim if which == "x" else ax.set_ylim)(low, high)
    frame = ax.get_window_extent()
    room = frame.width / 38 if which == "x" else frame.height / 13  # names that fit
    choices = [_inside(marked, low, high) for marked in ((1, 2, 5), (1, 3), (1,))]
    axis.set_major_locator(FixedLocator(next((c for c in choices if len(c) <= room), choices[-1])))
    axis.set_minor_locator(FixedLocator(_inside(range(1, 10), low, high) if minor else []))
    axis.set_major_formatter(FuncFormatter(number))
    axis.set_minor_formatter(NullFormatter())


def _inside(marked: Iterable[int], low: float, high: float) -> list[float]:
    decades = 10.0 ** np.arange(np.floor(np.log10(low)), np.ceil(np.log10(high)) + 1)
    every = np.outer(decades, list(marked)).ravel()
    return [float(f"{value:.6g}") for value in every if low <= value <= high]


def quantity(value: float, unit: str) -> str:
    """A value for people: "4.21 m³/s"."""
    return f"{rounded(value)} {unit}"
