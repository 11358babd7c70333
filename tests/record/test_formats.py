"""What every reader of an agency's format owes: values, unit, flags, and faults that say where."""

from __future__ import annotations

import contextlib
import datetime
import math
import random
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from format_files import CFS, DAYS, FILES, M3S, VALUES, FormatFile

from hydroyield.checks import Check
from hydroyield.errors import RecordError
from hydroyield.record import Record, RecordOptions, read_record, read_records
from hydroyield.record.formats.registry import FORMATS

NO_OPTIONS = RecordOptions()
EVERY = pytest.mark.parametrize("made", FILES.values(), ids=FILES)
DATA = Path(__file__).parents[1] / "data"


def read(tmp_path: Path, content: str | bytes, options: RecordOptions = NO_OPTIONS) -> Record:
    path = tmp_path / "record.txt"
    path.write_bytes(content if isinstance(content, bytes) else content.encode())
    return read_record(path, options, shown_as="record.txt")


def _those(test: Callable[[FormatFile], bool]) -> pytest.MarkDecorator:
    """The files that pass a test, as parameters."""
    found = {name: made for name, made in FILES.items() if test(made)}
    return pytest.mark.parametrize("made", found.values(), ids=found)


def check(record: Record, name: str) -> Check:
    return next(found for found in record.receipt.checks if found.name == name)


def assert_values(record: Record, factor: float = 1.0) -> None:
    expected = [math.nan if value is None else value * factor for value in VALUES]
    np.testing.assert_allclose(record.discharge, expected, rtol=1e-14)
    assert [str(day) for day in record.dates] == [str(day) for day in DAYS]


def test_every_format_has_a_file() -> None:
    assert {made.name for made in FILES.values()} == {known.name for known in FORMATS}


@EVERY
def test_clean_file(tmp_path: Path, made: FormatFile) -> None:
    record = read(tmp_path, made.content(), made.options)
    receipt = record.receipt
    assert_values(record, made.factor)
    assert receipt.file_format == made.name
    assert (receipt.unit, receipt.unit_source) == (made.unit, made.unit_source)
    assert receipt.flags == made.flags
    assert receipt.estimated_share == pytest.approx(made.estimated / 18)
    assert (receipt.rows_read, receipt.rows_used) == (20, 18)
    assert sum(kind.count for kind in receipt.dropped) == 2
    assert receipt.in_order
    assert receipt.daily


@EVERY
def test_one_reader_claims_it(made: FormatFile) -> None:
    text = made.content().decode(made.codec)
    assert [known.name for known in FORMATS if known.recognises(text)] == [made.name]


@EVERY
def test_line_numbers_are_those_of_the_file(tmp_path: Path, made: FormatFile) -> None:
    """A value that is no number is named with the line it stands in."""
    value = f"{VALUES[7]:.3f}"
    row = made.rows[7]
    spoilt = row.replace(value, '"2x5"' if made.between == ",\n" else "2x5").replace(
        value.replace(".", ","), "2x5"
    )
    if spoilt == row:  # JSON prints no trailing zeros
        spoilt = row.replace(str(VALUES[7]), '"2x5"')
    content = made.content([*made.rows[:7], spoilt, *made.rows[8:]])
    line = content.decode(made.codec).split("2x5")[0].count("\n") + 1
    with pytest.raises(RecordError, match=rf"record\.txt:{line}: .*2x5"):
        read(tmp_path, content, made.options)


@EVERY
def test_shuffled_rows_are_sorted_and_reported(tmp_path: Path, made: FormatFile) -> None:
    rows = list(made.rows)
    random.Random(3).shuffle(rows)
    record = read(tmp_path, made.content(rows), made.options)
    assert_values(record, made.factor)
    assert not record.receipt.in_order
    assert check(record, "record_row_order").outcome == "warn"


@EVERY
def test_last_row_that_was_cut_is_refused(tmp_path: Path, made: FormatFile) -> None:
    last = made.rows[-1][: made.cut]
    content = made.text([*made.rows[:-1], last])[: -len(made.foot) or None].encode(made.codec)
    with pytest.raises(RecordError, match=r"record\.txt:\d+: ") as raised:
        read(tmp_path, content, made.options)
    # a head may announce the number of rows; XML and JSON are named where they end
    last_line = content.decode(made.codec).count("\n") + 1
    assert raised.value.faults[0].line in (last_line, 5)


@pytest.mark.parametrize("name", ["grdc", "austria", "germany_daily", "spain", "nrfa"])
def test_last_value_that_was_cut_is_reported(tmp_path: Path, name: str) -> None:
    made = FILES[name]
    record = read(tmp_path, made.content([*made.rows[:-1], made.rows[-1][:-1]]), made.options)
    assert check(record, "record_last_row").outcome == "warn"


@EVERY
@pytest.mark.parametrize("number", [15, pytest.param(200, marks=pytest.mark.slow)])
def test_damaged_files_are_read_or_refused(tmp_path: Path, made: FormatFile, number: int) -> None:
    """Whatever is cut out of a file, nothing else than a RecordError comes of it."""
    text, chance = made.text(), random.Random(5)
    for _ in range(number):
        start = chance.randrange(len(text))
        damaged = text[:start] + text[start + chance.choice([1, 3, 40, len(text)]) :]
        with contextlib.suppress(RecordError):
            read(tmp_path, damaged.encode(made.codec), made.options)


@_those(lambda made: made.other is not None)
def test_another_parameter_is_refused(tmp_path: Path, made: FormatFile) -> None:
    assert made.other is not None
    assert made.other[0] in made.text()
    content = made.text().replace(*made.other).encode(made.codec)
    with pytest.raises(RecordError, match="download the discharge"):
        read(tmp_path, content, made.options)


@_those(lambda made: made.no_unit is not None)
def test_file_without_its_unit_asks_for_it(tmp_path: Path, made: FormatFile) -> None:
    assert made.no_unit is not None
    assert made.no_unit[0] in made.text()
    content = made.text().replace(*made.no_unit).encode(made.codec)
    with pytest.raises(RecordError, match="unit: m3/s"):
        read(tmp_path, content)
    record = read(tmp_path, content, RecordOptions(unit="l/s"))
    assert_values(record, 1e-3)
    assert record.receipt.unit_source == "site file"


@_those(lambda made: bool(made.head) and made is not FILES["france_means_json"])
def test_head_without_rows(tmp_path: Path, made: FormatFile) -> None:
    with pytest.raises(RecordError, match=r"no rows|announces 20 rows"):
        read(tmp_path, made.content([]), made.options)


@EVERY
def test_named_format(tmp_path: Path, made: FormatFile) -> None:
    options = replace(made.options, file_format=made.name)
    assert_values(read(tmp_path, made.content(), options), made.factor)
    other = "spain" if made.name != "spain" else "grdc"
    with pytest.raises(RecordError, match=rf"no file of format {other}.*write {made.name}"):
        read(tmp_path, made.content(), replace(made.options, file_format=other))


@EVERY
def test_series_that_is_not_there(tmp_path: Path, made: FormatFile) -> None:
    with pytest.raises(RecordError, match=r"value_column: there is no series 'nowhere'"):
        read(tmp_path, made.content(), replace(made.options, value_column="nowhere"))


def test_unknown_format(tmp_path: Path) -> None:
    with pytest.raises(
        RecordError, match=r"discharge\.record\.file_format: .*did you mean usgs-rdb\?"
    ):
        read(tmp_path, FILES["usgs"].content(), RecordOptions(file_format="usgs-rbd"))


def test_plain_file_is_no_format(tmp_path: Path) -> None:
    text = "date,flow_m3s\n" + "".join(
        f"{day},{'' if value is None else value}\n" for day, value in zip(DAYS, VALUES, strict=True)
    )
    assert not [known.name for known in FORMATS if known.recognises(text)]
    record = read(tmp_path, text)
    assert_values(record)
    assert record.receipt.file_format == "plain"
    assert_values(read(tmp_path, text, RecordOptions(file_format="plain")))


def test_unit_that_contradicts_the_file(tmp_path: Path) -> None:
    with pytest.raises(RecordError, match="site file says m3/s but the record says cfs"):
        read(tmp_path, FILES["usgs"].content(), M3S)


def test_date_column_of_another_layout(tmp_path: Path) -> None:
    with pytest.raises(RecordError, match="its dates in 'datetime'"):
        read(tmp_path, FILES["usgs"].content(), RecordOptions(date_column="day"))


# ---- USGS


def rdb(columns: str, *rows: str, zone: bool = False) -> str:
    names = ["agency_cd", "site_no", "datetime", *(["tz_cd"] if zone else []), *columns.split()]
    return "\n".join(
        [
            "#",
            "\t".join(names),
            "\t".join(["5s"] * len(names)),
            *(r.replace(" ", "\t") for r in rows),
        ]
    )


def test_rdb_thousands_marks_text_and_negatives(tmp_path: Path) -> None:
    text = rdb(
        "1_00060_00003 1_00060_00003_cd",
        "USGS 01 2020-01-01 7,250 A", "USGS 01 2020-01-02 Eqp P", "USGS 01 2020-01-03 Ice P",
        "USGS 01 2020-01-04 *** P", "USGS 01 2020-01-05 -12 P", "USGS 01 2020-01-06 -999999 A",
        "USGS 01 2020-01-07 3.5 A:[91]",
    )  # fmt: skip
    record = read(tmp_path, text)
    np.testing.assert_allclose(record.discharge[[0, -1]], [7250 * CFS, 3.5 * CFS])
    assert record.receipt.missing_days == 5
    assert record.receipt.flags == {"A": 2, "Eqp": 1, "Ice": 1, "***": 1, "P": 1, "A:[91]": 1}
    assert {kind.reason: kind.count for kind in record.receipt.dropped} == {
        "mark for missing": 4,
        "negative": 1,
    }


def test_rdb_with_the_header_repeated_and_other_columns(tmp_path: Path) -> None:
    one = rdb("1_00060_00003 1_00060_00003_cd", "USGS 01 2020-01-01 2 A")
    two = rdb(
        "9_00065_00003 9_00065_00003_cd 1_00060_00003 1_00060_00003_cd",
        "USGS 01 2020-01-02 77 A 3 A",
    )
    record = read(tmp_path, f"{one}\n{two}\n")
    np.testing.assert_allclose(record.discharge, [2 * CFS, 3 * CFS])


def test_rdb_with_several_series_of_discharge(tmp_path: Path) -> None:
    text = rdb("1_00060_00003 2_00060_00003", "USGS 01 2020-01-01 2 4", "USGS 01 2020-01-02 3 5")
    with pytest.raises(RecordError, match=r"value_column.*'1_00060_00003', '2_00060_00003'"):
        read(tmp_path, text)
    record = read(tmp_path, text, RecordOptions(value_column="2_00060_00003"))
    np.testing.assert_allclose(record.discharge, [4 * CFS, 5 * CFS])


def test_rdb_with_several_sites(tmp_path: Path) -> None:
    text = rdb("1_00060_00003", "USGS 01 2020-01-01 2", "USGS 02 2020-01-01 4")
    with pytest.raises(RecordError, match="'01 1_00060_00003', '02 1_00060_00003'"):
        read(tmp_path, text)
    record = read(tmp_path, text, RecordOptions(value_column="02 1_00060_00003"))
    np.testing.assert_allclose(record.discharge, [4 * CFS])
    assert record.receipt.station == "02"


def test_rdb_of_daily_maxima_alone(tmp_path: Path) -> None:
    with pytest.raises(RecordError, match="the daily maximum of discharge"):
        read(tmp_path, rdb("1_00060_00001", "USGS 01 2020-01-01 2"))
    options = RecordOptions(value_column="1_00060_00001")
    record = read(tmp_path, rdb("1_00060_00001", "USGS 01 2020-01-01 2"), options)
    assert check(record, "record_statistic").outcome == "warn"


@pytest.mark.parametrize(
    "column", ["18268_00060_00003", "02_00060_00003", "00060_00003", "18268_00060", "X_00060_00003"]
)
def test_rdb_names_of_columns(tmp_path: Path, column: str) -> None:
    """Series, parameter and statistic; the series may be left out, as in older files."""
    record = read(tmp_path, rdb(column, "USGS 01 2020-01-01 2", "USGS 01 2020-01-02 3"))
    np.testing.assert_allclose(record.discharge, [2 * CFS, 3 * CFS])


def test_rdb_of_gage_height(tmp_path: Path) -> None:
    text = rdb("1_00065_00003", "USGS 01 2020-01-01 2")
    for options in (NO_OPTIONS, RecordOptions(value_column="1_00065_00003", unit="cfs")):
        with pytest.raises(RecordError, match="gage height"):
            read(tmp_path, text, options)


def test_rdb_hour_that_is_written_twice(tmp_path: Path) -> None:
    """Clocks went back on 3 November 2019 at 2:00; the hour from 1:00 stands twice."""
    hours = [(f"{h:02d}:00", "EDT" if h < 2 else "EST", 10.0) for h in range(24)]
    hours.insert(2, ("01:00", "EST", 50.0))
    rows = [f"USGS 01 2019-11-03T{clock} {zone} {value}" for clock, zone, value in hours]
    rows += [f"USGS 01 2019-11-04T{h:02d}:00 EST 10.0" for h in range(24)]
    record = read(
        tmp_path, rdb("1_00060", *rows, zone=True).replace("-03T", "-03 ").replace("-04T", "-04 ")
    )
    np.testing.assert_allclose(record.discharge, [10 * CFS, 10 * CFS])
    (dropped,) = record.receipt.dropped
    assert (dropped.reason, dropped.count) == ("hour written twice as clocks went back", 1)
    assert record.receipt.in_order


def test_flat_brook_through_rdb_in_cubic_feet(tmp_path: Path) -> None:
    """The published record in cfs: a plain file and an RDB file give the same discharge."""
    lines = (DATA / "flat_brook_daily.csv").read_text().split("\n")
    pairs = [line.split(",") for line in lines if line[:1].isdigit()]
    text = rdb(
        "1_00060_00003 1_00060_00003_cd",
        *(f"USGS 01440000 {day} {value or 'Eqp'} A" for day, value in pairs),
    )
    record = read(tmp_path, text)
    known = {day: float(value) * 0.3048**3 for day, value in pairs if value}
    found = {
        str(day): value
        for day, value in zip(record.dates, record.discharge.tolist(), strict=True)
        if not math.isnan(value)
    }
    assert found.keys() == known.keys()
    assert max(abs(found[day] - known[day]) for day in known) < 1e-9
    assert record.receipt.station == "01440000"


# ---- the others


def test_uk_day_is_noted(tmp_path: Path) -> None:
    for name in ("nrfa", "england"):
        record = read(tmp_path, FILES[name].content())
        assert "09:00" in check(record, "record_day_start").message


def test_catchment_area_of_the_file_is_held_against_the_site_file(tmp_path: Path) -> None:
    text = FILES["grdc"].content().replace(b"-999\n", b"312.5\n")
    record = read(tmp_path, text, RecordOptions(gauge_area_m2=312.5e6))
    assert record.receipt.catchment_area_m2 == 312.5e6
    assert check(record, "record_catchment_area").outcome == "pass"
    record = read(tmp_path, text, RecordOptions(gauge_area_m2=100e6))
    assert check(record, "record_catchment_area").outcome == "warn"
    assert read(tmp_path, FILES["grdc"].content()).receipt.catchment_area_m2 is None


def test_grdc_columns_that_disagree_are_asked_for(tmp_path: Path) -> None:
    head = "# DATA\nYYYY-MM-DD;hh:mm; Original; Calculated; Flag\n"
    text = head + "2020-01-01;--:--; 1.000; 2.000; 1\n"
    with pytest.raises(RecordError, match="'Original', 'Calculated'"):
        read(tmp_path, text)
    assert read(tmp_path, text, RecordOptions(value_column="Calculated")).discharge == [2.0]
    only = head + "2020-01-01;--:--; -999.000; 2.000; 1\n"
    assert read(tmp_path, only).discharge.tolist() == [2.0]


def test_canadian_stations_are_asked_for(tmp_path: Path) -> None:
    text = "x\n ID,PARAM,Date,Value,SYM\n01AA001,1,2020/01/01,2,\n01AA002,1,2020/01/01,3,\n"
    with pytest.raises(RecordError, match="'01AA001', '01AA002'"):
        read(tmp_path, text)
    assert read(tmp_path, text, RecordOptions(value_column="01AA002")).discharge == [3.0]


def test_kiwis_with_fewer_rows_than_announced(tmp_path: Path) -> None:
    made = FILES["kiwis"]
    with pytest.raises(RecordError, match="announces 20 rows, but there are 19"):
        read(tmp_path, made.content(made.rows[:-1]))


def test_kiwis_hour_that_is_written_twice(tmp_path: Path) -> None:
    """Offsets change from +02:00 to +01:00: written 02:00 stands twice; each file day is 10."""
    head = "#ts_unitsymbol;m3/s\n#Timestamp;Value;Quality Code\n"
    rows = [f"2020-10-25T{h:02d}:00:00.000+0{2 if h < 3 else 1}:00;10;0" for h in range(24)]
    rows.insert(3, "2020-10-25T02:00:00.000+01:00;99;0")
    rows += [f"2020-10-26T{h:02d}:00:00.000+01:00;10;0" for h in range(24)]
    record = read(tmp_path, head + "\n".join(rows))
    np.testing.assert_allclose(record.discharge, [10.0, 10.0])
    assert "offset from UTC not applied" in record.receipt.date_format


def test_norwegian_day_belongs_to_its_printed_date(tmp_path: Path) -> None:
    record = read(tmp_path, FILES["norway_json"].content())
    assert record.dates[0] == np.datetime64(DAYS[0])


def test_polish_months_that_contradict(tmp_path: Path) -> None:
    text = '"1","A","B","2020","01","05",100,1.5,5.0,"12"\n'
    with pytest.raises(RecordError, match=r"record\.txt:1: .*not calendar month 12"):
        read(tmp_path, text)


def test_polish_year_begins_in_november(tmp_path: Path) -> None:
    """Month 1 of hydrological year 2020 is November 2019, month 3 is January 2020."""
    rows = [(1, 30, 11), (2, 1, 12), (2, 31, 12), (3, 1, 1), (12, 31, 10)]
    text = "\n".join(f"1,A,B,2020,{h:02d},{d:02d},1,{h}.5,9,{m:02d}" for h, d, m in rows)
    record = read(tmp_path, text)
    used = record.dates[~np.isnan(record.discharge)]
    assert [str(day) for day in used] == [
        "2019-11-30", "2019-12-01", "2019-12-31", "2020-01-01", "2020-10-31",
    ]  # fmt: skip
    assert read(tmp_path, FILES["poland"].content()).receipt.encoding == "cp1250"


@pytest.mark.parametrize("declared", ["<!DOCTYPE a>", '<!DOCTYPE a [<!ENTITY b "c">]>'])
def test_xml_with_declarations_is_refused(tmp_path: Path, declared: str) -> None:
    text = FILES["waterml"].text().replace("<w:Collection", declared + "<w:Collection", 1)
    with pytest.raises(RecordError, match=r"record\.txt:2: .*remove them"):
        read(tmp_path, text)


def test_xml_with_a_second_series(tmp_path: Path) -> None:
    text = FILES["waterml"].text()
    start, end = text.index("<w:MeasurementTimeseries"), text.index("</w:Collection>")
    level = text[start:end].replace("ts1", "ts2").replace("m3/s", "m")
    assert_values(read(tmp_path, text[:end] + level + text[end:]))
    other = text[start:end].replace("ts1", "ts2")
    with pytest.raises(RecordError, match="'ts1', 'ts2'"):
        read(tmp_path, text[:end] + other + text[end:])


# ---- several files as one


def write(tmp_path: Path, name: str, content: str | bytes) -> Path:
    path = tmp_path / name
    path.write_bytes(content if isinstance(content, bytes) else content.encode())
    return path


def part(made: FormatFile, which: slice) -> bytes:
    return made.content(made.rows[which])


def test_files_that_overlap_and_agree(tmp_path: Path) -> None:
    made = FILES["austria"]
    paths = [
        write(tmp_path, "b.csv", part(made, slice(8, None))),
        write(tmp_path, "a.csv", part(made, slice(0, 10))),
    ]
    record = read_records(paths, shown_as=["b.csv", "a.csv"])
    assert_values(record)
    assert check(record, "record_overlap").value == 2
    assert record.receipt.rows_read == 22
    assert record.receipt.rows_used == 18
    assert [name for name, _ in record.receipt.files] == ["b.csv", "a.csv"]


def test_files_in_different_units(tmp_path: Path) -> None:
    one = write(tmp_path, "a.csv", "date,q (l/s)\n2020-01-01,1500\n2020-01-02,2500\n")
    two = write(tmp_path, "b.csv", "date,q (m3/s)\n2020-01-02,2.5\n2020-01-03,3.5\n")
    assert read_records([one, two]).discharge.tolist() == [1.5, 2.5, 3.5]


def test_files_in_conflict_name_both_lines(tmp_path: Path) -> None:
    one = write(tmp_path, "a.csv", "date,q (m3/s)\n2020-01-01,1\n2020-01-02,2\n")
    two = write(tmp_path, "b.csv", "date,q (m3/s)\n2020-01-02,3\n")
    with pytest.raises(RecordError, match=r"b\.csv:2: 2020-01-02 .* 3, but 2 in a\.csv, line 3"):
        read_records([one, two], shown_as=["a.csv", "b.csv"])


def test_files_of_different_gauges_and_steps(tmp_path: Path) -> None:
    one = write(tmp_path, "a.txt", rdb("1_00060_00003", "USGS 01 2020-01-01 2"))
    two = write(tmp_path, "b.txt", rdb("1_00060_00003", "USGS 02 2020-01-02 2"))
    with pytest.raises(RecordError, match=r"of station '02', but a\.txt is of '01'"):
        read_records([one, two], shown_as=["a.txt", "b.txt"])
    fine = write(tmp_path, "c.csv", "date,q m3/s\n2020-01-01 00:00,1\n2020-01-01 12:00,1\n")
    with pytest.raises(RecordError, match="several values a day"):
        read_records([one, fine])


def test_every_file_at_fault_is_named(tmp_path: Path) -> None:
    one, two = (write(tmp_path, name, "date,q\n2020-01-01,1\n") for name in ("a.csv", "b.csv"))
    with pytest.raises(RecordError) as raised:
        read_records([one, two], shown_as=["a.csv", "b.csv"])
    assert [fault.file for fault in raised.value.faults] == ["a.csv", "b.csv"]


def test_one_file_reads_the_same_alone(tmp_path: Path) -> None:
    path = write(tmp_path, "a.csv", FILES["spain"].content())
    assert read_records([path]).receipt == read_record(path).receipt


def test_dates_are_of_the_makers() -> None:
    assert DAYS[-1] == datetime.date(2019, 11, 13)


def test_monthly_means_are_no_daily_record(tmp_path: Path) -> None:
    head = "# Title: invented\n# DATA\nYYYY-MM-DD;hh:mm; Value\n"
    rows = "".join(f"2003-{month:02d}-00;--:--;  3.100\n" for month in range(1, 13))
    with pytest.raises(RecordError, match=r"m\.txt:4: .*monthly means; download the daily means"):
        read_record(write(tmp_path, "m.txt", head + rows), shown_as="m.txt")
