"""The kinds of value a site file holds: quantities, words, switches, whole numbers, text.

Each is a piece of metadata for a model's field. It reads what the user wrote and raises
ValueError with a sentence that says what to write instead; pydantic only carries the sentence.
A number given from Python means what the same number means in a site file: it is in the unit
that the field states.
"""

from __future__ import annotations

import math
import re
from collections.abc import Mapping
from dataclasses import dataclass, field
from fractions import Fraction
from numbers import Integral, Real
from typing import Annotated, Any

from pydantic import (
    BeforeValidator,
    GetCoreSchemaHandler,
    GetJsonSchemaHandler,
    WithJsonSchema,
)
from pydantic_core import CoreSchema, core_schema

from hydroyield.quantities import ANGLE, NUMBER, PERCENT, SHARE, Dimension, parse
from hydroyield.site.faults import closest, shown

_WHOLE = re.compile(r"[+-]?\d{1,9}", re.ASCII)
_SI = (Fraction(1), Fraction(0))  # the scale of a unit that is one of the SI
_CONTROL = re.compile(r"[\x00-\x08\x0b-\x1f\x7f]")
NUMBER_OR_TEXT = [{"type": "number"}, {"type": "string"}]


def scalar_text(value: object, wanted: str, example: str) -> str:
    """A single value as text.

    wanted : what belongs here, with its article
    example : what to write

    Raises ValueError for a list, a block of keys or nothing at all.
    """
    if isinstance(value, str) and value.strip():
        return value.strip()
    if isinstance(value, bool | Integral):
        return str(value)
    if isinstance(value, Real):
        return repr(float(value))
    if value is None or value == "":
        raise ValueError(f"has no value; write {example}")
    raise ValueError(f"{kind_of(value)} stands where {wanted} belongs; write {example}")


def kind_of(value: object) -> str:
    """What stands there, for messages."""
    if isinstance(value, Mapping):
        return "a block of keys"
    if isinstance(value, list | tuple):
        return "a list"
    return f"'{shown(value)}'"


@dataclass(frozen=True)
class Quantity:
    """A number with a unit, held in SI (temperatures in degC, percentages in per cent).

    dimension : what kind of quantity
    above, at_least, at_most, below : limits, in SI
    excess : what it means to exceed a share of 1, for the message
    example : a value as one would write it; that of the dimension if empty
    """

    dimension: Dimension = field(hash=False)  # it holds a dict
    above: float | None = None
    at_least: float | None = None
    at_most: float | None = None
    below: float | None = None
    excess: str = ""
    example: str = ""

    def read(self, value: object) -> float:
        """SI value of what the user wrote. Raises ValueError that says what to write."""
        text = scalar_text(value, self.dimension.name, self._example())
        number = parse(shown(text), self.dimension)
        if not math.isfinite(number):
            raise ValueError(f"'{shown(text)}' is too large; write for example {self._example()}")
        if self._within(number):
            return number
        raise ValueError(self._out_of_range(shown(text), number))

    def _example(self) -> str:
        return self.example or self.dimension.example

    def _within(self, number: float) -> bool:
        return not (
            (self.above is not None and number <= self.above)
            or (self.at_least is not None and number < self.at_least)
            or (self.at_most is not None and number > self.at_most)
            or (self.below is not None and number >= self.below)
        )

    def _out_of_range(self, text: str, number: float) -> str:
        if self.dimension is SHARE and self.at_most == 1 and number > 1:
            what = f"'{text}': {self.excess}" if self.excess else f"'{text}' is above 1"
            if "%" not in text and 2 <= number <= 100:
                return f"{what}; write {number:g} % or {number / 100:g}"
            return f"{what}; write a share up to 100 %"
        remedy = f"write {self.dimension.name} {self.limits()}, such as {self._example()}"
        return f"'{text}' is out of range; {remedy}"

    def limits(self) -> str:
        """The limits in words: "above 0", "from -90 to 90"; empty where there are none."""
        unit = "" if self.dimension in (SHARE, NUMBER, ANGLE) else f" {_si_unit(self.dimension)}"
        words = [
            f"{word} {limit:g}{unit if limit else ''}"
            for word, limit in (
                ("above", self.above),
                ("of at least", self.at_least),
                ("up to", self.at_most),
                ("below", self.below),
            )
            if limit is not None
        ]
        return " and ".join(words)

    def __get_pydantic_core_schema__(
        self, source: Any, handler: GetCoreSchemaHandler
    ) -> CoreSchema:
        return core_schema.no_info_before_validator_function(self.read, handler(source))

    def __get_pydantic_json_schema__(
        self, schema: CoreSchema, handler: GetJsonSchemaHandler
    ) -> dict[str, Any]:
        return {"anyOf": NUMBER_OR_TEXT}


def _si_unit(dimension: Dimension) -> str:
    if dimension is PERCENT:
        return "%"
    return next((unit for unit, scale in dimension.units.items() if scale == _SI), "")


@dataclass(frozen=True)
class Choice:
    """One word of a closed list."""

    words: tuple[str, ...]

    def read(self, value: object) -> str:
        """The word. Raises ValueError with the words that are read."""
        text = scalar_text(value, "one word", f"one of {', '.join(self.words)}")
        if text in self.words:
            return text
        meant = closest(text, self.words)
        hint = f"; did you mean {meant}?" if meant else ""
        raise ValueError(
            f"'{shown(text)}' is not known here; write one of {', '.join(self.words)}{hint}"
        )

    def __get_pydantic_core_schema__(
        self, source: Any, handler: GetCoreSchemaHandler
    ) -> CoreSchema:
        return core_schema.no_info_before_validator_function(self.read, handler(source))


@dataclass(frozen=True)
class Whole:
    """A whole number between two limits, both included."""

    least: int
    most: int

    def read(self, value: object) -> int:
        """The number. Raises ValueError that says what to write."""
        wanted = f"a whole number from {self.least} to {self.most}"
        text = scalar_text(value, wanted, wanted)
        if not _WHOLE.fullmatch(text):
            raise ValueError(f"'{shown(text)}' is not a whole number; write {wanted}")
        if not self.least <= int(text) <= self.most:
            raise ValueError(f"'{shown(text)}' is out of range; write {wanted}")
        return int(text)

    def __get_pydantic_core_schema__(
        self, source: Any, handler: GetCoreSchemaHandler
    ) -> CoreSchema:
        return core_schema.no_info_before_validator_function(self.read, handler(source))

    def __get_pydantic_json_schema__(
        self, schema: CoreSchema, handler: GetJsonSchemaHandler
    ) -> dict[str, Any]:
        return {"type": "integer", "minimum": self.least, "maximum": self.most}


@dataclass(frozen=True)
class ListOf:
    """A list; `example` is one of its entries, `least` the number of entries needed."""

    example: str
    least: int = 0

    def read(self, value: object) -> object:
        """The list as it is. Raises ValueError if it is none, or too short."""
        if isinstance(value, Mapping):
            raise ValueError(
                f"a single block stands where a list belongs; write a list: start the line "
                f"with '- ', such as - {self.example}"
            )
        if not isinstance(value, list | tuple):
            raise ValueError(
                f"{kind_of(value)} stands where a list belongs; write for example [{self.example}]"
            )
        if len(value) < self.least:
            raise ValueError(f"the list is empty; write at least one entry: - {self.example}")
        return value

    def __get_pydantic_core_schema__(
        self, source: Any, handler: GetCoreSchemaHandler
    ) -> CoreSchema:
        return core_schema.no_info_before_validator_function(self.read, handler(source))

    def __get_pydantic_json_schema__(
        self, schema: CoreSchema, handler: GetJsonSchemaHandler
    ) -> dict[str, Any]:
        return {**handler(schema), **({"minItems": self.least} if self.least else {})}


def _read_text(value: object) -> str:
    text = scalar_text(value, "text", "a word or a line of text")
    if _CONTROL.search(text):
        raise ValueError("the text holds control characters; delete them")
    return text


def _read_switch(value: object) -> bool:
    text = scalar_text(value, "true or false", "true").lower()
    if text not in ("true", "false"):
        raise ValueError(f"'{shown(text)}' is neither true nor false; write true or false")
    return text == "true"


# a number may stand for itself as text, such as the name of a column
Text = Annotated[str, BeforeValidator(_read_text), WithJsonSchema({"type": ["string", "number"]})]
Switch = Annotated[bool, BeforeValidator(_read_switch)]
