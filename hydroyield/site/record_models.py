"""The record block: which files hold the discharge, and how to read them."""

from __future__ import annotations

import re
from pathlib import Path
from typing import Annotated, Any, ClassVar, Literal, get_args

from pydantic import AfterValidator, BeforeValidator, Field, ValidationInfo, WithJsonSchema

from hydroyield.quantities import CATCHMENT_AREA, DISCHARGE, unit_factor
from hydroyield.site.blocks import Block
from hydroyield.site.faults import refuse, shown
from hydroyield.site.fields import Choice, Quantity, Switch, Text, scalar_text

DEPTH_UNITS = ("mm/d", "mm/h")  # runoff depths, which need the catchment area
RECORD_UNITS = (*DISCHARGE.units, *DEPTH_UNITS)

DateOrder = Literal["day_first", "month_first"]
DecimalMark = Literal["point", "comma"]


def stays_inside(name: str, info: ValidationInfo) -> str:
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


def _files(value: object) -> tuple[str, ...]:
    """One name or a list of names, each held inside the folder later."""
    names = value if isinstance(value, list | tuple) else [value]
    if not names:
        raise ValueError("names no file; write the name of the record")
    texts, findings = [], []
    for index, name in enumerate(names):
        try:
            texts.append(scalar_text(name, "the name of a file", "larkbeck_daily.csv"))
        except ValueError as error:
            findings.append(((index,) if names is value else (), str(error)))
    twice = [text for index, text in enumerate(texts) if text in texts[:index]]
    if twice:
        raise ValueError(f"'{shown(twice[0])}' is named twice; name each file once")
    if findings:
        refuse(findings)
    return tuple(texts)


def _stay_inside(names: tuple[str, ...], info: ValidationInfo) -> tuple[str, ...]:
    return tuple(stays_inside(name, info) for name in names)


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

    file: Annotated[
        tuple[str, ...],
        BeforeValidator(_files),
        AfterValidator(_stay_inside),
        WithJsonSchema({"type": ["string", "array"], "items": {"type": "string"}, "minItems": 1}),
    ] = Field(
        description="Name of the file with the discharge record, relative to the site file and "
        "never outside its folder; or a list of names, where several files of one gauge are read "
        "as one record.",
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


class Reference(Record):
    """A long record of another gauge, from which days without a value are filled."""

    example: ClassVar[dict[str, Any]] = {"file": "longbrook_daily.csv", "unit": "m3/s"}

    seasonal: Switch = Field(
        default=False,
        description="Whether each of four seasons (December to February and so on) has its own "
        "line between the two records; one line for all months if left out.",
        examples=[True],
    )
    gauge_area: Annotated[float, Quantity(CATCHMENT_AREA, above=0)] | None = Field(
        default=None,
        description="Catchment area of the reference gauge [km2], needed where its values are "
        "runoff depths; not known if left out.",
        examples=["845 km2"],
    )
