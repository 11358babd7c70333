"""The main job on real records, against what is published about them and plain second ways.

Fulda at Grebenau: shipped with spotpy (MIT), read from the installed package. Flat Brook:
USGS 01440000, US federal data in the public domain, kept beside the tests in cfs.
"""

from __future__ import annotations

from importlib.util import find_spec
from pathlib import Path

import numpy as np
import pandas as pd
import pytest
import twin

import hydroyield
from hydroyield.jobs import SiteEstimate

CFS = 0.3048**3  # m3/s
FLAT_BROOK = Path(__file__).parents[1] / "data" / "flat_brook_daily.csv"
KEPT, HEAD, FULL, EFFICIENCY, MINIMUM = 1.5, 3.0, 20.0, 0.85, 0.2  # of the plain plant at Fulda

PLAIN_SITE = """\
format: 1
site: {{name: {name}}}
discharge: {{record: {record}}}
environmental_flow:
  - {{rule: constant, discharge: {kept}}}
head: {{headwater: {{level: {head}}}, tailwater: {{level: 0}}}}
turbines:
  - count: 1
    type: other
    rated_discharge: {full}
    rated_head: {head}
    minimum_discharge: {minimum}
    efficiency: [[0, {efficiency}], [1, {efficiency}]]
"""


def fulda_file() -> Path:
    found = find_spec("spotpy")
    assert found is not None, "install the package with its test extra"
    assert found.origin is not None
    return Path(found.origin).parent / "examples" / "cmf_data" / "fulda_climate.csv"


def fulda_series() -> pd.Series:
    """The same record by pandas alone; the second row holds the units."""
    table = pd.read_csv(fulda_file(), skiprows=[1])
    dates = pd.to_datetime(table["date"], format="%d.%m.%Y")
    return pd.Series(table["Q"].to_numpy(dtype=float), index=pd.DatetimeIndex(dates))


def flat_brook_series() -> pd.Series:
    table = pd.read_csv(FLAT_BROOK, comment="#", parse_dates=["date"])
    return pd.Series(table["discharge_cfs"].to_numpy() * CFS, index=pd.DatetimeIndex(table["date"]))


RECORDS = {
    "fulda": (
        fulda_file(),
        fulda_series,
        "{file: daily.csv, unit: m3/s, date_column: date, value_column: Q}",
        {"kept": KEPT, "head": HEAD, "full": FULL, "minimum": MINIMUM, "efficiency": EFFICIENCY},
    ),
    "flat_brook": (
        FLAT_BROOK,
        flat_brook_series,
        "{file: daily.csv, date_column: date, value_column: discharge_cfs}",
        {"kept": 0.3, "head": 5.0, "full": 4.0, "minimum": 0.15, "efficiency": 0.8},
    ),
}


@pytest.fixture(scope="module", params=RECORDS)
def river(
    request: pytest.FixtureRequest, tmp_path_factory: pytest.TempPathFactory
) -> tuple[str, SiteEstimate, pd.Series]:
    """(name, the main job for one plain unit on the record, the record read by pandas)."""
    name = request.param
    file, series, record, plant = RECORDS[name]
    folder = tmp_path_factory.mktemp(name)
    (folder / "daily.csv").write_bytes(file.read_bytes())
    path = folder / "site.yaml"
    path.write_text(PLAIN_SITE.format(name=name, record=record, **plant))
    return name, hydroyield.estimate(hydroyield.read_site(path)), series()


# first and last day, days, min, median, mean, max [m3/s], to the digits that were noted
PUBLISHED = {
    "fulda": ("1979-01-01", "1988-12-31", 3653, 8.55, 21.3, 31.33, 360),
    "flat_brook": ("1945-01-01", "2025-05-05", 29345, 0.116, 2.149, 3.303, 178.7),
}


def test_the_record_is_read_as_published(river: tuple[str, SiteEstimate, pd.Series]) -> None:
    name, estimate, series = river
    first, last, days, least, median, mean, most = PUBLISHED[name]
    flow = estimate.scheme.valid_discharge
    assert (str(estimate.record.first), str(estimate.record.last)) == (first, last)
    assert (estimate.record.days, estimate.record.missing_days) == (days, 0)
    found = [flow.min(), np.median(flow), flow.mean(), flow.max()]
    rounded = [float(f"{value:.4g}") for value in found]
    assert rounded == pytest.approx([least, median, mean, most], rel=1e-3)
    assert flow == pytest.approx(series.to_numpy(), rel=1e-12)


def test_exceedance_discharges(river: tuple[str, SiteEstimate, pd.Series]) -> None:
    """numpy's own Weibull quantiles, from the other end of the axis."""
    _, estimate, series = river
    for percent, found in estimate.exceedance_discharge_m3s.items():
        share = 1 - float(percent) / 100
        assert found == pytest.approx(np.quantile(series, share, method="weibull"), rel=1e-9)
    for days, found in estimate.characteristic_discharge_m3s.items():
        share = 1 - float(days) / 365.25
        assert found == pytest.approx(np.quantile(series, share, method="weibull"), rel=1e-9)


def plain_run(series: pd.Series, plant: dict[str, float]) -> pd.Series:
    """Energy of each hydrological year [MWh] that has all its days, one line for each step."""
    offered = (series - plant["kept"]).clip(lower=0)
    turbined = offered.clip(upper=plant["full"]).where(offered >= plant["minimum"] * plant["full"])
    kilowatts = 9.81 * turbined.fillna(0) * plant["head"] * plant["efficiency"]
    year = series.index.year + (series.index.month >= 10)
    days = kilowatts.groupby(year).count()
    energy = kilowatts.groupby(year).sum() * 24 / 1000
    return energy[days >= 365]


def test_energy_of_every_year(river: tuple[str, SiteEstimate, pd.Series]) -> None:
    """A discharge within 1e-5 of full opening from a column of the dispatch table is read at it, so
    that single days differ by up to that share of the capacity."""
    name, estimate, series = river
    expected = plain_run(series, RECORDS[name][3])
    assert estimate.years_used == [str(year) for year in expected.index]
    yearly = list(estimate.yearly_energy_mwh.values())
    assert yearly == pytest.approx(expected.to_numpy(), rel=1e-6)
    assert estimate.mean_annual_energy_mwh == pytest.approx(expected.mean(), rel=1e-6)
    plant = RECORDS[name][3]
    kept = np.minimum(series[series.index.isin(days_used(estimate))], plant["kept"])
    assert estimate.environmental_flow_mean_m3s == pytest.approx(kept.mean(), rel=1e-9)


def days_used(estimate: SiteEstimate) -> pd.DatetimeIndex:
    first, last = int(estimate.years_used[0]), int(estimate.years_used[-1])
    return pd.date_range(f"{first - 1}-10-01", f"{last}-09-30", freq="D")


def test_a_mean_flow_all_year_would_promise_more(
    river: tuple[str, SiteEstimate, pd.Series],
) -> None:
    """The plant bends the other way: it gains nothing in floods and stands in drought."""
    name, estimate, series = river
    plant = RECORDS[name][3]
    turbined = min(series.mean() - plant["kept"], plant["full"])
    promised = 9.81 * turbined * plant["head"] * plant["efficiency"] * 8.766
    assert promised > 1.1 * estimate.mean_annual_energy_mwh


# --- a real plant on a real river -----------------------------------------------------------------

TWO_UNITS = """\
format: 1
site: {name: Two Units, latitude: 51.2, altitude: 141, water_temperature: 10}
discharge: {record: {file: daily.csv, unit: m3/s}}
environmental_flow:
  - {rule: exceedance, percent: 95}
head:
  headwater: {level: 104.2}
  tailwater: {table: [[0, 100.0], [20, 100.6], [100, 102.1], [360, 104.5]]}
  minimum_net_head: 1.0
waterway:
  - {loss_coefficient: 0.0003}
turbines:
  - {count: 2, type: kaplan, rated_discharge: 12.0, rated_head: 3.4}
electrical: {drive_efficiency: 0.97, generator_efficiency: 0.95, own_use: 2}
"""


@pytest.mark.slow
@pytest.mark.parametrize("name", RECORDS)
def test_two_units_against_the_twin(name: str, tmp_path: Path) -> None:
    """Ten years of either record; Flat Brook's discharge is made eight times larger, so that the
    same plant fits."""
    series = RECORDS[name][1]()
    series = (series * (1 if name == "fulda" else 8)).loc["1978-10-01":"1988-12-31"]
    rows = [f"{day:%Y-%m-%d},{flow:.6g}" for day, flow in series.items()]
    (tmp_path / "daily.csv").write_text("\n".join(["date,discharge", *rows]) + "\n")
    path = tmp_path / "site.yaml"
    path.write_text(TWO_UNITS)
    estimate, expected = hydroyield.estimate(hydroyield.read_site(path)), twin.estimate(path)
    assert estimate.mean_annual_energy_mwh == pytest.approx(
        expected["mean_annual_energy_mwh"], rel=1e-3
    )
    assert estimate.yearly_energy_mwh == pytest.approx(expected["yearly_energy_mwh"], rel=3e-3)
