"""What is worth a look in a record that was read, as checks."""

from __future__ import annotations

import datetime
import re

import numpy as np

from hydroyield.checks import Check, warn_unless
from hydroyield.record.cleaning import Cleaned
from hydroyield.record.daily import Daily
from hydroyield.record.faults import in_lines
from hydroyield.record.result import Dropped
from hydroyield.record.rows import USED, Rows

_SENTINEL = re.compile(r"9{3,}(\.9+)?")
_FAR_ABOVE = 3.0  # a sentinel stands at least so many times above every other value
_PARTIAL_LIMIT = 0.01  # share of days covered in part from which they are worth a look
_GAP_LIMIT = 0.1  # share of missing days from which the gaps are worth a look


def of_rows(cleaned: Cleaned, encoding: str, file_format: str) -> tuple[Check, ...]:
    """The checks that name lines of the file."""
    return (
        _rows_used(cleaned),
        _encoding(encoding, file_format),
        _negative(cleaned),
        _duplicate(cleaned),
        _order(cleaned),
        *cleaned.rows.checks,
        _sentinel(cleaned.rows),
    )


def of_days(daily: Daily) -> tuple[Check, ...]:
    """The checks of the daily means."""
    return (_future(daily), _zeros(daily), _gaps(daily), *_partial(daily))


def _of(cleaned: Cleaned, reason: str) -> Dropped:
    found = [kind for kind in cleaned.dropped if kind.reason == reason]
    return found[0] if found else Dropped(reason, 0, ())


def _shown(kind: Dropped) -> str:
    rest = kind.count - len(kind.lines)
    return in_lines(kind.lines) + (f" and {rest} more" if rest else "")


def _rows_used(cleaned: Cleaned) -> Check:
    used = cleaned.rows_read - sum(kind.count for kind in cleaned.dropped)
    share = used / cleaned.rows_read
    rest = ", ".join(f"{kind.count} {kind.reason}" for kind in cleaned.dropped)
    counts = f"{used} of {cleaned.rows_read} rows used" + (f" ({rest})" if rest else "")
    bad = f"{counts}; look whether this column and these marks are meant"
    return warn_unless("record_rows_used", share >= 0.5, share, 0.5, f"{counts}.", bad)


def _encoding(encoding: str, file_format: str) -> Check:
    """Agencies that write no UTF-8 are known to; of any other file the encoding is a guess."""
    guessed = encoding == "cp1252" and file_format == "plain"
    return Check(
        "record_encoding",
        "warn" if guessed else "pass",
        None,
        None,
        "The file is not UTF-8 and was read as cp1252; look whether names with accents are right."
        if guessed
        else f"The file was read as {encoding}.",
    )


def _negative(cleaned: Cleaned) -> Check:
    kind = _of(cleaned, "negative")
    bad = (
        f"{kind.count} negative values ({_shown(kind)}) were taken as missing; if a negative "
        "number marks missing values, add it to `missing:` under discharge.record."
    ) if kind.count else ""  # fmt: skip
    return warn_unless(
        "record_negative_values", not kind.count, kind.count, 0, "No negative values.", bad
    )


def _duplicate(cleaned: Cleaned) -> Check:
    kind = _of(cleaned, "duplicate")
    bad = (
        f"{kind.count} rows ({_shown(kind)}) repeat the time of another row without "
        "contradicting it; one row of each time was kept; look why they are doubled."
    ) if kind.count else ""  # fmt: skip
    return warn_unless(
        "record_duplicate_rows", not kind.count, kind.count, 0, "Each time once.", bad
    )


def _order(cleaned: Cleaned) -> Check:
    line = cleaned.first_line_out_of_order
    bad = (
        f"Line {line} is earlier than the line above; the rows were sorted by time; look whether "
        "files were joined in the wrong order."
    )
    fine = "The rows stand in order of time."
    return Check(
        "record_row_order", "pass" if line is None else "warn", None, None,
        fine if line is None else bad,
    )  # fmt: skip


def _sentinel(rows: Rows) -> Check:
    """A number of nines alone far above everything else is likely a mark for no value."""
    used = rows.reasons == USED
    top = float(rows.values.max(where=used, initial=-np.inf))
    others = used & (rows.values < top)
    below = float(rows.values.max(where=others, initial=-np.inf)) if others.any() else top
    is_mark = bool(_SENTINEL.fullmatch(f"{top:.10g}")) and top > _FAR_ABOVE * below
    lines = rows.lines[rows.values == top]
    bad = (
        f"{top:.10g} ({in_lines(lines)}) stands far above all other values and looks like a mark "
        f"for no value; if it is one, add `missing: [{top:.10g}]` under discharge.record."
    )
    fine = "No value looks like a mark for missing."
    return warn_unless("record_high_mark", not is_mark, top, _FAR_ABOVE * below, fine, bad)


def _future(daily: Daily) -> Check:
    today = np.datetime64(datetime.date.today(), "D")
    count = int(np.count_nonzero(daily.dates > today))
    bad = f"The record runs to {daily.dates[-1]}, which is not over yet; look at its dates."
    return warn_unless(
        "record_future_dates", not count, count, 0, "No date lies in the future.", bad
    )


def _zeros(daily: Daily) -> Check:
    count = int(np.count_nonzero(daily.means == 0))
    known = int(np.count_nonzero(~np.isnan(daily.means)))
    if count == known:
        bad = "Every value is zero; look whether this is the column of discharges."
        return Check("record_zero_days", "fail", count, 0, bad)
    bad = f"{count} days have zero discharge; look whether the river was dry or values are missing."
    return warn_unless("record_zero_days", not count, count, 0, "No day has zero discharge.", bad)


def _partial(daily: Daily) -> tuple[Check, ...]:
    """Days of a finer record that are covered in part, the first and the last as a rule."""
    if daily.daily:
        return ()
    count, share = daily.partial_days, daily.partial_days / len(daily.means)
    words = (
        f"{count} days are covered to less than 90 % and left out, as the first and last often are"
    )
    bad = f"{words}; look whether the gaps within days favour floods or nights."
    few = count <= 2 or share <= _PARTIAL_LIMIT
    return (warn_unless("record_partial_days", few, share, _PARTIAL_LIMIT, f"{words}.", bad),)


def _gaps(daily: Daily) -> Check:
    missing = int(np.count_nonzero(np.isnan(daily.means)))
    share = missing / len(daily.means)
    counts = f"{missing} of {len(daily.means)} days from {daily.dates[0]} to {daily.dates[-1]}"
    if daily.partial_days:
        counts += f" (days covered in part, left out: {daily.partial_days})"
    bad = f"{counts} have no value; look whether the gaps favour floods or droughts."
    fine = f"{counts} have no value."
    return warn_unless("record_missing_days", share <= _GAP_LIMIT, share, _GAP_LIMIT, fine, bad)
