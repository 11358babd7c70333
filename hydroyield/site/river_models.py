"""Water that does not reach the turbines: environmental flow and other abstractions."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from functools import partial
from typing import Annotated, Any, ClassVar, Literal

from pydantic import BeforeValidator, Field, WithJsonSchema, WrapValidator
from pydantic import ValidatorFunctionWrapHandler as Handler

from hydroyield.quantities import DISCHARGE, PERCENT, SHARE
from hydroyield.site.blocks import Block
from hydroyield.site.faults import Finding, closest, flow, refuse, shown
from hydroyield.site.fields import Choice, Quantity, Switch, Text
from hydroyield.site.months import MONTHS_PER_YEAR, TWELVE_SCHEMA, Months, read_twelve
from hydroyield.site.tables import Pairs, Table

ReservedDischarge = Annotated[float, Quantity(DISCHARGE, at_least=0)]
PRESET_NAMES = (
    "swiss_q347",
    "czech_1998",
    "french_tenth",
    "tennant_outstanding",
    "tennant_excellent",
    "tennant_good",
    "tennant_fair",
    "tennant_poor",
)  # those of river.presets, kept here so that reading a site file needs no numbers

Combination = Literal["largest", "sum", "priority"]

_FLOW = Quantity(DISCHARGE, at_least=0)


class FlowRule(Block):
    """What every rule may say beside its numbers."""

    months: Months | None = Field(
        default=None,
        description="Months in which the rule holds, such as 3, mar or mar-may; all year if left "
        "out.",
        examples=[[3, 4, 5]],
    )
    permit: Text | None = Field(
        default=None,
        description="Number of the permit that states the rule, for the report; shown as not "
        "stated if left out.",
        examples=["WR 112/2019"],
    )
    date: Text | None = Field(
        default=None,
        description="Date of the permit, for the report; shown as not stated if left out.",
        examples=["2019-05-14"],
    )


class ConstantRule(FlowRule):
    """The same discharge stays in the river all year."""

    example: ClassVar[dict[str, Any]] = {"rule": "constant", "discharge": "0.6 m3/s"}

    rule: Literal["constant"] = Field(description="Name of the rule.", examples=["constant"])
    discharge: ReservedDischarge = Field(
        description="Discharge that stays in the river [m3/s].", examples=["0.6 m3/s"]
    )


class MonthlyRule(FlowRule):
    """A discharge for each calendar month stays in the river."""

    example: ClassVar[dict[str, Any]] = {"rule": "monthly", "discharge": [0.6] * MONTHS_PER_YEAR}

    rule: Literal["monthly"] = Field(description="Name of the rule.", examples=["monthly"])
    discharge: Annotated[
        tuple[float, ...],
        BeforeValidator(partial(read_twelve, quantity=_FLOW)),
        WithJsonSchema(TWELVE_SCHEMA),
    ] = Field(
        description="Discharges that stay in the river, in m3/s: 12 values, January first, or "
        "ranges such as {apr-sep: 0.8, oct-mar: 0.5}.",
        examples=[[0.6] * MONTHS_PER_YEAR],
    )


class ExceedanceRule(FlowRule):
    """The discharge equalled or exceeded in a percentage of the days stays in the river."""

    example: ClassVar[dict[str, Any]] = {"rule": "exceedance", "percent": 95}

    rule: Literal["exceedance"] = Field(description="Name of the rule.", examples=["exceedance"])
    percent: Annotated[float, Quantity(PERCENT, above=0, below=100)] = Field(
        description="Percentage of all days at which the discharge is equalled or exceeded [%]; "
        "95 stands for Q95.",
        examples=[95],
    )


class MeanShareRule(FlowRule):
    """A share of the mean discharge of the record at the site stays in the river."""

    example: ClassVar[dict[str, Any]] = {"rule": "mean_share", "share": "10 %"}

    rule: Literal["mean_share"] = Field(description="Name of the rule.", examples=["mean_share"])
    share: Annotated[float, Quantity(SHARE, at_least=0, at_most=1)] = Field(
        description="Share of the mean discharge [share or %].", examples=["10 %"]
    )


class InflowShareRule(FlowRule):
    """Everything up to a discharge, and a share of what exceeds it, stays in the river."""

    example: ClassVar[dict[str, Any]] = {
        "rule": "inflow_share",
        "share": "50 %",
        "above": "1.2 m3/s",
    }

    rule: Literal["inflow_share"] = Field(
        description="Name of the rule.", examples=["inflow_share"]
    )
    share: Annotated[float, Quantity(SHARE, at_least=0, at_most=1)] = Field(
        description="Share of the inflow above the given discharge [share or %].",
        examples=["50 %"],
    )
    above: ReservedDischarge = Field(
        description="Discharge up to which everything stays in the river [m3/s].",
        examples=["1.2 m3/s"],
    )
    maximum_take: Annotated[float, Quantity(DISCHARGE, above=0)] | None = Field(
        default=None,
        description="The most that may be taken, whatever the inflow [m3/s]; no limit if left out.",
        examples=["5 m3/s"],
    )


def _from_zero(table: Table) -> Iterable[Finding]:
    if table[0][0] > 0:
        yield (0, 0), "the first step begins above 0; write the discharge that stays from 0 m3/s on"


class StepsRule(FlowRule):
    """A discharge stays in the river that goes up in steps with the inflow."""

    example: ClassVar[dict[str, Any]] = {
        "rule": "steps",
        "steps": [["0 m3/s", "0.4 m3/s"], ["2 m3/s", "0.7 m3/s"]],
    }

    rule: Literal["steps"] = Field(description="Name of the rule.", examples=["steps"])
    steps: Annotated[
        Table,
        Pairs(
            _FLOW, _FLOW, ("inflow", "discharge"), "[[0, 0.4 m3/s], [2 m3/s, 0.7 m3/s]]", _from_zero
        ),
    ] = Field(
        description="Pairs of the inflow from which a step holds [m3/s] and the discharge that "
        "stays in the river [m3/s].",
        examples=[[["0 m3/s", "0.4 m3/s"], ["2 m3/s", "0.7 m3/s"]]],
    )


class PresetRule(FlowRule):
    """A published rule, as an example with its date; never the law of the day."""

    example: ClassVar[dict[str, Any]] = {"rule": "preset", "name": "swiss_q347"}

    rule: Literal["preset"] = Field(description="Name of the rule.", examples=["preset"])
    name: Annotated[str, Choice(tuple(PRESET_NAMES))] = Field(
        description="Which: " + ", ".join(PRESET_NAMES) + ".", examples=["swiss_q347"]
    )


AnyRule = (
    ConstantRule
    | MonthlyRule
    | ExceedanceRule
    | MeanShareRule
    | InflowShareRule
    | StepsRule
    | PresetRule
)
RULES: dict[str, type[Block]] = {
    "constant": ConstantRule,
    "monthly": MonthlyRule,
    "exceedance": ExceedanceRule,
    "mean_share": MeanShareRule,
    "inflow_share": InflowShareRule,
    "steps": StepsRule,
    "preset": PresetRule,
}


def _read_rule(written: Any, handler: Handler) -> Any:
    """Hand a rule to the model that its name asks for, so that only that model's faults show."""
    if isinstance(written, Block):
        return handler(written)
    if not isinstance(written, Mapping):
        raise ValueError(f"'{shown(written)}' is no rule; write {flow(ConstantRule.example)}")
    if "rule" not in written:
        refuse([(("rule",), f"is missing; write rule: and one of {', '.join(RULES)}")])
    name = written["rule"]
    if not isinstance(name, str) or name not in RULES:
        meant = closest(str(name), RULES)
        hint = f"; did you mean {meant}?" if meant else ""
        known = ", ".join(RULES)
        refuse([(("rule",), f"'{shown(name)}' is no rule; write one of {known}{hint}")])
    return RULES[name].model_validate(written)


Rule = Annotated[AnyRule, Field(discriminator="rule"), WrapValidator(_read_rule)]


class Abstraction(Block):
    """Other water that does not reach the turbines.

    Leakage past gates, seals and canal walls is written as an abstraction: with `returns: true`
    where it reaches the river above the tailwater, as at a weir, with `returns: false` where it
    does not.
    """

    example: ClassVar[dict[str, Any]] = {"name": "fish pass", "discharge": "0.15 m3/s"}

    name: Text = Field(description="What takes the water.", examples=["fish pass"])
    discharge: ReservedDischarge = Field(
        description="Discharge taken [m3/s].", examples=["0.15 m3/s"]
    )
    months: Months | None = Field(
        default=None,
        description="Months in which it is taken, such as 3, mar or mar-may; all year if left out.",
        examples=[[3, 4, 5]],
    )
    counts_as_environmental_flow: Switch = Field(
        default=False,
        description="Whether the water counts towards the environmental flow, as that of a fish "
        "pass may: true or false; false if left out.",
        examples=[True],
    )
    returns: Switch = Field(
        default=True,
        description="Whether the water is back in the river at the tailwater: true or false; true "
        "if left out.",
        examples=[False],
    )
