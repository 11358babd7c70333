"""From rows as they stand in a file to one value per time, in order of time."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from hydroyield.errors import RecordError
from hydroyield.record.faults import SHOWN, Source, first_lines
from hydroyield.record.result import Dropped
from hydroyield.record.rows import DUPLICATE, NEGATIVE, REASONS, REPEATED_HOUR, USED, Rows


@dataclass(frozen=True)
class Cleaned:
    """Rows in order of time, each time once; the rest is counted.

    rows : the rows kept, those without a value among them
    rows_read : number of rows before
    dropped : rows that give no value, by reason
    first_line_out_of_order : line of the first row that is earlier than the one above, or None
    """

    rows: Rows
    rows_read: int
    dropped: tuple[Dropped, ...]
    first_line_out_of_order: int | None


def clean(rows: Rows, source: Source) -> Cleaned:
    """Take negatives as missing, sort by time and keep one row of each time.

    Raises RecordError when one time has different values, or when no value is left.
    """
    rows = _negatives_as_missing(rows)
    # of one time, a row with a value comes first; else the order of the file stays
    if not _has_repeats(rows):
        _refuse_no_value(rows.reasons, source)
        return Cleaned(rows, rows.lines.size, _dropped(rows.reasons, rows.lines), None)
    disorder = _first_line_out_of_order(rows)
    ordered = rows.select(np.lexsort((rows.reasons != USED, rows.times)))
    surplus = np.zeros(len(ordered.lines), dtype=np.bool_)
    surplus[1:] = np.diff(ordered.times) == 0
    _refuse_conflicts(ordered, surplus, source)
    reasons = ordered.reasons.copy()
    reasons[surplus & (reasons != NEGATIVE) & (reasons != REPEATED_HOUR)] = DUPLICATE
    _refuse_no_value(reasons, source)
    return Cleaned(
        ordered.select(~surplus), len(reasons), _dropped(reasons, ordered.lines), disorder
    )


def _negatives_as_missing(rows: Rows) -> Rows:
    negative = rows.values < 0
    if not negative.any():
        return rows
    return replace(
        rows,
        values=np.where(negative, np.nan, rows.values),
        reasons=np.where(negative, np.uint8(NEGATIVE), rows.reasons),
    )


def _first_line_out_of_order(rows: Rows) -> int | None:
    once = rows.reasons != REPEATED_HOUR
    back = np.flatnonzero(np.diff(rows.times[once]) < 0)
    return int(rows.lines[once][back[0] + 1]) if back.size else None


def _has_repeats(rows: Rows) -> bool:
    return bool((rows.times[1:] <= rows.times[:-1]).any())


def _refuse_conflicts(rows: Rows, surplus: NDArray[np.bool_], source: Source) -> None:
    """Rows of one time must agree; those without a value agree with any."""
    first = np.maximum.accumulate(np.where(surplus, 0, np.arange(len(surplus))))
    differ = surplus & (rows.reasons == USED) & (rows.values != rows.values[first])
    found = np.flatnonzero(differ)
    if not found.size:
        return
    faults = [_conflict(rows, int(first[k]), int(k), source) for k in found[:SHOWN]]
    message, line, clock = zip(*faults, strict=True)
    rest = len(found) - len(faults)
    hint = (
        "; where clocks were set back in autumn, export the record without summer time"
        if any(clock)
        else ""
    )
    raise RecordError(
        [
            source.fault(
                ", ".join(message)
                + (f" and {rest} more such pairs" if rest else "")
                + f"; keep the one that is right{hint}",
                min(line),
            )
        ]
    )


def _conflict(rows: Rows, one: int, other: int, source: Source) -> tuple[str, int, bool]:
    lines = sorted((int(rows.lines[one]), int(rows.lines[other])))
    when = (rows.dates[other] + rows.seconds[other].astype("timedelta64[s]")).item()
    clock = bool(rows.seconds[other])
    stamp = f"{when:%Y-%m-%d %H:%M}" if clock else f"{when:%Y-%m-%d}"
    values = f"{rows.values[one]:.10g} and {rows.values[other]:.10g}"
    return f"{stamp} has the values {values} (lines {lines[0]} and {lines[1]})", lines[1], clock


def _refuse_no_value(reasons: NDArray[np.uint8], source: Source) -> None:
    if (reasons == USED).any():
        return
    kinds = [f"{np.count_nonzero(reasons == code)} {word}" for code, word in REASONS.items()
             if (reasons == code).any()]  # fmt: skip
    raise source.error(
        f"no row has a value ({', '.join(kinds)}); look at the column of values and at "
        "`missing:` under discharge.record"
    )


def _dropped(reasons: NDArray[np.uint8], lines: NDArray[np.int64]) -> tuple[Dropped, ...]:
    return tuple(
        Dropped(word, int(np.count_nonzero(reasons == code)), first_lines(lines[reasons == code]))
        for code, word in REASONS.items()
        if (reasons == code).any()
    )
