"""The sweep over sizes against plants that are computed in full."""

from __future__ import annotations

import numpy as np
import pandas as pd
import pytest

from hydroyield.energy import Estimate, estimate_energy
from hydroyield.evidence.outages import with_placed_outage
from hydroyield.options.combination import Combination
from hydroyield.options.sweep import SizeSweep, scales
from hydroyield.record import Record
from hydroyield.site.assembly import assemble
from hydroyield.site.option_assembly import machines_to_try, site_with, turbines_of
from hydroyield.site.reading import SiteDescription, read_site_text
from hydroyield.site.river_assembly import RiverAtSite, river_at_site

CLOSE = 1e-3  # share of the annual energy, as comparisons ask of a sweep

SITE = """\
format: 1
site: {{name: Sized}}
discharge: {{record: {{file: daily.csv, unit: m3/s}}}}
environmental_flow:
  - {{rule: monthly, discharge: {{nov-apr: 0.6, may-oct: 0.9}}}}
head:
  headwater: {headwater}
  tailwater: {{table: [[2, 97.9], [20, 98.35], [60, 99.5], [100, 100.2]]}}
{more}
turbines:
  - {{count: 1, type: {type}, rated_discharge: 6}}
electrical: {{drive_efficiency: 0.98, generator_efficiency: 0.94, own_use: 1.5}}
options: {{unit_counts: [1], design_discharges: [6]}}
"""
MORE = {
    "plain": "",
    "losses": "waterway: [{loss_coefficient: 0.0008}]",
    "pipe": "waterway: [{pipe: {length: 60 m, diameter: 2 m, roughness: 0.1 mm}}]",
    "outages": "operation: {planned_outage: {days: 10, months: aug-sep}, "
    "forced_outage_rate: 3 %, closed: jan}",
    "flood": "operation: {shutdown_above: 40 m3/s}",
}


def record() -> Record:
    """Twelve invented years in three digits."""
    dates = pd.date_range("2001-10-01", "2013-09-30", freq="D")
    noise = np.random.default_rng(7).normal(size=dates.size)
    weather = np.convolve(noise, 0.93 ** np.arange(60), mode="same")
    values = 11 * np.exp(0.8 * weather / weather.std() - 0.3)
    return Record.from_series(pd.Series([float(f"{v:.3g}") for v in values], index=dates))


RECORD = record()


def described(more: str, kind: str, headwater: str = "{level: 101.2}") -> SiteDescription:
    return read_site_text(SITE.format(more=MORE[more], type=kind, headwater=headwater))


class Full:
    """Plants of one kind, each computed in full."""

    def __init__(self, site: SiteDescription, split: tuple[float, ...]) -> None:
        self.site, self.split = site, split
        self.river: RiverAtSite = river_at_site(site, RECORD, None)
        (self.machine,) = machines_to_try(site)

    def of(self, size: float) -> Estimate:
        turbines = turbines_of(self.machine, Combination(0, self.split, size))
        site = site_with(self.site, turbines, None)
        return with_placed_outage(site, estimate_energy(assemble(site, self.river).scheme))


CASES = [
    ("plain", "kaplan", (1.0,)),
    ("plain", "propeller", (0.5, 0.5)),
    ("losses", "francis", (0.33, 0.67)),
    ("outages", "crossflow", (0.25,) * 4),
    ("flood", "screw", (0.5, 0.5)),
    ("pipe", "kaplan", (0.2, 0.3, 0.5)),
]


@pytest.mark.parametrize(("more", "kind", "split"), CASES)
@pytest.mark.parametrize("size", [3.0, pytest.param(16.0, marks=pytest.mark.slow)])
def test_energy_and_capacity_of_other_sizes(
    more: str, kind: str, split: tuple[float, ...], size: float
) -> None:
    full = Full(described(more, kind), split)
    sweep, expected = SizeSweep(full.of(8.0), 8.0), full.of(size)
    assert sweep.mean_annual_energy(size) == pytest.approx(
        expected.mean_annual_energy_mwh, rel=CLOSE
    )
    assert sweep.installed_capacity(size) == pytest.approx(expected.installed_capacity_kw, rel=1e-5)


def test_a_weir_that_the_turbines_draw_down() -> None:
    weir = "{weir: {crest: 101.0 m, length: 20 m, coefficient: 1.8}}"
    full = Full(described("plain", "kaplan", weir), (0.5, 0.5))
    sweep = SizeSweep(full.of(8.0), 8.0)
    for size in (4.0, 12.0):
        expected = full.of(size).mean_annual_energy_mwh
        assert sweep.mean_annual_energy(size) == pytest.approx(expected, rel=CLOSE)


def test_unlike_units_have_no_common_output() -> None:
    text = SITE.format(more="", type="kaplan", headwater="{level: 101.2}").replace(
        "  - {count: 1, type: kaplan, rated_discharge: 6}",
        "  - {count: 1, type: kaplan, rated_discharge: 6}\n"
        "  - {count: 1, type: propeller, rated_discharge: 3}",
    )
    site = read_site_text(text)
    found = estimate_energy(assemble(site, river_at_site(site, RECORD, None)).scheme)
    assert not scales(found.scheme)
    with pytest.raises(ValueError, match="no common relative output"):
        SizeSweep(found, 9.0)
