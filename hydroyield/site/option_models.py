"""The blocks `options` and `cost`: what `hydroyield compare` tries, and what it costs."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from collections.abc import Set as AbstractSet
from typing import Annotated, Any, ClassVar, get_args

from pydantic import BeforeValidator, Field, GetJsonSchemaHandler, WithJsonSchema
from pydantic_core import CoreSchema

from hydroyield.quantities import DISCHARGE, LENGTH, NUMBER, PERCENT, POWER, SHARE
from hydroyield.site.blocks import Block
from hydroyield.site.faults import Finding
from hydroyield.site.fields import NUMBER_OR_TEXT, Choice, ListOf, Quantity, Text, Whole
from hydroyield.site.months import MONTHS_PER_YEAR, read_twelve
from hydroyield.site.plant_models import EfficiencyCurve, TurbineType
from hydroyield.site.tables import Pairs, Table

MOST_UNITS = 12  # of one option
SUM_TOLERANCE = 0.02  # shares of a split such as 0.33 and 0.67 are rounded
MOST_OPTIONS = 5000  # of one comparison; more is a slip of the pen

Share = Annotated[float, Quantity(SHARE, above=0, at_most=1)]
Split = Annotated[tuple[Share, ...], ListOf("0.5", 1)]
Multiple = Annotated[float, Quantity(NUMBER, above=0, at_most=20, example="1.2")]
Percent = Annotated[float, Quantity(PERCENT, above=0, below=100, example="30")]
Diameter = Annotated[float, Quantity(LENGTH, above=0, example="1.1 m")]
Design = Annotated[float, Quantity(DISCHARGE, above=0)]
Money = Quantity(NUMBER, at_least=0, example="2500")


class OptionMachine(Block):
    """A type of turbine to try, with what is known of it."""

    example: ClassVar[dict[str, Any]] = {"type": "crossflow"}

    type: Annotated[TurbineType, Choice(get_args(TurbineType))] = Field(
        description="Type of turbine: " + ", ".join(get_args(TurbineType)) + ".",
        examples=["crossflow"],
    )
    minimum_discharge: Annotated[float, Quantity(SHARE, at_least=0, at_most=1)] | None = Field(
        default=None,
        description="Least discharge of a running unit, of full discharge [share or %]; that of "
        "the first turbine group of the type, else by type if left out.",
        examples=["15 %"],
    )
    starting_discharge: Annotated[float, Quantity(SHARE, above=0, at_most=1)] | None = Field(
        default=None,
        description="Discharge at which a unit starts, as under turbines [share or %]; that of the "
        "first turbine group of the type, else the minimum if left out.",
        examples=["30 %"],
    )
    efficiency: EfficiencyCurve | None = Field(
        default=None,
        description="Pairs of share of full discharge [share or %] and turbine efficiency [share "
        "or %], or the word typical; that of the first turbine group of the type, else typical if "
        "left out.",
        examples=[[[0.2, 0.71], [0.6, 0.82], [1.0, 0.80]]],
    )
    jets: Annotated[int, Whole(1, 6)] | None = Field(
        default=None,
        description="Number of jets of a pelton or turgo unit, as under turbines; that of the "
        "first turbine group of the type if left out.",
        examples=[2],
    )
    axis_level: Annotated[float, Quantity(LENGTH)] | None = Field(
        default=None,
        description="Level of the turbine axis [m], as under turbines; that of the first turbine "
        "group of the type, and for pelton and turgo of the first group with one if left out.",
        examples=["98.1 m"],
    )

    @classmethod
    def keys_fit_together(
        cls, named: AbstractSet[str], written: Mapping[str, Any]
    ) -> Iterable[Finding]:
        """Only impulse machines have jets."""
        if "jets" in named and written.get("type") not in ("pelton", "turgo"):
            yield ("jets",), "only pelton and turgo units have jets; take the key out"


def _machine(value: Any) -> Any:
    """A word stands for a machine of that type."""
    return {"type": value} if isinstance(value, str) else value


class _OrWord:
    """Tells the schema that the word for a type may stand for the block."""

    def __get_pydantic_json_schema__(
        self, block: CoreSchema, handler: GetJsonSchemaHandler
    ) -> dict[str, Any]:
        word = {"type": "string", "enum": list(get_args(TurbineType))}
        return {"anyOf": [word, handler(block)]}


Machine = Annotated[OptionMachine, BeforeValidator(_machine), _OrWord()]


class MachineUncertainty(Block):
    """How far real machines may lie from their curves, one standard deviation each."""

    example: ClassVar[dict[str, Any]] = {"type_offset": "2 %"}

    type_offset: Annotated[float, Quantity(SHARE, at_least=0, below=1, example="2 %")] = Field(
        default=0.02,
        description="Of all machines of a type together, as a share of the energy [share or %]; "
        "2 % (common practice) if left out.",
        examples=["2 %"],
    )
    size_offset: Annotated[float, Quantity(SHARE, at_least=0, below=1, example="1 %")] = Field(
        default=0.01,
        description="Of the machines of one size, as a share of the energy [share or %]; 1 % "
        "(common practice) if left out.",
        examples=["1 %"],
    )
    part_load_tilt: Annotated[float, Quantity(SHARE, at_least=0, below=1, example="3 %")] = Field(
        default=0.03,
        description="Of the efficiency of one size of machine towards no load, nothing at full "
        "load [share or %]; 3 % (common practice) if left out.",
        examples=["3 %"],
    )


class Options(Block):
    """The plants that `hydroyield compare` tries: every combination of what is listed here."""

    example: ClassVar[dict[str, Any]] = {"unit_counts": [1, 2], "exceedances": [20, 30]}

    unit_counts: Annotated[tuple[Annotated[int, Whole(1, MOST_UNITS)], ...], ListOf("2", 1)] = (
        Field(
            default=(),
            description="Numbers of equal units to try; only the splits if left out.",
            examples=[[1, 2, 3]],
        )
    )
    splits: Annotated[tuple[Split, ...], ListOf("[0.33, 0.67]", 1)] = Field(
        default=(),
        description="Shares of the design discharge of each unit, which add up to 1 [share or %]; "
        "only equal units if left out.",
        examples=[[[0.33, 0.67]]],
    )
    types: Annotated[tuple[Machine, ...], ListOf("crossflow", 1)] = Field(
        default=(),
        description="Types of turbine to try: words, or blocks with what is known of a machine; "
        "the types under turbines if left out.",
        examples=[["kaplan", {"type": "crossflow", "minimum_discharge": "15 %"}]],
    )
    design_discharges: Annotated[tuple[Design, ...], ListOf("6 m3/s", 1)] = Field(
        default=(),
        description="Discharges of all units together at full opening [m3/s]; none of this kind "
        "if left out.",
        examples=[["4 m3/s", "6 m3/s"]],
    )
    mean_flow_multiples: Annotated[tuple[Multiple, ...], ListOf("1.0", 1)] = Field(
        default=(),
        description="Design discharges as multiples of the mean discharge of the river at the "
        "site [-]; none of this kind if left out.",
        examples=[[0.5, 1.0, 1.5]],
    )
    exceedances: Annotated[tuple[Percent, ...], ListOf("30", 1)] = Field(
        default=(),
        description="Design discharges as those that the river at the site equals or exceeds in so "
        "many per cent of the time [%]; none of this kind if left out.",
        examples=[[20, 30, 40]],
    )
    pipe_diameters: Annotated[tuple[Diameter, ...], ListOf("1.1 m", 1)] = Field(
        default=(),
        description="Diameters to try for the one pipe of the waterway [m]; that under waterway "
        "if left out.",
        examples=[["0.9 m", "1.1 m"]],
    )
    wanted_capacity_factor: Share | None = Field(
        default=None,
        description="Capacity factor that a further kW should reach, for the aim that weighs "
        "energy against capacity [share or %]; that aim is left out if left out.",
        examples=["35 %"],
    )
    minimum_capacity_factor: Share | None = Field(
        default=None,
        description="Options with less are shown, but not chosen [share or %]; no limit if left "
        "out.",
        examples=["30 %"],
    )
    maximum_capacity: Annotated[float, Quantity(POWER, above=0)] | None = Field(
        default=None,
        description="Options with more installed capacity are shown, but not chosen [kW]; no "
        "limit if left out.",
        examples=["500 kW"],
    )
    machine_uncertainty: MachineUncertainty = Field(
        default_factory=MachineUncertainty,
        description="How far real machines may lie from their curves; common practice if left out.",
        examples=[MachineUncertainty.example],
    )

    @classmethod
    def keys_fit_together(
        cls, named: AbstractSet[str], written: Mapping[str, Any]
    ) -> Iterable[Finding]:
        """Units and sizes are both needed."""
        if not named & {"unit_counts", "splits"}:
            yield (), "how many units is missing; write unit_counts: [1, 2], or splits, or both"
        if not named & {"design_discharges", "mean_flow_multiples", "exceedances"}:
            yield (
                (),
                "the sizes are missing; write design_discharges, mean_flow_multiples or "
                "exceedances, such as exceedances: [20, 30, 40]",
            )

    def values_fit_together(self) -> Iterable[Finding]:
        """Shares add up, and the number of combinations is one that can be looked through."""
        for index, split in enumerate(self.splits):
            total = sum(split)
            if len(split) > MOST_UNITS:
                yield ("splits", index), f"has {len(split)} units; write up to {MOST_UNITS}"
            if abs(total - 1) > SUM_TOLERANCE:
                yield (
                    ("splits", index),
                    f"adds up to {total:.4g}; write shares of the design discharge that add up "
                    "to 1, such as [0.33, 0.67]",
                )
        sizes = (self.design_discharges, self.mean_flow_multiples, self.exceedances)
        number = (
            (len(self.unit_counts) + len(self.splits))
            * max(1, len(self.types))
            * sum(map(len, sizes))
            * max(1, len(self.pipe_diameters))
        )
        if number > MOST_OPTIONS:
            yield (), f"makes {number} options; list fewer, at most {MOST_OPTIONS} together"


_PIPE_COSTS = Pairs(
    Quantity(LENGTH, above=0),
    Money,
    ("diameter", "cost of a metre"),
    "[[0.8 m, 300], [1.2 m, 480]]",
)


def _one_or_by_diameter(value: object) -> object:
    """One cost of a metre, or pairs of diameter and cost."""
    return _PIPE_COSTS.read(value) if isinstance(value, list | tuple) else Money.read(value)


def _prices(value: object) -> tuple[float, ...]:
    """One price for the whole year, or twelve."""
    if isinstance(value, list | tuple | Mapping):
        return read_twelve(value, Money)
    return (Money.read(value),) * MONTHS_PER_YEAR


class Cost(Block):
    """Costs and prices, all of them the user's own: none is built in."""

    example: ClassVar[dict[str, Any]] = {
        "fixed": 180000,
        "per_kw": 2400,
        "life": 30,
        "discount_rate": "5 %",
    }

    currency: Text = Field(
        default="money",
        description="Name of the currency, for the report; the word money if left out.",
        examples=["EUR"],
    )
    fixed: Annotated[float, Money] = Field(
        default=0.0,
        description="Capital cost that every option has; 0 if left out.",
        examples=[180000],
    )
    per_kw: Annotated[float, Money] = Field(
        default=0.0,
        description="Capital cost of a kW of installed capacity; 0 if left out.",
        examples=[2400],
    )
    per_unit: Annotated[float, Money] = Field(
        default=0.0, description="Capital cost of a unit; 0 if left out.", examples=[35000]
    )
    per_pipe_metre: Annotated[
        float | Table,
        BeforeValidator(_one_or_by_diameter),
        WithJsonSchema({"anyOf": [*NUMBER_OR_TEXT, {"type": "array", "minItems": 2}]}),
    ] = Field(
        default=0.0,
        description="Capital cost of a metre of the pipes of the waterway: one for all, or pairs "
        "of diameter and cost, linear between them; 0 if left out.",
        examples=[[["0.8 m", 300], ["1.2 m", 480]]],
    )
    energy_price: (
        Annotated[
            tuple[float, ...],
            BeforeValidator(_prices),
            WithJsonSchema({"anyOf": [*NUMBER_OR_TEXT, {"type": "array"}, {"type": "object"}]}),
        ]
        | None
    ) = Field(
        default=None,
        description="Income from a kWh: one for the whole year, twelve values, January first, or "
        "ranges of months; income is left out if left out.",
        examples=[{"apr-sep": 0.09, "oct-mar": 0.13}],
    )
    yearly: Annotated[float, Money] = Field(
        default=0.0, description="Cost of a year of operation; 0 if left out.", examples=[6000]
    )
    yearly_share: Annotated[float, Quantity(SHARE, at_least=0, below=1, example="1.5 %")] = Field(
        default=0.0,
        description="Cost of a year of operation as a share of the capital cost [share or %], "
        "beside `yearly`; 0 if left out.",
        examples=["1.5 %"],
    )
    life: Annotated[int, Whole(1, 100)] = Field(
        description="Years of operation that are counted.", examples=[30]
    )
    discount_rate: Annotated[float, Quantity(SHARE, at_least=0, below=1, example="5 %")] = Field(
        description="Discount rate a year, real if prices are [share or %].", examples=["5 %"]
    )
    grant_share: Annotated[float, Quantity(SHARE, at_least=0, at_most=1, example="30 %")] = Field(
        default=0.0,
        description="Share of the capital cost that a grant pays [share or %]; 0 if left out.",
        examples=["30 %"],
    )

    def values_fit_together(self) -> Iterable[Finding]:
        """Something costs something."""
        if not any((self.fixed, self.per_kw, self.per_unit, self.per_pipe_metre)):
            yield (), "no capital cost is above 0; write fixed, per_kw, per_unit or per_pipe_metre"
