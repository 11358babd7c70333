"""Figures that stand beside the headline: the energy of a plant that ages, and what is metered."""

from __future__ import annotations

from collections.abc import Sequence

AGES = (10, 20, 30)  # a, of the plant
LIFE = 30  # a, over which the mean of an ageing plant is taken
BEHIND_TERMINALS = ("transformer", "own_use", "export_limit", "imports")  # rows of the ledger


def after_years(energy: float, degradation: float, years: int) -> float:
    """Annual energy of a plant of some age, in the unit of that of the new plant.

    degradation : share of the energy that is lost from each year to the next
    years : that have passed; 0 for the first year
    """
    return float(energy * (1 - degradation) ** years)


def mean_over_life(energy: float, degradation: float, years: int = LIFE) -> float:
    """Mean annual energy over the first years, the first of which is that of the new plant."""
    return sum(after_years(energy, degradation, year) for year in range(years)) / years


def at_terminals(ledger: Sequence[tuple[str, float]]) -> float:
    """Energy at the generator terminals: the net less the rows that follow them.

    ledger : (step, energy) of every row, losses negative, the net among them
    """
    rows = dict(ledger)
    return rows["net"] - sum(rows.get(step, 0.0) for step in BEHIND_TERMINALS)
