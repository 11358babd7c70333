"""The site file as a whole: what may be written, in which unit, and what it means.

The text under each field is its documentation; the reference page of the site file is made from
it. After validation every number is in SI: areas in m2, powers in W, discharges in m3/s, shares
as fractions, percentages in per cent, temperatures in degC and angles in degrees. A number given
from Python is in the unit that the field states, like a number in a site file.
"""

from __future__ import annotations

from collections.abc import Iterable
from typing import Annotated, Any, ClassVar, Literal, get_args

from pydantic import BeforeValidator, Field

from hydroyield.quantities import ANGLE, LENGTH, TEMPERATURE
from hydroyield.site.baseline_models import Baseline
from hydroyield.site.blocks import Block
from hydroyield.site.discharge_models import Discharge
from hydroyield.site.faults import Finding, flow, shown
from hydroyield.site.fields import Choice, ListOf, Quantity, Text, scalar_text
from hydroyield.site.head_models import Head
from hydroyield.site.operation_models import Operation
from hydroyield.site.option_models import Cost, Options
from hydroyield.site.plant_models import Electrical, TurbineGroup
from hydroyield.site.river_models import Abstraction, Combination, ConstantRule, Rule
from hydroyield.site.waterway_models import WaterwayLoss


class Site(Block):
    """The place."""

    example: ClassVar[dict[str, Any]] = {"name": "Larkbeck Weir"}

    name: Text = Field(description="Name of the site.", examples=["Larkbeck Weir"])
    latitude: Annotated[float, Quantity(ANGLE, at_least=-90, at_most=90)] | None = Field(
        default=None,
        description="Latitude [degrees], north positive, which gives gravity; gravity is "
        "9.81 m/s2 if left out.",
        examples=[54.2],
    )
    altitude: Annotated[float, Quantity(LENGTH, at_least=-500, at_most=6000)] | None = Field(
        default=None,
        description="Altitude above sea level [m], a part of gravity; 0 m if left out.",
        examples=["62 m"],
    )
    water_temperature: Annotated[float, Quantity(TEMPERATURE, at_least=0, at_most=40)] | None = (
        Field(
            default=None,
            description="Mean water temperature [degC], which gives density; density is "
            "1000 kg/m3 if left out.",
            examples=["9 degC"],
        )
    )


def _read_format(value: object) -> int:
    text = scalar_text(value, "the number of the format", "1")
    if text != "1":
        raise ValueError(f"format '{shown(text)}' is not read by this version; write format: 1")
    return 1


class SiteFile(Block):
    """A small run-of-river hydropower site."""

    example: ClassVar[dict[str, Any]] = {"format": 1, "site": Site.example}

    format: Annotated[Literal[1], BeforeValidator(_read_format)] = Field(
        description="Version of the format of this file: 1.", examples=[1]
    )
    site: Site = Field(description="Which site it is, and where.", examples=[Site.example])
    discharge: Discharge = Field(
        description="Where the discharge of the river comes from.", examples=[Discharge.example]
    )
    environmental_flow: Annotated[tuple[Rule, ...], ListOf(flow(ConstantRule.example))] = Field(
        default=(),
        description="Rules for the water that stays in the river; the largest applies, unless "
        "environmental_flow_combination says otherwise, and never more than the inflow. All water "
        "is offered to the turbines if left out.",
        examples=[[ConstantRule.example]],
    )
    environmental_flow_combination: Annotated[Combination, Choice(get_args(Combination))] = Field(
        default="largest",
        description="What applies where several rules hold in a month: largest, sum, or priority "
        "for the first of them in the list; largest if left out.",
        examples=["sum"],
    )
    abstractions: Annotated[tuple[Abstraction, ...], ListOf(flow(Abstraction.example))] = Field(
        default=(),
        description="Other water that does not reach the turbines; none if left out.",
        examples=[[Abstraction.example]],
    )
    head: Head = Field(description="Levels above and below the turbines.", examples=[Head.example])
    waterway: Annotated[tuple[WaterwayLoss, ...], ListOf(flow(WaterwayLoss.example))] = Field(
        default=(),
        description="Losses between headwater and turbines, which add up; no head is lost if "
        "left out.",
        examples=[[WaterwayLoss.example]],
    )
    turbines: Annotated[tuple[TurbineGroup, ...], ListOf(flow(TurbineGroup.example), 1)] = Field(
        description="Groups of equal units, at least one.", examples=[[TurbineGroup.example]]
    )
    electrical: Electrical = Field(
        default_factory=Electrical,
        description="From the turbine shaft to the grid; nothing is lost or limited if left out.",
        examples=[Electrical.example],
    )
    operation: Operation = Field(
        default_factory=Operation,
        description="How the plant is run; always on if left out.",
        examples=[Operation.example],
    )
    baseline: Baseline | None = Field(
        default=None,
        description="A plant that runs at the site already, against which the gain is stated; "
        "nothing is compared if left out.",
        examples=[Baseline.example],
    )
    options: Options | None = Field(
        default=None,
        description="Plants that `hydroyield compare` tries; a comparison needs it, and other "
        "commands leave it aside; nothing is compared if left out.",
        examples=[Options.example],
    )
    cost: Cost | None = Field(
        default=None,
        description="Costs and prices for a comparison; no money is spoken of if left out.",
        examples=[Cost.example],
    )

    def values_fit_together(self) -> Iterable[Finding]:
        """Diameters are tried on a pipe."""
        if self.options is None or not self.options.pipe_diameters:
            return
        pipes = sum(loss.pipe is not None for loss in self.waterway)
        if pipes != 1:
            yield (
                ("options", "pipe_diameters"),
                f"the waterway has {pipes or 'no'} pipe{'s' if pipes > 1 else ''}; diameters are "
                "tried on the one pipe of the waterway",
            )
