"""Plant options: energy, capacity factor and marginal energy, the frontier, power of the chosen."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from hydroyield.report.figures import style
from hydroyield.report.figures.labels import HEIGHT, Labels

if TYPE_CHECKING:
    from matplotlib.artist import Artist
    from matplotlib.axes import Axes

Floats = NDArray[np.float64]

TYPE_INKS = (style.BLUE, style.VERMILLION, style.GREEN, style.INK, style.ORANGE, style.GREY)
COUNT_MARKS = "os^Dvp*hX<>8"
CHOSEN_DASHES = ("-", (0, (6, 2)), (0, (1, 1.5)), (0, (6, 2, 1, 2)))
MOST_NUMBERS = 25  # options named by number along the frontier


@dataclass(frozen=True)
class Family:
    """Options that differ in size alone, by rising capacity.

    type : of the turbines
    split : of the units, "0.33+0.67"
    count : of the units
    pipe : diameter in words; empty without a choice
    numbers : (n,) of the options
    capacity : (n,) installed [kW]
    energy : (n,) [MWh a year]
    factor : (n,) capacity factor
    marginal : (n,) energy of each further kW [kWh/kW], nan where there is none
    """

    type: str
    split: str
    count: int
    pipe: str
    numbers: NDArray[np.int64]
    capacity: Floats
    energy: Floats
    factor: Floats
    marginal: Floats

    @property
    def equal(self) -> bool:
        """Whether the units are equal."""
        return len(set(self.split.split("+"))) == 1

    @property
    def units(self) -> str:
        """The units in words."""
        alone = "1 unit" if self.count == 1 else f"{self.count} equal units"
        return (alone if self.equal else self.split) + self.pipe


@dataclass(frozen=True)
class ChosenPower:
    """Power duration curve of an option that is best by some aim.

    name : "option 3"
    exceedance : [%]
    power : [kW]
    """

    name: str
    exceedance: Floats
    power: Floats


@dataclass(frozen=True)
class OptionFacts:
    """What the figures of a comparison show.

    families : of options
    on_frontier : numbers of the options that no other beats
    wanted : capacity factor that a further kW should reach; None without
    chosen : the best by the aims, each once
    """

    families: tuple[Family, ...]
    on_frontier: frozenset[int]
    wanted: float | None
    chosen: tuple[ChosenPower, ...]

    @property
    def types(self) -> list[str]:
        return list(dict.fromkeys(family.type for family in self.families))

    @property
    def points(self) -> tuple[NDArray[np.int64], Floats, Floats]:
        """Number, capacity [kW] and energy [MWh] of all options, by rising capacity."""
        numbers = np.concatenate([family.numbers for family in self.families])
        capacity = np.concatenate([family.capacity for family in self.families])
        energy = np.concatenate([family.energy for family in self.families])
        order = np.lexsort((energy, capacity))
        return numbers[order], capacity[order], energy[order]


def draw_energy(axes: Sequence[Axes], facts: OptionFacts) -> dict[str, Artist]:
    """Energy, and below it the capacity factor, against installed capacity.

    axes : two, one above the other

    Returns the lines `energy_N` and `factor_N` of each family N, from 0.
    """
    upper, lower = axes
    _limits(upper, [family.capacity for family in facts.families])
    _limits(lower, [family.capacity for family in facts.families])
    drawn: dict[str, Artist] = {}
    for number, family in enumerate(facts.families):
        drawn[f"energy_{number}"] = _line(upper, facts, family, family.energy)
        drawn[f"factor_{number}"] = _line(lower, facts, family, 100 * family.factor)
    energy = np.concatenate([family.energy for family in facts.families])
    factor = 100 * np.concatenate([family.factor for family in facts.families])
    note = style.line_limits(upper, float(energy.min()), float(energy.max()))
    low_note = style.line_limits(lower, float(factor.min()), float(factor.max()))
    style.name_axes(upper, "", f"Net energy, MWh a year{note}")
    style.name_axes(lower, "Installed capacity, kW", f"Capacity factor, %{low_note}")
    _key(upper, facts)
    return drawn


def alt_energy(facts: OptionFacts) -> str:
    """The figure in a sentence or two."""
    _, capacity, energy = facts.points
    most = int(energy.argmax())
    factors = np.concatenate([family.factor for family in facts.families])
    return (
        f"Energy and capacity factor of {energy.size} options against installed capacity: from "
        f"{style.quantity(float(energy.min()), 'MWh')} to "
        f"{style.quantity(float(energy[most]), 'MWh')} a year, the most at "
        f"{style.quantity(float(capacity[most]), 'kW')}; capacity factors from "
        f"{100 * factors.min():.0f} to {100 * factors.max():.0f} %."
    )


def draw_marginal(ax: Axes, facts: OptionFacts) -> dict[str, Artist]:
    """Energy that each further kW brings, against installed capacity.

    Returns the line `marginal_N` of each family N that has one, and `wanted`.
    """
    shown = [family for family in facts.families if np.isfinite(family.marginal).any()]
    _limits(ax, [family.capacity for family in facts.families])
    style.name_axes(
        ax, "Installed capacity, kW", "Energy of each further kW, kWh a year (8766: all the time)"
    )
    drawn: dict[str, Artist] = {}
    if not shown:
        ax.text(0.5, 0.5, "each kind has one size only", transform=ax.transAxes, ha="center")
        ax.set_yticks([])
        return drawn
    known = np.concatenate([family.marginal for family in shown])
    high = float(np.nanmax(known))
    low = float(np.nanmin(known))
    ax.set_ylim(min(0.0, low - 0.06 * (high - low)), 1.15 * max(high, 1.0))
    style.numbers(ax, "y")
    for number, family in enumerate(facts.families):
        if np.isfinite(family.marginal).any():
            drawn[f"marginal_{number}"] = _line(ax, facts, family, family.marginal)
    if facts.wanted is not None:
        hours = 8766 * facts.wanted
        drawn["wanted"] = ax.axhline(hours, color=style.GREY, linewidth=1, linestyle=(0, (4, 3)))
        labels = Labels(ax)
        up = labels.dots(np.array([0.0]), np.array([hours]))[1][0]
        text = f"wanted capacity factor {100 * facts.wanted:.0f} %"
        labels.put(text, labels.frame[2] - labels.width(text), up + 2, color=style.GREY)
    _key(ax, facts)
    return drawn


def alt_marginal(facts: OptionFacts) -> str:
    """The figure in a sentence or two."""
    known = np.concatenate([family.marginal for family in facts.families])
    if not np.isfinite(known).any():
        return "Energy of each further kW: each kind of plant was tried in one size only."
    return (
        "Energy that each further kW brings a year, from an option to the next larger one of its "
        f"kind: from {style.quantity(float(np.nanmin(known)), 'kWh')} to "
        f"{style.quantity(float(np.nanmax(known)), 'kWh')} for each kW."
    )


def draw_frontier(ax: Axes, facts: OptionFacts) -> dict[str, Artist]:
    """All options, and those that no other beats in capacity and energy.

    Returns `options` and `frontier`.
    """
    numbers, capacity, energy = facts.points
    _limits(ax, [capacity])
    note = style.line_limits(ax, float(energy.min()), float(energy.max()))
    style.name_axes(ax, "Installed capacity, kW", f"Net energy, MWh a year{note}")
    on = np.array([number in facts.on_frontier for number in numbers])
    others = ax.scatter(capacity[~on], energy[~on], s=14, color=style.GREY, alpha=0.6, linewidth=0)
    (line,) = ax.plot(capacity[on], energy[on], color=style.BLUE, marker="o", markersize=4)
    labels = Labels(ax)
    across, up = labels.dots(capacity[on], energy[on])
    for number, x, y in list(zip(numbers[on], across, up, strict=True))[:MOST_NUMBERS]:
        text = str(number)
        labels.put(text, x - labels.width(text) / 2, y + HEIGHT / 3, color=style.BLUE)
    labels.key((line, "no option beats these (with their numbers)"), (others, "other options"))
    return {"options": others, "frontier": line}


def alt_frontier(facts: OptionFacts) -> str:
    """The figure in a sentence or two."""
    on = sorted(facts.on_frontier)
    numbers = ", ".join(map(str, on[:12])) + (f" and {len(on) - 12} more" if len(on) > 12 else "")
    total = facts.points[0].size
    return (
        f"Energy against installed capacity of {total} options; {len(on)} of them are beaten by no "
        f"other, which would give as much energy with less capacity: {numbers}."
    )


def draw_chosen(ax: Axes, facts: OptionFacts) -> dict[str, Artist]:
    """Power duration curves of the options that are best by some aim.

    Returns the line `chosen_N` of each, from 0.
    """
    style.percent_of_time(ax)
    highest = max(float(curve.power.max()) for curve in facts.chosen) if facts.chosen else 1.0
    ax.set_ylim(0, 1.15 * highest)
    style.numbers(ax, "y")
    style.name_axes(ax, "Share of the time with this power or more, %", "Net power, kW")
    drawn: dict[str, Artist] = {}
    labels = Labels(ax)
    for number, curve in enumerate(facts.chosen):
        ink, dash = TYPE_INKS[number % len(TYPE_INKS)], CHOSEN_DASHES[number % len(CHOSEN_DASHES)]
        (line,) = ax.plot(curve.exceedance, curve.power, color=ink, linestyle=dash)
        labels.unplaced.append((line, curve.name))
        drawn[f"chosen_{number}"] = line
    labels.key()
    return drawn


def alt_chosen(facts: OptionFacts) -> str:
    """The figure in a sentence or two."""
    parts = []
    for curve in facts.chosen:
        running = curve.exceedance[curve.power > 0]
        share = float(running.max()) if running.size else 0.0
        most = style.quantity(float(curve.power.max()), "kW")
        parts.append(f"{curve.name} delivers up to {most} and runs in {share:.0f} % of the time")
    return f"Power duration curves of the chosen options: {'; '.join(parts)}."


# --- shared ---------------------------------------------------------------------------------------


def _limits(ax: Axes, capacities: Sequence[Floats]) -> None:
    low = min(float(capacity.min()) for capacity in capacities)
    high = max(float(capacity.max()) for capacity in capacities)
    room = 0.06 * max(high - low, 0.2 * high)
    ax.set_xlim(max(0.0, low - room), high + room)
    style.numbers(ax, "x")


def _line(ax: Axes, facts: OptionFacts, family: Family, values: Floats) -> Artist:
    ink = TYPE_INKS[facts.types.index(family.type) % len(TYPE_INKS)]
    mark = COUNT_MARKS[(family.count - 1) % len(COUNT_MARKS)]
    (line,) = ax.plot(
        family.capacity,
        values,
        color=ink,
        marker=mark,
        markersize=4.5,
        linewidth=1.1,
        linestyle="-" if family.equal else (0, (3, 2)),
        markerfacecolor=ink if family.equal else style.PAPER,
    )
    return line


def _key(ax: Axes, facts: OptionFacts) -> None:
    """Types by colour and units by mark, right of the axes."""
    from matplotlib.lines import Line2D

    handles = [
        Line2D([], [], color=TYPE_INKS[n % len(TYPE_INKS)], label=kind.replace("_", " "))
        for n, kind in enumerate(facts.types)
    ]
    seen: dict[str, Family] = {}
    for family in facts.families:
        seen.setdefault(family.units, family)
    for units, family in seen.items():
        handles.append(
            Line2D(
                [],
                [],
                color=style.GREY,
                marker=COUNT_MARKS[(family.count - 1) % len(COUNT_MARKS)],
                markersize=4.5,
                linestyle="none",
                markerfacecolor=style.GREY if family.equal else style.PAPER,
                label=units,
            )
        )
    ax.legend(
        handles=handles, loc="upper left", bbox_to_anchor=(1.01, 1.0), borderaxespad=0,
        handlelength=1.4,
    )  # fmt: skip
