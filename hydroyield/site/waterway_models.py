"""The waterway block: what is lost between headwater and tailwater."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from typing import Annotated, Any, ClassVar, Literal, get_args

from pydantic import BeforeValidator, Field, WithJsonSchema

from hydroyield.quantities import ANGLE, AREA, LENGTH, NUMBER, SHARE
from hydroyield.site.blocks import Block
from hydroyield.site.faults import Finding
from hydroyield.site.fields import NUMBER_OR_TEXT, Choice, Quantity, Whole
from hydroyield.site.months import MONTHS_PER_YEAR, TWELVE_SCHEMA, read_twelve

BarShape = Literal["rectangular", "rounded_upstream", "rounded_both", "circular", "teardrop"]
PositiveLength = Annotated[float, Quantity(LENGTH, above=0)]
PositiveArea = Annotated[float, Quantity(AREA, above=0)]

_BLOCKAGE = Quantity(SHARE, at_least=0, below=1, example="10 %")


class Pipe(Block):
    """A pipe, or several alike side by side, by Darcy and Weisbach with Colebrook's friction."""

    example: ClassVar[dict[str, Any]] = {
        "length": "180 m",
        "diameter": "1.1 m",
        "roughness": "0.15 mm",
    }

    length: PositiveLength = Field(description="Length [m].", examples=["180 m"])
    diameter: PositiveLength = Field(description="Inner diameter [m].", examples=["1.1 m"])
    roughness: Annotated[float, Quantity(LENGTH, at_least=0, example="0.15 mm")] = Field(
        description="Roughness of the wall [m]; common practice: 0.01 mm for plastics, 0.05 mm for "
        "new welded steel, 0.3 to 3 mm for concrete.",
        examples=["0.15 mm"],
    )
    minor_losses: Annotated[float, Quantity(NUMBER, at_least=0)] = Field(
        default=0.0,
        description="Sum of the loss coefficients of entrance, bends, valves and the like, on the "
        "velocity head in the pipe [-]; 0 if left out.",
        examples=[1.6],
    )
    parallel: Annotated[int, Whole(1, 20)] = Field(
        default=1,
        description="Number of such pipes that share the discharge; 1 if left out.",
        examples=[1],
    )

    def values_fit_together(self) -> Iterable[Finding]:
        """A wall rougher than a twentieth of the diameter is outside Colebrook's formula."""
        if self.roughness > 0.05 * self.diameter:
            yield (
                ("roughness",),
                f"{self.roughness:g} m is more than a twentieth of the diameter; write the "
                "roughness of the wall, such as 0.15 mm",
            )


def _blockages(value: object) -> tuple[float, ...]:
    """One share for the whole year, or twelve."""
    if isinstance(value, list | tuple | Mapping):
        return read_twelve(value, _BLOCKAGE)
    return (_BLOCKAGE.read(value),) * MONTHS_PER_YEAR


class TrashRack(Block):
    """A trash rack, by Kirschmer's formula."""

    example: ClassVar[dict[str, Any]] = {
        "bar_thickness": "10 mm",
        "clear_spacing": "30 mm",
        "bar_shape": "rectangular",
        "inclination": 70,
        "area": "9 m2",
    }

    bar_thickness: PositiveLength = Field(
        description="Thickness of the bars across the flow [m].", examples=["10 mm"]
    )
    clear_spacing: PositiveLength = Field(
        description="Clear space between two bars [m].", examples=["30 mm"]
    )
    bar_shape: Annotated[BarShape, Choice(get_args(BarShape))] = Field(
        description="Shape of the bars: " + ", ".join(get_args(BarShape)) + ".",
        examples=["rectangular"],
    )
    inclination: Annotated[float, Quantity(ANGLE, above=0, at_most=90, example="70")] = Field(
        description="Angle of the bars to the horizontal [degrees].", examples=[70]
    )
    area: PositiveArea = Field(
        description="Wetted area of the rack normal to the flow, bars included [m2].",
        examples=["9 m2"],
    )
    blockage: Annotated[
        tuple[float, ...],
        BeforeValidator(_blockages),
        WithJsonSchema({"anyOf": [*NUMBER_OR_TEXT, *TWELVE_SCHEMA["anyOf"]]}),
    ] = Field(
        default=(0.0,) * MONTHS_PER_YEAR,
        description="Share of the area that trash has closed, one for the year, 12 by month, "
        "January first, or ranges such as {sep-nov: 40 %, dec-aug: 10 %}; 0 if left out.",
        examples=["10 %"],
    )


class Exit(Block):
    """The velocity head that is lost behind the draught tubes."""

    example: ClassVar[dict[str, Any]] = {"area": "6.5 m2"}

    area: PositiveArea = Field(
        description="Area of the outlets that the discharge leaves through, all together [m2].",
        examples=["6.5 m2"],
    )


class Canal(Block):
    """The fall of the water along a canal that is held at a depth, by Manning's formula."""

    example: ClassVar[dict[str, Any]] = {
        "length": "240 m",
        "bottom_width": "3 m",
        "side_slope": 1.5,
        "depth": "1.4 m",
        "manning_n": 0.02,
    }

    length: PositiveLength = Field(description="Length [m].", examples=["240 m"])
    bottom_width: Annotated[float, Quantity(LENGTH, at_least=0)] = Field(
        description="Width of the bed [m]; 0 for a triangular canal.", examples=["3 m"]
    )
    side_slope: Annotated[float, Quantity(NUMBER, at_least=0)] = Field(
        description="Slope of the banks, horizontal to vertical [-]; 0 for upright walls.",
        examples=[1.5],
    )
    depth: PositiveLength = Field(
        description="Depth of the water at which the canal is held [m].", examples=["1.4 m"]
    )
    manning_n: Annotated[float, Quantity(NUMBER, above=0, example="0.02")] = Field(
        description="Manning's roughness, in metric units [s/m^(1/3)].", examples=[0.02]
    )

    def values_fit_together(self) -> Iterable[Finding]:
        """A canal without width and with upright walls holds no water."""
        if self.bottom_width == 0 and self.side_slope == 0:
            yield ("bottom_width",), "a canal needs a bottom_width or a side_slope above 0"


class WaterwayLoss(Block):
    """One loss between headwater and tailwater; the losses add up."""

    example: ClassVar[dict[str, Any]] = {"loss_coefficient": 0.0021}
    exactly_one_of: ClassVar[tuple[str, ...]] = (
        "loss_coefficient", "pipe", "trash_rack", "canal", "exit",
    )  # fmt: skip

    loss_coefficient: Annotated[float, Quantity(NUMBER, at_least=0, example="0.0021")] | None = (
        Field(
            default=None,
            description="k in h = k Q^2, with Q the discharge that takes this way: that of the "
            "whole plant under waterway, that of one unit under turbines [m per (m3/s)^2].",
            examples=[0.0021],
        )
    )
    pipe: Pipe | None = Field(
        default=None, description="A pipe or penstock.", examples=[Pipe.example]
    )
    trash_rack: TrashRack | None = Field(
        default=None, description="A trash rack.", examples=[TrashRack.example]
    )
    canal: Canal | None = Field(
        default=None, description="A canal in uniform flow.", examples=[Canal.example]
    )
    exit: Exit | None = Field(
        default=None,
        description="The velocity head lost behind the draught tubes, which net head by IEC 60041 "
        "does not contain.",
        examples=[Exit.example],
    )
