"""A plant that is worse in one thing never gives more energy: a few drawn plants, more if slow."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from typing import Any

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from test_properties import not_more, schemes

from hydroyield.energy import Scheme
from hydroyield.energy.beside import AGES, after_years, mean_over_life
from hydroyield.hydraulics.losses import Pipe, Waterway, rack_coefficient, racks_of_seasons
from hydroyield.powerhouse import Dated, Outages, Spread

few = settings(deadline=None, max_examples=2, suppress_health_check=[HealthCheck.too_slow])
many = settings(few, max_examples=40)

Draw = Callable[[st.SearchStrategy[Any]], Any]


def _with_way(plant: Scheme, way: Waterway) -> Scheme:
    racks = racks_of_seasons(way, plant.rules.month_of_season)
    return replace(plant, heads=replace(plant.heads, waterway=way, rack_of_season=racks))


def _in_order(draw: Draw, values: st.SearchStrategy[float]) -> list[float]:
    return sorted([draw(values), draw(values)])


# Units without a minimum where head changes: the least discharge of a unit falls with its head, so
# that more losses may let it run on a day on which it would have stood.


def more_blockage(draw: Draw) -> tuple[Scheme, Scheme]:
    plant = draw(schemes(minimum=0.0))
    area = draw(st.floats(4.0, 20.0))

    def blocked(share: float) -> Scheme:
        rack = rack_coefficient(0.01, 0.03, "rectangular", 70, area, share, 9.81)
        return _with_way(plant, Waterway(racks_by_month=(rack,) * 12))

    less, more = _in_order(draw, st.floats(0.0, 0.7))
    return blocked(less), blocked(more)


def _with_pipe(plant: Scheme, length: float, roughness: float) -> Scheme:
    pipe = Pipe(length, 1.6, roughness, 1.2, 2, 1.3e-6, 9.81)
    return _with_way(plant, Waterway(pipes=(pipe,)))


def rougher_pipe(draw: Draw) -> tuple[Scheme, Scheme]:
    plant, length = draw(schemes(minimum=0.0)), draw(st.floats(5.0, 80.0))
    less, more = _in_order(draw, st.floats(1e-5, 3e-3))
    return _with_pipe(plant, length, less), _with_pipe(plant, length, more)


def longer_pipe(draw: Draw) -> tuple[Scheme, Scheme]:
    plant, roughness = draw(schemes(minimum=0.0)), draw(st.floats(1e-5, 3e-3))
    less, more = _in_order(draw, st.floats(1.0, 120.0))
    return _with_pipe(plant, less, roughness), _with_pipe(plant, more, roughness)


def more_forced_outage(draw: Draw) -> tuple[Scheme, Scheme]:
    plant = draw(schemes())
    less, more = _in_order(draw, st.floats(0.0, 0.4))
    common, most_common = _in_order(draw, st.floats(0.0, 0.2))
    return (
        replace(plant, outages=Outages(forced_rate=less, common_rate=common)),
        replace(plant, outages=Outages(forced_rate=more, common_rate=most_common)),
    )


def more_planned_days(draw: Draw) -> tuple[Scheme, Scheme]:
    plant = draw(schemes())
    months = draw(st.sampled_from([(8,), (1, 2), tuple(range(1, 13))]))
    less, more = _in_order(draw, st.floats(0.0, 7.0))  # of four units at the most
    return (
        replace(plant, outages=Outages(planned=Spread(less, months))),
        replace(plant, outages=Outages(planned=Spread(more, months))),
    )


def longer_standstill(draw: Draw) -> tuple[Scheme, Scheme]:
    plant = draw(schemes())
    first, last = sorted([draw(st.integers(1, 28)), draw(st.integers(1, 28))])
    short = Dated((((12, first), (12, last)),))
    long = Dated((((12, first), (1, last)),))
    return (
        replace(plant, outages=Outages(standstill=short)),
        replace(plant, outages=Outages(standstill=long)),
    )


WORSE = [
    more_blockage,
    rougher_pipe,
    longer_pipe,
    more_forced_outage,
    more_planned_days,
    longer_standstill,
]
worse = pytest.mark.parametrize("pair", WORSE, ids=lambda pair: pair.__name__)


@worse
@few
@given(data=st.data())
def test_a_worse_plant_never_gives_more_energy(
    pair: Callable[[Draw], tuple[Scheme, Scheme]], data: st.DataObject
) -> None:
    better, other = pair(data.draw)
    not_more(other, better)


@pytest.mark.slow
@worse
@many
@given(data=st.data())
def test_a_worse_plant_never_gives_more_energy_often(
    pair: Callable[[Draw], tuple[Scheme, Scheme]], data: st.DataObject
) -> None:
    better, other = pair(data.draw)
    not_more(other, better)


@given(energy=st.floats(0, 1e5), rates=st.tuples(st.floats(0, 0.5), st.floats(0, 0.5)))
@settings(deadline=None, max_examples=60)
def test_more_degradation_never_leaves_more_energy(
    energy: float, rates: tuple[float, float]
) -> None:
    less, more = sorted(rates)
    assert mean_over_life(energy, more) <= mean_over_life(energy, less) * (1 + 1e-12)
    aged = [energy, *(after_years(energy, more, age) for age in AGES)]
    assert aged == sorted(aged, reverse=True)
    assert all(after_years(energy, more, age) <= after_years(energy, less, age) for age in AGES)
