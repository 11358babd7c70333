"""The best size between those listed, and how flat the optimum is."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from functools import cache

FLAT = 0.01  # share of the best that counts as nearly as good
SIZE_TOLERANCE = 1e-3  # of the size; finer than any machine is built


@dataclass(frozen=True)
class Sizing:
    """The best design discharge for one count, split and type.

    best : design discharge [m3/s]
    worth : there
    low, high : smallest and largest size around it whose worth is within 1 % of the best [m3/s]
    at_end : the best is the smallest or the largest size of the range, so a wider range may hold
        better ones
    low_at_end, high_at_end : sizes beyond the range may be as good
    """

    best: float
    worth: float
    low: float
    high: float
    at_end: bool
    low_at_end: bool
    high_at_end: bool


def best_size(worth: Callable[[float], float], sizes: Sequence[float]) -> Sizing:
    """Search between the sizes listed, from the best of them to its neighbours.

    worth : of a design discharge [m3/s], the larger the better
    sizes : listed, at least two, rising [m3/s]

    A bounded scalar search (Brent 1973, Algorithms for Minimization Without Derivatives). A peak
    between two sizes that are both poor is not looked for.
    Raises ValueError for fewer than two sizes.
    """
    from scipy.optimize import minimize_scalar

    if len(sizes) < 2:
        raise ValueError("a best size is looked for between two sizes or more")
    of = cache(worth)
    listed = [of(size) for size in sizes]
    top = max(range(len(sizes)), key=listed.__getitem__)
    low, high = sizes[max(top - 1, 0)], sizes[min(top + 1, len(sizes) - 1)]
    found = minimize_scalar(
        lambda size: -of(float(size)),
        bounds=(low, high),
        method="bounded",
        options={"xatol": SIZE_TOLERANCE * low},
    )
    best = float(found.x) if of(float(found.x)) > listed[top] else sizes[top]
    enough = of(best) - FLAT * abs(of(best))
    return Sizing(
        best=best,
        worth=of(best),
        low=_edge(of, [size for size in reversed(sizes) if size < best], best, enough),
        high=_edge(of, [size for size in sizes if size > best], best, enough),
        at_end=best in (sizes[0], sizes[-1]),
        low_at_end=of(sizes[0]) >= enough,
        high_at_end=of(sizes[-1]) >= enough,
    )


def _edge(
    worth: Callable[[float], float], beyond: Sequence[float], best: float, enough: float
) -> float:
    """Where the worth falls below `enough`, going outwards over the listed sizes `beyond`."""
    from scipy.optimize import brentq

    inside = best
    for size in beyond:
        if worth(size) < enough:
            tolerance = SIZE_TOLERANCE * min(inside, size)
            return float(brentq(lambda q: worth(float(q)) - enough, inside, size, xtol=tolerance))
        inside = size
    return inside
