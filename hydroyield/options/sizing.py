"""The best size between those listed, and how flat the optimum is."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from functools import cache

FLAT = 0.01  # share of the best that counts as nearly as good
SIZE_TOLERANCE = 1e-3  # of the size; finer than any machine is built
LEAST = -1e300  # a worth below all others


@dataclass(frozen=True)
class Sizing:
    """The best design discharge for one count, split and type.

    best : design discharge [m3/s]
    worth : there
    low, high : smallest and largest size around it whose worth is within 1 % of the best [m3/s]
    at_end : the best is the smallest or the largest size of the range, so a wider range may hold
        better ones
    low_at_end, high_at_end : sizes beyond the range may be as good
    at_limit, low_at_limit, high_at_limit : beyond it there is no plant, or none that keeps the
        limits
    """

    best: float
    worth: float
    low: float
    high: float
    at_end: bool
    low_at_end: bool
    high_at_end: bool
    at_limit: bool = False
    low_at_limit: bool = False
    high_at_limit: bool = False


Worth = Callable[[float], float | None]


def best_size(worth: Worth, sizes: Sequence[float]) -> Sizing:
    """Search between the sizes listed, from the best of them to its neighbours.

    worth : of a design discharge [m3/s], the larger the better; None where there is no plant that
        may be chosen
    sizes : listed, at least two, rising, one with a worth or more [m3/s]

    A bounded scalar search (Brent 1973, Algorithms for Minimization Without Derivatives). A peak
    between two sizes that are both poor is not looked for.
    Raises ValueError for fewer than two sizes, and where none has a worth.
    """
    from scipy.optimize import minimize_scalar

    if len(sizes) < 2:
        raise ValueError("a best size is looked for between two sizes or more")
    of = cache(worth)
    listed = {size: value for size in sizes if (value := of(size)) is not None}
    if not listed:
        raise ValueError("no size has a worth")
    top = max(listed, key=listed.__getitem__)
    below = _reach(of, top, [size for size in reversed(sizes) if size < top])
    above = _reach(of, top, [size for size in sizes if size > top])
    low, high = (path[1] if len(path) > 1 else top for path in (below.sizes, above.sizes))
    best = top
    if low < high:
        found = minimize_scalar(
            lambda size: -_known(of, size),
            bounds=(low, high),
            method="bounded",
            options={"xatol": SIZE_TOLERANCE * low},
        )
        tried = max((low, float(found.x), high), key=lambda size: _known(of, size))
        best = tried if _known(of, tried) > listed[top] else top
    enough = _known(of, best) - FLAT * abs(_known(of, best))
    left = [best, *(size for size in below.sizes if size < best)]
    right = [best, *(size for size in above.sizes if size > best)]
    first, last = below.sizes[-1], above.sizes[-1]
    low_ends, high_ends = (_known(of, end) >= enough for end in (first, last))
    return Sizing(
        best=best,
        worth=_known(of, best),
        low=_edge(of, left, enough),
        high=_edge(of, right, enough),
        at_end=best in (sizes[0], sizes[-1]),
        low_at_end=low_ends and not below.limited,
        high_at_end=high_ends and not above.limited,
        at_limit=(below.limited and best == first) or (above.limited and best == last),
        low_at_limit=low_ends and below.limited,
        high_at_limit=high_ends and above.limited,
    )


@dataclass(frozen=True)
class _Reach:
    """Sizes with a worth, going outwards: those listed, and the last before a limit."""

    sizes: tuple[float, ...]
    limited: bool


def _reach(worth: Worth, start: float, beyond: Sequence[float]) -> _Reach:
    """How far one can go from `start` over the listed sizes `beyond` before there is no worth."""
    passed = [start]
    for size in beyond:
        if worth(size) is None:
            edge = _last_with_worth(worth, passed[-1], size)
            return _Reach((*passed, *([edge] if edge != passed[-1] else [])), limited=True)
        passed.append(size)
    return _Reach(tuple(passed), limited=False)


def _last_with_worth(worth: Worth, inside: float, outside: float) -> float:
    """The last size between the two that has a worth, to a thousandth."""
    while abs(outside - inside) > SIZE_TOLERANCE * min(inside, outside):
        middle = 0.5 * (inside + outside)
        inside, outside = (middle, outside) if worth(middle) is not None else (inside, middle)
    return inside


def _known(worth: Worth, size: float) -> float:
    """A worth; least of all where there is none, such as within the tolerance of a limit."""
    value = worth(float(size))
    return LEAST if value is None else value


def _edge(worth: Worth, outward: Sequence[float], enough: float) -> float:
    """Where the worth falls below `enough`, going outwards over sizes that have one."""
    from scipy.optimize import brentq

    inside = outward[0]
    for size in outward[1:]:
        if _known(worth, size) < enough:
            tolerance = SIZE_TOLERANCE * min(inside, size)
            return float(brentq(lambda q: _known(worth, q) - enough, inside, size, xtol=tolerance))
        inside = size
    return inside
