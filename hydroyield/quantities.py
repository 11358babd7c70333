"""Quantities as people write them, and back.

"4.2 m3/s", "12 ft" or "350 l/s" become SI numbers at the edge of the program; inside, every
number is SI. The list of units is closed and short on purpose: a units library costs half a
second at each start. The tests hold the table against such a library.
"""

from __future__ import annotations

import math
import re
from dataclasses import dataclass
from fractions import Fraction

# Units are exact fractions, so that "94 %" and "0.94" are one number.
FOOT = Fraction("0.3048")  # m, international foot of 1959
US_GALLON = Fraction("3.785411784e-3")  # m3, 231 cubic inches
# W, mechanical: 550 foot-pounds per second
HORSEPOWER = 550 * Fraction("0.45359237") * Fraction("9.80665") * FOOT
DAY = 86400  # s
HOUR = 3600  # s
HOURS_PER_DAY = 24.0
W_PER_KW = 1000.0
WH_PER_MWH = 1e6

_QUANTITY = re.compile(r"([+-]?(?:\d+(?:\.\d*)?|\.\d+)(?:[eE][+-]?\d{1,3})?)\s*(.*)")
_DECIMAL_COMMA = re.compile(r"[+-]?\d+,\d+.*")
_MAYBE_THOUSANDS = re.compile(r"[+-]?\d+,(\d{3}(?!\d)|\d+[.,])")


Scale = tuple[Fraction, Fraction]  # (factor, offset): SI value = (number + offset) * factor


@dataclass(frozen=True)
class Dimension:
    """A kind of quantity.

    name : with its article, for messages
    bare_unit : the unit of a number written without one; "" for a plain number
    units : {unit: (factor, offset)}, SI value = (number + offset) * factor
    example : a value as one would write it
    """

    name: str
    bare_unit: str
    units: dict[str, Scale]
    example: str


def _scaled(factors: dict[str, Fraction | int]) -> dict[str, Scale]:
    return {unit: (Fraction(factor), Fraction(0)) for unit, factor in factors.items()}


_CENTI, _MILLI = Fraction(1, 100), Fraction(1, 1000)

_LENGTH_UNITS = _scaled(
    {
        "m": 1, "cm": _CENTI, "mm": _MILLI, "km": 1000,
        "ft": FOOT, "in": FOOT / 12, "mi": 5280 * FOOT,
    }
)  # fmt: skip
_DISCHARGE_UNITS = _scaled(
    {
        "m3/s": 1,
        "l/s": _MILLI,
        "m3/h": Fraction(1, HOUR),
        "m3/d": Fraction(1, DAY),
        "Ml/d": Fraction(1000, DAY),
        "cfs": FOOT**3,
        "mgd": 10**6 * US_GALLON / DAY,
    }
)
_AREA_UNITS = _scaled(
    {
        "m2": 1, "km2": 10**6, "ha": 10**4,
        "acre": 43560 * FOOT**2, "ft2": FOOT**2, "mi2": (5280 * FOOT) ** 2,
    }
)  # fmt: skip

LENGTH = Dimension("a length", "m", _LENGTH_UNITS, "12.5 m")
DISCHARGE = Dimension("a discharge", "m3/s", _DISCHARGE_UNITS, "4.2 m3/s")
POWER = Dimension(
    "a power", "kW", _scaled({"W": 1, "kW": 1000, "MW": 10**6, "hp": HORSEPOWER}), "125 kW"
)
AREA = Dimension("an area", "m2", _AREA_UNITS, "9 m2")
CATCHMENT_AREA = Dimension("an area", "km2", _AREA_UNITS, "287 km2")
# temperatures stay in degC inside: every formula that uses one is written in degC
TEMPERATURE = Dimension(
    "a temperature",
    "degC",
    {"degC": (Fraction(1), Fraction(0)), "degF": (Fraction(5, 9), Fraction(-32))},
    "9 degC",
)
SHARE = Dimension("a share", "", _scaled({"%": _CENTI}), "20 %")
PERCENT = Dimension("a percentage", "%", _scaled({"%": 1}), "95")
NUMBER = Dimension("a number", "", {}, "1.7")
ANGLE = Dimension("an angle", "degrees", {}, "54.2")

# spellings of a unit that mean the same and are read too
_SPELLINGS = {
    "ML/d": "Ml/d",
    "L/s": "l/s",
    "ft3/s": "cfs",
    "°C": "degC",
    "°F": "degF",
    "C": "degC",
    "F": "degF",
}


def _canonical(unit: str) -> str:
    unit = unit.replace("²", "2").replace("³", "3").replace("^", "")
    return _SPELLINGS.get(unit, unit)


def parse(text: str, dimension: Dimension) -> float:
    """Read a quantity: a number, or a number and a unit.

    text : "4.2", "350 l/s", "20 %"
    dimension : what is expected

    Returns the value in SI units (temperatures in degC, percentages in per cent).
    Raises ValueError with a message that says what to write.
    """
    stripped = text.strip()
    match = _QUANTITY.fullmatch(stripped)
    if match is None:
        raise ValueError(_not_a_quantity(stripped, dimension))
    number, unit = float(match[1]), _canonical(match[2])
    if not math.isfinite(number):
        raise ValueError(_too_large(stripped, dimension))
    if not unit:
        unit = dimension.bare_unit
        if unit not in dimension.units:  # a plain number or a bare fraction
            return number
    if unit not in dimension.units:
        raise ValueError(_unknown_unit(stripped, match[2], dimension))
    factor, offset = dimension.units[unit]
    try:
        return float((Fraction(match[1]) + offset) * factor)
    except OverflowError:
        raise ValueError(_too_large(stripped, dimension)) from None


def _too_large(text: str, dimension: Dimension) -> str:
    return f"'{text}' is too large; write for example {dimension.example}"


def unit_factor(unit: str, dimension: Dimension) -> float:
    """SI value of one of a unit that has no offset. Raises ValueError for an unknown unit."""
    try:
        return float(dimension.units[_canonical(unit.strip())][0])
    except KeyError:
        raise ValueError(
            f"unit '{unit}' is not read here; write one of {', '.join(dimension.units)}"
        ) from None


def _not_a_quantity(text: str, dimension: Dimension) -> str:
    if not text:
        return f"has no value; write {dimension.name} such as {dimension.example}"
    if _DECIMAL_COMMA.fullmatch(text):
        return _comma(text)
    return f"'{text}' is not {dimension.name}; write for example {dimension.example}"


def _comma(text: str) -> str:
    if not _MAYBE_THOUSANDS.match(text):
        return f"'{text}' has a decimal comma; write {text.replace(',', '.', 1)}"
    return f"'{text}' has a comma; write a decimal point, and nothing between thousands"


def _unknown_unit(text: str, unit: str, dimension: Dimension) -> str:
    if _DECIMAL_COMMA.fullmatch(text):
        return _comma(text)
    if not dimension.units:
        return (
            f"'{text}' carries a unit or stray text; write {dimension.name} such as "
            f"{dimension.example}"
        )
    readable = ", ".join(dimension.units)
    same_but_case = [known for known in dimension.units if known.lower() == unit.lower()]
    hint = f"; did you mean {same_but_case[0]}?" if same_but_case else ""
    return f"'{text}': unit '{unit}' is not one of {dimension.name}; write one of {readable}{hint}"


def rounded(value: float, digits: int = 3) -> str:
    """A number for people, to `digits` significant figures, thousands set apart by a thin space."""
    if value == 0 or not math.isfinite(value):
        return "0" if value == 0 else str(value)
    decimals = max(0, digits - 1 - math.floor(math.log10(abs(value))))
    return f"{round(value, digits - 1 - math.floor(math.log10(abs(value)))):,.{decimals}f}".replace(
        ",", "\u202f"
    )
