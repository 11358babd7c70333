"""The head block: the levels above and below the turbines."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from collections.abc import Set as AbstractSet
from typing import Annotated, Any, ClassVar, Literal, get_args

from pydantic import Field

from hydroyield.quantities import DISCHARGE, LENGTH, NUMBER, SHARE
from hydroyield.site.blocks import Block
from hydroyield.site.faults import Finding
from hydroyield.site.fields import Choice, Quantity, Switch
from hydroyield.site.tables import Pairs, Table

Follows = Literal["river", "turbine", "higher"]

Level = Annotated[float, Quantity(LENGTH)]
PositiveLength = Annotated[float, Quantity(LENGTH, above=0)]


def _falling(table: Table) -> Iterable[Finding]:
    for index in range(1, len(table)):
        if table[index][1] < table[index - 1][1]:
            yield (
                (index, 1),
                "a rating that falls: the tailwater level is lower than at the smaller discharge "
                "before; correct the levels",
            )


_COLUMNS = ("discharge", "level")


def _enough(table: Table) -> Iterable[Finding]:
    if len({level for _, level in table}) < 3:
        yield (
            (),
            "a rating needs three gaugings at different levels or more; write more, or a table",
        )
    yield from _falling(table)


Gaugings = Annotated[
    Table,
    Pairs(
        Quantity(DISCHARGE, above=0),
        Quantity(LENGTH),
        _COLUMNS,
        "[[2 m3/s, 98.0 m], [8 m3/s, 98.4 m], [20 m3/s, 98.9 m]]",
        also=_enough,
    ),
]
HeadwaterTable = Annotated[
    Table,
    Pairs(
        Quantity(DISCHARGE, at_least=0),
        Quantity(LENGTH),
        _COLUMNS,
        "[[0 m3/s, 101.0 m], [50 m3/s, 101.4 m]]",
    ),
]
TailwaterTable = Annotated[
    Table,
    Pairs(
        Quantity(DISCHARGE, at_least=0),
        Quantity(LENGTH),
        _COLUMNS,
        "[[0 m3/s, 97.9 m], [20 m3/s, 98.35 m]]",
        also=_falling,
    ),
]


class Weir(Block):
    """A free overfall: Q = coefficient * length * h ^ 1.5, h above the crest."""

    example: ClassVar[dict[str, Any]] = {"crest": "100.9 m", "length": "22 m", "coefficient": 1.8}

    crest: Level = Field(description="Level of the crest [m].", examples=["100.9 m"])
    length: PositiveLength = Field(description="Length of the crest [m].", examples=["22 m"])
    coefficient: Annotated[float, Quantity(NUMBER, above=0, example="1.8")] = Field(
        description="Discharge coefficient, in metric units [m^0.5/s].", examples=[1.8]
    )
    drowned: Switch = Field(
        default=False,
        description="Whether a tailwater above the crest holds the headwater up (Villemonte): true "
        "or false; false if left out.",
        examples=[True],
    )


class Rating(Block):
    """A rating of the river: Q = coefficient * (level - zero_level) ^ exponent."""

    example: ClassVar[dict[str, Any]] = {
        "zero_level": "97.6 m",
        "coefficient": 18,
        "exponent": 1.7,
    }

    zero_level: Level = Field(
        description="Level at which the discharge is zero [m].", examples=["97.6 m"]
    )
    coefficient: Annotated[float, Quantity(NUMBER, above=0, example="18")] = Field(
        description="Discharge one metre above the zero level, in metric units [m3/s].",
        examples=[18],
    )
    exponent: Annotated[float, Quantity(NUMBER, above=0)] = Field(
        description="Exponent of the rating [-].", examples=[1.7]
    )


class Channel(Block):
    """A trapezoidal channel in uniform flow, by Manning's formula."""

    example: ClassVar[dict[str, Any]] = {
        "bed_level": "97.2 m",
        "bottom_width": "9 m",
        "side_slope": 1.5,
        "slope": 0.002,
        "manning_n": 0.035,
    }

    bed_level: Level = Field(description="Level of the bed [m].", examples=["97.2 m"])
    bottom_width: Annotated[float, Quantity(LENGTH, at_least=0)] = Field(
        description="Width of the bed [m]; 0 for a triangular channel.", examples=["9 m"]
    )
    side_slope: Annotated[float, Quantity(NUMBER, at_least=0)] = Field(
        description="Slope of the banks, horizontal to vertical [-]; 0 for upright walls.",
        examples=[1.5],
    )
    slope: Annotated[float, Quantity(SHARE, above=0, at_most=1, example="0.002")] = Field(
        description="Slope of the bed [share or %].", examples=[0.002]
    )
    manning_n: Annotated[float, Quantity(NUMBER, above=0, example="0.035")] = Field(
        description="Manning's roughness, in metric units [s/m^(1/3)].", examples=[0.035]
    )

    def values_fit_together(self) -> Iterable[Finding]:
        """A channel without width and with upright walls holds no water."""
        if self.bottom_width == 0 and self.side_slope == 0:
            yield ("bottom_width",), "a channel needs a bottom_width or a side_slope above 0"


class Headwater(Block):
    """The level above the turbines: exactly one of level, table and weir.

    Gates that hold the level are a table with equal levels up to the discharge at which they stand
    open, and rising ones beyond. Water that leaks past gates and seals goes into abstractions.
    """

    example: ClassVar[dict[str, Any]] = {"level": "101.2 m"}
    exactly_one_of: ClassVar[tuple[str, ...]] = ("level", "table", "weir")

    level: Level | None = Field(
        default=None, description="Constant headwater level [m].", examples=["101.2 m"]
    )
    table: HeadwaterTable | None = Field(
        default=None,
        description="Pairs of river discharge [m3/s] and headwater level [m], linear between "
        "them; the last segment is extended. Equal levels stand for gates that hold the level.",
        examples=[[["0 m3/s", "101.0 m"], ["50 m3/s", "101.4 m"]]],
    )
    weir: Weir | None = Field(
        default=None,
        description="A weir that all untaken water passes over.",
        examples=[Weir.example],
    )


class RiverLevel(Block):
    """A level against discharge: exactly one of level, table, rating, channel and gaugings."""

    example: ClassVar[dict[str, Any]] = {"level": "97.9 m"}
    exactly_one_of: ClassVar[tuple[str, ...]] = (
        "level", "table", "rating", "channel", "gaugings",
    )  # fmt: skip

    level: Level | None = Field(
        default=None, description="Constant level [m].", examples=["97.9 m"]
    )
    table: TailwaterTable | None = Field(
        default=None,
        description="Pairs of discharge [m3/s] and level [m], not falling, linear between them; "
        "the last segment is extended.",
        examples=[[["0 m3/s", "97.9 m"], ["20 m3/s", "98.35 m"]]],
    )
    rating: Rating | None = Field(
        default=None, description="A rating formula.", examples=[Rating.example]
    )
    channel: Channel | None = Field(
        default=None, description="A channel in uniform flow.", examples=[Channel.example]
    )
    gaugings: Gaugings | None = Field(
        default=None,
        description="Surveyed pairs of discharge [m3/s] and level [m], three or more, to which "
        "Q = C (h - a)^b is fitted.",
        examples=[[["2 m3/s", "98.0 m"], ["8 m3/s", "98.4 m"], ["20 m3/s", "98.9 m"]]],
    )


class Tailwater(RiverLevel):
    """The level below the turbines: exactly one of level, table, rating, channel and gaugings."""

    follows: Annotated[Follows, Choice(get_args(Follows))] = Field(
        default="river",
        description="The discharge that sets the level: river, turbine for a separate tailrace, or "
        "higher for a tailrace that the river can drown; river if left out.",
        examples=["river"],
    )
    river: RiverLevel | None = Field(
        default=None,
        description="With follows: higher, the level of the river where the tailrace joins it; not "
        "needed if left out.",
        examples=[RiverLevel.example],
    )
    not_below: Level | None = Field(
        default=None,
        description="Level that backwater from downstream holds, such as of a pond [m]; none if "
        "left out.",
        examples=["97.5 m"],
    )

    @classmethod
    def keys_fit_together(
        cls, named: AbstractSet[str], written: Mapping[str, Any]
    ) -> Iterable[Finding]:
        """A drowned tailrace needs the river that drowns it."""
        higher = written.get("follows") == "higher"
        if higher and "river" not in named:
            yield ("river",), "is missing; write river: {table: [[0 m3/s, 97.9 m], ...]}"
        if "river" in named and not higher:
            yield ("river",), "is read with follows: higher; write that, or take river out"


class Head(Block):
    """The levels that make the head."""

    example: ClassVar[dict[str, Any]] = {
        "headwater": Headwater.example,
        "tailwater": Tailwater.example,
    }

    headwater: Headwater = Field(
        description="The level above the turbines.", examples=[Headwater.example]
    )
    tailwater: Tailwater = Field(
        description="The level below the turbines.", examples=[Tailwater.example]
    )
    minimum_net_head: Annotated[float, Quantity(LENGTH, at_least=0)] | None = Field(
        default=None,
        description="Net head below which the plant does not run [m], behind the waterway that all "
        "units share and before the branch of one unit; any net head above 0 will do if left out.",
        examples=["1.0 m"],
    )
