"""Power and energy of textbook examples, through the same run as any site.

Standing of each source: "seen" was read in a stored text; "derived" was computed from inputs that
were seen; "from memory" was not seen.
"""

from __future__ import annotations

import numpy as np
import pytest

from hydroyield.energy import Estimate, Scheme, estimate_energy
from hydroyield.hydraulics import FixedLevel, Heads
from hydroyield.hydraulics.losses import Waterway
from hydroyield.powerhouse import EfficiencyCurve, Electrical, Plant, UnitGroup
from hydroyield.river import WaterRules, exceedance_percent

DENSITY, GRAVITY = 1000.0, 9.81  # of all sources below
HOURS = 8760.0  # of the year that the sources use


def calendar_years(count: int) -> np.ndarray:
    """All days of `count` years from 2001, a year of 365 days."""
    first = np.datetime64("2001-01-01")
    last = np.datetime64(f"{2001 + count}-01-01")
    return np.arange(first, last, dtype="datetime64[D]")


def equally_often(discharges: list[float], years: int) -> np.ndarray:
    """A record of whole years in which each discharge stands on the same number of days."""
    days = calendar_years(years).size
    assert days % len(discharges) == 0
    return np.resize(discharges, days)


def run(
    discharge: np.ndarray,
    years: int,
    *,
    full: float,
    head: float,
    efficiency: float,
    minimum_share: float = 0.0,
    gross_head: float | None = None,
) -> Estimate:
    """One unit of constant efficiency, and a loss that leaves `head` at full discharge."""
    gross = head if gross_head is None else gross_head
    capacity = DENSITY * GRAVITY * full * head * efficiency
    curve = EfficiencyCurve((0.0, 1.0), (efficiency, efficiency))
    group = UnitGroup(1, "other", full, head, capacity, minimum_share, curve)
    heads = Heads(FixedLevel(gross), FixedLevel(0.0), waterway=Waterway((gross - head) / full**2))
    plant = Plant((group,), Electrical(), DENSITY, GRAVITY)
    rules = WaterRules.by_month()
    return estimate_energy(Scheme(calendar_years(years), discharge, rules, heads, plant, 1))


def mean_power_kw(estimate: Estimate) -> float:
    return estimate.cells.mean(estimate.net_power) / 1e3


def test_head_loss_and_power() -> None:
    """Cengel & Cimbala, Fluid Mechanics, ex. 5-13 (inputs seen, title from memory): 85 m; the
    book prints 66.7 MW, derived 66.708."""
    estimate = run(np.full(365, 100.0), 1, full=100.0, head=85.0, efficiency=0.80, gross_head=120.0)
    assert estimate.operation.net_head == pytest.approx(85.0, abs=1e-6)
    assert mean_power_kw(estimate) == pytest.approx(66_708, abs=0.5)
    assert estimate.installed_capacity_kw == pytest.approx(66_708, abs=0.5)


def test_yearly_runoff() -> None:
    """580 Mm3 in a year of 12 x 30 days, 80 m, 0.85 (seen, with answer): 18.6471 m3/s and
    12 439.12 kW."""
    discharge = 580e6 / (12 * 30 * 86400)
    assert discharge == pytest.approx(18.6471, abs=5e-5)
    estimate = run(np.full(365, discharge), 1, full=20.0, head=80.0, efficiency=0.85)
    assert mean_power_kw(estimate) == pytest.approx(12_439.12, abs=0.005)


MONTHLY_VOLUMES = [500, 200, 1500, 2500, 3000, 2400, 2000, 1500, 1500, 1000, 800, 600]  # Mm3
# months in which a volume is equalled or exceeded (power-plant textbook; seen)
MONTHS_EXCEEDED = {
    200: 12, 500: 11, 600: 10, 800: 9, 1000: 8, 1500: 7, 2000: 4, 2400: 3, 2500: 2, 3000: 1,
}  # fmt: skip


def test_months_exceeded_with_ties() -> None:
    """Of three equal months each counts all three."""
    ranks = exceedance_percent(MONTHLY_VOLUMES) * (12 + 1) / 100
    found = dict(zip(MONTHLY_VOLUMES, ranks.tolist(), strict=True))
    assert found == pytest.approx(MONTHS_EXCEEDED)


def test_monthly_duration_curve_and_power() -> None:
    """The same months of 30 days, 80 m, 0.80 (inputs seen): mean 562.63 m3/s and 353.24 MW
    (derived). 16 years hold each discharge on 487 days."""
    discharges = [volume * 1e6 / (30 * 86400) for volume in MONTHLY_VOLUMES]
    record = equally_often(discharges, 16)
    estimate = run(record, 16, full=1200.0, head=80.0, efficiency=0.80)
    assert record.mean() == pytest.approx(562.63, abs=0.005)
    assert mean_power_kw(estimate) == pytest.approx(353_240, abs=5)


def test_firm_power() -> None:
    """Mehta, Principles of Power System (from memory): 94 m3/s, 39 m, 0.80 give 28 771 kW and
    252.03 GWh in 8760 h."""
    estimate = run(np.full(365, 94.0), 1, full=94.0, head=39.0, efficiency=0.80)
    assert mean_power_kw(estimate) == pytest.approx(28_771, abs=0.5)
    assert estimate.mean_annual_energy_mwh == pytest.approx(252_030, abs=5)


def test_weekly_flows() -> None:
    """Mehta (from memory): seven flows, 15 m, 0.85; mean 713 m3/s and 89 180 kW. 28 years hold
    each on 1461 days."""
    flows = [500.0, 520.0, 850.0, 800.0, 875.0, 900.0, 546.0]
    record = equally_often(flows, 28)
    assert record.mean() == pytest.approx(713, abs=1e-9)
    estimate = run(record, 28, full=1000.0, head=15.0, efficiency=0.85)
    assert mean_power_kw(estimate) == pytest.approx(89_180, abs=5)


# --- a straight duration curve Q(p) = Qmax (1 - p), integrated exactly (derived) ------------------


def straight_record(years: int, largest: float) -> np.ndarray:
    """Discharges at the middles of equal steps of exceedance, in a mixed order."""
    days = calendar_years(years).size
    steps = largest * (np.arange(days) + 0.5) / days
    return np.random.default_rng(7).permutation(steps)


def exact_mean(full: float, largest: float, smallest: float = 0.0) -> float:
    """Qd - Qd^2 / 2 Qmax - Qmin^2 / 2 Qmax, mean turbine discharge [m3/s]."""
    return full - full**2 / (2 * largest) - smallest**2 / (2 * largest)


def mean_turbined(estimate: Estimate) -> float:
    return estimate.cells.mean(estimate.operation.turbined)


def test_exact_integral_of_one_year() -> None:
    """Full discharge 5 of at most 10 m3/s, 10 m, 0.85, 8760 h (derived): mean 3.75 m3/s,
    2739.2 MWh, 416.93 kW installed, capacity factor 0.7500."""
    estimate = run(straight_record(1, 10.0), 1, full=5.0, head=10.0, efficiency=0.85)
    assert estimate.cells.hours_per_year == HOURS
    assert mean_turbined(estimate) == pytest.approx(3.75, abs=5e-5)
    assert estimate.mean_annual_energy_mwh == pytest.approx(2739.2, abs=0.05)
    assert estimate.installed_capacity_kw == pytest.approx(416.93, abs=0.005)
    assert estimate.capacity_factor == pytest.approx(0.7500, abs=5e-5)
    assert estimate.duration_integral_energy_mwh == pytest.approx(2739.2, abs=0.05)
    assert sum(estimate.monthly_energy_mwh) == pytest.approx(2739.2, abs=0.05)


def test_exact_integral_with_a_minimum_discharge() -> None:
    """The same with a least discharge of 1 m3/s (derived): mean 3.70 m3/s. Of 365 days one
    stands exactly at 1 m3/s."""
    estimate = run(
        straight_record(1, 10.0), 1, full=5.0, head=10.0, efficiency=0.85, minimum_share=0.2
    )
    assert mean_turbined(estimate) == pytest.approx(3.70, abs=0.005)


@pytest.mark.parametrize(
    ("full", "largest", "smallest"),
    [(5.0, 10.0, 0.0), (5.0, 10.0, 1.0), (8.0, 10.0, 2.0), (10.0, 10.0, 0.0), (10.0, 40.0, 8.0)],
)
def test_exact_integral_of_forty_years(full: float, largest: float, smallest: float) -> None:
    """14 610 days, of which every bend and step of the curve lies between two: the middles of
    the steps then integrate it exactly."""
    estimate = run(
        straight_record(40, largest),
        40,
        full=full,
        head=10.0,
        efficiency=0.85,
        minimum_share=smallest / full,
    )
    mean = exact_mean(full, largest, smallest)
    assert mean_turbined(estimate) == pytest.approx(mean, rel=1e-6)
    energy = DENSITY * GRAVITY * mean * 10.0 * 0.85 * 8766.0 / 1e6  # MWh in 365.25 days
    assert estimate.mean_annual_energy_mwh == pytest.approx(energy, rel=1e-6)
    assert estimate.duration_integral_energy_mwh == pytest.approx(energy, rel=1e-6)
    assert estimate.capacity_factor == pytest.approx(mean / full, rel=1e-6)
