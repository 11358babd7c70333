"""Quantities: the table of units against a units library, spellings, and messages."""

from __future__ import annotations

import math

import pint
import pytest
from hypothesis import given
from hypothesis import strategies as st

from hydroyield import quantities
from hydroyield.quantities import (
    ANGLE,
    AREA,
    CATCHMENT_AREA,
    DISCHARGE,
    LENGTH,
    NUMBER,
    PERCENT,
    POWER,
    SHARE,
    TEMPERATURE,
    Dimension,
    parse,
    unit_factor,
)

# our unit -> the same as an expression of pint. The acre is that of the international foot: NIST
# retired the survey foot, which pint's own acre still uses, at the end of 2022.
PINT = {
    LENGTH.name: (
        "meter",
        {
            "m": "meter",
            "cm": "centimeter",
            "mm": "millimeter",
            "km": "kilometer",
            "ft": "foot",
            "in": "inch",
            "mi": "mile",
        },
    ),
    DISCHARGE.name: (
        "meter**3/second",
        {
            "m3/s": "meter**3/second",
            "l/s": "liter/second",
            "m3/h": "meter**3/hour",
            "m3/d": "meter**3/day",
            "Ml/d": "megaliter/day",
            "cfs": "foot**3/second",
            "mgd": "1e6*gallon/day",
        },
    ),
    POWER.name: (
        "watt",
        {"W": "watt", "kW": "kilowatt", "MW": "megawatt", "hp": "horsepower"},
    ),
    AREA.name: (
        "meter**2",
        {
            "m2": "meter**2",
            "km2": "kilometer**2",
            "ha": "hectare",
            "acre": "43560*foot**2",
            "ft2": "foot**2",
            "mi2": "mile**2",
        },
    ),
}
ALL = [LENGTH, DISCHARGE, POWER, AREA, CATCHMENT_AREA, TEMPERATURE, SHARE, PERCENT, NUMBER, ANGLE]
UNITS = [
    (dimension, unit)
    for dimension in (LENGTH, DISCHARGE, POWER, AREA, CATCHMENT_AREA)
    for unit in dimension.units
]


@pytest.fixture(scope="module")
def registry() -> pint.UnitRegistry:
    return pint.UnitRegistry()


@pytest.mark.parametrize(("dimension", "unit"), UNITS)
def test_unit_agrees_with_units_library(
    registry: pint.UnitRegistry, dimension: Dimension, unit: str
) -> None:
    si, expressions = PINT[dimension.name]
    expected = registry(expressions[unit]).to(si).magnitude
    assert unit_factor(unit, dimension) == pytest.approx(expected, rel=1e-13)
    assert parse(f"7.25 {unit}", dimension) == pytest.approx(7.25 * expected, rel=1e-13)


def test_every_unit_is_held_against_the_library() -> None:
    held = {(name, unit) for name, (_, units) in PINT.items() for unit in units}
    assert held == {(dimension.name, unit) for dimension, unit in UNITS}


@pytest.mark.parametrize("degrees", [-40.0, 0.0, 32.0, 50.0, 98.6, 212.0])
def test_fahrenheit_agrees_with_units_library(registry: pint.UnitRegistry, degrees: float) -> None:
    expected = registry.Quantity(degrees, "degF").to("degC").magnitude
    assert parse(f"{degrees} degF", TEMPERATURE) == pytest.approx(expected, abs=1e-10)


@pytest.mark.parametrize(
    ("text", "dimension", "expected"),
    [
        # exact by definition of the units
        ("4.2", DISCHARGE, 4.2),
        ("350 l/s", DISCHARGE, 0.35),
        ("350l/s", DISCHARGE, 0.35),
        ("  350   l/s ", DISCHARGE, 0.35),
        ("350 L/s", DISCHARGE, 0.35),
        ("86.4 ML/d", DISCHARGE, 1.0),
        ("100 ft3/s", DISCHARGE, 2.8316846592),
        ("1 m³/s", DISCHARGE, 1.0),
        ("1 m^3/s", DISCHARGE, 1.0),
        ("1e3", LENGTH, 1000.0),
        (".5 m", LENGTH, 0.5),
        ("5. m", LENGTH, 5.0),
        ("-3", LENGTH, -3.0),
        ("+3 m", LENGTH, 3.0),
        ("017", LENGTH, 17.0),
        ("125", POWER, 125e3),
        ("125 kW", POWER, 125e3),
        ("287", CATCHMENT_AREA, 287e6),
        ("287", AREA, 287.0),
        ("20 %", SHARE, 0.2),
        ("0.2", SHARE, 0.2),
        ("95", PERCENT, 95.0),
        ("95 %", PERCENT, 95.0),
        ("1.7", NUMBER, 1.7),
        ("-54.2", ANGLE, -54.2),
        ("9", TEMPERATURE, 9.0),
        ("9 °C", TEMPERATURE, 9.0),
        ("50 °F", TEMPERATURE, 10.0),
    ],
)
def test_parse_reads_what_people_write(text: str, dimension: Dimension, expected: float) -> None:
    assert parse(text, dimension) == pytest.approx(expected, rel=1e-14)


@pytest.mark.parametrize(
    ("text", "dimension", "fragment"),
    [
        ("", LENGTH, "has no value; write a length such as 12.5 m"),
        ("much", LENGTH, "'much' is not a length; write for example 12.5 m"),
        ("nan", LENGTH, "is not a length"),
        ("inf", LENGTH, "is not a length"),
        ("1e999", LENGTH, "too large"),
        ("12:30", LENGTH, "unit ':30'"),
        ("1_000", LENGTH, "unit '_000'"),
        ("0x10", LENGTH, "unit 'x10'"),
        ("3 fathoms", LENGTH, "unit 'fathoms' is not one of a length; write one of m, cm"),
        ("125 KW", POWER, "did you mean kW?"),
        ("20 %", NUMBER, "carries a unit or stray text"),
        ("54.2 N", ANGLE, "carries a unit or stray text"),
        ("4,2 m3/s", DISCHARGE, "has a decimal comma; write 4.2 m3/s"),
        ("4,25", NUMBER, "has a decimal comma; write 4.25"),
        ("1,234", DISCHARGE, "has a comma; write a decimal point, and nothing between"),
        ("1,234.5 m3/s", DISCHARGE, "has a comma; write a decimal point, and nothing between"),
        ("1,234,567 W", POWER, "has a comma; write a decimal point, and nothing between"),
    ],
)
def test_parse_refuses_with_a_remedy(text: str, dimension: Dimension, fragment: str) -> None:
    with pytest.raises(ValueError, match=r".") as caught:
        parse(text, dimension)
    assert fragment in str(caught.value)


def test_unit_factor_refuses_unknown_unit() -> None:
    with pytest.raises(ValueError, match="unit 'gpm' is not read here; write one of m3/s"):
        unit_factor("gpm", DISCHARGE)


@pytest.mark.parametrize("dimension", ALL, ids=lambda dimension: dimension.example)
def test_example_of_every_dimension_can_be_read(dimension: Dimension) -> None:
    assert math.isfinite(parse(dimension.example, dimension))


@given(st.floats(min_value=-1e9, max_value=1e9), st.sampled_from(UNITS))
def test_parse_scales_with_the_number(number: float, unit: tuple[Dimension, str]) -> None:
    dimension, name = unit
    factor = dimension.units[name][0]
    assert parse(f"{number!r} {name}", dimension) == pytest.approx(number * factor, rel=1e-14)


@given(st.text(max_size=30), st.sampled_from(ALL))
def test_parse_gives_a_number_or_a_message(text: str, dimension: Dimension) -> None:
    try:
        assert math.isfinite(parse(text, dimension))
    except ValueError as error:
        assert str(error)  # noqa: PT017


@pytest.mark.parametrize(
    ("value", "digits", "expected"),
    [
        (0.0, 3, "0"),
        (1234.5678, 6, "1\u202f234.57"),
        (0.012345, 3, "0.0123"),
        (125000.0, 3, "125\u202f000"),
    ],
)
def test_rounded_is_for_people(value: float, digits: int, expected: str) -> None:
    # by hand
    assert quantities.rounded(value, digits) == expected
