"""What the readers of agency formats share: rows of text, and choosing a series."""

from __future__ import annotations

import csv
import difflib
from collections import Counter
from collections.abc import Callable, Collection, Iterable, Iterator, Sequence

from hydroyield.errors import RecordError
from hydroyield.record.faults import Source, in_lines
from hydroyield.record.options import RecordOptions

_HEAD = 200_000  # characters, more than the head of any file has


def rows_of(
    lines: Sequence[str],
    start: int,
    delimiter: str,
    names: Sequence[str],
    source: Source,
    *,
    fewer: int = 0,
    skip: Callable[[Sequence[str]], bool] = lambda fields: False,
) -> tuple[list[int], list[list[str]]]:
    """Line numbers and columns of the delimited rows from `lines[start]` on.

    Blank lines, repeats of the header and rows that `skip` picks are left out. The header may
    name up to `fewer` columns more than all rows have, and a row above the last may have only
    its date. Raises RecordError where a row is cut.
    """
    numbers: list[int] = []
    rows: list[list[str]] = []
    for number, fields in _split(lines, start, delimiter, source):
        if any(map(str.strip, fields)) and not skip(fields) and not _is_header(fields, names):
            numbers.append(number)
            rows.append(fields)
    if not rows:
        return [], [[] for _ in names]
    usual = Counter(map(len, rows)).most_common(1)[0][0]
    width = usual if len(names) - fewer <= usual < len(names) else len(names)
    for k, fields in enumerate(rows):
        if len(fields) != width:
            rows[k] = _fitted(fields, width, k == len(rows) - 1)
    refuse_ragged(list(map(len, rows)), numbers, width, source)
    return numbers, [list(map(str.strip, column)) for column in zip(*rows, strict=True)]


def _split(
    lines: Sequence[str], start: int, delimiter: str, source: Source
) -> Iterator[tuple[int, list[str]]]:
    reader = csv.reader(lines[start:], delimiter=delimiter, skipinitialspace=True)
    try:
        for fields in reader:
            yield start + reader.line_num, fields
    except csv.Error:
        raise source.error(
            "this line is too long for a row; give one row to each line", start + reader.line_num
        ) from None


def _is_header(fields: Sequence[str], names: Sequence[str]) -> bool:
    if len(fields) < 2 or fields[0].strip() != names[0].strip():
        return False
    return all(a.strip() == b.strip() for a, b in zip(fields, names, strict=False))


def _fitted(fields: list[str], width: int, is_last: bool) -> list[str]:
    """A row without empty fields beyond the width; one that has only its date is a gap."""
    if len(fields) < width and not is_last and not any(map(str.strip, fields[1:])):
        return [*fields, *[""] * (width - len(fields))]
    while len(fields) > width and not fields[-1].strip():
        fields = fields[:-1]
    return fields


def refuse_ragged(
    widths: Sequence[int], numbers: Sequence[int], width: int, source: Source
) -> None:
    """Refuse rows with another number of columns, such as a last row that was cut."""
    bad = [number for number, found in zip(numbers, widths, strict=True) if found != width]
    if bad:
        found = sorted({w for w in widths if w != width})[:3]
        raise source.error(
            f"{width} columns expected, but {in_lines(bad)} {'has' if len(bad) == 1 else 'have'} "
            f"{' and '.join(map(str, found))}; complete or remove what is cut or stray",
            bad[0],
        )


def choose_series(
    names: Collection[str],
    best: Sequence[str],
    options: RecordOptions,
    source: Source,
    column: str = "",
) -> str:
    """The series to read: the one the user names, or the only one that is fit.

    names : every series of the file; best : those that are discharge
    column : name of the column that holds the values of all series, where it is one
    Raises RecordError when the name is not there, or when several are fit.
    """
    wanted = options.value_column
    if wanted is not None and wanted.strip() != column:
        if wanted.strip() in names:
            return wanted.strip()
        close = difflib.get_close_matches(wanted, names, n=1, cutoff=0.5)
        hint = f"; did you mean '{close[0]}'?" if close else ""
        raise source.error(
            f"there is no series '{wanted}'; the file has {listed(names)}{hint}",
            key="value_column",
        )
    if len(best) == 1:
        return best[0]
    raise source.error(
        f"the file holds several series of discharge; add `value_column:` with one of "
        f"{listed(best)} under discharge.record",
        key="value_column",
    )


def not_discharge(what: str, source: Source, line: int | None = None) -> RecordError:
    """The error for a file of another parameter."""
    return source.error(
        f"the file holds {what}, not the mean discharge; download the discharge of the gauge", line
    )


def listed(names: Iterable[str]) -> str:
    """ "'a', 'b'", at most ten of them."""
    names = list(names)
    rest = f" and {len(names) - 10} more" if len(names) > 10 else ""
    return ", ".join(f"'{name}'" for name in names[:10]) + rest


def head(text: str, count: int = 100) -> list[str]:
    """The first lines of a text."""
    return text[:_HEAD].split("\n", count)[:count]


def fields_of(line: str, delimiter: str) -> list[str]:
    """The fields of one line, without white space around them; none where it cannot be split."""
    try:
        return [field.strip() for field in next(csv.reader([line], delimiter=delimiter), [])]
    except csv.Error:
        return []
