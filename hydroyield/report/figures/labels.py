"""Labels beside what they name, where there is room for them.

Each axes has one `Labels`, which knows what is taken. Widths are estimated, on the safe side, as
measuring would mean drawing twice.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from hydroyield.report.figures.style import FONT_SIZE, INK

if TYPE_CHECKING:
    from matplotlib.artist import Artist
    from matplotlib.axes import Axes
    from matplotlib.text import Text

Floats = NDArray[np.float64]
Box = tuple[float, float, float, float]  # left, bottom, right, top [pt]

WIDTH = 0.62 * FONT_SIZE  # of a letter, on the safe side [pt]
HEIGHT = 1.25 * FONT_SIZE  # of a line [pt]
APART = 3.0  # between a label and what it names [pt]
FEW = 10  # points of a line that has no gaps
PLACES = np.array([0.5, 0.4, 0.6, 0.3, 0.7, 0.2, 0.8, 0.12, 0.88])  # along the axis, in order


class Labels:
    """Places labels in an axes whose limits are set."""

    def __init__(self, ax: Axes) -> None:
        self.ax = ax
        frame = ax.get_window_extent()
        self.frame: Box = (frame.x0, frame.y0, frame.x1, frame.y1)
        self.taken: list[Box] = []
        self.lines: list[tuple[Floats, Floats]] = []
        self.unplaced: list[tuple[Artist, str]] = []

    def dots(self, x: Floats, y: Floats) -> tuple[Floats, Floats]:
        """Points of the data in the drawing [pt]."""
        with np.errstate(divide="ignore", invalid="ignore"):
            places = self.ax.transData.transform(np.column_stack([x, y]))
        return places[:, 0], places[:, 1]

    def keep_clear(self, x: float | None = None, y: float | None = None) -> None:
        """Let no label cross an upright line at `x` or a level line at `y`."""
        left, bottom, right, top = self.frame
        if x is not None:
            across = float(self.dots(np.array([x]), np.array([self.ax.get_ylim()[1]]))[0][0])
            left, right = across - 1, across + 1
        if y is not None:
            up = float(self.dots(np.array([self.ax.get_xlim()[0]]), np.array([y]))[1][0])
            bottom, top = up - 1, up + 1
        self.taken.append((left, bottom, right, top))

    def keep_off(self, x: Floats, y: Floats) -> None:
        """Let no label cross a line; gaps in it are nan."""
        self.lines.append(self.dots(x, y))

    @staticmethod
    def width(text: str) -> float:
        """Of a text, on the safe side [pt]."""
        return len(text) * WIDTH

    def put(self, text: str, left: float, bottom: float, **style: Any) -> Text | None:
        """Write a text if there is room for it at a place of the drawing [pt]."""
        box = (left, bottom, left + self.width(text), bottom + HEIGHT)
        if not _within(box, self.frame) or any(_meet(box, other) for other in self.taken):
            return None
        if any(_crosses(box, *line) for line in self.lines):
            return None
        self.taken.append(box)
        x, y = self.ax.transAxes.inverted().transform(
            (left + self.width(text) / 2, bottom + HEIGHT / 2)
        )
        given = {"ha": "center", "va": "center", "color": INK} | style
        return self.ax.text(x, y, text, transform=self.ax.transAxes, **given)

    def in_band(
        self, x: Floats, low: Floats, high: Floats, text: str, patch: Artist, **style: Any
    ) -> Text | None:
        """Name an area where it is widest; where there is no room, leave it to the key."""
        across, bottom = self.dots(x, low)
        top = self.dots(x, high)[1]
        bottom = np.clip(np.nan_to_num(bottom, nan=self.frame[1]), self.frame[1], self.frame[3])
        top = np.clip(np.nan_to_num(top, nan=self.frame[1]), self.frame[1], self.frame[3])
        width = self.width(text)
        middle = _middle(across, top - bottom) - width / 2
        found = []
        for left in np.linspace(self.frame[0], max(self.frame[0], self.frame[2] - width), 60):
            floor, roof = _window(across, bottom, left, width), _window(across, top, left, width)
            room = roof.min() - floor.max()
            enough = min(room, 2.2 * HEIGHT)  # once there is room, rather in the middle
            centre = (roof.min() + floor.max()) / 2
            found.append((enough, -abs(left - middle), left, centre - HEIGHT / 2))
        for room, _, left, start in sorted(found, reverse=True)[:12]:
            placed = self.put(text, left, start, **style) if room > HEIGHT else None
            if placed is not None:
                return placed
        self.unplaced.append((patch, text))
        return None

    def along(
        self, x: Floats, y: Floats, text: str, line: Artist, above: bool = True, **style: Any
    ) -> Text | None:
        """Name a line just above or below it; where there is no room, leave it to the key."""
        order = np.argsort(x, kind="stable")
        across, up = self.dots(x[order], y[order])
        known = np.isfinite(up)
        across, up = across[known], up[known]
        width = self.width(text)
        room = self.frame[2] - self.frame[0] - width
        for place in PLACES if across.size else ():
            left = self.frame[0] + place * room
            away = np.abs(across - left - width / 2).min()
            if away > width / 4 and across.size > FEW:  # a gap in the line
                continue
            window = _window(across, up, left, width)
            bottom = window.max() + APART if above else window.min() - APART - HEIGHT
            placed = self.put(text, left, bottom, **style)
            if placed is not None:
                return placed
        self.unplaced.append((line, text))
        return None

    def key(self, *more: tuple[Artist, str]) -> None:
        """A key above the axes, on the right, for what could not be named in place."""
        entries = [*self.unplaced, *more]
        if entries:
            self.ax.legend(
                [artist for artist, _ in entries],
                [text for _, text in entries],
                loc="lower right",
                bbox_to_anchor=(1.0, 1.0),
                borderaxespad=0.1,
                ncols=len(entries),
                handlelength=1.5,
                columnspacing=1.2,
            )


def _window(across: Floats, values: Floats, left: float, width: float) -> Floats:
    """Values of a line from `left` over `width`, its ends interpolated."""
    inside = values[(across > left) & (across < left + width)]
    ends = np.interp([left, left + width], across, values)
    return np.concatenate([ends, inside])


def _middle(across: Floats, height: Floats) -> float:
    """Centre of an area along the axis [pt]."""
    total = float(height.sum())
    return float((across * height).sum() / total) if total > 0 else float(across.mean())


def _within(box: Box, frame: Box) -> bool:
    return (
        box[0] >= frame[0] - 0.5
        and box[1] >= frame[1]
        and box[2] <= frame[2] + 0.5
        and box[3] <= frame[3] + 0.5
    )


def _crosses(box: Box, across: Floats, up: Floats) -> bool:
    """Whether a line passes a box, to the density of its points and of points between them."""
    middle = [(v[1:] + v[:-1]) / 2 for v in (across, up)]
    x, y = (np.concatenate([v, m]) for v, m in zip((across, up), middle, strict=True))
    return bool(((x > box[0]) & (x < box[2]) & (y > box[1]) & (y < box[3])).any())


def _meet(one: Box, other: Box) -> bool:
    return one[0] < other[2] and other[0] < one[2] and one[1] < other[3] and other[1] < one[3]
