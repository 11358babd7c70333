"""The fast way into large files gives what the general reader gives, or steps aside."""

from __future__ import annotations

import gzip
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from hydroyield.errors import RecordError
from hydroyield.record import Record, RecordOptions, read_record
from hydroyield.record import reading as reading_module
from hydroyield.record.faults import Source
from hydroyield.record.large import read_large
from hydroyield.record.plain import read_plain
from hydroyield.record.rows import Rows
from hydroyield.record.text import read_document

SOURCE = Source("file.csv")
UNIT = RecordOptions(unit="m3/s")


def quarter_hours(count: int, mark: str = ",", stamp: str = "m", between: str = " ") -> list[str]:
    times = np.datetime64("2019-12-31T22:00") + np.arange(count) * np.timedelta64(15, "m")
    draw = np.random.default_rng(3)
    values = np.round(2 + np.cumsum(draw.normal(size=count)) ** 2 / 50, 3)
    stamps = [text.replace("T", between) for text in np.datetime_as_string(times, unit=stamp)]
    return [f"{text}{mark}{value}" for text, value in zip(stamps, values, strict=True)]


HEAD = ["time,discharge"]
ROWS = quarter_hours(400)


def both(folder: Path, text: str, options: RecordOptions = UNIT) -> tuple[Rows | None, Rows]:
    """The rows by the fast way, None where it steps aside, and by the general reader."""
    path = folder / "file.csv"
    path.write_bytes(text.encode())
    document = read_document(path, SOURCE)
    fast = read_large(document, options, SOURCE, least=0)
    return fast, read_plain(document.text, options, SOURCE)


def assert_same(fast: Rows, general: Rows) -> None:
    for name in ("dates", "seconds", "values", "lines", "reasons"):
        one, other = getattr(fast, name), getattr(general, name)
        np.testing.assert_array_equal(one, other, name)
        assert one.dtype == other.dtype
    assert (fast.layout, fast.factor, fast.checks, fast.flags) == (
        general.layout, general.factor, general.checks, general.flags,
    )  # fmt: skip


def changed(rows: list[str], *changes: tuple[int, str]) -> list[str]:
    rows = list(rows)
    for place, text in changes:
        rows[place] = text
    return rows


FAST = {
    "plain": "\n".join([*HEAD, *ROWS]) + "\n",
    "no last line end": "\n".join([*HEAD, *ROWS]),
    "line ends of Windows": "\r\n".join([*HEAD, *ROWS]) + "\r\n",
    "no names": "\n".join(ROWS),
    "comments above": "\n".join(["# a gauge", "#", *HEAD, *ROWS]),
    "a row of units": "\n".join(["time,flow", ",l/s", *ROWS]),
    "T in the stamps": "\n".join([*HEAD, *quarter_hours(400, between="T")]),
    "seconds": "\n".join([*HEAD, *quarter_hours(400, stamp="s")]),
    "semicolons": "\n".join(["time;discharge", *quarter_hours(400, ";")]),
    "tabs": "\n".join(["time\tdischarge", *quarter_hours(400, "\t")]),
    "blanks": "\n".join([*HEAD, *changed(ROWS, (5, ROWS[5][:17]), (399, ROWS[399][:17]))]),
    "a mark and a negative": "\n".join(
        [*HEAD, *changed(ROWS, (7, ROWS[7][:17] + "-999"), (9, ROWS[9][:17] + "-0.5"))]
    ),
    "a negative zero and an exponent": "\n".join(
        [*HEAD, *changed(ROWS, (7, ROWS[7][:17] + "-0.0"), (9, ROWS[9][:17] + "2.5e-1"))]
    ),
    "out of order": "\n".join([*HEAD, *ROWS[200:], *ROWS[:200]]),
    "a row twice": "\n".join([*HEAD, *ROWS, ROWS[17]]),
    "a third column": "\n".join(["time,discharge,level", *(f"{row},1.5" for row in ROWS)]),
    "daily": "\n".join(["date,discharge", *(f"2001-03-{d:02d},{d}.5" for d in range(1, 32))]),
}
ASIDE = {
    "a word": changed(ROWS, (300, ROWS[300][:17] + "Ice")),
    "a usual mark": changed(ROWS, (300, ROWS[300][:17] + "NA")),
    "another date": changed(ROWS, (300, "31.12.2019 22:00,2.5")),
    "a short date": changed(ROWS, (300, "2020-01-04,2.5")),
    "a date of one digit": changed(ROWS, (300, "2020-1-04 02:00,2.5")),
    "an impossible date": changed(ROWS, (300, "2020-02-30 02:00,2.5")),
    "an impossible month": changed(ROWS, (300, "2020-13-01 02:00,2.5")),
    "an impossible hour": changed(ROWS, (300, "2020-01-04 25:00,2.5")),
    "midnight as 24:00": changed(ROWS, (200, "2020-01-01 24:00,2.5")),
    "a blank line": changed(ROWS, (300, "")),
    "a comment": changed(ROWS, (300, "# changed by hand")),
    "a row that is cut": changed(ROWS, (399, ROWS[399][:16])),
    "a row that is cut in its date": changed(ROWS, (399, ROWS[399][:9])),
    "a stray column": changed(ROWS, (300, ROWS[300] + ",7")),
    "a stray and a cut row": changed(ROWS, (300, ROWS[300] + ","), (301, ROWS[301][:16])),
    "a quotation": changed(ROWS, (300, '2020-01-04 01:00,"2.5"')),
    "infinity": changed(ROWS, (300, ROWS[300][:17] + "1e999")),
    "an accent": changed(ROWS, (300, ROWS[300] + "é")),
    "a zone": [row.replace(",", "Z,") for row in ROWS],
    "before any gauge": changed(ROWS, (0, "1700-01-04 01:00,2.5")),
}  # fmt: skip


@pytest.mark.parametrize("text", FAST.values(), ids=FAST)
@pytest.mark.parametrize("missing", [(), ("-999",)])
def test_the_same_rows(tmp_path: Path, text: str, missing: tuple[str, ...]) -> None:
    unit = None if "l/s" in text else "m3/s"
    options = RecordOptions(unit=unit, missing=missing, value_column=None)
    if "level" in text or "no names" in text:
        options = RecordOptions(unit=unit, missing=missing, value_column="discharge")
    fast, general = both(tmp_path, text, options)
    assert fast is not None
    assert_same(fast, general)


@pytest.mark.parametrize("rows", ASIDE.values(), ids=ASIDE)
def test_it_steps_aside(tmp_path: Path, rows: list[str]) -> None:
    path = tmp_path / "file.csv"
    path.write_text("\n".join([*HEAD, *rows]), "utf-8")
    assert read_large(read_document(path, SOURCE), UNIT, SOURCE, least=0) is None


def test_small_files_are_left_to_the_general_reader(tmp_path: Path) -> None:
    path = tmp_path / "file.csv"
    path.write_text(FAST["plain"])
    assert read_large(read_document(path, SOURCE), UNIT, SOURCE) is None


FIELDS = st.sampled_from(["", "-999", "0", "7.25", "-3", "12", "x", "1,5", " 4", "NA", "1e2"])


@settings(max_examples=80, deadline=None)
@given(st.lists(st.tuples(st.integers(0, 39), FIELDS), max_size=4), st.booleans())
def test_never_another_result(
    tmp_path_factory: pytest.TempPathFactory, changes: list[tuple[int, str]], ended: bool
) -> None:
    rows = changed(ROWS[:40], *((place, ROWS[place][:17] + text) for place, text in changes))
    text = "\n".join([*HEAD, *rows]) + "\n" * ended
    path = tmp_path_factory.mktemp("large") / "file.csv"
    path.write_text(text)
    document = read_document(path, SOURCE)
    fast = read_large(document, UNIT, SOURCE, least=0)
    if fast is not None:
        assert_same(fast, read_plain(document.text, UNIT, SOURCE))


def records(path: Path, monkeypatch: pytest.MonkeyPatch) -> tuple[Record, Record]:
    """A file read by the fast way and without it."""

    def fast(*given: object) -> Rows | None:
        return read_large(*given, least=0)  # type: ignore[arg-type]

    monkeypatch.setattr(reading_module, "read_large", fast)
    one = read_record(path, UNIT)
    monkeypatch.setattr(reading_module, "read_large", lambda *_: None)
    return one, read_record(path, UNIT)


@pytest.mark.parametrize("name", ["blanks", "a mark and a negative", "out of order", "a row twice"])
@pytest.mark.parametrize("packed", [False, True])
def test_the_same_record_and_receipt(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, name: str, packed: bool
) -> None:
    path = tmp_path / "file.csv"
    content = FAST[name].encode()
    path.write_bytes(gzip.compress(content) if packed else content)
    fast, general = records(path, monkeypatch)
    np.testing.assert_array_equal(fast.discharge, general.discharge)
    np.testing.assert_array_equal(fast.dates, general.dates)
    assert fast.receipt == general.receipt
    assert fast.finer is not None
    assert general.finer is not None
    np.testing.assert_array_equal(fast.finer.discharge, general.finer.discharge)


def test_a_fault_in_a_large_file_is_named_with_its_line(tmp_path: Path) -> None:
    path = tmp_path / "large.csv"
    rows = ROWS * 250
    rows[70_000] = ROWS[0][:17] + "Eqp"
    path.write_text("\n".join([*HEAD, *rows]))
    assert path.stat().st_size > 2_000_000
    with pytest.raises(RecordError, match=r"large\.csv:70002: .*'Eqp'"):
        read_record(path, UNIT)
