"""The block `operation`: when the plant, or one unit of it, does not run."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from collections.abc import Set as AbstractSet
from typing import Annotated, Any, ClassVar

from pydantic import Field

from hydroyield.quantities import DISCHARGE, NUMBER, SHARE
from hydroyield.site.blocks import Block
from hydroyield.site.date_windows import Windows
from hydroyield.site.faults import Finding
from hydroyield.site.fields import Quantity
from hydroyield.site.months import MONTHS_PER_YEAR, Months


class _Days(Block):
    """Days of every year, stated by their number or by their dates."""

    exactly_one_of: ClassVar[tuple[str, ...]] = ("days", "dates")
    months_needed: ClassVar[bool] = False

    @classmethod
    def keys_fit_together(
        cls, named: AbstractSet[str], written: Mapping[str, Any]
    ) -> Iterable[Finding]:
        """Months belong to a number of days."""
        if "dates" in named and "months" in named:
            yield ("months",), "'months' is read with days; the dates name their months"
        if cls.months_needed and "days" in named and "months" not in named:
            yield ("months",), "is missing; write months: [1, 2]"


class PlannedOutage(_Days):
    """Maintenance: one unit after another is out, on days by their number or by their dates."""

    example: ClassVar[dict[str, Any]] = {"days": 10, "months": [8]}

    days: Annotated[float, Quantity(NUMBER, at_least=0, at_most=366, example="10")] | None = Field(
        default=None,
        description="Days of each unit, every year, spread evenly over the months [d].",
        examples=[10],
    )
    months: Months | None = Field(
        default=None,
        description="Calendar months in which the days fall, such as 8 or aug-sep; those that cost "
        "the least energy if left out.",
        examples=[[8]],
    )
    dates: Windows | None = Field(
        default=None,
        description="Windows of every year, month-day, both included, over the turn of the year "
        "where need be: in them one unit after another is out, each for an equal part. They count "
        "as days of their months, in which the river is taken as in the whole month.",
        examples=[["08-10 to 08-19"]],
    )


class Standstill(_Days):
    """Days on which the whole plant stands, by their number or by their dates."""

    example: ClassVar[dict[str, Any]] = {"days": 5, "months": [1, 2]}
    months_needed: ClassVar[bool] = True

    days: Annotated[float, Quantity(NUMBER, at_least=0, at_most=366, example="5")] | None = Field(
        default=None,
        description="Days every year, spread evenly over the months [d].",
        examples=[5],
    )
    months: Months | None = Field(
        default=None,
        description="Calendar months in which the days fall, such as 1, jan or jan-feb; needed "
        "with days, if left out.",
        examples=[[1, 2]],
    )
    dates: Windows | None = Field(
        default=None,
        description="Windows of every year, month-day, both included, over the turn of the year "
        "where need be. They count as days of their months, in which the river is taken as in the "
        "whole month.",
        examples=[["12-20 to 01-10"]],
    )


class Operation(Block):
    """How the plant is run."""

    example: ClassVar[dict[str, Any]] = {"shutdown_above": "90 m3/s"}
    shutdown_above: Annotated[float, Quantity(DISCHARGE, above=0)] | None = Field(
        default=None,
        description="River discharge above which the plant stands [m3/s]; it runs in any flood if "
        "left out.",
        examples=["90 m3/s"],
    )
    planned_outage: PlannedOutage | None = Field(
        default=None,
        description="Days on which each unit is out of service for maintenance; none if left out.",
        examples=[PlannedOutage.example],
    )
    forced_outage_rate: (
        Annotated[float, Quantity(SHARE, at_least=0, below=1, example="2 %")] | None
    ) = Field(
        default=None,
        description="Chance that a unit is down in an hour not planned out, each unit by itself "
        "[share or %]; none if left out.",
        examples=["2 %"],
    )
    common_outage_rate: (
        Annotated[float, Quantity(SHARE, at_least=0, below=1, example="1 %")] | None
    ) = Field(
        default=None,
        description="Chance that what all units share is down, such as the intake or the line "
        "[share or %]; none if left out.",
        examples=["1 %"],
    )
    standstill: Standstill | None = Field(
        default=None,
        description="Days on which the whole plant stands, such as for ice or flushing; none if "
        "left out.",
        examples=[Standstill.example],
    )
    degradation: Annotated[float, Quantity(SHARE, at_least=0, below=1, example="0.3 %")] | None = (
        Field(
            default=None,
            description="Share of the energy that is lost from each year to the next as the plant "
            "ages [share or %]. The result stays that of the new plant; the energy after 10, 20 "
            "and 30 years and the mean over 30 stand beside it. Nothing is said of ageing if left "
            "out.",
            examples=["0.3 %"],
        )
    )
    closed: Months | None = Field(
        default=None,
        description="Calendar months in which the plant does not run, such as 1, jan or jan-feb; "
        "none if left out.",
        examples=[[1, 2]],
    )

    def values_fit_together(self) -> Iterable[Finding]:
        """A plant that is closed all year is no plant."""
        if self.closed is not None and len(self.closed) == MONTHS_PER_YEAR:
            yield ("closed",), "the plant is closed all year; write the months in which it stands"
