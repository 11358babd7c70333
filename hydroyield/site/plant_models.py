"""The plant: turbines and electrical equipment."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from collections.abc import Set as AbstractSet
from typing import Annotated, Any, ClassVar, Literal, get_args

from pydantic import (
    BeforeValidator,
    Field,
    ValidatorFunctionWrapHandler,
    WithJsonSchema,
    WrapValidator,
)

from hydroyield.quantities import DISCHARGE, LENGTH, POWER, SHARE
from hydroyield.site.blocks import Block
from hydroyield.site.faults import Finding, flow
from hydroyield.site.fields import NUMBER_OR_TEXT, Choice, ListOf, Quantity, Whole
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
MeteredAt = Literal["grid", "generator"]
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


_CURVE = Pairs(
    Quantity(SHARE, at_least=0, at_most=1),
    Quantity(SHARE, at_least=0, at_most=1),
    ("share of full discharge", "efficiency"),
    "[[0.2, 0.71], [0.6, 0.9], [1.0, 0.89]]",
    also=_useful,
    word="typical",
)
EfficiencyCurve = Annotated[Table | Literal["typical"], _CURVE]


_LIMIT = Pairs(
    Quantity(LENGTH, above=0),
    Quantity(POWER, above=0),
    ("net head", "power"),
    "[[2.0 m, 80 kW], [2.6 m, 125 kW]]",
)


class EfficiencyTable(Block):
    """Efficiency of one unit over net head and discharge, as makers draw it."""

    example: ClassVar[dict[str, Any]] = {
        "heads": ["2 m", "3 m"],
        "discharges": ["1 m3/s", "3 m3/s", "6 m3/s"],
        "values": [[0.70, 0.84, 0.83], [0.72, 0.88, 0.87]],
    }

    heads: Annotated[tuple[Annotated[float, Quantity(LENGTH, above=0)], ...], ListOf("2 m", 2)] = (
        Field(description="Net heads, rising [m].", examples=[["2 m", "3 m"]])
    )
    discharges: Annotated[
        tuple[Annotated[float, Quantity(DISCHARGE, at_least=0)], ...], ListOf("1 m3/s", 2)
    ] = Field(
        description="Discharges of one unit, rising [m3/s].",
        examples=[["1 m3/s", "3 m3/s", "6 m3/s"]],
    )
    values: Annotated[
        tuple[
            Annotated[
                tuple[Annotated[float, Quantity(SHARE, at_least=0, at_most=1)], ...],
                ListOf("0.70"),
            ],
            ...,
        ],
        ListOf("[0.70, 0.84, 0.83]", 2),
    ] = Field(
        description="A row of efficiencies for each head, one for each discharge [share or %].",
        examples=[[[0.70, 0.84, 0.83], [0.72, 0.88, 0.87]]],
    )

    def values_fit_together(self) -> Iterable[Finding]:
        """Rising heads and discharges, and a value for each pair of them."""
        for key in ("heads", "discharges"):
            numbers = getattr(self, key)
            for index in range(1, len(numbers)):
                if numbers[index] <= numbers[index - 1]:
                    yield (key, index), "not above the one before; sort them, each one once"
        if len(self.values) != len(self.heads):
            yield ("values",), f"has {len(self.values)} rows; write {len(self.heads)}, one a head"
        for index, row in enumerate(self.values):
            if len(row) != len(self.discharges):
                yield (
                    ("values", index),
                    f"has {len(row)} values; write {len(self.discharges)}, one for each discharge",
                )


def _curve_or_table(written: Any, handler: ValidatorFunctionWrapHandler) -> Any:
    """A block is a table over heads; anything else a curve."""
    if isinstance(written, Mapping | EfficiencyTable):
        return EfficiencyTable.model_validate(written)
    return _CURVE.read(written)  # and not by a handler, whose paths would name the alternatives


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
    starting_discharge: Annotated[float, Quantity(SHARE, above=0, at_most=1)] | None = Field(
        default=None,
        description="Discharge at which a unit starts, of full discharge at the head of the moment "
        "[share or %], at least the minimum. A plant that stands starts only on a day on which the "
        "water reaches the least of these, and runs on down to the minimum; a day without a value "
        "or a shutdown leaves it standing. With units out of service it waits on the same days. "
        "Units start at their minimum if left out.",
        examples=["30 %"],
    )
    efficiency: (
        Annotated[EfficiencyCurve | EfficiencyTable, WrapValidator(_curve_or_table)] | None
    ) = Field(
        default=None,
        description="Pairs of share of full discharge at the head of the moment [share or %] and "
        "turbine efficiency [share or %], or a table over heads, or the word typical; typical of "
        "the type if left out.",
        examples=[[[0.2, 0.71], [0.6, 0.9], [1.0, 0.89]]],
    )
    jets: Annotated[int, Whole(1, 6)] | None = Field(
        default=None,
        description="Number of jets of a pelton or turgo unit that close one after another at part "
        "load; efficiency is then that of one jet, or of all when all are open. The curve counts "
        "as it stands if left out.",
        examples=[2],
    )
    axis_level: Annotated[float, Quantity(LENGTH)] | None = Field(
        default=None,
        description="Level of the turbine axis [m], for impulse machines: the head ends there, "
        "and the unit stands when the tailwater is higher; the head ends at the tailwater if left "
        "out.",
        examples=["98.1 m"],
    )
    output_limit: Annotated[Table, _LIMIT] | None = Field(
        default=None,
        description="Pairs of net head [m] and the most that one unit gives at it, at the "
        "generator terminals [kW], linear between them and constant outside; a unit never gives "
        "more than the lesser of this and unit_capacity. The capacity alone limits if left out.",
        examples=[[["2.0 m", "80 kW"], ["2.6 m", "125 kW"]]],
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
        yield from _table_findings(named, written)
        if "jets" in named and written.get("type") not in ("pelton", "turgo"):
            yield ("jets",), "only pelton and turgo units have jets; take the key out"
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


def _table_findings(named: AbstractSet[str], written: Mapping[str, Any]) -> Iterable[Finding]:
    """What an efficiency over heads needs and excludes."""
    if not isinstance(written.get("efficiency"), Mapping):
        return
    if "rated_discharge" not in named:
        yield ("rated_discharge",), "is missing; a table over heads needs it: 6.2 m3/s"
    for key in ("jets", "waterway"):
        if written.get(key):
            yield (
                (key,),
                f"'{key}' is read with a curve only; take it into the table, or out of the file",
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


def _one_or_curve(value: object) -> object:
    """One efficiency at every load, or pairs of load and efficiency."""
    return _LOAD_CURVE.read(value) if isinstance(value, list | tuple) else _ONE.read(value)


_ONE = Quantity(SHARE, above=0, at_most=1, example="94 %")
_LOAD_CURVE = Pairs(
    Quantity(SHARE, at_least=0, at_most=1),
    Quantity(SHARE, above=0, at_most=1),
    ("load", "efficiency"),
    "[[0.1, 0.80], [0.5, 0.93], [1.0, 0.95]]",
)


class Electrical(Block):
    """From the turbine shaft to the grid."""

    example: ClassVar[dict[str, Any]] = {"generator_efficiency": "94 %"}

    drive_efficiency: Efficiency | None = Field(
        default=None,
        description="Efficiency of gearbox or belt [share or %]; no loss if left out.",
        examples=["98 %"],
    )
    generator_efficiency: (
        Annotated[
            float | Table,
            BeforeValidator(_one_or_curve),
            WithJsonSchema({"anyOf": [*NUMBER_OR_TEXT, {"type": "array", "minItems": 2}]}),
        ]
        | None
    ) = Field(
        default=None,
        description="Efficiency of the generator, a share or in %: one for every load, or pairs of "
        "load (output over unit_capacity) and efficiency; no loss if left out.",
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
    standing_use: Annotated[float, Quantity(POWER, at_least=0)] | None = Field(
        default=None,
        description="Power that the plant takes from the grid while no unit runs [kW]; none if "
        "left out.",
        examples=["0.8 kW"],
    )
    transformer_no_load_loss: Annotated[float, Quantity(POWER, at_least=0)] | None = Field(
        default=None,
        description="Loss of the transformer at any load, all year and while the plant stands "
        "[kW]; none if left out.",
        examples=["0.6 kW"],
    )
    transformer_load_loss: Annotated[float, Quantity(POWER, at_least=0)] | None = Field(
        default=None,
        description="Further loss of the transformer with all units at capacity, growing with the "
        "square of the load [kW]; none if left out.",
        examples=["2.4 kW"],
    )
    export_limit: Annotated[float, Quantity(POWER, above=0)] | None = Field(
        default=None,
        description="The most that may be fed into the grid, after all losses [kW]; no limit if "
        "left out.",
        examples=["220 kW"],
    )

    metered_at: Annotated[MeteredAt, Choice(get_args(MeteredAt))] = Field(
        default="grid",
        description="Where the energy is metered: grid or generator. The result is net at the grid "
        "either way; with generator the energy at the generator terminals stands beside it, before "
        "transformer, own use and export limit; grid if left out.",
        examples=["generator"],
    )

    @classmethod
    def keys_fit_together(
        cls, named: AbstractSet[str], written: Mapping[str, Any]
    ) -> Iterable[Finding]:
        """The losses of a transformer are stated in one way."""
        if "transformer_efficiency" in named:
            for key in ("transformer_no_load_loss", "transformer_load_loss"):
                if key in named:
                    yield (
                        (key,),
                        f"'{key}' and 'transformer_efficiency' state the same loss; keep one of "
                        "the two ways",
                    )
