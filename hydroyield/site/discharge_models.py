"""The discharge block: a record or a duration table, and how it becomes the river at the site."""

from __future__ import annotations

import datetime
from collections.abc import Iterable, Mapping
from collections.abc import Set as AbstractSet
from typing import Annotated, Any, ClassVar, Literal, get_args

from pydantic import BeforeValidator, Field, WithJsonSchema

from hydroyield.quantities import CATCHMENT_AREA, DISCHARGE, NUMBER, PERCENT, SHARE
from hydroyield.site.blocks import Block
from hydroyield.site.faults import Finding, refuse, shown
from hydroyield.site.fields import NUMBER_OR_TEXT, Choice, Quantity, Whole, kind_of, scalar_text
from hydroyield.site.record_models import DEPTH_UNITS, Record, Reference
from hydroyield.site.tables import Pairs, Table

TransferMethod = Literal["area_ratio", "mean_ratio", "spot_gaugings"]
PositiveCatchmentArea = Annotated[float, Quantity(CATCHMENT_AREA, above=0)]
PositiveDischarge = Annotated[float, Quantity(DISCHARGE, above=0)]
KEYS_OF_METHOD = {
    "area_ratio": ("gauge_area", "site_area"),
    "mean_ratio": ("gauge_mean", "site_mean"),
    "spot_gaugings": (),
}
SPOT_EXAMPLE = "[[2021-04-14, 1.32 m3/s], [2021-08-02, 410 l/s]]"


class Transfer(Block):
    """How discharge at the gauge becomes discharge at the site."""

    example: ClassVar[dict[str, Any]] = {
        "method": "area_ratio",
        "gauge_area": "312 km2",
        "site_area": "287 km2",
    }

    method: Annotated[TransferMethod, Choice(get_args(TransferMethod))] = Field(
        description="Method: area_ratio multiplies by (site_area / gauge_area) ^ exponent, "
        "mean_ratio by site_mean / gauge_mean, spot_gaugings by the mean ratio of the discharges "
        "in discharge.spot_gaugings to the record of the same days.",
        examples=["area_ratio"],
    )
    gauge_area: PositiveCatchmentArea | None = Field(
        default=None,
        description="Catchment area at the gauge [km2]; needed for area_ratio, not known if left "
        "out.",
        examples=["312 km2"],
    )
    site_area: PositiveCatchmentArea | None = Field(
        default=None,
        description="Catchment area at the intake of the site [km2]; needed for area_ratio, not "
        "known if left out.",
        examples=["287 km2"],
    )
    exponent: Annotated[float, Quantity(NUMBER)] = Field(
        default=1.0, description="Exponent of the area ratio [-]; 1.0 if left out.", examples=[1.0]
    )
    gauge_mean: PositiveDischarge | None = Field(
        default=None,
        description="Mean discharge at the gauge [m3/s]; needed for mean_ratio, not used if left "
        "out.",
        examples=["5.2 m3/s"],
    )
    site_mean: PositiveDischarge | None = Field(
        default=None,
        description="Mean discharge at the intake of the site [m3/s], over the same years; needed "
        "for mean_ratio, not used if left out.",
        examples=["4.8 m3/s"],
    )
    uncertainty: Annotated[float, Quantity(SHARE, at_least=0, at_most=1, example="8 %")] | None = (
        Field(
            default=None,
            description="Standard uncertainty of the factor from gauge to site, as a share of it "
            "[share or %]; taken from the method if left out.",
            examples=["8 %"],
        )
    )

    @classmethod
    def keys_fit_together(
        cls, named: AbstractSet[str], written: Mapping[str, Any]
    ) -> Iterable[Finding]:
        """Each method needs its own keys."""
        method = written.get("method")
        for key in KEYS_OF_METHOD.get(str(method), ()):
            if key not in named:
                example = (cls.model_fields[key].examples or ["..."])[0]
                yield (key,), f"is missing; write {key}: {example}"


class InflowBelowIntake(Block):
    """Water that joins the river between intake and tailwater: it lifts the tailwater only."""

    example: ClassVar[dict[str, Any]] = {"discharge": "0.2 m3/s"}
    exactly_one_of: ClassVar[tuple[str, ...]] = ("area", "discharge")

    area: PositiveCatchmentArea | None = Field(
        default=None,
        description="Catchment area between intake and tailwater [km2], taken to yield as much "
        "water per area as that above the intake; needs transfer with site_area.",
        examples=["14 km2"],
    )
    discharge: PositiveDischarge | None = Field(
        default=None,
        description="Mean discharge that joins between intake and tailwater [m3/s], taken to rise "
        "and fall with the river.",
        examples=["0.2 m3/s"],
    )


def _never_rises(table: Table) -> Iterable[Finding]:
    for index in range(1, len(table)):
        if table[index][1] > table[index - 1][1]:
            yield (
                (index, 1),
                f"discharge rises from {table[index - 1][1]:g} to {table[index][1]:g} m3/s; what "
                "is exceeded in more of the time is less, so write discharges that fall",
            )
    if table[0][1] == 0:
        yield (0, 1), "no discharge at all; write the discharges of the river"


def _gaugings(value: object) -> tuple[tuple[datetime.date, float], ...]:
    """Dates and discharges; every fault at once."""
    if not isinstance(value, list | tuple) or not value:
        raise ValueError(f"{kind_of(value)} stands here; write a list of pairs {SPOT_EXAMPLE}")
    findings: list[Finding] = []
    pairs = []
    for index, row in enumerate(value):
        if not isinstance(row, list | tuple) or len(row) != 2:
            findings.append(((index,), "not a pair; write [date, discharge]"))
            continue
        try:
            pairs.append((_day(row[0]), Quantity(DISCHARGE, at_least=0).read(row[1])))
        except ValueError as error:
            findings.append(((index,), str(error)))
    if findings:
        refuse(findings)
    return tuple(pairs)


def _day(value: object) -> datetime.date:
    if isinstance(value, datetime.date):
        return value
    text = scalar_text(value, "a date", "2021-04-14")
    try:
        return datetime.date.fromisoformat(text)
    except ValueError:
        raise ValueError(f"'{shown(text)}' is no date; write year-month-day: 2021-04-14") from None


SpotGaugings = Annotated[
    tuple[tuple[datetime.date, float], ...],
    BeforeValidator(_gaugings),
    WithJsonSchema(
        {
            "type": "array",
            "items": {
                "type": "array",
                "items": {"anyOf": NUMBER_OR_TEXT},
                "minItems": 2,
                "maxItems": 2,
            },
            "minItems": 1,
        }
    ),
]


class Discharge(Block):
    """The river's discharge."""

    example: ClassVar[dict[str, Any]] = {"record": Record.example}
    exactly_one_of: ClassVar[tuple[str, ...]] = ("record", "duration_table")

    record: Record | None = Field(
        default=None,
        description="The discharge record and how to read it; or give duration_table.",
        examples=[Record.example],
    )
    duration_table: (
        Annotated[
            Table,
            Pairs(
                Quantity(PERCENT, at_least=0, at_most=100),
                Quantity(DISCHARGE, at_least=0),
                ("percent", "discharge"),
                "[[5, 21.0 m3/s], [50, 4.1 m3/s], [95, 0.8 m3/s]]",
                _never_rises,
            ),
        ]
        | None
    ) = Field(
        default=None,
        description="Where only statistics exist: percent of the time [%] and the discharge "
        "equalled or exceeded in it [m3/s], percent rising. Read between the points by a monotone "
        "curve, constant beyond the first and the last. Energy by year and month is then not known."
        " Or give record.",
        examples=[[[5, "21.0 m3/s"], [50, "4.1 m3/s"], [95, "0.8 m3/s"]]],
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
    spot_gaugings: SpotGaugings | None = Field(
        default=None,
        description="Discharges measured at the site: pairs of date (year-month-day) and discharge "
        "in m3/s. They check the transfer, or make it with method: spot_gaugings; nothing is "
        "checked if left out.",
        examples=[[["2021-04-14", "1.32 m3/s"], ["2021-08-02", "410 l/s"]]],
    )
    reference: Reference | None = Field(
        default=None,
        description="A long record of another gauge, from which days without a value are filled "
        "and the record is lengthened (MOVE.1); nothing is filled if left out.",
        examples=[Reference.example],
    )
    inflow_below_intake: InflowBelowIntake | None = Field(
        default=None,
        description="Water that joins between intake and tailwater; none if left out.",
        examples=[InflowBelowIntake.example],
    )

    @classmethod
    def keys_fit_together(
        cls, named: AbstractSet[str], written: Mapping[str, Any]
    ) -> Iterable[Finding]:
        """What one key needs of the others."""
        yield from _depths(named, written)
        if "duration_table" in named and "record" not in named:
            for key in ("spot_gaugings", "reference"):
                if key in named:
                    yield (
                        (key,),
                        "needs a record of daily discharge; leave it out, or give a record",
                    )
        transfer = written.get("transfer")
        if _value(transfer, "method") == "spot_gaugings" and "spot_gaugings" not in named:
            yield (
                ("transfer", "method"),
                "needs the gaugings at the site; write beside transfer spot_gaugings: "
                + SPOT_EXAMPLE,
            )
        inflow = written.get("inflow_below_intake")
        if _value(inflow, "area") is not None and _value(transfer, "site_area") is None:
            yield (
                ("inflow_below_intake", "area"),
                "needs the catchment area above the intake; write site_area under transfer, or "
                "discharge in place of area",
            )


def _value(block: object, key: str) -> object:
    return block.get(key) if isinstance(block, Mapping) else getattr(block, key, None)


def _depths(named: AbstractSet[str], written: Mapping[str, Any]) -> Iterable[Finding]:
    """A runoff depth needs the area it fell on."""
    unit = _value(written.get("record"), "unit")
    if unit not in DEPTH_UNITS:
        return
    if "transfer" not in named:
        yield (
            ("record", "unit"),
            f"'{unit}' needs the catchment area of the gauge; write beside record a block "
            "transfer: {method: area_ratio, gauge_area: 312 km2, site_area: 287 km2}",
        )
    elif _value(written.get("transfer"), "method") != "area_ratio" and (
        _value(written.get("transfer"), "gauge_area") is None
    ):
        yield (
            ("record", "unit"),
            f"'{unit}' needs the catchment area of the gauge; write gauge_area: 312 km2 under "
            "transfer",
        )
