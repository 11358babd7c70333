"""From the texts of a column to numbers, with one decimal mark for the whole column.

The same text means the same number wherever it stands, so each distinct text is read once.
"""

from __future__ import annotations

import math
import re
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from hydroyield.checks import Check
from hydroyield.record.faults import SHOWN, Source, quoted_texts, shorten
from hydroyield.record.rows import BLANK, MARKED, USED

USUAL_MARKS = frozenset({"na", "n/a", "nan", "null", "-", "--", "---"})
_PATTERN = (
    r"[+-]?(?:\d+(?:{mark}\d*)?|{mark}\d+|[1-9]\d{{0,2}}(?:{group}\d{{3}})+(?:{mark}\d*)?)"
    r"(?:[eE][+-]?\d+)?"
)
_POINT = re.compile(_PATTERN.format(mark=r"\.", group=","), re.ASCII)
_COMMA = re.compile(_PATTERN.format(mark=",", group=r"\."), re.ASCII)
_CONVENTIONS = {"point": _POINT, "comma": _COMMA}
_GROUP_SPACE = re.compile(r"(?<=\d)[ \u00a0\u2009\u202f'’](?=\d{3}(?!\d))", re.ASCII)


@dataclass(frozen=True)
class Numbers:
    """A column read as numbers.

    values : as printed, nan where there is none, shape (n,)
    reasons : USED, BLANK or MARKED, shape (n,)
    decimal_mark : "point" or "comma"
    checks : findings on how the numbers are written
    """

    values: NDArray[np.float64]
    reasons: NDArray[np.uint8]
    decimal_mark: str
    checks: tuple[Check, ...]


def looks_like_number(text: str) -> bool:
    """Whether a text is a number under either decimal mark, a usual mark for none, or blank."""
    text = _tidy(text)
    return not text or text.casefold() in USUAL_MARKS or _is_number(text)


def is_number(text: str) -> bool:
    """Whether a text is a number under either decimal mark."""
    return _is_number(_tidy(text))


def number_of_mark(text: str) -> float | None:
    """The number that a mark for "no value" prints, or None for a word."""
    return _number(_tidy(text), "point")


def read_numbers(
    texts: Sequence[str],
    lines: NDArray[np.int64],
    missing: tuple[str, ...],
    decimal_mark: str | None,
    source: Source,
) -> Numbers:
    """Read a column of values.

    texts : the fields, shape (n,); lines : their line numbers, shape (n,)
    missing : marks for "no value" beside the usual ones
    decimal_mark : "point", "comma", or None to find it in the column

    Raises RecordError for text where a number belongs, and where the decimal mark is in doubt.
    """
    tidy = {text: _tidy(text) for text in dict.fromkeys(texts)}
    marks = USUAL_MARKS | {mark.strip().casefold() for mark in missing}
    absent = {
        raw: BLANK if not text else MARKED for raw, text in tidy.items() if _absent(text, marks)
    }
    printed = {raw: text for raw, text in tidy.items() if raw not in absent}
    column = _Column(texts, lines, printed, source)
    mark = decimal_mark or _decimal_mark(column)
    read = {raw: _number(text, mark) for raw, text in printed.items()}
    _refuse_text(column, read, mark)
    sentinels = {_number(_tidy(text), way) for text in missing for way in {mark, "point"}} - {None}
    absent.update({raw: MARKED for raw, value in read.items() if value in sentinels})
    read.update(dict.fromkeys(absent, math.nan))
    reasons = {raw: absent.get(raw, USED) for raw in tidy}
    return Numbers(
        np.fromiter(map(read.__getitem__, texts), np.float64, len(texts)),
        np.fromiter(map(reasons.__getitem__, texts), np.uint8, len(texts)),
        mark,
        _thousands_check(column, mark),
    )


@dataclass(frozen=True)
class _Column:
    """texts and lines of a column, {distinct text: tidy text} of those that are not missing."""

    texts: Sequence[str]
    lines: NDArray[np.int64]
    printed: dict[str, str]
    source: Source

    def line_of(self, raw: str) -> int:
        return int(self.lines[self.texts.index(raw)])

    def example(self, raw: str) -> str:
        return f"'{self.printed[raw]}' in line {self.line_of(raw)}"


def _tidy(text: str) -> str:
    text = text.strip()
    if text.isascii() and " " not in text and "'" not in text:
        return text
    return _GROUP_SPACE.sub("", text.replace("\u2212", "-"))


def _absent(text: str, marks: frozenset[str] | set[str]) -> bool:
    return not text or text.casefold() in marks


def _is_number(text: str) -> bool:
    return bool(_POINT.fullmatch(text) or _COMMA.fullmatch(text))


def _number(text: str, mark: str) -> float | None:
    """The finite number that a text prints, or None."""
    if not _CONVENTIONS[mark].fullmatch(text):
        return None
    if mark == "comma":
        text = text.replace(".", "").replace(",", ".")
    value = float(text.replace(",", ""))
    return value + 0.0 if math.isfinite(value) else None


def _decimal_mark(column: _Column) -> str:
    if not any("," in text for text in column.printed):
        return "point"
    numerals = {raw: text for raw, text in column.printed.items() if _is_number(text)}
    if not any("," in text for text in numerals.values()):
        return "point"
    not_point = [raw for raw, text in numerals.items() if not _POINT.fullmatch(text)]
    not_comma = [raw for raw, text in numerals.items() if not _COMMA.fullmatch(text)]
    if not_point and not_comma:
        raise _two_marks(column, not_point[0], not_comma[0])
    if not_point:
        _refuse_point_in_doubt(column, numerals, not_point[0])
        return "comma"
    if not_comma:
        return "point"
    raise _comma_in_doubt(column, next(raw for raw, text in numerals.items() if "," in text))


def _two_marks(column: _Column, with_comma: str, with_point: str) -> Exception:
    message = (
        f"the numbers have two decimal marks: {column.example(with_comma)} and "
        f"{column.example(with_point)}; write all of them with the same mark"
    )
    return column.source.error(message, column.line_of(with_comma))


def _comma_in_doubt(column: _Column, raw: str) -> Exception:
    text = column.printed[raw]
    message = (
        f"is {text} the number {text.replace(',', '')} (comma between thousands) or "
        f"{text.replace(',', '.')} (decimal comma)? The file does not tell; add "
        "`decimal_mark: point` or `decimal_mark: comma` under discharge.record"
    )
    return column.source.error(message, column.line_of(raw), "decimal_mark")


def _refuse_point_in_doubt(column: _Column, numerals: dict[str, str], with_comma: str) -> None:
    """Where commas are decimal, a lone 2.149 counts as 2149 only if 1.234,5 shows the habit."""
    lone = [raw for raw, text in numerals.items() if "." in text and "," not in text]
    if not lone or any("." in text and "," in text for text in numerals.values()):
        return
    message = (
        f"the numbers have commas and points: {column.example(with_comma)} and "
        f"{column.example(lone[0])}; write all of them with the same mark, or, where the point "
        "stands between thousands, add `decimal_mark: comma` under discharge.record"
    )
    raise column.source.error(message, column.line_of(lone[0]), "decimal_mark")


def _refuse_text(column: _Column, read: dict[str, float | None], mark: str) -> None:
    bad = {raw for raw, value in read.items() if value is None}
    if not bad:
        return
    found = [(t, n) for t, n in zip(column.texts, column.lines, strict=True) if t in bad]
    texts, lines = [column.printed[text] for text, _ in found], [int(line) for _, line in found]
    marks = ", ".join(_yaml_item(text) for text in list(dict.fromkeys(texts))[:SHOWN])
    verb = "is not a number" if len(texts) == 1 else "are not numbers"
    pronoun = "it stands" if len(texts) == 1 else "they stand"
    message = (
        f"{quoted_texts(texts, lines)} {verb} (decimal {mark}); correct the file, or, where "
        f"{pronoun} for no value, add `missing: [{marks}]` under discharge.record"
    )
    raise column.source.error(message, lines[0], "missing")


def _yaml_item(text: str) -> str:
    text = shorten(text)
    return text if re.fullmatch(r"[A-Za-z][\w ]*", text) else "'" + text.replace("'", "''") + "'"


def _thousands_check(column: _Column, mark: str) -> tuple[Check, ...]:
    group = "," if mark == "point" else "."
    grouped = [raw for raw, text in column.printed.items() if group in text]
    if not grouped:
        return ()
    value = _number(column.printed[grouped[0]], mark)
    message = (
        f"{column.example(grouped[0])} and others like it were read with marks between "
        f"thousands, as {value:.10g}; look whether that is meant"
    )
    return (Check("record_thousands_marks", "warn", float(len(grouped)), 0.0, message),)
