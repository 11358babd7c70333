"""The baseline block: what stands at the site already, for the gain of a refurbishment."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Annotated, Any, ClassVar

from pydantic import AfterValidator, BeforeValidator, Field, WithJsonSchema

from hydroyield.quantities import NUMBER
from hydroyield.site.blocks import Block
from hydroyield.site.faults import Finding, refuse, shown
from hydroyield.site.fields import NUMBER_OR_TEXT, Quantity, Text, kind_of
from hydroyield.site.record_models import stays_inside

_ENERGY = Quantity(NUMBER, at_least=0, example="812")


def _by_year(value: Any) -> dict[int, float]:
    """Energy by year. Raises the findings of every year."""
    if not isinstance(value, Mapping) or not value:
        raise ValueError(
            f"{kind_of(value)} stands here; write years and their energy in MWh: {{2019: 812}}"
        )
    found: dict[int, float] = {}
    findings: list[Finding] = []
    for name, energy in value.items():
        text = str(name).strip()
        if not (text.isdigit() and len(text) == 4):
            findings.append(((name,), f"'{shown(text)}' is no year; write it with four digits"))
            continue
        try:
            found[int(text)] = _ENERGY.read(energy)
        except ValueError as error:
            findings.append(((name,), str(error)))
    if findings:
        refuse(findings)
    return found


class Baseline(Block):
    """A plant that runs already: its site file, or the energy that it delivered."""

    example: ClassVar[dict[str, Any]] = {"annual_energy": 640}
    exactly_one_of: ClassVar[tuple[str, ...]] = ("site", "yearly_energy", "annual_energy")

    site: Annotated[Text, AfterValidator(stays_inside)] | None = Field(
        default=None,
        description="Name of the site file of the old plant, relative to this file and never "
        "outside its folder.",
        examples=["old_plant.yaml"],
    )
    yearly_energy: (
        Annotated[
            dict[int, float],
            BeforeValidator(_by_year),
            WithJsonSchema({"type": "object", "additionalProperties": {"anyOf": NUMBER_OR_TEXT}}),
        ]
        | None
    ) = Field(
        default=None,
        description="Energy that the old plant delivered, in MWh, by the year in which each "
        "hydrological year ends.",
        examples=[{"2019": 640, "2020": 580}],
    )
    annual_energy: Annotated[float, _ENERGY] | None = Field(
        default=None,
        description="Mean energy that the old plant delivered a year, in MWh.",
        examples=[640],
    )
