"""Tables of two columns: ratings and efficiency curves."""

from __future__ import annotations

from collections.abc import Callable, Iterable
from dataclasses import dataclass
from typing import Any

from pydantic import GetCoreSchemaHandler, GetJsonSchemaHandler
from pydantic_core import CoreSchema, core_schema

from hydroyield.site.faults import Finding, refuse, shown
from hydroyield.site.fields import NUMBER_OR_TEXT, Quantity, kind_of

Table = tuple[tuple[float, float], ...]


@dataclass(frozen=True)
class Pairs:
    """A table of two columns, the first strictly rising, held in SI.

    first, second : what the columns hold
    names : of the columns, for messages
    example : how one would write the table
    also : a further check of the finished table
    word : a word that may stand instead of a table ("typical"), or ""
    """

    first: Quantity
    second: Quantity
    names: tuple[str, str]
    example: str
    also: Callable[[Table], Iterable[Finding]] | None = None
    word: str = ""

    def read(self, value: object) -> Table | str:
        """The table in SI. Raises ValueError, or the findings of every row."""
        if self.word and isinstance(value, str) and value.strip() == self.word:
            return self.word
        if not isinstance(value, list | tuple):
            raise ValueError(f"{kind_of(value)} stands here; write {self._wanted()}")
        findings: list[Finding] = []
        rows = [self._row(index, row, findings) for index, row in enumerate(value)]
        if findings:
            refuse(findings)
        table = tuple(row for row in rows if row is not None)
        if len(table) < 2:
            raise ValueError(f"a table needs two pairs or more; write {self._wanted()}")
        refused = [*self._not_rising(table, value), *(self.also(table) if self.also else ())]
        if refused:
            refuse(refused)
        return table

    def _wanted(self) -> str:
        other = f"{self.word}, or " if self.word else ""
        return f"{other}a list of pairs [{', '.join(self.names)}], such as {self.example}"

    def _row(self, index: int, row: object, findings: list[Finding]) -> tuple[float, float] | None:
        if not isinstance(row, list | tuple) or len(row) != 2:
            findings.append(((index,), f"not a pair; write [{', '.join(self.names)}]"))
            return None
        numbers: list[float] = []
        for column, quantity in enumerate((self.first, self.second)):
            try:
                numbers.append(quantity.read(row[column]))
            except ValueError as error:
                findings.append(((index, column), f"{self.names[column]}: {error}"))
        return (numbers[0], numbers[1]) if len(numbers) == 2 else None

    def _not_rising(self, table: Table, written: list[Any] | tuple[Any, ...]) -> list[Finding]:
        name = self.names[0]
        return [
            (
                (index, 0),
                f"{name} '{shown(written[index][0])}' is not above '{shown(written[index - 1][0])}'"
                f" in the row before; sort the rows by rising {name}, each one once",
            )
            for index in range(1, len(table))
            if table[index][0] <= table[index - 1][0]
        ]

    def __get_pydantic_core_schema__(
        self, source: Any, handler: GetCoreSchemaHandler
    ) -> CoreSchema:
        return core_schema.no_info_plain_validator_function(self.read)

    def __get_pydantic_json_schema__(
        self, schema: CoreSchema, handler: GetJsonSchemaHandler
    ) -> dict[str, Any]:
        pair = {
            "type": "array",
            "items": {"anyOf": NUMBER_OR_TEXT},
            "minItems": 2,
            "maxItems": 2,
        }
        table: dict[str, Any] = {"type": "array", "items": pair, "minItems": 2}
        return {"anyOf": [{"const": self.word}, table]} if self.word else table
