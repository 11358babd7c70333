"""Which differences in energy between options are real, with the evidence at hand.

Two things make a difference uncertain. The years of the record are few; as all options share their
weather, differences are taken year by year. And real machines differ from their curves; errors that
options share cancel in a difference as far as they share them.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import combinations
from math import inf, sqrt

import numpy as np
from numpy.typing import NDArray

from hydroyield.options.simultaneous import LEAST_YEARS, PAIRED, chance_of, smallest_chances
from hydroyield.river.trends import standard_error_of_mean

Floats = NDArray[np.float64]

CLOSEST = 100  # options that are simulated together, by how close they are to the best
MOST_PERSISTENT = 0.9  # autocorrelation of differences
ROUNDING = 1e-9  # share of the energy below which options are the same


@dataclass(frozen=True)
class MachineError:
    """How far real machines may lie from their curves, one standard deviation each.

    shared : of all options alike, as a share of the energy
    type_offset : of all machines of a type
    size_offset : of one machine in one size
    part_load_tilt : of the efficiency of one machine in one size at no load, 0 at full opening

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
    machine : number of the machine, which tells two of one type apart
    """

    name: int
    mean_energy: float
    yearly_energy: Floats
    type: str
    sizes: tuple[tuple[float, float, float], ...]
    machine: int = 0


@dataclass(frozen=True)
class Difference:
    """Energy of one option less that of another.

    first, second : their numbers
    mean : [MWh a year]
    year_error : standard error from the record's years [MWh]; None where they do not tell
    machine_error : standard error from the machines [MWh]
    low, high : interval of this difference by itself [MWh]; unbounded where a year does not tell
    chance : of a difference as large if there were none, looked at by itself
    real : it is not 0, with all comparisons taken together
    """

    first: int
    second: int
    mean: float
    year_error: float | None
    machine_error: float
    low: float
    high: float
    chance: float
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
    critical_chance : a difference is real whose own chance is smaller, all taken together
    against : the best less each other, closest first
    pairs : among the options with the most energy
    seed : of the simulation
    """

    best: int
    years: int
    confidence: float
    critical_chance: float
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
    the best of many is found with the same years with which it is compared, the bound for all
    comparisons together is that of the smallest chance (Westfall & Young 1993, Resampling-Based
    Multiple Testing) among options that are equally good: simulated with their common weather and
    machines, the best and every error found anew in each draw. Raises ValueError for fewer than two
    candidates.
    """
    if len(candidates) < 2:
        raise ValueError("a difference needs two options")
    ranked = sorted(candidates, key=lambda candidate: (-candidate.mean_energy, candidate.name))
    best, near = ranked[0], ranked[:PAIRED]
    against = _against_first(ranked, error)
    paired = _Contrasts(near, list(combinations(range(len(near)), 2)), error)
    close = [best, *against.closest(CLOSEST)]
    smallest = smallest_chances(
        np.array([candidate.yearly_energy for candidate in close]),
        _machine_effects(close, error),
        _against_first(close, error).effective_years,
        seed,
    )
    critical, of_pairs = (float(np.quantile(each, 1 - confidence)) for each in smallest)
    return Differences(
        best=best.name,
        years=int(best.yearly_energy.size),
        confidence=confidence,
        critical_chance=critical,
        against=tuple(
            sorted(
                against.found(confidence, critical), key=lambda found: (found.mean, found.second)
            )
        ),
        pairs=tuple(paired.found(confidence, of_pairs)),
        seed=seed,
    )


def _against_first(candidates: Sequence[Candidate], error: MachineError) -> _Contrasts:
    """The first candidate with each other one."""
    return _Contrasts(candidates, [(0, place) for place in range(1, len(candidates))], error)


class _Contrasts:
    """Pairs of options, the first with more energy than the second.

    places : of the two of each pair among the candidates
    """

    def __init__(
        self,
        candidates: Sequence[Candidate],
        places: Sequence[tuple[int, int]],
        error: MachineError,
    ) -> None:
        self._pairs = [(candidates[first], candidates[second]) for first, second in places]
        self._mean = np.array([one.mean_energy - other.mean_energy for one, other in self._pairs])
        self._yearly = np.array(
            [one.yearly_energy - other.yearly_energy for one, other in self._pairs]
        )
        effects = _machine_effects(candidates, error)
        first, second = np.array(places).T
        self._machine_error = np.sqrt(((effects[first] - effects[second]) ** 2).sum(axis=1))
        self._year_error, self._count = self._years()
        self._total = np.sqrt(self._year_error**2 + self._machine_error**2)

    def _years(self) -> tuple[Floats, Floats]:
        """(n,) standard errors from the years, and the effective numbers of years."""
        years = self._yearly.shape[1]
        if years < 2:
            return np.zeros(len(self._pairs)), np.full(len(self._pairs), np.inf)
        r = _persistence(self._yearly)
        found = [standard_error_of_mean(yearly, r) for yearly in self._yearly]
        errors = np.array([each.standard_error for each in found])
        return errors, np.array([each.effective_count for each in found])

    @property
    def effective_years(self) -> float:
        """Effective number of years of a difference in the middle."""
        return float(np.median(self._count))

    def closest(self, number: int) -> list[Candidate]:
        """The second options of the pairs with the smallest difference for their error."""
        apart = np.divide(
            self._mean, self._total, out=np.full(self._mean.size, inf), where=self._total > 0
        )
        chosen = np.argsort(apart, kind="stable")[:number]
        return [self._pairs[place][1] for place in sorted(chosen)]

    def found(self, confidence: float, critical: float) -> list[Difference]:
        """Every pair with its interval, and whether it is real.

        critical : chance below which it is
        """
        from scipy.special import stdtrit

        one_year = self._yearly.shape[1] == 1
        chance, freedom = chance_of(self._mean, self._year_error, self._machine_error, self._count)
        reach = stdtrit(freedom, 0.5 + confidence / 2) * self._total
        reach = np.full(reach.size, inf) if one_year else reach
        energy = max(abs(one.mean_energy) for one, _ in self._pairs)
        real = (chance < critical) & (np.abs(self._mean) > ROUNDING * energy)
        return [
            Difference(
                first=one.name,
                second=other.name,
                mean=float(self._mean[place]),
                year_error=float(self._year_error[place]) if self._yearly.shape[1] > 1 else None,
                machine_error=float(self._machine_error[place]),
                low=float(self._mean[place] - reach[place]),
                high=float(self._mean[place] + reach[place]),
                chance=1.0 if one_year else float(chance[place]),
                real=bool(real[place]) and not one_year,
            )
            for place, (one, other) in enumerate(self._pairs)
        ]


def _persistence(yearly: Floats) -> float:
    """Autocorrelation of consecutive years of all differences (n, y) together, without its bias.

    A short series looks less persistent than it is, by (1 + 3 r) / y (Kendall 1954, Biometrika 41:
    403-404); of all of them one number is known better than of each.
    """
    apart = yearly - yearly.mean(axis=1, keepdims=True)
    square = (apart**2).sum(axis=1)
    moved = square > 0
    years = yearly.shape[1]
    if years < LEAST_YEARS or not moved.any():
        return 0.0
    consecutive = (apart[:, 1:] * apart[:, :-1]).sum(axis=1)
    r = float((consecutive[moved] / square[moved]).mean())
    return float(min((years * r + 1) / (years - 3), MOST_PERSISTENT))


def _machine_effects(candidates: Sequence[Candidate], error: MachineError) -> Floats:
    """(n, k) what each of k independent errors, one deviation large, does to an option [MWh]."""
    effects = [_effects(candidate, error) for candidate in candidates]
    sources = list(dict.fromkeys(source for moved in effects for source in moved))
    return np.array([[moved.get(source, 0.0) for source in sources] for moved in effects])


def _effects(candidate: Candidate, error: MachineError) -> dict[object, float]:
    """{error: what it does, one deviation large, to the energy of an option [MWh]}."""
    energy = candidate.mean_energy
    effects: dict[object, float] = {
        "shared": energy * error.shared,
        ("type", candidate.type): energy * error.type_offset,
    }
    for discharge, made, part_load in candidate.sizes:
        size = (candidate.type, candidate.machine, round(discharge, 9))
        for name, moved in (
            ("offset", made * error.size_offset),
            ("tilt", part_load * error.part_load_tilt),
        ):
            effects[name, *size] = effects.get((name, *size), 0.0) + moved
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
