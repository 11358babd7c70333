"""What all blocks of a site file have in common.

A block reports everything that is wrong with it at once: keys that are not read, keys that are
missing, keys that do not go together, and values that cannot be read. One slip gives one finding:
a misspelt key is not reported as missing, too.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from collections.abc import Set as AbstractSet
from typing import Any, ClassVar, Self

from pydantic import (
    BaseModel,
    ConfigDict,
    Field,
    GetJsonSchemaHandler,
    ModelWrapValidatorHandler,
    ValidationError,
    model_validator,
)
from pydantic_core import CoreSchema

from hydroyield.site.faults import Finding, closest, findings_of, flow, refuse, shown
from hydroyield.site.fields import Text


class Block(BaseModel):
    """A block of keys. Blocks are frozen and read no other keys than their own."""

    # built on first use, which spares an import half of its time
    model_config = ConfigDict(frozen=True, extra="forbid", defer_build=True)

    example: ClassVar[dict[str, Any]] = {}
    exactly_one_of: ClassVar[tuple[str, ...]] = ()  # keys that stand for each other
    at_least_one_of: ClassVar[tuple[str, ...]] = ()  # keys of which any will do

    source: Text | None = Field(
        default=None,
        description="Where the values of this block come from, in free text; the block is shown "
        "as an assumption if left out.",
        examples=["survey of April 2024"],
    )

    @classmethod
    def keys_fit_together(
        cls, named: AbstractSet[str], written: Mapping[str, Any]
    ) -> Iterable[Finding]:
        """Findings about keys that need or exclude each other.

        named : the keys that the user wrote or, with a slip of the pen, meant
        written : the block as it was written
        """
        return ()

    @classmethod
    def _not_exactly_one(cls, named: AbstractSet[str]) -> Iterable[Finding]:
        """The finding that not exactly one of the keys that stand for each other is given."""
        keys = cls.exactly_one_of
        given = [key for key in keys if key in named]
        # an unknown key stands for one of them
        if keys and not given and named <= cls.model_fields.keys():
            yield (), f"needs one of {', '.join(keys)}; write for example {flow(cls.example)}"
        for key in given[1:]:
            yield (key,), f"'{key}' and '{given[0]}' exclude each other; keep one of them"

    @classmethod
    def __get_pydantic_json_schema__(
        cls, schema: CoreSchema, handler: GetJsonSchemaHandler
    ) -> dict[str, Any]:
        """The schema of the block, with the keys of which one is needed."""
        block = handler.resolve_ref_schema(handler(schema))
        if cls.exactly_one_of:
            block["oneOf"] = [{"required": [key]} for key in cls.exactly_one_of]
        if cls.at_least_one_of:
            block["anyOf"] = [{"required": [key]} for key in cls.at_least_one_of]
        return block

    def values_fit_together(self) -> Iterable[Finding]:
        """Findings about values of the finished block that contradict each other."""
        return ()

    @model_validator(mode="wrap")
    @classmethod
    def _read(cls, written: Any, handler: ModelWrapValidatorHandler[Self]) -> Self:
        if isinstance(written, cls):
            return written
        if not isinstance(written, Mapping):
            refuse([((), f"{_what(written)}; write a block of keys, such as {flow(cls.example)}")])
        block, findings = None, list(cls._findings_of_keys(written))
        try:
            block = handler({key: written[key] for key in written if key in cls.model_fields})
        except ValidationError as error:
            findings += [
                finding for finding in findings_of(error) if not cls._is_missing(finding, written)
            ]
        if block is not None and not findings:
            findings += block.values_fit_together()
        if findings or block is None:
            refuse(findings)
        return block

    @classmethod
    def _is_missing(cls, finding: Finding, written: Mapping[str, Any]) -> bool:
        """Whether a finding is about a key of this block that is not there, reported already."""
        path, _ = finding
        return len(path) == 1 and path[0] in cls.model_fields and path[0] not in written

    @classmethod
    def _findings_of_keys(cls, written: Mapping[str, Any]) -> Iterable[Finding]:
        unknown = [str(key) for key in written if key not in cls.model_fields]
        open_keys = [key for key in cls.model_fields if key not in written]
        meant = {key: closest(key, open_keys) for key in unknown}
        for key in unknown:
            yield (key,), cls._not_read(key, meant.get(key))
        named = {*written, *(key for key in meant.values() if key)}
        for key, field in cls.model_fields.items():
            if field.is_required() and key not in named:
                yield (key,), f"is missing; write {key}: {flow((field.examples or ['...'])[0])}"
        yield from cls._not_exactly_one(named)
        yield from cls.keys_fit_together(named, written)

    @classmethod
    def _not_read(cls, key: str, meant: str | None) -> str:
        if meant:
            return f"unknown key '{shown(key)}'; did you mean '{meant}'?"
        known = [name for name in cls.model_fields if name != "source"]
        return f"unknown key '{shown(key)}'; the keys read here are {', '.join(known)} and source"


def _what(written: object) -> str:
    if written is None:
        return "has no value"
    if isinstance(written, list | tuple):
        return "a list stands where a block of keys belongs"
    return f"'{shown(written)}' stands where a block of keys belongs"
