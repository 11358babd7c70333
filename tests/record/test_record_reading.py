"""What a plain record file may look like, and what the receipt says about it."""

from __future__ import annotations

import datetime
import gzip
import hashlib
import importlib.util
import time
from pathlib import Path

import numpy as np
import pandas as pd
import pytest

from hydroyield.checks import Check
from hydroyield.errors import RecordError
from hydroyield.record import Record, RecordOptions, read_record
from hydroyield.record.units import UNITS as UNITS_READ
from hydroyield.record.units import known_unit

M3S = RecordOptions(unit="m3/s")
EXPECTED = [1.5, 2.25, 1234.5]  # what every layout below prints for 30 and 31 January, 1 February


def read(tmp_path: Path, content: str | bytes, options: RecordOptions = M3S) -> Record:
    path = tmp_path / "flow.csv"
    path.write_bytes(content if isinstance(content, bytes) else content.encode())
    return read_record(path, options)


def check(record: Record, name: str) -> Check:
    (found,) = [check for check in record.receipt.checks if check.name == name]
    return found


LAYOUTS = {
    "iso": "date,q\n2020-01-30,1.5\n2020-01-31,2.25\n2020-02-01,1234.5\n",
    "year first, slashes": "date,q\n2020/01/30,1.5\n2020/01/31,2.25\n2020/02/01,1234.5\n",
    "compact": "date,q\n20200130,1.5\n20200131,2.25\n20200201,1234.5\n",
    "day first, points": "Datum;Abfluss\n30.01.2020;1,5\n31.01.2020;2,25\n01.02.2020;1234,5\n",
    "day first, unpadded": "date,q\n30/1/2020,1.5\n31/1/2020,2.25\n1/2/2020,1234.5\n",
    "day first, dashes": "date|q\n30-01-2020|1.5\n31-01-2020|2.25\n01-02-2020|1234.5\n",
    "month first": "date\tq\n1/30/2020\t1.5\n1/31/2020\t2.25\n2/1/2020\t1234.5\n",
    "thousands, points": "d;q\n2020-01-30;1,5\n2020-01-31;2,25\n2020-02-01;1.234,5\n",
    "thousands, commas": 'd,q\n2020-01-30,1.5\n2020-01-31,2.25\n2020-02-01,"1,234.5"\n',
    "thousands, spaces": "d;q\n2020-01-30;1,5\n2020-01-31;2,25\n2020-02-01;1 234,5\n",
    "exponents": "d,q\n2020-01-30,1.5e0\n2020-01-31,+2.25\n2020-02-01,1.2345E+03\n",
    "white space": "date   q\n2020-01-30   1.5\n2020-01-31  2.25\n2020-02-01 1234.5\n",
    "white space, comma": "2020-01-30 1,5\n2020-01-31 2,25\n2020-02-01 1234,5\n",
    "white space, clock": "datetime q\n2020-01-30 09:00 1.5"
    "\n2020-01-31 09:00 2.25\n2020-02-01 09:00 1234.5\n",
    "no header": "2020-01-30,1.5\n2020-01-31,2.25\n2020-02-01,1234.5\n",
    "quoted": '"date","q"\n"2020-01-30","1,5"\n"2020-01-31","2,25"\n"2020-02-01","1234,5"\n',
    "comments": "# river\n\n# a, b\ndate,q\n\n2020-01-30,1.5\n# note"
    "\n2020-01-31,2.25\n2020-02-01,1234.5\n",
    "header in a comment": "# river\n#date;q\n2020-01-30;1.5\n2020-01-31;2.25\n2020-02-01;1234.5\n",
    "spreadsheet note": "sep=;\ndate;q\n2020-01-30;1.5\n2020-01-31;2.25\n2020-02-01;1234.5\n",
    "unit row": "date,rain,q\n#,mm/day,m³/s\n2020-01-30,0,1.5"
    "\n2020-01-31,0,2.25\n2020-02-01,1,1234.5\n",
    "trailing fields": "date,q\n2020-01-30,1.5,\n2020-01-31,2.25\n2020-02-01,1234.5,,\n",
    "trailing column": "date,q,\n2020-01-30,1.5,\n2020-01-31,2.25,\n2020-02-01,1234.5,\n",
    "empty rows": "date,q\n2020-01-30,1.5\n,\n2020-01-31,2.25\n2020-02-01,1234.5\n,\n",
    "time of day": "date,q\n2020-01-30T09:00:00Z,1.5"
    "\n2020-01-31T09:00:00Z,2.25\n2020-02-01T09:00:00Z,1234.5\n",
    "clock column": "date;hh:mm;q\n2020-01-30;--:--;1.5"
    "\n2020-01-31;--:--;2.25\n2020-02-01;--:--;1234.5\n",
    "flags": "date,q,flag\n2020-01-30,1.5,A\n2020-01-31,2.25,\n2020-02-01,1234.5,B\n",
    "unit picks": "date,W [cm],Pegelwert [m³/s]\n2020-01-30,10,1.5"
    "\n2020-01-31,12,2.25\n2020-02-01,50,1234.5\n",
    "exported series": ",0\n2020-01-30,1.5\n2020-01-31,2.25\n2020-02-01,1234.5\n",
    "carriage returns": "date,q\r2020-01-30,1.5\r2020-01-31,2.25\r2020-02-01,1234.5\r",
    "both line ends": "date,q\r\n2020-01-30,1.5\r\n2020-01-31,2.25\r\n2020-02-01,1234.5",
}


@pytest.mark.parametrize("name", LAYOUTS)
def test_layouts(tmp_path: Path, name: str) -> None:
    record = read(tmp_path, LAYOUTS[name])
    assert record.discharge.tolist() == EXPECTED
    assert [str(day) for day in record.dates] == ["2020-01-30", "2020-01-31", "2020-02-01"]
    assert record.dates.dtype == np.dtype("datetime64[D]")
    assert record.receipt.daily
    assert record.receipt.rows_used == 3


@pytest.mark.parametrize(
    ("codec", "encoding", "outcome"),
    [
        ("utf-8", "utf-8", "pass"),
        ("utf-8-sig", "utf-8 with byte order mark", "pass"),
        ("utf-16", "utf-16", "pass"),
        ("cp1252", "cp1252", "warn"),
    ],
)
def test_encodings(tmp_path: Path, codec: str, encoding: str, outcome: str) -> None:
    content = "# Abfluß der Fürth\nZeit;Débit [m³/s]\n2020-01-30;1,5\n".encode(codec)
    record = read(tmp_path, content, RecordOptions())
    assert record.receipt.encoding == encoding
    assert record.receipt.value_column == "Débit [m³/s]"
    assert check(record, "record_encoding").outcome == outcome


def test_gzip_and_digest_of_the_stored_bytes(tmp_path: Path) -> None:
    stored = gzip.compress(LAYOUTS["iso"].encode())
    record = read(tmp_path, stored)
    assert record.discharge.tolist() == EXPECTED
    assert record.receipt.sha256 == hashlib.sha256(stored).hexdigest()


# factors: exact by definition of foot (0.3048 m), US gallon (231 cubic inches), day and litre
UNITS = [
    ("discharge (m3/s)", 1.0), ("Q [l/s]", 1e-3), ("flow_cfs", 0.3048**3), ("discharge_m3s", 1.0),
    ("q_m3_s", 1.0), ("flow m³/s", 1.0), ("flow in cumecs", 1.0), ("Q, m3 s-1", 1.0),
    ("Q (m³ s⁻¹)", 1.0), ("Valeur (en m3/s)", 1.0), ("flow ML/day", 1000 / 86400),
    ("Q.lps", 1e-3), ("flow (ft^3/s)", 0.3048**3), ("flow [m3/h]", 1 / 3600),
    ("flow (mgd)", 231e6 * 0.0254**3 / 86400), ("flow (cubic feet per second)", 0.3048**3),
]  # fmt: skip


@pytest.mark.parametrize(("header", "factor"), UNITS)
def test_unit_in_the_header(tmp_path: Path, header: str, factor: float) -> None:
    record = read(tmp_path, f"date;{header}\n2020-01-30;2\n", RecordOptions())
    assert record.discharge[0] == pytest.approx(2 * factor, rel=1e-12)
    assert record.receipt.unit_source == "column header"


def test_every_unit_spells_itself() -> None:
    assert [known_unit(unit) for unit in UNITS_READ] == list(UNITS_READ)


@pytest.mark.parametrize("header", ["discharge (foo)", "q", "flow (mm)", "flow ml/d", "values"])
def test_no_unit_is_guessed(tmp_path: Path, header: str) -> None:
    with pytest.raises(RecordError, match="add `unit: m3/s`"):
        read(tmp_path, f"date;{header}\n2020-01-30;2\n", RecordOptions())


def test_agreeing_units_are_no_fault(tmp_path: Path) -> None:
    record = read(tmp_path, "date,q (m³/s)\n2020-01-30,2\n", RecordOptions(unit="cumecs"))
    assert (record.receipt.unit, record.receipt.unit_source) == ("m3/s", "site file")


@pytest.mark.parametrize(("unit", "seconds"), [("mm/d", 86400), ("mm/h", 3600)])
def test_depth_over_the_catchment(tmp_path: Path, unit: str, seconds: float) -> None:
    options = RecordOptions(unit=unit, gauge_area_m2=86.4e6)
    # 1 mm over 86.4 km2 is 86 400 m3
    record = read(tmp_path, "date,q\n2020-01-30,1\n", options)
    assert record.discharge[0] == pytest.approx(86400 / seconds, rel=1e-12)


def test_chosen_columns_and_receipt(tmp_path: Path) -> None:
    content = "day;level;flow (l/s)\n31.01.2020;5;1,5\n01.02.2020;6;2\n"
    options = RecordOptions(date_column="day", value_column="flow (l/s)")
    receipt = read(tmp_path, content, options).receipt
    assert (receipt.delimiter, receipt.decimal_mark) == ("semicolon", "comma")
    assert (receipt.date_format, receipt.unit) == ("DD.MM.YYYY", "l/s")
    assert (receipt.date_column, receipt.value_column) == ("day", "flow (l/s)")
    assert (str(receipt.first), str(receipt.last)) == ("2020-01-31", "2020-02-01")
    assert (receipt.days, receipt.missing_days, receipt.step_minutes) == (2, 0, 1440)


def test_clean_record_passes_every_check(tmp_path: Path) -> None:
    assert {c.outcome for c in read(tmp_path, LAYOUTS["iso"]).receipt.checks} == {"pass"}


def test_missing_marks_as_text_and_as_number(tmp_path: Path) -> None:
    values = ["1", "-999", "-999.00", "ICE", "NA", "n/a", "NaN", "null", "-", "---", "", " ", "2"]
    rows = "".join(f"2020-01-{day:02},{value}\n" for day, value in enumerate(values, 1))
    record = read(tmp_path, f"date,q\n{rows}", RecordOptions("m3/s", missing=("-999", "Ice")))
    assert record.discharge[[0, -1]].tolist() == [1, 2]
    assert np.isnan(record.discharge[1:-1]).all()
    dropped = {kind.reason: kind for kind in record.receipt.dropped}
    assert (dropped["mark for missing"].count, dropped["blank"].count) == (9, 2)
    assert dropped["mark for missing"].lines == (3, 4, 5, 6, 7)
    assert check(record, "record_negative_values").outcome == "pass"
    assert check(record, "record_missing_days").outcome == "warn"


def test_number_mark_with_decimal_comma(tmp_path: Path) -> None:
    content = "date;q\n2020-01-01;-999,000\n2020-01-02;0,5\n"
    record = read(tmp_path, content, RecordOptions("m3/s", missing=("-999.0",)))
    assert record.receipt.dropped[0].reason == "mark for missing"


def test_negatives_are_missing_and_reported(tmp_path: Path) -> None:
    record = read(tmp_path, "date,q\n2020-01-01,1\n2020-01-02,-1\n2020-01-03,2\n")
    assert np.isnan(record.discharge[1])
    found = check(record, "record_negative_values")
    assert (found.outcome, found.value) == ("warn", 1)
    assert "line 3" in found.message
    assert "`missing:`" in found.message


def test_repeats_are_reported_and_rows_add_up(tmp_path: Path) -> None:
    content = "date,q\n2020-01-01,\n2020-01-01,1\n2020-01-02,2\n2020-01-02,2.0\n2020-01-03,-1\n"
    record = read(tmp_path, content)
    receipt = record.receipt
    assert record.discharge.tolist() == [1, 2]
    assert [(k.reason, k.count, k.lines) for k in receipt.dropped] == [
        ("negative", 1, (6,)),
        ("duplicate", 2, (2, 5)),
    ]
    assert receipt.rows_read == receipt.rows_used + sum(kind.count for kind in receipt.dropped)
    assert check(record, "record_duplicate_rows").outcome == "warn"


def test_unsorted_rows_are_sorted_and_reported(tmp_path: Path) -> None:
    record = read(tmp_path, "date,q\n2020-01-02,2\n2020-01-01,1\n2020-01-03,3\n")
    assert record.discharge.tolist() == [1, 2, 3]
    assert (record.receipt.in_order, record.receipt.first_line_out_of_order) == (False, 3)
    assert check(record, "record_row_order").outcome == "warn"


def test_high_mark_is_kept_and_named(tmp_path: Path) -> None:
    content = "date,q\n2020-01-01,1\n2020-01-02,99999.999\n2020-01-03,3\n"
    record = read(tmp_path, content)
    assert record.discharge[1] == 99999.999
    found = check(record, "record_high_mark")
    assert (found.outcome, "add `missing: [99999.999]`" in found.message) == ("warn", True)


def test_zeros(tmp_path: Path) -> None:
    some = read(tmp_path, "date,q\n2020-01-01,0\n2020-01-02,1\n")
    only = read(tmp_path, "date,q\n2020-01-01,0\n2020-01-02,-0.0\n")
    assert check(some, "record_zero_days").outcome == "warn"
    assert check(only, "record_zero_days").outcome == "fail"
    assert not np.signbit(only.discharge).any()


def test_future_dates_are_kept_and_named(tmp_path: Path) -> None:
    day = datetime.date.today() + datetime.timedelta(3)
    record = read(tmp_path, f"date,q\n{day},1\n")
    assert check(record, "record_future_dates").outcome == "warn"


@pytest.mark.parametrize(
    ("order", "days"), [("day_first", ["2020-02-01"]), ("month_first", ["2020-01-02"])]
)
def test_declared_date_order(tmp_path: Path, order: str, days: list[str]) -> None:
    record = read(tmp_path, "date,q\n01/02/2020,1\n", RecordOptions("m3/s", date_order=order))
    assert [str(day) for day in record.dates] == days


@pytest.mark.parametrize(("mark", "value"), [("point", 1234.0), ("comma", 1.234)])
def test_declared_decimal_mark(tmp_path: Path, mark: str, value: float) -> None:
    options = RecordOptions("m3/s", decimal_mark=mark)
    assert read(tmp_path, "date;q\n2020-01-01;1,234\n", options).discharge[0] == value


def test_thousands_told_by_other_values_are_named(tmp_path: Path) -> None:
    record = read(tmp_path, 'date,q\n2020-01-01,"1,234"\n2020-01-02,98.5\n')
    assert record.discharge.tolist() == [1234, 98.5]
    assert check(record, "record_thousands_marks").outcome == "warn"


def test_point_alone_is_decimal(tmp_path: Path) -> None:
    assert read(tmp_path, "date;q\n2020-01-01;2.149\n").discharge[0] == 2.149


def test_offset_is_noted_and_clock_time_stays(tmp_path: Path) -> None:
    record = read(tmp_path, "date,q\n2020-01-01T23:00:00+05:00,1\n2020-01-02T23:00:00+05:00,2\n")
    assert [str(day) for day in record.dates] == ["2020-01-01", "2020-01-02"]
    assert "clock time as written" in record.receipt.date_format


def test_series_there_and_back(tmp_path: Path) -> None:
    record = read(tmp_path, "date,q\n2020-01-01,1\n2020-01-02,2\n2020-01-04,3\n")
    series = record.series()
    assert series.index.freqstr == "D"
    again = Record.from_series(series)
    np.testing.assert_array_equal(again.discharge, record.discharge)
    np.testing.assert_array_equal(again.dates, record.dates)


def test_series_in_another_unit_and_finer_than_daily() -> None:
    index = pd.date_range("2020-01-01", periods=97, freq="15min", tz="UTC")
    record = Record.from_series(pd.Series(2000.0, index=index), unit="l/s")
    np.testing.assert_allclose(record.discharge, [2.0], rtol=1e-12)
    assert record.receipt.step_minutes == 15


def test_series_at_fault() -> None:
    with pytest.raises(RecordError, match="DatetimeIndex"):
        Record.from_series(pd.Series([1.0, 2.0]))
    days = pd.DatetimeIndex(["2020-01-01", None])
    with pytest.raises(RecordError, match="without a date"):
        Record.from_series(pd.Series([1.0, 2.0], index=days))
    with pytest.raises(RecordError, match="infinite value in line 1"):
        Record.from_series(pd.Series([np.inf], index=days[:1]))


def test_twenty_thousand_days_quickly(tmp_path: Path) -> None:
    days = np.datetime64("1960-01-01") + np.arange(20_000)
    flows = np.random.default_rng(7).lognormal(size=20_000).round(3)
    path = tmp_path / "flow.csv"
    rows = (f"{day},{flow}\n" for day, flow in zip(days, flows, strict=True))
    path.write_text("date,q (m3/s)\n" + "".join(rows))
    read_record(path)
    start = time.perf_counter()
    record = read_record(path)
    assert time.perf_counter() - start < 1.0  # about 0.05 s; the margin is for busy machines
    np.testing.assert_array_equal(record.discharge, flows)


def test_real_record_fulda() -> None:
    """Fulda at Grebenau 1979 to 1988 as spotpy 1.6.7 ships it; its statistics as published."""
    spec = importlib.util.find_spec("spotpy")
    if spec is None or spec.origin is None:
        pytest.skip("spotpy is not installed")
    path = Path(spec.origin).parent / "examples" / "cmf_data" / "fulda_climate.csv"
    record = read_record(path, RecordOptions(date_column="date", value_column="Q"))
    assert (record.receipt.unit, record.receipt.unit_source) == ("m3/s", "unit row")
    assert (str(record.dates[0]), str(record.dates[-1])) == ("1979-01-01", "1988-12-31")
    assert (record.receipt.days, record.receipt.missing_days) == (3653, 0)
    q = record.discharge
    assert (q.min(), np.median(q), round(q.mean(), 2), q.max()) == (8.55, 21.3, 31.33, 360)
