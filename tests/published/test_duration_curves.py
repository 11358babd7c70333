"""Plotting positions and quantiles against published tables and scipy.

Standing of each source: "seen" was read in a stored text; "derived" was computed from inputs that
were seen.
"""

from __future__ import annotations

import numpy as np
import pytest

from hydroyield.river.duration import (
    Position,
    characteristic_discharge,
    exceedance_percent,
    quantile,
)

# UNESCO-IHE tables (seen): ten flows, and m / (N + 1) of the flows in falling order
IHE_FLOWS = [56, 52, 60, 70, 34, 30, 44, 48, 40, 38]
IHE_POSITIONS = ["0.09", "0.18", "0.27", "0.36", "0.45", "0.545", "0.64", "0.73", "0.82", "0.91"]

SHORT = [1, 2, 3, 5, 8, 13, 21, 34, 55]
# value not exceeded in 30 % of the time, scipy.stats.mstats.mquantiles (seen)
SHORT_AT_30 = {"weibull": 3.0, "hazen": 3.4, "gringorten": 3.352, "cunnane": 3.32, "blom": 3.3}
CONSTANTS = {"weibull": 0.0, "hazen": 0.5, "gringorten": 0.44, "cunnane": 0.4, "blom": 0.375}


def test_weibull_table() -> None:
    falling = sorted(IHE_FLOWS, reverse=True)
    share = exceedance_percent(IHE_FLOWS) / 100
    by_flow = dict(zip(IHE_FLOWS, share.tolist(), strict=True))
    for flow, printed in zip(falling, IHE_POSITIONS, strict=True):
        half_a_digit = 0.5 * 10.0 ** -len(printed.partition(".")[2])
        # 6 / 11 = 0.54545...: the table prints 0.545
        assert by_flow[flow] == pytest.approx(float(printed), abs=half_a_digit)


def test_gringorten_position_of_the_largest() -> None:
    """(m - 0.44) / (N + 0.12) for m = 1 of 10 (derived): 0.0553."""
    share = exceedance_percent(IHE_FLOWS, "gringorten")[IHE_FLOWS.index(70)] / 100
    assert share == pytest.approx(0.0553, abs=5e-5)


@pytest.mark.parametrize(("position", "value"), SHORT_AT_30.items())
def test_short_series(position: Position, value: float) -> None:
    assert float(quantile(SHORT, 70.0, position)) == pytest.approx(value, abs=5e-4)


@pytest.mark.parametrize("position", CONSTANTS)
@pytest.mark.parametrize("sample", ["short", "ties", "long"])
def test_quantiles_against_scipy(position: Position, sample: str) -> None:
    from scipy.stats.mstats import mquantiles

    rng = np.random.default_rng(11)
    values = {
        "short": np.array(SHORT, dtype=float),
        "ties": np.round(rng.gamma(1.5, 2.0, 60), 0),
        "long": rng.lognormal(1.0, 1.2, 500),
    }[sample]
    percent = np.linspace(0, 100, 201)
    constant = CONSTANTS[position]
    expected = mquantiles(values, 1 - percent / 100, alphap=constant, betap=constant)
    np.testing.assert_allclose(quantile(values, percent, position), expected, rtol=1e-9, atol=1e-9)


def test_exceedance_is_100_less_the_percentile() -> None:
    """As USGS duration plots say (seen); numpy calls Weibull percentiles so too."""
    percentiles = np.array([5.0, 25.0, 50.0, 75.0, 95.0])
    values = np.random.default_rng(2).gamma(1.5, 2.0, 99)
    expected = np.percentile(values, percentiles, method="weibull")
    np.testing.assert_allclose(quantile(values, 100 - percentiles), expected, rtol=1e-12)


def test_347_days_of_365() -> None:
    """Q347 of the Swiss Waters Protection Act is exceeded in 95.07 % of the time (seen)."""
    values = np.arange(1.0, 10_000.0)  # 9999 values: one in 10 000 each, in order
    q347 = float(characteristic_discharge(values, 347, days_per_year=365))
    exceeded = 100 - q347 / 100
    assert exceeded == pytest.approx(95.07, abs=0.005)
    assert q347 == pytest.approx(float(quantile(values, 100 * 347 / 365)), rel=1e-12)
