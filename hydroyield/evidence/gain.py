"""The gain over a plant that runs at the site already."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from hydroyield.checks import Check
from hydroyield.energy import Estimate


@dataclass(frozen=True)
class Gain:
    """A new plant against the old one.

    baseline_mwh : mean energy of the old plant [MWh a year]
    energy_mwh : that of the new plant in the same years [MWh a year]
    years : the years that both have; () where only means are known
    """

    baseline_mwh: float
    energy_mwh: float
    years: tuple[str, ...] = ()

    @property
    def gain_mwh(self) -> float:
        """What the new plant delivers more [MWh a year]."""
        return self.energy_mwh - self.baseline_mwh


def gain_over_mean(energy: Estimate, baseline_mwh: float) -> Gain:
    """Mean against mean; whether they are of the same years is not known."""
    return Gain(baseline_mwh, energy.mean_annual_energy_mwh)


def gain_over_years(energy: Estimate, baseline: Mapping[str, float]) -> Gain:
    """Year by year over the years that both have. Raises ValueError when there is none."""
    own = energy.yearly_energy_mwh
    years = tuple(year for year in own if year in baseline)
    if not years:
        raise ValueError(
            "none of its years is one of those used; write annual_energy in place of the years"
        )
    count = len(years)
    return Gain(
        sum(baseline[year] for year in years) / count,
        sum(own[year] for year in years) / count,
        years,
    )


def gain_check(gain: Gain) -> Check:
    """What the gain rests on."""
    if gain.years:
        return Check(
            "baseline_years", "pass", len(gain.years), None,
            f"Gain and baseline are of the same {len(gain.years)} years.",
        )  # fmt: skip
    return Check(
        "baseline_years", "warn", None, None,
        "The baseline is a mean; a wet or dry run of its years counts as gain or loss. State its "
        "yearly_energy, or the site file of the old plant.",
    )  # fmt: skip
