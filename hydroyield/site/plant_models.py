"""The plant: waterway, turbines, electrical equipment and operation."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from collections.abc import Set as AbstractSet
from typing import Annotated, Any, ClassVar, Literal, get_args

from pydantic import BeforeValidator, Field

from hydroyield.quantities import DISCHARGE, LENGTH, POWER, SHARE
from hydroyield.site.blocks import Block
from hydroyield.site.faults import Finding, flow
from hydroyield.site.fields import Choice, ListOf, Quantity, Whole
from hydroyield.site.tables import Pairs, Table
from hydroyield.site.waterway_models import WaterwayLoss

TurbineType = Literal[
    "kaplan",
    "semi_kaplan",
    "propeller",
    "francis",
    "pelton",
    "turgo",
    "crossflow",
    "screw",
    "other",
]
MOST_UNITS = 50  # of one group; more is a slip of the pen in a small plant

Efficiency = Annotated[float, Quantity(SHARE, above=0, at_most=1, example="94 %")]


def _useful(table: Table) -> Iterable[Finding]:
    """An efficiency may start at 0 and never comes back to it."""
    efficiencies = [efficiency for _, efficiency in table]
    if not any(efficiencies):
        yield (), "all efficiencies are 0; write efficiencies above 0"
        return
    first = next(index for index, value in enumerate(efficiencies) if value > 0)
    for index in range(first, len(table)):
        if efficiencies[index] == 0:
            yield (index, 1), "an efficiency of 0 after one above 0; write an efficiency above 0"


EfficiencyCurve = Annotated[
    Table | Literal["typical"],
    Pairs(
        Quantity(SHARE, at_least=0, at_most=1),
        Quantity(SHARE, at_least=0, at_most=1),
        ("share of full discharge", "efficiency"),
        "[[0.2, 0.71], [0.6, 0.9], [1.0, 0.89]]",
        also=_useful,
        word="typical",
    ),
]


class TurbineGroup(Block):
    """One or more equal units."""

    example: ClassVar[dict[str, Any]] = {
        "count": 2,
        "type": "kaplan",
        "rated_discharge": "6.2 m3/s",
    }

    at_least_one_of: ClassVar[tuple[str, ...]] = ("unit_capacity", "rated_discharge")

    count: Annotated[int, Whole(1, MOST_UNITS)] = Field(
        description="Number of equal units.", examples=[2]
    )
    type: Annotated[TurbineType, Choice(get_args(TurbineType))] = Field(
        description="Type of turbine: " + ", ".join(get_args(TurbineType)) + ".",
        examples=["kaplan"],
    )
    unit_capacity: Annotated[float, Quantity(POWER, above=0)] | None = Field(
        default=None,
        description="Capacity of one unit at the generator terminals [kW]; output at rated "
        "discharge and head if left out.",
        examples=["125 kW"],
    )
    rated_discharge: Annotated[float, Quantity(DISCHARGE, above=0)] | None = Field(
        default=None,
        description="Discharge of one unit, fully open at rated head [m3/s]; derived from "
        "unit_capacity if left out.",
        examples=["6.2 m3/s"],
    )
    rated_head: Annotated[float, Quantity(LENGTH, above=0)] | None = Field(
        default=None,
        description="Net head for which the unit is built [m]; that at the smallest river "
        "discharge at which all units are fully open if left out.",
        examples=["2.65 m"],
    )
    minimum_discharge: (
        Annotated[
            float,
            Quantity(
                SHARE,
                at_least=0,
                at_most=1,
                excess="the minimum discharge is above full discharge",
            ),
        ]
        | None
    ) = Field(
        default=None,
        description="Least discharge of a running unit, of full discharge at the head of the "
        "moment [share or %]; by type if left out.",
        examples=["20 %"],
    )
    efficiency: EfficiencyCurve | None = Field(
        default=None,
        description="Pairs of share of full discharge at the head of the moment [share or %] and "
        "turbine efficiency [share or %], or the word typical; typical of the type if left out.",
        examples=[[[0.2, 0.71], [0.6, 0.9], [1.0, 0.89]]],
    )
    axis_level: Annotated[float, Quantity(LENGTH)] | None = Field(
        default=None,
        description="Level of the turbine axis [m], for impulse machines: the head ends there, "
        "and the unit stands when the tailwater is higher; the head ends at the tailwater if left "
        "out.",
        examples=["98.1 m"],
    )
    waterway: Annotated[tuple[WaterwayLoss, ...], ListOf(flow(WaterwayLoss.example))] = Field(
        default=(),
        description="Losses of the branch that leads to and from one unit, beside those of "
        "waterway that all units share; none if left out.",
        examples=[[{"exit": {"area": "3.2 m2"}}]],
    )

    @classmethod
    def keys_fit_together(
        cls, named: AbstractSet[str], written: Mapping[str, Any]
    ) -> Iterable[Finding]:
        """A size is needed, and a machine of unknown type has no typical values."""
        if not named & set(cls.at_least_one_of):
            yield (
                (),
                "the size of the unit is missing; write rated_discharge: 6.2 m3/s or "
                "unit_capacity: 125 kW, or both",
            )
        yield from _branch_findings(written)
        if written.get("type") != "other":
            return
        if "efficiency" not in named or written.get("efficiency") == "typical":
            yield (
                ("efficiency",),
                "type other has no typical efficiency; write a list of pairs [share of full "
                "discharge, efficiency]",
            )
        if "minimum_discharge" not in named:
            yield (
                ("minimum_discharge",),
                "type other has no usual minimum discharge; write for example "
                "minimum_discharge: 20 %",
            )


def _branch_findings(written: Mapping[str, Any]) -> Iterable[Finding]:
    """What cannot be on the way of one unit."""
    losses = written.get("waterway")
    if not isinstance(losses, list | tuple) or not losses:
        return
    if written.get("type") == "screw":
        yield (
            ("waterway",),
            "a screw takes its head between the levels; write its losses under the waterway of "
            "the plant",
        )
    for index, loss in enumerate(losses):
        rack = loss.get("trash_rack") if isinstance(loss, Mapping) else None
        if rack is not None:
            yield (
                ("waterway", index, "trash_rack"),
                "a trash rack is read under the waterway of the plant; write it there with the "
                "area of all racks together",
            )


def _no_load_curve(value: object) -> object:
    if isinstance(value, list | tuple):
        raise ValueError("a load curve is not supported yet; write one value, such as 94 %")
    return value


class Electrical(Block):
    """From the turbine shaft to the grid."""

    example: ClassVar[dict[str, Any]] = {"generator_efficiency": "94 %"}

    drive_efficiency: Efficiency | None = Field(
        default=None,
        description="Efficiency of gearbox or belt [share or %]; no loss if left out.",
        examples=["98 %"],
    )
    generator_efficiency: Annotated[Efficiency, BeforeValidator(_no_load_curve)] | None = Field(
        default=None,
        description="Efficiency of the generator [share or %]; no loss if left out.",
        examples=["94 %"],
    )
    transformer_efficiency: Efficiency | None = Field(
        default=None,
        description="Efficiency of the transformer [share or %]; no loss if left out.",
        examples=["98.5 %"],
    )
    own_use: Annotated[float, Quantity(POWER, at_least=0)] | None = Field(
        default=None,
        description="Power that the plant itself uses while any unit runs [kW]; none if left out.",
        examples=["1.5 kW"],
    )
    export_limit: Annotated[float, Quantity(POWER, above=0)] | None = Field(
        default=None,
        description="The most that may be fed into the grid, after all losses [kW]; no limit if "
        "left out.",
        examples=["220 kW"],
    )


class Operation(Block):
    """How the plant is run."""

    example: ClassVar[dict[str, Any]] = {"shutdown_above": "90 m3/s"}
    not_supported: ClassVar[dict[str, str]] = {
        "planned_outage": "take the key out; the energy is then that of a plant always available",
        "forced_outage_rate": "take the key out; the energy is then that of a plant always "
        "available",
    }

    shutdown_above: Annotated[float, Quantity(DISCHARGE, above=0)] | None = Field(
        default=None,
        description="River discharge above which the plant stands [m3/s]; it runs in any flood if "
        "left out.",
        examples=["90 m3/s"],
    )
