"""Which differences in energy between options are real, with the evidence at hand.

Two things make a difference uncertain. The years of the record are few; as all options share their
weather, differences are taken year by year. And real machines differ from their curves; errors that
options share cancel in a difference as far as they share them.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from math import inf, sqrt

import numpy as np
from numpy.typing import NDArray

from hydroyield.river.trends import standard_error_of_mean

Floats = NDArray[np.float64]

DRAWS, BLOCK = 8000, 1000  # of the simulation; a seed of its own for each block
CLOSEST = 150  # options whose joint distribution is simulated, by how close they are to the best
PAIRED = 6  # options with the most energy that are compared each with each
MANY = 1e9  # degrees of freedom, as good as without end
ROUNDING = 1e-9  # share of the energy below which options are the same


@dataclass(frozen=True)
class MachineError:
    """How far real machines may lie from their curves, one standard deviation each.

    shared : of all options alike, as a share of the energy
    type_offset : of all machines of a type
    size_offset : of the machines of one type and size
    part_load_tilt : of the efficiency of one type and size at no load, falling to 0 at full opening

    The defaults are common practice: guarantees of different makers for the same machine differ by
    a few per cent.
    """

    shared: float = 0.0
    type_offset: float = 0.02
    size_offset: float = 0.01
    part_load_tilt: float = 0.03


@dataclass(frozen=True)
class Candidate:
    """An option as the comparison sees it.

    name : its number
    mean_energy : a year [MWh]
    yearly_energy : (y,) of the same years for all candidates [MWh]; empty where no years are known
    type : of its machines
    sizes : (discharge of one unit [m3/s], energy of the units of that size [MWh], the same weighted
        with the share by which they are not fully open [MWh])
    """

    name: int
    mean_energy: float
    yearly_energy: Floats
    type: str
    sizes: tuple[tuple[float, float, float], ...]


@dataclass(frozen=True)
class Difference:
    """Energy of one option less that of another.

    first, second : their numbers
    mean : [MWh a year]
    year_error : standard error from the record's years [MWh]; None where they do not tell
    machine_error : standard error from the machines [MWh]
    low, high : interval of this difference by itself [MWh]; unbounded where a year does not tell
    real : it is not 0, with all comparisons taken together
    """

    first: int
    second: int
    mean: float
    year_error: float | None
    machine_error: float
    low: float
    high: float
    real: bool

    @property
    def standard_error(self) -> float:
        """From years and machines together [MWh]."""
        return sqrt((self.year_error or 0.0) ** 2 + self.machine_error**2)


@dataclass(frozen=True)
class Differences:
    """The option with the most energy held against all others.

    best : its number
    years : of the record; 0 where none are known
    confidence : of intervals and of what counts as real
    critical : standard errors that a difference must exceed to be real, all taken together
    against : the best less each other, closest first
    pairs : among the options with the most energy
    seed : of the simulation
    """

    best: int
    years: int
    confidence: float
    critical: float
    against: tuple[Difference, ...]
    pairs: tuple[Difference, ...]
    seed: int

    @property
    def indistinguishable(self) -> tuple[int, ...]:
        """Options that cannot be told from the best, closest first."""
        return tuple(difference.second for difference in self.against if not difference.real)


def differences(
    candidates: Sequence[Candidate],
    error: MachineError,
    *,
    confidence: float = 0.95,
    seed: int = 1,
) -> Differences:
    """Hold the option with the most energy against all others, and the first few pair by pair.

    candidates : two or more
    confidence : that no difference is called real which is not

    A single difference has Student's t distribution with the effective number of years (Welch 1947,
    Biometrika 34: 28-35, Satterthwaite's degrees of freedom, the machines counting as known). As
    the best of many is compared with all, the bound of all comparisons together is the quantile of
    the largest studentised difference (Dunnett 1955, J. Am. Stat. Assoc. 50: 1096-1121; Hsu 1981,
    Ann. Stat. 9: 1026-1034), simulated with the correlations of the paired years and of the shared
    machines. Raises ValueError for fewer than two candidates.
    """
    if len(candidates) < 2:
        raise ValueError("a difference needs two options")
    ranked = sorted(candidates, key=lambda candidate: (-candidate.mean_energy, candidate.name))
    best, others = ranked[0], ranked[1:]
    against = _Contrasts([(best, other) for other in others], error)
    near = ranked[:PAIRED]
    paired = _Contrasts(
        [(one, other) for place, one in enumerate(near) for other in near[place + 1 :]], error
    )
    critical = against.closest(CLOSEST).critical(confidence, seed)
    return Differences(
        best=best.name,
        years=int(best.yearly_energy.size),
        confidence=confidence,
        critical=critical,
        against=tuple(
            sorted(
                against.found(confidence, critical), key=lambda found: (found.mean, found.second)
            )
        ),
        pairs=tuple(paired.found(confidence, paired.critical(confidence, seed))),
        seed=seed,
    )


class _Contrasts:
    """Pairs of options, the first with more energy than the second."""

    def __init__(self, pairs: Sequence[tuple[Candidate, Candidate]], error: MachineError) -> None:
        self._pairs, self._error = pairs, error
        self._mean = np.array([one.mean_energy - other.mean_energy for one, other in pairs])
        self._yearly = np.array([one.yearly_energy - other.yearly_energy for one, other in pairs])
        self._machines = _machine_parts(pairs, error)
        self._machine_error = np.sqrt((self._machines**2).sum(axis=1))
        self._year_error, self._count = self._years()
        self._total = np.sqrt(self._year_error**2 + self._machine_error**2)

    def _years(self) -> tuple[Floats, Floats]:
        """(n,) standard errors from the years, and the effective numbers of years."""
        years = self._yearly.shape[1]
        if years < 2:
            return np.zeros(len(self._pairs)), np.full(len(self._pairs), np.inf)
        found = [standard_error_of_mean(yearly) for yearly in self._yearly]
        errors = np.array([each.standard_error for each in found])
        return errors, np.array([each.effective_count for each in found])

    def closest(self, number: int) -> _Contrasts:
        """The pairs with the smallest difference for their error."""
        with np.errstate(divide="ignore", invalid="ignore"):
            apart = np.where(self._total > 0, self._mean / self._total, np.inf)
        chosen = np.argsort(apart, kind="stable")[:number]
        return _Contrasts([self._pairs[place] for place in sorted(chosen)], self._error)

    def critical(self, confidence: float, seed: int) -> float:
        """Quantile of the largest studentised difference if no option were better [1].

        Blocks of draws have seeds of their own, so that the result does not depend on who draws.
        """
        uncertain = self._total > 0
        if not uncertain.any():
            return 0.0
        apart = self._yearly
        if apart.shape[1]:
            apart = apart - apart.mean(axis=1, keepdims=True)
        spread = np.sqrt((apart**2).sum(axis=1))
        scale = np.divide(self._year_error, spread, out=np.zeros_like(spread), where=spread > 0)
        years = (apart * scale[:, None] / self._total[:, None])[uncertain]
        machines = (self._machines / self._total[:, None])[uncertain]
        freedom = float(np.min(self._count)) - 1
        largest = [
            _largest(np.random.default_rng(child), years, machines, freedom)
            for child in np.random.SeedSequence(seed).spawn(DRAWS // BLOCK)
        ]
        return float(np.quantile(np.concatenate(largest), confidence))

    def found(self, confidence: float, critical: float) -> list[Difference]:
        """Every pair with its interval, and whether it is real."""
        from scipy.special import stdtrit

        one_year = self._yearly.shape[1] == 1
        with np.errstate(divide="ignore", invalid="ignore"):
            part = np.where(self._total > 0, self._year_error / self._total, 0.0)
            freedom = np.where(part > 0, (self._count - 1) / part**4, MANY)
        reach = stdtrit(np.clip(freedom, 1.0, MANY), 0.5 + confidence / 2) * self._total
        reach = np.full(reach.size, inf) if one_year else reach
        energy = max(abs(one.mean_energy) for one, _ in self._pairs)
        real = (np.abs(self._mean) > critical * self._total) & (
            np.abs(self._mean) > ROUNDING * energy
        )
        return [
            Difference(
                first=one.name,
                second=other.name,
                mean=float(self._mean[place]),
                year_error=float(self._year_error[place]) if self._yearly.shape[1] > 1 else None,
                machine_error=float(self._machine_error[place]),
                low=float(self._mean[place] - reach[place]),
                high=float(self._mean[place] + reach[place]),
                real=bool(real[place]) and not one_year,
            )
            for place, (one, other) in enumerate(self._pairs)
        ]


def _largest(draw: np.random.Generator, years: Floats, machines: Floats, freedom: float) -> Floats:
    """(BLOCK,) the largest of the studentised differences, by size."""
    shape = (BLOCK, years.shape[1])
    weather = np.einsum("dy,ny->dn", draw.standard_normal(shape), years)
    if years.shape[1] and np.isfinite(freedom):
        chi = draw.chisquare(max(freedom, 1.0), BLOCK)
        weather *= np.sqrt(max(freedom, 1.0) / chi)[:, None]
    guess = draw.standard_normal((BLOCK, machines.shape[1]))
    return np.asarray(np.abs(weather + np.einsum("dk,nk->dn", guess, machines)).max(axis=1))


def _machine_parts(pairs: Sequence[tuple[Candidate, Candidate]], error: MachineError) -> Floats:
    """(n, k) by how much each of k independent errors, one deviation large, moves a difference."""
    parts: list[dict[object, float]] = []
    for one, other in pairs:
        moved: dict[object, float] = {}
        for candidate, sign in ((one, 1.0), (other, -1.0)):
            for source, effect in _effects(candidate, error):
                moved[source] = moved.get(source, 0.0) + sign * effect
        parts.append(moved)
    sources = list(dict.fromkeys(source for moved in parts for source in moved))
    return np.array([[moved.get(source, 0.0) for source in sources] for moved in parts])


def _effects(candidate: Candidate, error: MachineError) -> list[tuple[object, float]]:
    """What each error, one deviation large, does to the energy of an option [MWh]."""
    energy = candidate.mean_energy
    effects: list[tuple[object, float]] = [
        ("shared", energy * error.shared),
        (("type", candidate.type), energy * error.type_offset),
    ]
    for discharge, made, part_load in candidate.sizes:
        size = (candidate.type, round(discharge, 9))
        effects.append((("offset", *size), made * error.size_offset))
        effects.append((("tilt", *size), part_load * error.part_load_tilt))
    return effects


# --- in words -------------------------------------------------------------------------------------


def in_words(found: Differences) -> str:
    """What the differences say, for people."""
    same = found.indistinguishable
    years = f"{found.years} years of record" if found.years > 1 else "one year of record"
    evidence = f"{years} and the stated uncertainty of the machines"
    if not found.years:
        evidence = "the stated uncertainty of the machines (the record's years are not known)"
    first = f"Option {found.best} gives the most energy."
    if found.years == 1:
        return f"{first} One year of record cannot tell any option from it."
    if not same:
        return f"{first} All others give less, with {evidence}."
    rest = " All others give less." if len(same) < len(found.against) else ""
    verb = "cannot be told apart from it"
    return f"{first} {_named(same)} {verb} with {evidence}.{rest}"


def _named(numbers: Sequence[int], most: int = 6) -> str:
    if len(numbers) == 1:
        return f"Option {numbers[0]}"
    shown = [str(number) for number in numbers[:most]]
    if len(numbers) > most:
        return f"Options {', '.join(shown)} and {len(numbers) - most} more"
    return f"Options {', '.join(shown[:-1])} and {shown[-1]}"
