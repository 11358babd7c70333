"""From the text of a delimited file to named columns of texts with their line numbers."""

from __future__ import annotations

from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass
from itertools import chain, pairwise

import numpy as np
from numpy.typing import NDArray

from hydroyield.record.delimiter import NAMES, find_delimiter, split_line, split_lines
from hydroyield.record.faults import Source, in_lines
from hydroyield.record.numbers import is_number
from hydroyield.record.shapes import looks_like_date, looks_like_split_date
from hydroyield.record.units import known_unit

_CHUNK = 50_000  # lines split at a time, so that the rows need not all lie in memory
_LONGEST_LINE = 100_000  # characters
_NO_CONTENT = ' \t;,|"'
_DATE_NAMES = frozenset(
    {
        "date", "datum", "day", "datetime", "timestamp", "time", "zeit", "zeitpunkt",
        "zeitstempel", "tag", "fecha", "data", "dato", "jour", "dia", "dag",
    }
)  # fmt: skip


@dataclass(frozen=True)
class Table:
    """The columns of a file, as text.

    names : of the columns, as printed ("column 2" where there is none), length k
    columns : the fields, k lists of length n
    lines : line numbers, shape (n,)
    units : unit that the row below the header gives for each column, None where it gives none
    delimiter : in words
    header_line : line of the names, None without
    """

    names: tuple[str, ...]
    columns: tuple[list[str], ...]
    lines: NDArray[np.int64]
    units: tuple[str | None, ...]
    delimiter: str
    header_line: int | None


def read_table(text: str, source: Source) -> Table:
    """Split a text into columns. Raises RecordError when it is no table with rows."""
    content = _Content.of(text, source)
    delimiter = find_delimiter(content.lines)
    if delimiter is None:
        raise source.error(
            "no two columns found; put a comma, a semicolon or a tab between date and value",
            int(content.numbers[0]),
        )
    header = _header(content, delimiter, source)
    data, names = content.from_row(header.rows), header.names
    if not data.lines:
        raise source.error("there are column names but no rows with dates and values", header.line)
    columns, names = _columns(data, names, delimiter, header.line, source)
    filled = tuple(name or f"column {k}" for k, name in enumerate(names, 1))
    units = tuple((*header.units, *(None for _ in filled))[: len(filled)])
    return Table(filled, columns, data.numbers, units, NAMES[delimiter], header.line)


@dataclass(frozen=True)
class _Content:
    """Lines that are neither empty nor comments, with their numbers, and all lines."""

    lines: list[str]
    numbers: NDArray[np.int64]
    all_lines: list[str]

    @classmethod
    def of(cls, text: str, source: Source) -> _Content:
        all_lines = text.split("\n")
        start = 1 if all_lines[0][:4].lower() == "sep=" else 0  # a note to spreadsheets
        numbers = [
            number
            for number, line in enumerate(all_lines[start:], start + 1)
            if line[:1].isalnum() or _has_content(line)
        ]
        if not numbers:
            raise source.error("the file has no rows; give a record with dates and values")
        lines = [all_lines[number - 1] for number in numbers]
        _refuse_endless(lines, numbers, source)
        return cls(lines, np.array(numbers, dtype=np.int64), all_lines)

    def from_row(self, start: int) -> _Content:
        return _Content(self.lines[start:], self.numbers[start:], self.all_lines)


def _refuse_endless(lines: list[str], numbers: list[int], source: Source) -> None:
    lengths = list(map(len, lines))
    longest = lengths.index(max(lengths))
    if lengths[longest] > _LONGEST_LINE:
        raise source.error(
            f"this line is {lengths[longest]} characters long; give one row to each line",
            numbers[longest],
        )


def _has_content(line: str) -> bool:
    return line.lstrip(_NO_CONTENT)[:1] not in ("", "#")


@dataclass(frozen=True)
class _Header:
    """names (empty without), the line they stand in, units by column, rows of the content used."""

    names: tuple[str, ...]
    line: int | None
    units: tuple[str | None, ...]
    rows: int


def _header(content: _Content, delimiter: str, source: Source) -> _Header:
    first = split_line(content.lines[0], delimiter)
    number = int(content.numbers[0])
    if any(map(looks_like_date, first)):
        return _commented_header(content, delimiter, len(first))
    if looks_like_split_date(first):
        return _Header((), None, (), 0)
    _refuse_broken_row(first, number, source)
    names = tuple(name.strip() for name in _named(content.lines[0], delimiter))
    below = content.all_lines[number] if number < len(content.all_lines) else ""
    units = _unit_row(below, delimiter, len(names))
    if not units:
        return _Header(names, number, (), 1)
    return _Header(names, number, units, 1 if below.lstrip().startswith("#") else 2)


def _named(line: str, delimiter: str) -> list[str]:
    """The names in a line; between white space "flow (m3/s)" is one name."""
    if delimiter == " ":
        line = line.replace(" (", "_(").replace(" [", "_[")
    return split_line(line, delimiter)


def _refuse_broken_row(fields: list[str], line: int, source: Source) -> None:
    """A row with a number is no header, except the bare numbering of columns without names."""
    numbering = fields == ["", *(str(k) for k in range(len(fields) - 1))]
    if any(is_number(field) for field in fields) and not numbering:
        raise source.error(
            "the first row has a number but no date that is read here; write the date as "
            "2020-01-31 or 31.01.2020, or give the columns names",
            line,
        )


def _commented_header(content: _Content, delimiter: str, width: int) -> _Header:
    """Names in the comment just above the first row, where one of them is a name for dates."""
    line = int(content.numbers[0]) - 1
    comment = content.all_lines[line - 1].lstrip() if line else ""
    names = tuple(name.strip() for name in _named(comment.lstrip("# "), delimiter))
    if comment.startswith("#") and len(names) == width and any(map(is_date_name, names)):
        return _Header(names, line, (), 0)
    return _Header((), None, (), 0)


def is_date_name(name: str) -> bool:
    """Whether a column has a usual name for dates."""
    words = "".join(c if c.isalpha() else " " for c in name.casefold()).split()
    return any(word in _DATE_NAMES for word in words)


def _unit_row(line: str, delimiter: str, width: int) -> tuple[str | None, ...]:
    """Units in the row below the names; empty when that row is no row of units."""
    fields = split_line(line, delimiter)
    if delimiter == " " and len(fields) == width - 1:
        fields.insert(0, "")
    units = tuple(known_unit(field) for field in fields)
    is_data = any(looks_like_date(field) or is_number(field) for field in fields)
    return units if len(fields) == width and any(units) and not is_data else ()


def _columns(
    data: _Content, names: tuple[str, ...], delimiter: str, line: int | None, source: Source
) -> tuple[tuple[list[str], ...], tuple[str, ...]]:
    widths, columns = _split(data, delimiter, source)
    usual = Counter(widths).most_common(1)[0][0]
    while len(names) > usual and not names[-1]:
        names = names[:-1]
    if delimiter == " " and len(names) == usual - 1:
        names = (*names[:1], "time", *names[1:])  # "datetime flow" above "2020-01-31 00:15 4.2"
    width = len(names) or usual
    if len(set(widths)) == 1 and width == usual:
        return columns, names or ("",) * width
    rows = _trimmed(data, delimiter, width)
    _refuse_ragged(rows, data.numbers, width, delimiter, line if names else None, source)
    return tuple(map(list, zip(*rows, strict=True))), names or ("",) * width


def _split(
    data: _Content, delimiter: str, source: Source
) -> tuple[list[int], tuple[list[str], ...]]:
    """The number of fields of each row, and the columns where all rows have the same number."""
    widths: list[int] = []
    columns: list[list[str]] = []
    for start in range(0, len(data.lines), _CHUNK):
        chunk = data.lines[start : start + _CHUNK]
        found, fields = _fields(chunk, delimiter)
        if len(found) != len(chunk):
            raise _open_quote(data, source)
        widths.extend(found)
        if set(found) == {widths[0]}:
            columns = columns or [[] for _ in range(widths[0])]
            for j, column in enumerate(columns):
                column.extend(fields[j :: widths[0]])
    return widths, tuple(columns)


def _fields(lines: Sequence[str], delimiter: str) -> tuple[list[int], list[str]]:
    """The number of fields of each line, and all fields in one list."""
    text = "\n".join(lines)
    if '"' in text:
        rows = list(split_lines(lines, delimiter))
        return list(map(len, rows)), list(chain.from_iterable(rows))
    if delimiter == " ":
        return list(map(len, map(str.split, lines))), text.split()
    widths = [line.count(delimiter) + 1 for line in lines]
    return widths, text.replace("\n", delimiter).split(delimiter)


def _open_quote(data: _Content, source: Source) -> Exception:
    odd = [n for n, line in zip(data.numbers, data.lines, strict=True) if line.count('"') % 2]
    line = int(odd[0]) if odd else int(data.numbers[0])
    return source.error('a quotation mark (") is opened and not closed; add or remove one', line)


def _trimmed(data: _Content, delimiter: str, width: int) -> list[list[str]]:
    """The rows without empty fields beyond the width."""
    rows = list(split_lines(data.lines, delimiter))
    for row in rows:
        while len(row) > width and not row[-1].strip():
            row.pop()
    return rows


def _refuse_ragged(
    rows: Sequence[list[str]],
    numbers: NDArray[np.int64],
    width: int,
    delimiter: str,
    header_line: int | None,
    source: Source,
) -> None:
    bad = [k for k, row in enumerate(rows) if len(row) != width]
    if not bad:
        return
    if delimiter == "," and all(len(rows[k]) > width and _split_number(rows[k]) for k in bad):
        raise source.error(
            "a comma stands between the columns and also inside the numbers; export the record "
            "with semicolons between the columns, or with a decimal point",
            int(numbers[bad[0]]),
        )
    if len(bad) == len(rows) and header_line is not None:
        raise source.error(
            f"this line names {_count(width)}, but the rows below have {len(rows[0])}; name "
            "every column, and start lines of title with #",
            header_line,
        )
    found = " and ".join(str(n) for n in sorted({len(rows[k]) for k in bad})[:3])
    raise source.error(
        f"{_count(width)} expected, but {in_lines(numbers[bad])} "
        f"{'has' if len(bad) == 1 else 'have'} {found}; complete or remove what is cut or stray",
        int(numbers[bad[0]]),
    )


def _split_number(row: list[str]) -> bool:
    """Whether two neighbouring fields may be the halves of one number."""
    return any(a.lstrip("+-").isdigit() and b[:1].isdigit() for a, b in pairwise(row))


def _count(width: int) -> str:
    return "1 column" if width == 1 else f"{width} columns"
