"""Several files of one gauge, read as one record."""

from __future__ import annotations

import hashlib
from collections import Counter
from collections.abc import Iterable, Sequence
from dataclasses import replace
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from hydroyield.checks import Check
from hydroyield.errors import Fault, RecordError
from hydroyield.record.cleaning import Cleaned
from hydroyield.record.daily import daily_means
from hydroyield.record.faults import SHOWN, Source
from hydroyield.record.options import RecordOptions
from hydroyield.record.reading import ReadFile, open_file, record_of
from hydroyield.record.result import Dropped, Record
from hydroyield.record.rows import DUPLICATE, REASONS, USED, Rows

_NO_OPTIONS = RecordOptions()
_SAME = 1e-6  # relative difference up to which values in different units are equal


def read_records(
    paths: Sequence[Path | str],
    options: RecordOptions = _NO_OPTIONS,
    *,
    shown_as: Sequence[str] | None = None,
) -> Record:
    """Read several files of one gauge as one record.

    paths : the files, in any order; where they overlap they must agree
    options : what the user says about all of them
    shown_as : names of the files in messages, as in `paths` when left out

    Raises RecordError for faults in any of them, for files of different gauges or steps, and for
    one time with different values, naming both files and lines.
    """
    if not paths:
        raise Source("record").error("no file is named; give at least one", key="file")
    shown = list(shown_as) if shown_as is not None else [str(path) for path in paths]
    files = _open(paths, options, shown)
    joined = files[0] if len(files) == 1 else _joined(files)
    return record_of(joined, daily_means(joined.cleaned.rows, joined.source))


def _open(
    paths: Sequence[Path | str], options: RecordOptions, shown: Sequence[str]
) -> list[ReadFile]:
    files: list[ReadFile] = []
    faults: list[Fault] = []
    for path, name in zip(paths, shown, strict=True):
        try:
            files.append(open_file(path, options, name))
        except RecordError as error:
            faults.extend(error.faults)
    if faults:
        raise RecordError(faults)
    return files


def _joined(files: Sequence[ReadFile]) -> ReadFile:
    _refuse_different_gauges(files)
    daily = _refuse_different_steps(files)
    rows, origin = _all_rows(files, daily)
    order = np.lexsort((rows.reasons != USED, rows.times))
    rows, origin = rows.select(order), origin[order]
    surplus = np.zeros(len(rows.lines), dtype=np.bool_)
    surplus[1:] = np.diff(rows.times) == 0
    _refuse_conflicts(rows, origin, surplus, files)
    digests = tuple((file.source.name, file.sha256) for file in files)
    return ReadFile(
        Source(", ".join(file.source.name for file in files)),
        hashlib.sha256("".join(digest for _, digest in digests).encode()).hexdigest(),
        _all_words(file.encoding for file in files),
        _all_words(file.file_format for file in files),
        _cleaned(files, rows, surplus),
        dict(sum((Counter(file.flags) for file in files), Counter())),
        _checks(files, int(np.count_nonzero(surplus))),
        digests,
    )


def _all_words(words: Iterable[str]) -> str:
    return ", ".join(dict.fromkeys(words))


def _refuse_different_gauges(files: Sequence[ReadFile]) -> None:
    first = next((file for file in files if file.cleaned.rows.layout.station), files[0])
    station = first.cleaned.rows.layout.station
    for file in files:
        other = file.cleaned.rows.layout.station
        if other not in ("", station):
            raise file.source.error(
                f"this file is of station '{other}', but {first.source.name} is of '{station}'; "
                "join files of one gauge only",
                key="file",
            )


def _refuse_different_steps(files: Sequence[ReadFile]) -> bool:
    """Whether all files are daily. Raises RecordError when some are and some are finer."""
    daily = [bool((np.diff(file.cleaned.rows.dates).astype(int) > 0).all()) for file in files]
    if any(daily) and not all(daily):
        one, other = files[daily.index(True)], files[daily.index(False)]
        raise other.source.error(
            f"this file has several values a day, but {one.source.name} has one; join files with "
            "the same step",
            key="file",
        )
    return daily[0]


def _all_rows(files: Sequence[ReadFile], daily: bool) -> tuple[Rows, NDArray[np.int64]]:
    """The rows of all files, and for each the position of its file."""
    parts = [file.cleaned.rows for file in files]
    same = len({part.factor for part in parts}) == 1
    factors = [1.0 if same else part.factor for part in parts]
    layout = parts[0].layout if same else replace(parts[0].layout, unit="m3/s")
    seconds = np.concatenate([part.seconds for part in parts])
    rows = Rows(
        np.concatenate([part.dates for part in parts]),
        np.zeros_like(seconds) if daily else seconds,
        np.concatenate([p.values * factor for p, factor in zip(parts, factors, strict=True)]),
        np.concatenate([part.lines for part in parts]),
        np.concatenate([part.reasons for part in parts]),
        parts[0].factor if same else 1.0,
        layout,
        (),
        _all_flags(parts),
        frozenset().union(*(part.doubtful for part in parts)),
    )
    return rows, np.repeat(np.arange(len(parts)), [len(part.lines) for part in parts])


def _all_flags(parts: Sequence[Rows]) -> NDArray[np.str_] | None:
    if all(part.flags is None for part in parts):
        return None
    return np.concatenate(
        [np.full(len(p.lines), "") if p.flags is None else p.flags for p in parts]
    )


def _refuse_conflicts(
    rows: Rows, origin: NDArray[np.int64], surplus: NDArray[np.bool_], files: Sequence[ReadFile]
) -> None:
    first = np.maximum.accumulate(np.where(surplus, 0, np.arange(len(surplus))))
    same = len({file.cleaned.rows.factor for file in files}) == 1
    limit = 0.0 if same else _SAME * np.abs(rows.values[first])
    differ = surplus & (rows.reasons == USED) & (np.abs(rows.values - rows.values[first]) > limit)
    found = np.flatnonzero(differ)
    faults = []
    for k in found[:SHOWN]:
        one, other = int(first[k]), int(k)
        before, here = files[int(origin[one])].source, files[int(origin[other])].source
        when = (rows.dates[k] + rows.seconds[k].astype("timedelta64[s]")).item()
        faults.append(
            here.fault(
                f"{when:%Y-%m-%d %H:%M} has the value {rows.values[other]:.10g}, but "
                f"{rows.values[one]:.10g} in {before.name}, line {rows.lines[one]}; remove the "
                "one that is wrong",
                int(rows.lines[other]),
            )
        )
    if found.size > SHOWN:
        faults.append(files[0].source.fault(f"{found.size - SHOWN} more times are in conflict"))
    if faults:
        raise RecordError(faults)


def _cleaned(files: Sequence[ReadFile], rows: Rows, surplus: NDArray[np.bool_]) -> Cleaned:
    """What cleaning left of all files; a row that another file has too counts as a duplicate."""
    counts: Counter[str] = Counter()
    lines: dict[str, tuple[int, ...]] = {}
    for kind in (kind for file in files for kind in file.cleaned.dropped):
        counts[kind.reason] += kind.count
        lines.setdefault(kind.reason, kind.lines)
    for code, word in REASONS.items():
        again = int(np.count_nonzero(surplus & (rows.reasons == code)))
        counts[word] -= again
    counts[REASONS[DUPLICATE]] += int(np.count_nonzero(surplus))
    dropped = tuple(
        Dropped(word, counts[word], lines.get(word, ()))
        for word in REASONS.values()
        if counts[word] > 0
    )
    disorder = [file.cleaned.first_line_out_of_order for file in files]
    return Cleaned(
        rows.select(~surplus),
        sum(file.cleaned.rows_read for file in files),
        dropped,
        next((line for line in disorder if line is not None), None),
    )


def _checks(files: Sequence[ReadFile], overlap: int) -> tuple[Check, ...]:
    """The findings of each file with its name, and what the files have in common."""
    named = [
        replace(check, message=f"{file.source.name}: {check.message}")
        for file in files
        for check in file.checks
    ]
    message = (
        f"{overlap} times stand in several files with equal values or none; one of each was kept."
        if overlap
        else "The files do not overlap."
    )
    return (*named, Check("record_overlap", "pass", float(overlap), None, message))
