"""What makes an option: every combination of machine, split, design discharge and pipe."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import product

DIGITS = 12  # of the discharge of a unit, without the rounding of floating point behind them
EQUAL = 1e-9  # shares closer than this belong to equal units


@dataclass(frozen=True)
class Combination:
    """A plant to try.

    machine : number of the machine in the list of machines, from 0
    split : share of the design discharge of each unit, adding up to 1
    design_discharge : of all units at full opening [m3/s]
    pipe_diameter : of the one pipe of the waterway [m]; None for that of the site
    """

    machine: int
    split: tuple[float, ...]
    design_discharge: float
    pipe_diameter: float | None = None

    @property
    def unit_count(self) -> int:
        return len(self.split)

    @property
    def groups(self) -> list[tuple[int, float]]:
        """(count, discharge of one [m3/s]) of equal units, in the order of the split."""
        found: list[tuple[int, float]] = []
        for share in self.split:
            discharge = float(f"{share * self.design_discharge:.{DIGITS}g}")
            if found and abs(found[-1][1] - discharge) <= EQUAL * discharge:
                found[-1] = (found[-1][0] + 1, found[-1][1])
            else:
                found.append((1, discharge))
        return found

    @property
    def largest_unit(self) -> float:
        """Design discharge of the largest unit [m3/s]."""
        return max(self.split) * self.design_discharge

    @property
    def split_text(self) -> str:
        """The split as people write it: "0.33+0.67"."""
        return "+".join(f"{share:.4g}" for share in self.split)

    def units(self, type_: str) -> str:
        """The units as people speak of them: "3 x kaplan", or "kaplan 0.33+0.67".

        type_ : of the turbines
        """
        equal = len(self.groups) == 1
        return f"{self.unit_count} x {type_}" if equal else f"{type_} {self.split_text}"


def equal_split(count: int) -> tuple[float, ...]:
    """Equal shares of so many units."""
    return (1 / count,) * count


def splits_of(
    unit_counts: Sequence[int], splits: Sequence[Sequence[float]]
) -> list[tuple[float, ...]]:
    """All splits wanted, each once, fewest units first.

    unit_counts : numbers of equal units
    splits : shares of the units, divided by their sum so that they add up to 1
    """
    wanted = [equal_split(count) for count in unit_counts]
    wanted += [tuple(share / sum(split) for share in split) for split in splits]
    different: list[tuple[float, ...]] = []
    for split in sorted(wanted, key=len):
        if not any(_same(split, other) for other in different):
            different.append(split)
    return different


def _same(one: Sequence[float], other: Sequence[float]) -> bool:
    """Whether two splits make the same plant; the order of the units does not matter."""
    if len(one) != len(other):
        return False
    pairs = zip(sorted(one), sorted(other), strict=True)
    return all(abs(a - b) <= EQUAL for a, b in pairs)


def combinations(
    machines: int,
    splits: Sequence[tuple[float, ...]],
    design_discharges: Sequence[float],
    pipe_diameters: Sequence[float] = (),
) -> list[Combination]:
    """Every combination, in the order machine, split, pipe, rising design discharge.

    machines : their number
    design_discharges : of all units together [m3/s]; each counts once
    pipe_diameters : [m]; none for the pipe of the site
    """
    sizes = sorted(set(design_discharges))
    diameters: list[float | None] = sorted(set(pipe_diameters)) or [None]  # type: ignore[assignment]
    return [
        Combination(machine, split, size, diameter)
        for machine, split, diameter, size in product(range(machines), splits, diameters, sizes)
    ]
