"""Calendar months in a site file: numbers, names, or a range such as apr-sep."""

from __future__ import annotations

import re
from collections.abc import Mapping
from typing import Annotated, Any

from pydantic import AfterValidator, BeforeValidator, WithJsonSchema

from hydroyield.site.faults import Finding, refuse, shown
from hydroyield.site.fields import NUMBER_OR_TEXT, Quantity, Whole, kind_of

_SHORT = ("jan", "feb", "mar", "apr", "may", "jun", "jul", "aug", "sep", "oct", "nov", "dec")
_NUMBER = {name: number for number, name in enumerate(_SHORT, 1)}
_RANGE = re.compile(r"([a-z]{3})[a-z]*\s*-\s*([a-z]{3})[a-z]*")
_MONTH = Whole(1, 12)
MONTHS_PER_YEAR = 12


def months_between(first: int, last: int) -> list[int]:
    """Calendar months from one to another, over the turn of the year where need be."""
    return [(first - 1 + step) % 12 + 1 for step in range((last - first) % 12 + 1)]


def read_months(value: Any) -> tuple[int, ...]:
    """Months of a list, of one name, or of a range. Raises ValueError that says what to write."""
    if isinstance(value, str):
        alone = value.strip()
        return (_MONTH.read(alone),) if alone.isdigit() else tuple(_named(alone))
    if not isinstance(value, list | tuple):
        raise ValueError(f"{kind_of(value)} stands where months belong; write [3, 4, 5] or mar-may")
    if not value:
        raise ValueError("the list is empty; name months, such as [3, 4, 5], or take the key out")
    months, findings = [], []
    for index, entry in enumerate(value):
        try:
            named = isinstance(entry, str) and entry.strip()[:1].isalpha()
            months.extend(_named(entry) if named else [_MONTH.read(entry)])
        except ValueError as error:
            findings.append(((index,), str(error)))
    if findings:
        refuse(findings)
    return tuple(months)


def _named(text: str) -> list[int]:
    """Months of "apr", "april" or "nov-mar"."""
    word = text.strip().lower()
    ends = _RANGE.fullmatch(word)
    if ends and ends[1] in _NUMBER and ends[2] in _NUMBER:
        return months_between(_NUMBER[ends[1]], _NUMBER[ends[2]])
    if word.isalpha() and word[:3] in _NUMBER:
        return [_NUMBER[word[:3]]]
    raise ValueError(f"'{shown(text)}' is no month; write 1 to 12, a name such as apr, or apr-sep")


def _different(months: tuple[int, ...]) -> tuple[int, ...]:
    twice = sorted({month for month in months if months.count(month) > 1})
    if twice:
        raise ValueError(f"month {twice[0]} stands twice; name each month once")
    return months


Months = Annotated[
    tuple[int, ...],
    AfterValidator(_different),
    BeforeValidator(read_months),
    WithJsonSchema(
        {
            "anyOf": [
                {"type": "string"},
                {
                    "type": "array",
                    "items": {
                        "anyOf": [
                            {"type": "integer", "minimum": 1, "maximum": 12},
                            {"type": "string"},
                        ]
                    },
                    "minItems": 1,
                },
            ]
        }
    ),
]


def read_twelve(value: Any, quantity: Quantity) -> tuple[float, ...]:
    """Twelve values, January first: a list, or ranges of months and their values.

    Raises ValueError that says what to write, or the findings of every value.
    """
    if isinstance(value, Mapping):
        return _by_range(value, quantity)
    if not isinstance(value, list | tuple):
        raise ValueError(
            f"{kind_of(value)} stands where values by month belong; write 12, January first, or "
            "ranges such as {apr-sep: 0.8, oct-mar: 0.5}"
        )
    values: list[float] = []
    findings: list[Finding] = []
    for index, entry in enumerate(value):
        try:
            values.append(quantity.read(entry))
        except ValueError as error:
            findings.append(((index,), str(error)))
    if findings:
        refuse(findings)
    if len(values) != MONTHS_PER_YEAR:
        raise ValueError(f"has {len(values)} values; write 12, one for each month, January first")
    return tuple(values)


def _by_range(ranges: Mapping[str, Any], quantity: Quantity) -> tuple[float, ...]:
    found: dict[int, float] = {}
    findings: list[Finding] = []
    for name, entry in ranges.items():
        try:
            months, number = _named(str(name)), quantity.read(entry)
        except ValueError as error:
            findings.append(((name,), str(error)))
            continue
        twice = [month for month in months if month in found]
        if twice:
            findings.append(((name,), f"{_SHORT[twice[0] - 1]} has a value already; name it once"))
        found |= dict.fromkeys(months, number)
    lacking = [name for month, name in enumerate(_SHORT, 1) if month not in found]
    if lacking and not findings:
        findings.append(((), f"no value for {', '.join(lacking)}; write one for every month"))
    if findings:
        refuse(findings)
    return tuple(found[month] for month in range(1, MONTHS_PER_YEAR + 1))


TWELVE_SCHEMA: dict[str, Any] = {
    "anyOf": [
        {
            "type": "array",
            "items": {"anyOf": NUMBER_OR_TEXT},
            "minItems": MONTHS_PER_YEAR,
            "maxItems": MONTHS_PER_YEAR,
        },
        {"type": "object", "additionalProperties": {"anyOf": NUMBER_OR_TEXT}},
    ]
}
