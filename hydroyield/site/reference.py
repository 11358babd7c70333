"""The reference page of the site file, made from its models.

    python -m hydroyield.site.reference

prints it. The page lies as REFERENCE.md among the starting site files.
"""

from __future__ import annotations

import re
from collections.abc import Iterable, Iterator
from dataclasses import dataclass
from typing import Any, get_args, get_origin

import numpy as np
from pydantic.fields import FieldInfo

from hydroyield.powerhouse import machine_types
from hydroyield.quantities import (
    ANGLE,
    CATCHMENT_AREA,
    DISCHARGE,
    LENGTH,
    PERCENT,
    POWER,
    SHARE,
    TEMPERATURE,
    Dimension,
)
from hydroyield.site.blocks import Block
from hydroyield.site.faults import flow
from hydroyield.site.models import SiteFile

_UNIT = re.compile(r" \[([^\]]+)\]")
_IF_LEFT_OUT = re.compile(
    r"(?P<what>.*)(?:; |\. )(?P<then>(?:(?!; |\. ).)+?),? if left out\.", re.DOTALL
)
_CURVE_SHARES = (0.2, 0.4, 0.6, 0.8, 1.0)  # of full discharge, shown of the typical curves

_INTRODUCTION = """\
# The site file

A site file is YAML: keys, a colon and a value, with blocks indented below their key. It describes
one site. `hydroyield check site.yaml` says how a file is understood, and names every fault with its
line. This page lists all keys that are read; any other key is refused by name.

- **The order of keys is free.** A key that may be left out is not needed; the column "if left out"
  says what is filled in then. What is not filled in is left out of the calculation, and named.
- **A quantity** is a number with a unit, such as `350 l/s`, or a number alone, which is then in the
  unit that the tables give. The decimal mark is a point.
- **A list** stands in brackets, `[3, 4, 5]`, or one entry to a line, each starting with `- `.
- **`source:`** may stand in every block: free text that says where its values come from, such as
  `source: survey of April 2024`. A block without it is shown as an assumption.
- Anchors, aliases, merge keys and tags of YAML are not read, nor are keys that stand twice.

The starting files in this folder show every key in its place.
"""
_TYPES = """\
## Types of turbine

What is filled in for each type where `minimum_discharge` and `efficiency` are left out, and the
heads it is usual for. The efficiencies are those of the turbine alone at shares of full discharge,
read from the typical curve of machines above about 100 kW; smaller ones reach 3 to 8 points less.
Replace them by the maker's values. The source of each row stands in
`hydroyield/powerhouse/machine_types.csv`. Type `other` has no typical values.
"""


@dataclass(frozen=True)
class _Section:
    """A block of keys with its place in the file.

    path : of keys from the top, "head.tailwater"; "" for the file itself
    models : the block; several where rules of different form may stand in a list
    in_list : whether it is an entry of a list
    """

    path: str
    models: tuple[type[Block], ...]
    in_list: bool


def reference_text() -> str:
    """The reference page, as Markdown."""
    parts = [_INTRODUCTION, _units()]
    for section in _sections("", SiteFile):
        parts += _section(section)
    return "\n".join([*parts, _TYPES, _types()])


def _sections(path: str, model: type[Block], in_list: bool = False) -> Iterator[_Section]:
    """A block and all blocks in it, in the order of the file."""
    yield _Section(path, (model,), in_list)
    for key, field in model.model_fields.items():
        inner, below = _blocks_in(field.annotation), f"{path}.{key}".lstrip(".")
        listed = get_origin(field.annotation) is tuple
        if len(inner) == 1:
            yield from _sections(below, inner[0], listed)
        elif inner:
            yield _Section(below, tuple(inner), listed)


def _blocks_in(annotation: Any) -> list[type[Block]]:
    """The blocks that an annotation names: one, several alternatives, or none."""
    if isinstance(annotation, type) and issubclass(annotation, Block):
        return [annotation]
    return [block for part in get_args(annotation) for block in _blocks_in(part)]


# --- one section ----------------------------------------------------------------------------------


def _section(section: _Section) -> Iterator[str]:
    yield f"## {section.path or 'The whole file'}\n"
    if len(section.models) == 1:
        entry = " A list; each entry is one such block." if section.in_list else ""
        yield f"{_summary(section.models[0])}{entry}\n"
        yield from _block(section.path, section.models[0])
        return
    yield "A list; each entry is one of these blocks, told apart by `rule`.\n"
    for model in section.models:
        yield f"### `rule: {model.example['rule']}`\n\n{_summary(model)}\n"
        yield from _block(section.path, model)


def _summary(model: type[Block]) -> str:
    return " ".join((model.__doc__ or "").split())


def _block(path: str, model: type[Block]) -> Iterator[str]:
    """What is said about one block: which keys are needed, the table, what is not read yet."""
    if model.at_least_one_of:
        yield f"At least one of {_listed(model.at_least_one_of, 'and')} is needed.\n"
    yield _table(
        ("key", "what", "unit", "if left out", "example"),
        [
            _row(path, model, key, field)
            for key, field in model.model_fields.items()
            if key not in ("source", "rule")
        ],
    )


def _row(path: str, model: type[Block], key: str, field: FieldInfo) -> tuple[str, ...]:
    what, then = _what_and_then(field)
    if _blocks_in(field.annotation):
        target = f"{path}.{key}".lstrip(".")
        what += f" See [{target}](#{target.replace('.', '')})."
    if key in model.exactly_one_of:
        others = [other for other in model.exactly_one_of if other != key]
        then = f"{_listed(others, 'or')} instead"
    example = flow(field.examples[0]) if field.examples else ""
    return f"`{key}`", what, ", ".join(units_of(field)), then, f"`{example}`"


def units_of(field: FieldInfo) -> list[str]:
    """The units that the text of a key gives in brackets, each once; none for a plain number."""
    found = dict.fromkeys(_UNIT.findall(field.description or ""))
    return [unit for unit in found if unit != "-"]


def _what_and_then(field: FieldInfo) -> tuple[str, str]:
    """What a key is, and what happens if it is left out."""
    text = field.description or ""
    what, then = text, "needed" if field.is_required() else ""
    if found := _IF_LEFT_OUT.fullmatch(text):
        what, then = found["what"] + ".", found["then"][0].lower() + found["then"][1:]
    return _UNIT.sub("", what), then


def _listed(keys: Iterable[str], word: str) -> str:
    *first, last = (f"`{key}`" for key in keys)
    return f"{', '.join(first)} {word} {last}"


# --- tables ---------------------------------------------------------------------------------------


def _table(head: tuple[str, ...], rows: Iterable[tuple[str, ...]]) -> str:
    lines = [head, ("---",) * len(head), *rows]
    return "".join("| " + " | ".join(cells) + " |\n" for cells in lines)


def _units() -> str:
    """The units that are read, by kind of quantity."""
    kinds: tuple[tuple[str, Dimension], ...] = (
        ("length, level, head", LENGTH),
        ("discharge", DISCHARGE),
        ("power", POWER),
        ("area", CATCHMENT_AREA),
        ("temperature", TEMPERATURE),
        ("share, efficiency", SHARE),
        ("percentage", PERCENT),
        ("angle", ANGLE),
    )
    rows = [
        (kind, ", ".join(d.units) or "none", d.bare_unit or "a fraction of 1", f"`{d.example}`")
        for kind, d in kinds
    ]
    head = ("quantity", "units read", "a number alone is in", "example")
    note = "\nA share is `20 %` or `0.2`. `m3/s`, `m³/s` and `m^3/s` are the same.\n"
    return "## Units\n\n" + _table(head, rows) + note


def _types() -> str:
    """What is typical of each turbine type."""
    shares = [f"at {100 * share:g} %" for share in _CURVE_SHARES]
    rows = []
    for kind in machine_types().values():
        points = np.array(kind.curve)
        curve = [
            f"{np.interp(share, points[:, 0], points[:, 1]):.3g}" if share >= points[0, 0] else ""
            for share in _CURVE_SHARES
        ]
        low, high = kind.head_range
        rows.append(
            (
                f"`{kind.name}`",
                f"{100 * kind.minimum_discharge:g} %",
                f"{low:g} to {high:g} m",
                *curve,
            )
        )
    return _table(("type", "minimum discharge", "usual heads", *shares), rows)


if __name__ == "__main__":
    print(reference_text(), end="")
