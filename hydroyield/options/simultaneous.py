"""How small a chance must be to count, where the best of many options is compared with all.

With many comparisons some chance is small even where all options are equally good. How small is
found by simulation: options with the common weather and the common machines of the real ones, in
each draw the best and every error found anew.
"""

from __future__ import annotations

from math import inf, sqrt

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]
Ints = NDArray[np.intp]

DRAWS, BLOCK = 4000, 500  # of the simulation; a seed of its own for each block
PAIRED = 6  # options with the most energy that are compared each with each
LEAST_YEARS = 5  # for the covariances of options
MANY = 1e9  # degrees of freedom, as good as without end


def chance_of(
    apart: Floats, year_error: Floats, machine_error: Floats, count: Floats | float
) -> tuple[Floats, Floats]:
    """Chance of differences as large if there were none, and their degrees of freedom.

    apart, year_error, machine_error : of one shape [MWh]
    count : effective number of years, of that shape or one

    Student's t distribution with Satterthwaite's degrees of freedom, the machines counting as known
    (Welch 1947, Biometrika 34: 28-35).
    """
    from scipy.special import stdtr

    total = np.sqrt(year_error**2 + machine_error**2)
    known = total > 0
    part = np.divide(year_error, total, out=np.zeros(total.shape), where=known)
    steps = np.divide(np.abs(apart), total, out=np.zeros(total.shape), where=known)
    steps = np.where(known, steps, np.where(apart == 0, 0.0, inf))
    with np.errstate(divide="ignore", invalid="ignore"):
        freedom = np.where(part > 0, (np.asarray(count) - 1) / part**4, MANY)
    freedom = np.clip(freedom, 1.0, MANY)
    return np.asarray(2 * stdtr(freedom, -steps)), freedom


def smallest_chances(
    yearly: Floats, machines: Floats, count: float, seed: int
) -> tuple[Floats, Floats]:
    """(DRAWS,) the smallest chance if all options were equally good, in each draw.

    yearly : (n, y) energy of n options in y years; y may be 0 [MWh]
    machines : (n, k) what each of k independent errors, one deviation large, does [MWh]
    count : effective number of years
    seed : of the simulation

    Of the best against all others, and of the first few pair by pair. Blocks of draws have seeds
    of their own, so that the result does not depend on who draws.
    """
    years = yearly.shape[1]
    if years < 2:
        yearly, count = np.zeros((len(yearly), 1)), 2.0
    apart = yearly - yearly.mean(axis=1, keepdims=True)
    apart -= apart.mean(axis=0)  # what all share is in no difference
    together, alone = _spread(apart / sqrt(max(years - 1, 1)))
    drawn = [
        _drawn(np.random.default_rng(child), together, alone, machines, max(2, round(count)))
        for child in np.random.SeedSequence(seed).spawn(DRAWS // BLOCK)
    ]
    against, pairs = zip(*drawn, strict=True)
    return np.concatenate(against), np.concatenate(pairs)


def _spread(apart: Floats) -> tuple[Floats, Floats]:
    """Deviations that options share, (n, y), and that each has by itself, (n,) [MWh].

    apart : (n, y) yearly energies about their mean, without what all share, over the root of y - 1

    Few years make options look more alike than they are. Their covariances in these years have the
    weight of Schaefer & Strimmer (2005, Stat. Appl. Genet. Mol. Biol. 4: 32; target D); with very
    few years each option moves by itself, and all alike.
    """
    count, years = apart.shape
    variance = (apart**2).sum(axis=1)
    if years < LEAST_YEARS:
        return np.zeros(apart.shape), np.full(count, sqrt(float(variance.mean())))
    products = apart[:, None] * apart * (years - 1)
    doubt = products.var(axis=2) * years**2 / (years - 1) ** 3
    square = (apart[:, None] * apart).sum(axis=2) ** 2
    off = ~np.eye(count, dtype=bool)
    total = float(square[off].sum())
    alone = min(1.0, float(doubt[off].sum()) / total) if total > 0 else 0.0
    return sqrt(1 - alone) * apart, np.sqrt(alone * variance)


def _drawn(
    draw: np.random.Generator, together: Floats, alone: Floats, machines: Floats, years: int
) -> tuple[Floats, Floats]:
    """(BLOCK,) smallest chance against the best, and pair by pair, of options equally good.

    together, alone : (n, y) and (n,) deviation of options, see `_spread` [MWh]
    machines : (n, k) what each machine error does [MWh]
    years : independent ones of a draw
    """
    weather = draw.standard_normal((BLOCK, years, together.shape[1]))
    yearly = np.einsum("dty,ny->dtn", weather, together)
    yearly += alone * draw.standard_normal(yearly.shape)
    moved = np.einsum("dk,nk->dn", draw.standard_normal((BLOCK, machines.shape[1])), machines)
    energy = yearly.mean(axis=1) + moved
    order = np.argsort(-energy, axis=1, kind="stable")
    machine_error = np.sqrt(((machines[:, None] - machines) ** 2).sum(axis=2))

    def chance(one: Ints, other: Ints) -> Floats:
        """(BLOCK, m) of pairs; `one` (BLOCK, 1) and `other` (BLOCK, m) are places of options."""
        difference = np.take_along_axis(yearly, one[:, None], axis=2) - np.take_along_axis(
            yearly, other[:, None], axis=2
        )
        by_years = difference.std(axis=1, ddof=1) / sqrt(years)
        by_machines = machine_error[one, other]
        gap = np.take_along_axis(energy, one, axis=1) - np.take_along_axis(energy, other, axis=1)
        return chance_of(gap, by_years, by_machines, years)[0]

    of_best = chance(order[:, :1], order[:, 1:])
    pairs = of_best[:, : PAIRED - 1].min(axis=1)
    for place in range(1, min(PAIRED, order.shape[1]) - 1):
        later = chance(order[:, place : place + 1], order[:, place + 1 : PAIRED])
        pairs = np.minimum(pairs, later.min(axis=1))
    return of_best.min(axis=1), pairs
