"""The discharge block: where the record is, how to read it, and how to move it to the site."""

from __future__ import annotations

import re
from collections.abc import Iterable, Mapping
from collections.abc import Set as AbstractSet
from pathlib import Path
from typing import Annotated, Any, ClassVar, Literal, get_args

from pydantic import AfterValidator, BeforeValidator, Field, ValidationInfo, WithJsonSchema

from hydroyield.quantities import CATCHMENT_AREA, DISCHARGE, NUMBER, SHARE, unit_factor
from hydroyield.site.blocks import Block
from hydroyield.site.faults import Finding, refuse, shown
from hydroyield.site.fields import Choice, Quantity, Text, Whole, scalar_text

DEPTH_UNITS = ("mm/d", "mm/h")  # runoff depths, which need the catchment area
RECORD_UNITS = (*DISCHARGE.units, *DEPTH_UNITS)

DateOrder = Literal["day_first", "month_first"]
DecimalMark = Literal["point", "comma"]
TransferMethod = Literal["area_ratio"]
PositiveCatchmentArea = Annotated[float, Quantity(CATCHMENT_AREA, above=0)]


def _stays_inside(name: str, info: ValidationInfo) -> str:
    """A relative path that does not leave the folder of the site file, links included."""
    if "\\" in name:
        raise ValueError(f"'{shown(name)}' holds a backslash; write / between folders")
    if name.startswith("/") or re.match(r"[A-Za-z]:", name):
        raise ValueError(
            f"'{shown(name)}' is an absolute path; put the record into the folder of the site "
            "file and write its name"
        )
    folder = (info.context or {}).get("folder")
    if ".." in name.split("/") or (folder is not None and _leads_out(folder, name)):
        raise ValueError(
            f"'{shown(name)}' leads out of the folder of the site file; put the record into that "
            "folder and write its name"
        )
    return name


def _leads_out(folder: Path, name: str) -> bool:
    try:
        return not (folder / name).resolve().is_relative_to(folder.resolve())
    except (OSError, RuntimeError, ValueError):  # a loop of links, or no path at all
        return True


def _record_unit(unit: str) -> str:
    if unit not in DEPTH_UNITS:
        try:
            unit_factor(unit, DISCHARGE)
        except ValueError:
            raise ValueError(_unknown_unit(unit)) from None
    return unit


def _unknown_unit(unit: str) -> str:
    meant = [known for known in RECORD_UNITS if known.lower() == unit.lower()]
    hint = f"; did you mean {meant[0]}?" if meant else ""
    return f"unit '{shown(unit)}' is not read here; write one of {', '.join(RECORD_UNITS)}{hint}"


def _marks(value: object) -> tuple[str, ...]:
    marks = value if isinstance(value, list | tuple) else [value]
    texts, findings = [], []
    for index, mark in enumerate(marks):
        try:
            texts.append(scalar_text(mark, "a mark for missing values", "-999"))
        except ValueError as error:
            findings.append(((index,) if marks is value else (), str(error)))
    if findings:
        refuse(findings)
    return tuple(texts)


class Record(Block):
    """A measured series of discharge in a file."""

    example: ClassVar[dict[str, Any]] = {"file": "larkbeck_daily.csv", "unit": "m3/s"}

    file: Annotated[Text, AfterValidator(_stays_inside)] = Field(
        description="Name of the file with the discharge record, relative to the site file and "
        "never outside its folder.",
        examples=["larkbeck_daily.csv"],
    )
    unit: Annotated[Text, AfterValidator(_record_unit)] | None = Field(
        default=None,
        description="Unit of the values: "
        + ", ".join(RECORD_UNITS)
        + "; mm/d and mm/h need transfer with gauge_area. Read from the file, which must then "
        "state it, if left out.",
        examples=["m3/s"],
    )
    date_column: Text | None = Field(
        default=None,
        description="Name of the column of dates; found by itself if left out.",
        examples=["date"],
    )
    value_column: Text | None = Field(
        default=None,
        description="Name of the column of discharges; found by itself if left out.",
        examples=["discharge"],
    )
    missing: Annotated[
        tuple[str, ...],
        BeforeValidator(_marks),
        WithJsonSchema({"type": ["array", "string", "number"]}),
    ] = Field(
        default=(),
        description="Marks in the file that mean 'no value', besides those of its format: "
        "a list of numbers or text; none if left out.",
        examples=[[-999, "no data"]],
    )
    date_order: Annotated[DateOrder, Choice(get_args(DateOrder))] | None = Field(
        default=None,
        description="Order of day and month in dates such as 03/04/2001: day_first or "
        "month_first; found from the file, and asked for where it stays open, if left out.",
        examples=["day_first"],
    )
    decimal_mark: Annotated[DecimalMark, Choice(get_args(DecimalMark))] | None = Field(
        default=None,
        description="Decimal mark of the values: point or comma; found from the file, and "
        "asked for where it stays open, if left out.",
        examples=["point"],
    )
    file_format: Text | None = Field(
        default=None,
        description="Name of the format of the file, such as usgs-rdb, grdc or plain; found by "
        "looking at the file if left out.",
        examples=["plain"],
    )


class Transfer(Block):
    """How discharge at the gauge becomes discharge at the site."""

    example: ClassVar[dict[str, Any]] = {
        "method": "area_ratio",
        "gauge_area": "312 km2",
        "site_area": "287 km2",
    }

    method: Annotated[TransferMethod, Choice(get_args(TransferMethod))] = Field(
        description="Method: area_ratio multiplies by (site_area / gauge_area) ^ exponent.",
        examples=["area_ratio"],
    )
    gauge_area: PositiveCatchmentArea = Field(
        description="Catchment area at the gauge [km2].", examples=["312 km2"]
    )
    site_area: PositiveCatchmentArea = Field(
        description="Catchment area at the intake of the site [km2].", examples=["287 km2"]
    )
    exponent: Annotated[float, Quantity(NUMBER)] = Field(
        default=1.0, description="Exponent of the area ratio [-]; 1.0 if left out.", examples=[1.0]
    )


class Discharge(Block):
    """The river's discharge."""

    example: ClassVar[dict[str, Any]] = {"record": Record.example}
    not_supported: ClassVar[dict[str, str]] = {
        "duration_table": "give a record of daily discharge: record: {file: daily.csv}"
    }

    record: Record = Field(
        description="The discharge record and how to read it.", examples=[Record.example]
    )
    year_start_month: Annotated[int, Whole(1, 12)] = Field(
        default=10,
        description="Month in which the hydrological year starts, 1 to 12; 10 (October) if left "
        "out.",
        examples=[10],
    )
    minimum_month_coverage: Annotated[
        float, Quantity(SHARE, above=0, at_most=1, example="90 %")
    ] = Field(
        default=0.9,
        description="Share of the days of each month that must have a value for the year to be "
        "used [share or %]; 90 % if left out.",
        examples=["90 %"],
    )
    transfer: Transfer | None = Field(
        default=None,
        description="How to move the record from the gauge to the site; the record counts as one "
        "of the site itself if left out.",
        examples=[Transfer.example],
    )

    @classmethod
    def keys_fit_together(
        cls, named: AbstractSet[str], written: Mapping[str, Any]
    ) -> Iterable[Finding]:
        """A runoff depth needs the area it fell on."""
        record = written.get("record")
        unit = record.get("unit") if isinstance(record, Mapping) else getattr(record, "unit", None)
        if unit in DEPTH_UNITS and "transfer" not in named:
            yield (
                ("record", "unit"),
                f"'{unit}' needs the catchment area of the gauge; write beside record a block "
                "transfer: {method: area_ratio, gauge_area: 312 km2, site_area: 287 km2}",
            )
