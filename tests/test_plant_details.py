"""Further keys of the plant, each against what follows by hand or a search of every day."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
from scipy.interpolate import PchipInterpolator
from test_plant_jobs import FALLING, RIVER, UNIT, WEIGHT, check, estimate, ledger

import hydroyield.errors

PCHIP = PchipInterpolator([0.1, 0.5, 1], [0.8, 0.9, 0.85])  # of UNIT

# --- output limit by head -------------------------------------------------------------------------

LIMIT = "output_limit: [[12 m, 150 kW], [18 m, 390 kW], [19 m, 420 kW]]"


def limited_day(river: float, lost: float) -> float:
    """The best output [W] of a day by a fine grid; `lost` is k of the branch."""
    gross = 30 - float(np.interp(river, [0, 9], [10, 16]))
    full = 3 * np.sqrt(gross / (20 + lost * 9))
    tried = np.linspace(0, min(full, river), 4001)[1:]
    net = gross - lost * tried**2
    share = tried / (3 * np.sqrt(net / 20))
    most = np.minimum(WEIGHT * 3 * 20 * 0.85, 1000 * np.interp(net, [12, 18, 19], [150, 390, 420]))
    power = np.minimum(WEIGHT * tried * net * PCHIP(np.clip(share, 0.1, 1)), most)
    return float(np.where(share >= 0.2 - 1e-9, power, 0.0).max())


@pytest.mark.parametrize("lost", [0.0, 0.1])
def test_a_limit_by_head_against_a_search_of_every_day(tmp_path: Path, lost: float) -> None:
    branch = f", waterway: [{{loss_coefficient: {lost}}}]" if lost else ""
    found = estimate(tmp_path, head=FALLING, turbines=f"\n  {UNIT}, {LIMIT}{branch}}}")
    free = estimate(tmp_path, head=FALLING, turbines=f"\n  {UNIT}{branch}}}")
    by_hand = sum(limited_day(q, lost) for q in RIVER) * 24 / 4e6
    assert found.mean_annual_energy_mwh == pytest.approx(by_hand, rel=3e-4)
    assert found.mean_annual_energy_mwh < 0.99 * free.mean_annual_energy_mwh
    assert ledger(found)["capacity_limit"] < ledger(free)["capacity_limit"] - 1


def test_a_limit_above_the_capacity_changes_nothing(tmp_path: Path) -> None:
    free = estimate(tmp_path, head=FALLING)
    wide = "output_limit: [[1 m, 900 kW], [30 m, 900 kW]]"
    found = estimate(tmp_path, head=FALLING, turbines=f"\n  {UNIT}, {wide}}}")
    assert found.mean_annual_energy_mwh == pytest.approx(free.mean_annual_energy_mwh, rel=1e-5)
    assert check(found, "output_limit_at_rated_head").outcome == "pass"


def test_a_capacity_that_the_limit_forbids_at_rated_head_is_named(tmp_path: Path) -> None:
    found = estimate(tmp_path, turbines=f"\n  {UNIT}, {LIMIT}}}")
    named = check(found, "output_limit_at_rated_head")
    assert named.outcome == "warn"
    assert named.value == pytest.approx(420)
    assert named.limit == pytest.approx(WEIGHT * 3 * 20 * 0.85 / 1000)


def test_a_limit_needs_rising_heads(tmp_path: Path) -> None:
    with pytest.raises(hydroyield.errors.SiteFileError, match="sort the rows by rising net head"):
        estimate(tmp_path, turbines=f"\n  {UNIT}, output_limit: [[3 m, 9 kW], [2 m, 8 kW]]}}")
