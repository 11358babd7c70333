"""Trend, break, low flow, storage and yearly curves against published numbers and second ways.

Standing of each source: "from memory" was not seen again when it was written down; "analytic" and
"computed" say how the number was found. The Flat Brook record, USGS 01440000, is US federal data
in the public domain.
"""

from __future__ import annotations

from math import exp, log
from pathlib import Path

import numpy as np
import pandas as pd
import pytest
from scipy import optimize, stats

from hydroyield.river.annual_curves import annual_curves
from hydroyield.river.low_flow import low_flow, seven_day_minima
from hydroyield.river.storage import mass_curve
from hydroyield.river.trends import autocorrelation, break_in, standard_error_of_mean, trend

# Annual flow of the Nile at Aswan, 1871 to 1970, 1e8 m3 (Cobb 1978, Biometrika 65(2): 243-251;
# from memory; the sum guards against slips)
NILE = [
    1120, 1160, 963, 1210, 1160, 1160, 813, 1230, 1370, 1140, 995, 935, 1110, 994, 1020, 960, 1180,
    799, 958, 1140, 1100, 1210, 1150, 1250, 1260, 1220, 1030, 1100, 774, 840, 874, 694, 940, 833,
    701, 916, 692, 1020, 1050, 969, 831, 726, 456, 824, 702, 1120, 1100, 832, 764, 821, 768, 845,
    864, 862, 698, 845, 744, 796, 1040, 759, 781, 865, 845, 944, 984, 897, 822, 1010, 771, 676,
    649, 846, 812, 742, 801, 1040, 860, 874, 848, 890, 744, 749, 838, 1050, 918, 986, 797, 923,
    975, 815, 1020, 906, 901, 1170, 912, 746, 919, 718, 714, 740,
]  # fmt: skip
NILE_YEARS = np.arange(1871, 1971)


def test_the_nile_is_written_down_right() -> None:
    """100 years with a mean of 919.35 (from memory)."""
    assert (len(NILE), sum(NILE)) == (100, 91935)


def test_the_nile_fell_after_1898() -> None:
    """The break after 1898, means 1097.75 and 849.97 (Cobb 1978 and many after; from memory)."""
    found = break_in(NILE)
    assert NILE_YEARS[found.position] == 1899
    assert found.before == pytest.approx(1097.75, abs=5e-3)
    assert found.after == pytest.approx(849.97, abs=5e-3)
    assert found.p_value < 1e-5


def test_mann_kendall_of_the_nile() -> None:
    """Computed once with pymannkendall 1.4.3, which has its variance from Kendall too."""
    found = trend(NILE_YEARS, NILE)
    assert found.z == pytest.approx(-4.128066522844101, rel=1e-12)
    assert found.p_value == pytest.approx(3.6582629e-05, rel=1e-7)
    assert found.slope == pytest.approx(-2.6)


def test_the_nile_remembers_the_year_before() -> None:
    """Lag-one autocorrelation 0.498 (from memory)."""
    assert autocorrelation(NILE) == pytest.approx(0.498, abs=5e-4)


def test_years_that_depend_on_each_other_count_for_fewer() -> None:
    """Long series: the inflation tends to (1 + r) / (1 - r) (analytic, of a geometric series)."""
    found = standard_error_of_mean(NILE * 50)
    r = found.autocorrelation
    assert found.effective_count == pytest.approx(len(NILE) * 50 * (1 - r) / (1 + r), rel=1e-3)


# --- frequency factors ----------------------------------------------------------------------------

# K of the Pearson type III distribution not exceeded with a probability of 0.01, 0.1, 0.2 and 0.5
# (Interagency Advisory Committee on Water Data 1982, Bulletin 17B, appendix 3; from memory)
FREQUENCY_FACTORS = {
    1.0: (-1.58838, -1.12762, -0.85161, -0.16397),
    0.5: (-1.95472, -1.21618, -0.85653, -0.08302),
    0.0: (-2.32635, -1.28155, -0.84162, 0.0),
    -0.5: (-2.68572, -1.32309, -0.80829, 0.08302),
    -1.0: (-3.02256, -1.34039, -0.75752, 0.16397),
}
RETURN_PERIODS = (100.0, 10.0, 5.0, 2.0)


def sample_of_skew(skew: float) -> np.ndarray:
    """(6,) logarithms whose unbiased coefficient of skew is the one wanted."""

    def logs(inner: float) -> np.ndarray:
        return np.array([-1.0, *[inner] * 4, 1.0])

    def excess(inner: float) -> float:
        return float(stats.skew(logs(inner), bias=False)) - skew

    return logs(optimize.brentq(excess, -1.0, 1.0, xtol=1e-14))


def factors(skew: float) -> list[float]:
    logs = sample_of_skew(skew)
    values = [low_flow(np.exp(logs), period).value for period in RETURN_PERIODS]
    return [(log(value) - logs.mean()) / logs.std(ddof=1) for value in values]


@pytest.mark.parametrize("skew", FREQUENCY_FACTORS)
def test_frequency_factors(skew: float) -> None:
    assert factors(skew) == pytest.approx(FREQUENCY_FACTORS[skew], abs=6e-6)


def test_a_skew_of_two_is_the_exponential_distribution() -> None:
    """K = -ln(1 - p) - 1 (analytic)."""
    expected = [-log(1 - 1 / period) - 1 for period in RETURN_PERIODS]
    assert factors(2.0) == pytest.approx(expected, abs=1e-9)


# --- a real record --------------------------------------------------------------------------------


@pytest.fixture(scope="module")
def flat_brook() -> pd.Series:
    path = Path(__file__).parents[1] / "data" / "flat_brook_daily.csv"
    table = pd.read_csv(path, comment="#", parse_dates=["date"])
    flow = table["discharge_cfs"].to_numpy() * 0.3048**3
    return pd.Series(flow, index=pd.DatetimeIndex(table["date"]))


def parts(series: pd.Series) -> tuple[np.ndarray, np.ndarray]:
    return series.index.to_numpy().astype("datetime64[D]"), series.to_numpy()


def test_seven_day_minima_of_flat_brook(flat_brook: pd.Series) -> None:
    """By pandas: rolling means, and years that end in March, all but the first and last whole."""
    year = flat_brook.index.year + (flat_brook.index.month >= 4)
    expected = flat_brook.rolling(7).mean().groupby(year).min().loc[1946:2025]
    found = seven_day_minima(*parts(flat_brook))
    assert list(found) == expected.index.to_list()
    assert list(found.values()) == pytest.approx(expected.to_list(), rel=1e-9)


def test_low_flow_of_flat_brook(flat_brook: pd.Series) -> None:
    """By scipy's Pearson type III; and about one year in ten is below what is found."""
    minima = np.array(list(seven_day_minima(*parts(flat_brook)).values()))
    logs = np.log(minima)
    skew = stats.skew(logs, bias=False)
    expected = exp(stats.pearson3.ppf(0.1, skew, logs.mean(), logs.std(ddof=1)))
    found = low_flow(minima)
    assert found.value == pytest.approx(expected, rel=1e-9)
    assert found.years == 80
    assert 3 <= (minima < found.value).sum() <= 14  # 8 expected, two deviations of 2.7 either way


def test_mass_curve_of_flat_brook(flat_brook: pd.Series) -> None:
    departure = (flat_brook - flat_brook.mean()).cumsum() * 86400
    found = mass_curve(*parts(flat_brook))
    assert found.storage == pytest.approx(departure.max() - departure.min(), rel=1e-9)
    assert str(found.lowest) == f"{departure.idxmin():%Y-%m-%d}"
    assert str(found.highest) == f"{departure.idxmax():%Y-%m-%d}"


def test_annual_curves_of_flat_brook(flat_brook: pd.Series) -> None:
    """By numpy's Weibull quantiles, from the other end of the axis; 2024 is the last whole year.

    A band of eighty years holds its share of them at each exceedance."""
    percent, years = np.array([5.0, 50.0, 95.0]), range(1945, 2025)
    found = annual_curves(flat_brook.index.year.to_numpy(), flat_brook.to_numpy(), years, percent)
    for row, year in zip(found.discharge, years, strict=True):
        days = flat_brook[flat_brook.index.year == year]
        expected = np.quantile(days, 1 - percent / 100, method="weibull")
        assert row == pytest.approx(expected, rel=1e-9)
    low, high = found.band(0.8)
    inside = ((found.discharge >= low) & (found.discharge <= high)).mean(axis=0)
    assert inside == pytest.approx([0.8] * 3, abs=0.03)


def test_trend_of_flat_brook(flat_brook: pd.Series) -> None:
    """By scipy: Sen's slope, and Kendall's test without the continuity correction."""
    means = flat_brook.loc["1945":"2024"].groupby(flat_brook.loc["1945":"2024"].index.year).mean()
    found = trend(means.index, means)
    assert found.slope == pytest.approx(stats.theilslopes(means, means.index).slope)
    tau = stats.kendalltau(means.index, means, method="asymptotic")
    assert found.p_value == pytest.approx(tau.pvalue, rel=0.05)
    assert found.p_value > tau.pvalue
