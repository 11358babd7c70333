"""From gauge to site."""

from __future__ import annotations

import numpy as np
import pandas as pd
import pytest

from hydroyield.record import Record
from hydroyield.record.transfer import (
    SpotFit,
    area_check,
    by_area,
    by_means,
    fit_spot_gaugings,
    spot_checks,
)

KM2 = 1e6


def test_area_ratio_with_exponent() -> None:
    """By hand: (143.5 / 287) ^ 0.8 = 0.5 ^ 0.8 = 0.574349."""
    assert by_area(287 * KM2, 143.5 * KM2, 0.8).factor == pytest.approx(0.574349, abs=5e-7)
    assert by_area(287 * KM2, 287 * KM2, 0.8).factor == 1.0


def test_uncertainty_of_the_exponent_grows_with_the_ratio() -> None:
    """Rectangular half width 0.3: deviation 0.3 / sqrt 3 (JCGM 100:2008, 4.3.7)."""
    assert by_area(100 * KM2, 100 * KM2, 1.0).relative_uncertainty == 0.0
    half = by_area(100 * KM2, 50 * KM2, 1.0).relative_uncertainty
    assert half == pytest.approx(2 ** (0.3 / 3**0.5) - 1)
    assert half == pytest.approx(by_area(50 * KM2, 100 * KM2, 1.0).relative_uncertainty)


@pytest.mark.parametrize(
    ("ratio", "outcome"), [(0.49, "warn"), (0.5, "pass"), (1.5, "pass"), (1.51, "warn")]
)
def test_ratios_that_are_trusted(ratio: float, outcome: str) -> None:
    """USGS SIR 2008-5126: 0.5 to 1.5 on the same stream."""
    check = area_check(100 * KM2, ratio * 100 * KM2)
    assert (check.outcome, check.value) == (outcome, pytest.approx(ratio))


def test_ratio_of_means() -> None:
    transfer = by_means(5.0, 4.0)
    assert transfer.factor == 0.8
    assert transfer.relative_uncertainty is None


# --- spot gaugings ------------------------------------------------------------------------------

DAYS = pd.date_range("2020-01-01", periods=400, freq="D")
GAUGE = 2.0 + np.sin(np.arange(400) / 30)


def gauge(values: np.ndarray = GAUGE) -> Record:
    return Record.from_series(pd.Series(values, index=DAYS))


def fit(ratios: list[float], record: Record | None = None) -> SpotFit:
    days = [np.datetime64("2020-02-01") + 20 * k for k in range(len(ratios))]
    record = record or gauge()
    place = [int((day - record.dates[0]).astype(int)) for day in days]
    return fit_spot_gaugings(
        days, [r * GAUGE[k] for r, k in zip(ratios, place, strict=True)], record
    )


def test_factor_is_the_geometric_mean_and_its_error_that_of_the_logarithms() -> None:
    """By hand: ratios 0.5, 0.8, 1.25, 2 have the geometric mean 1; their logarithms are
    -0.6931, -0.2231, 0.2231, 0.6931, deviation 0.5946, error of the mean 0.2973."""
    found = fit([0.5, 0.8, 1.25, 2.0])
    assert found.factor == pytest.approx(1.0)
    assert found.standard_error == pytest.approx(0.2973, abs=5e-5)
    assert found.transfer.relative_uncertainty == found.standard_error


def test_days_without_record_or_discharge_are_left_out_and_named() -> None:
    values = GAUGE.copy()
    values[31] = np.nan  # 2020-02-01
    values[51] = 0.0  # 2020-02-21
    found = fit([0.5, 0.5, 0.7, 0.7], gauge(values))
    assert (found.used, found.without_record, found.zero) == (2, ("2020-02-01",), ("2020-02-21",))
    assert found.factor == pytest.approx(0.7)
    message = spot_checks(found, None)[0].message
    assert "2020-02-01" in message
    assert "2020-02-21" in message


def test_no_gauging_on_a_day_of_the_record_is_refused() -> None:
    with pytest.raises(ValueError, match=r"none of the 2 spot gaugings .* runs from 2020-01-01"):
        fit_spot_gaugings(
            [np.datetime64("1999-01-01"), np.datetime64("2031-01-01")], [1.0, 2.0], gauge()
        )


def test_agreement_with_the_area_ratio() -> None:
    """t of the ratios above, against a factor f: |ln f| / 0.2973, limit t(0.975, 3) = 3.182."""
    found = fit([0.5, 0.8, 1.25, 2.0])
    agrees = spot_checks(found, by_area(100 * KM2, 200 * KM2, 1.0))[1]
    assert agrees.limit == pytest.approx(3.182, abs=5e-4)
    assert agrees.value == pytest.approx(np.log(2) / 0.2973, rel=2e-4)
    assert agrees.outcome == "pass"
    apart = spot_checks(found, by_area(100 * KM2, 300 * KM2, 1.0))[1]
    assert apart.outcome == "warn"
    assert "method: spot_gaugings" in apart.message


def test_gaugings_that_agree_to_the_digit_have_no_scatter() -> None:
    found = fit([0.8] * 8)
    assert found.standard_error == pytest.approx(0, abs=1e-12)
    same = spot_checks(found, by_area(100 * KM2, 80 * KM2, 1.0))
    assert [check.outcome for check in same] == ["pass", "pass"]


def test_few_gaugings_are_named() -> None:
    assert spot_checks(fit([0.8] * 5), None)[0].outcome == "warn"
    assert spot_checks(fit([0.8] * 6), None)[0].outcome == "pass"
