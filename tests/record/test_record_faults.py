"""One bad file for each failure mode: the line, and a message that ends with the remedy."""

from __future__ import annotations

import datetime
import gzip
from pathlib import Path

import pytest

from hydroyield.errors import Fault, RecordError
from hydroyield.record import RecordOptions, read_record

M3S = RecordOptions(unit="m3/s")


def faults_of(tmp_path: Path, content: str | bytes, options: RecordOptions = M3S) -> list[Fault]:
    path = tmp_path / "flow.csv"
    path.write_bytes(content if isinstance(content, bytes) else content.encode())
    with pytest.raises(RecordError) as raised:
        read_record(path, options, shown_as="flow.csv")
    assert all(fault.file == "flow.csv" for fault in raised.value.faults)
    return list(raised.value.faults)


def fault_of(tmp_path: Path, content: str | bytes, options: RecordOptions = M3S) -> Fault:
    (fault,) = faults_of(tmp_path, content, options)
    return fault


BYTES = {
    "empty": (b"", "empty"),
    "only white space": (b" \r\n \n", "empty"),
    "workbook": (b"PK\x03\x04rest", "export the record as CSV"),
    "old workbook": (b"\xd0\xcf\x11\xe0rest", "export the record as CSV"),
    "binary": (b"date,q\n2020-01-01,\x00\x01", "export the record as CSV"),
    "damaged gzip": (gzip.compress(b"date,q\n2020-01-01,1\n" * 99)[:-12], "damaged or cut short"),
    "web page": (b"<!DOCTYPE html><html></html>", "web page"),
    "endless line": (b"date,q\n2020-01-01," + b"1" * 200_000 + b"\n", "characters long"),
    "only comments": (b"# station\n# river\n", "no rows"),
    "only a header": (b"date,q\n", "no rows with dates"),
    "one column": (b"date\n2020-01-01\n2020-01-02\n", "no two columns"),
}


@pytest.mark.parametrize("name", BYTES)
def test_files_that_are_no_record(tmp_path: Path, name: str) -> None:
    content, message = BYTES[name]
    assert message in fault_of(tmp_path, content).message


def test_missing_file_names_a_neighbour(tmp_path: Path) -> None:
    (tmp_path / "larkbeck.csv").touch()
    with pytest.raises(RecordError, match=r"no such file; did you mean larkbeck\.csv\?"):
        read_record(tmp_path / "larkbek.csv")


def test_missing_folder(tmp_path: Path) -> None:
    with pytest.raises(RecordError, match=r"discharge\.record\.file: there is no such file"):
        read_record(tmp_path / "nowhere" / "flow.csv")


def test_folder_instead_of_a_file(tmp_path: Path) -> None:
    with pytest.raises(RecordError, match="this is a folder"):
        read_record(tmp_path)


# name: (content, line, key below discharge.record, part of the message)
CONTENT = {
    "short row": (
        "date,q,flag\n2020-01-01,1,A\n2020-01-02,2\n2020-01-03,1,A\n",
        3,
        "",
        "line 3 has 2",
    ),
    "long row": ("date;q\n2020-01-01;1\n2020-01-02;1;x\n", 3, "", "2 columns expected"),
    "cut last row": ("date,q\n2020-01-01,1\n2020-01-02,1\n2020-0", 4, "", "line 4 has 1"),
    "title above": (
        "Larkbeck\ndate,q\n2020-01-01,1\n2020-01-02,1\n",
        1,
        "",
        "start lines of title with #",
    ),
    "open quote": ('date,q\n2020-01-01,"1\n2020-01-02,1\n', 2, "", "quotation mark"),
    "broken first row": (
        "31 Jan 2020,1\n2020-02-01,1\n2020-02-02,2\n",
        1,
        "",
        "first row has a number",
    ),
    "comma twice": (
        "date,q\n2020-01-01,1,25\n2020-01-02,1,5\n2020-01-03,2\n",
        2,
        "",
        "also inside the numbers",
    ),
    "comma twice, no header": (
        "2020-01-01,1,25\n2020-01-02,1,50\n",
        1,
        "value_column",
        "comma is also the decimal mark",
    ),
    "comma in doubt": (
        "date;q\n2020-01-01;12\n2020-01-02;1,234\n",
        3,
        "decimal_mark",
        "is 1,234 the number 1234",
    ),
    "two marks": (
        "date;q\n2020-01-01;1,5\n2020-01-02;1.25\n",
        2,
        "",
        "'1,5' in line 2 and '1.25' in line 3",
    ),
    "point in doubt": (
        "date;q\n2020-01-01;0,574\n2020-01-02;2.149\n",
        3,
        "decimal_mark",
        "decimal_mark: comma",
    ),
    "text value": (
        "date,q\n2020-01-01,1\n2020-01-02,Ice\n",
        3,
        "missing",
        "add `missing: [Ice]` under discharge.record",
    ),
    "infinite": ("date,q\n2020-01-01,inf\n2020-01-02,1\n", 2, "missing", "'inf' (line 2)"),
    "overflow": ("date,q\n2020-01-01,1e999\n2020-01-02,1\n", 2, "missing", "'1e999' (line 2)"),
    "underscore": ("date,q\n2020-01-01,1_000\n2020-01-02,1\n", 2, "missing", "'1_000' (line 2)"),
    "order in doubt": (
        "date,q\n04/04/1999,1\n03/04/1999,1\n",
        3,
        "date_order",
        "is 03/04/1999 the 3rd of April or the 4th of March?",
    ),
    "two orders": (
        "date,q\n13/01/1999,1\n02/01/1999,1\n01/14/1999,1\n",
        4,
        "",
        "first in '13/01/1999' (line 2) but second in '01/14/1999' (line 4)",
    ),
    "two digit year": ("date,q\n31.01.99,1\n01.02.99,1\n", 2, "", "year of two digits"),
    "impossible day": (
        "date,q\n2021-02-28,1\n2021-02-29,1\n2021-02-30,1\n",
        3,
        "",
        "'2021-02-29' (line 3), '2021-02-30' (line 4) is an impossible",
    ),
    "impossible month": ("date,q\n2021-13-01,1\n2021-12-01,1\n", 2, "", "impossible date"),
    "impossible time": (
        "date,q\n2021-01-01 12:61,1\n2021-12-01 12:00,1\n",
        2,
        "",
        "impossible date or time",
    ),
    "text date": (
        "date,q\n2021-01-01,1\nyesterday,1\n2021-01-03,1\n",
        3,
        "",
        "'yesterday' (line 3) is no date",
    ),
    "blank date": (
        "date,q\n2021-01-01,1\n,4\n2021-01-03,1\n",
        3,
        "",
        "line 3: a value without a date",
    ),
    "mixed dates": (
        "date,q\n2021-01-01,1\n13.01.2021,1\n2021-01-14,1\n",
        3,
        "",
        "'2021-01-01' (line 2) and '13.01.2021' (line 3)",
    ),
    "mixed separators": (
        "date,q\n2021-01-01,1\n2021/01/02,1\n2021-01-14,1\n",
        3,
        "",
        "written in different ways",
    ),
    "early year": ("date,q\n1097-01-01,1\n1997-01-02,1\n", 2, "", "outside the years 1800"),
    "late year": ("date,q\n1997-01-01,1\n9997-01-02,1\n", 3, "", "outside the years 1800"),
    "no dates": ("a,b\nx,1\ny,2\n", 1, "date_column", "no column holds dates"),
    "two date columns": (
        "from,to,q\n2020-01-01,2020-01-02,1\n2020-01-02,2020-01-03,2\n",
        1,
        "date_column",
        "several columns hold dates",
    ),
    "no value column": (
        "date,start\n2020-01-01,2020-01-01\n2020-01-02,2020-01-02\n",
        1,
        "",
        "no column beside the dates",
    ),
    "which column": (
        "date,level,depth\n2020-01-01,1,2\n2020-01-02,1,2\n",
        1,
        "value_column",
        "'level', 'depth'",
    ),
    "two discharges": (
        "date,Q obs,Q sim\n2020-01-01,1,2\n2020-01-02,1,2\n",
        1,
        "value_column",
        "'Q obs', 'Q sim'",
    ),
    "conflict": (
        "date,q\n2020-01-01,1\n2020-01-02,2\n2020-01-01,3\n",
        4,
        "",
        "2020-01-01 has the values 1 and 3 (lines 2 and 4)",
    ),
    "clock change": (
        "date,q\n2020-10-25 02:00,1\n2020-10-25 02:30,2\n2020-10-25 02:00,3\n",
        4,
        "",
        "without summer time",
    ),
    "no value": (
        "date,q\n2020-01-01,\n2020-01-02,NA\n2020-01-03,-999\n",
        None,
        "",
        "1 blank, 1 mark for missing, 1 negative",
    ),
    "weekly": (
        "date,q\n2020-01-01,1\n2020-01-08,2\n2020-01-15,3\n",
        None,
        "",
        "usual step between rows is 7 days",
    ),
    "only hours": (
        "date,q\n2020-01-01 10:00,1\n2020-01-01 11:00,2\n",
        None,
        "",
        "no day is covered",
    ),
}


@pytest.mark.parametrize("name", CONTENT)
def test_content_at_fault(tmp_path: Path, name: str) -> None:
    content, line, key, message = CONTENT[name]
    fault = fault_of(tmp_path, content)
    assert message in fault.message
    assert fault.line == line
    assert fault.key == (f"discharge.record.{key}" if key else "")


ROWS = "2020-01-01,1\n2020-01-02,2\n"
# name: (header, options, key, message)
OPTIONS = {
    "no unit": (
        "date,q",
        RecordOptions(),
        "unit",
        "unit of column 'q' is not stated; add `unit: m3/s`",
    ),
    "unknown unit": ("date,q", RecordOptions(unit="buckets"), "unit", "write one of m3/s, l/s"),
    "two units": (
        "date,q (cfs)",
        M3S,
        "unit",
        "the site file says m3/s but the column header says cfs",
    ),
    "depth": ("date,q", RecordOptions(unit="mm/d"), "unit", "gauge_area: 312 km2"),
    "unknown column": (
        "date,discharge",
        RecordOptions("m3/s", value_column="dischrge"),
        "value_column",
        "did you mean 'discharge'?",
    ),
    "unknown date": (
        "datum,q",
        RecordOptions("m3/s", date_column="date"),
        "date_column",
        "the columns are 'datum', 'q'; did you mean 'datum'?",
    ),
    "same names": (
        "q,q",
        RecordOptions("m3/s", value_column="q"),
        "value_column",
        "2 columns are named 'q'",
    ),
    "order": (
        "date,q",
        RecordOptions("m3/s", date_order="dmy"),
        "date_order",
        "write day_first or month_first",
    ),
    "mark": (
        "date,q",
        RecordOptions("m3/s", decimal_mark="dot"),
        "decimal_mark",
        "write point or comma",
    ),
}


@pytest.mark.parametrize("name", OPTIONS)
def test_options_at_fault(tmp_path: Path, name: str) -> None:
    header, options, key, message = OPTIONS[name]
    fault = fault_of(tmp_path, f"{header}\n{ROWS}", options)
    assert message in fault.message
    assert fault.key == f"discharge.record.{key}"


def test_contradicting_unit_row(tmp_path: Path) -> None:
    fault = fault_of(tmp_path, f"date,q cfs\n,m3/s\n{ROWS}", RecordOptions())
    assert "the column header says cfs but the unit row says m3/s" in fault.message


def test_declared_order_makes_the_other_impossible(tmp_path: Path) -> None:
    fault = fault_of(
        tmp_path,
        "date,q\n03/04/1999,1\n13/04/1999,1\n",
        RecordOptions("m3/s", date_order="month_first"),
    )
    assert (fault.line, "impossible" in fault.message) == (3, True)


def test_declared_mark_refuses_the_other(tmp_path: Path) -> None:
    options = RecordOptions("m3/s", decimal_mark="comma")
    assert "'1.5' (line 2)" in fault_of(tmp_path, "date;q\n2020-01-01;1.5\n", options).message


def test_all_faults_at_once_in_the_order_of_the_file(tmp_path: Path) -> None:
    found = faults_of(tmp_path, "date,q\n2020-01-01,Ice\n2020-02-30,1\n", RecordOptions())
    assert [fault.line for fault in found] == [1, 2, 3]


def test_many_bad_lines_make_one_message(tmp_path: Path) -> None:
    days = [datetime.date(2020, 1, 1) + datetime.timedelta(k) for k in range(40)]
    rows = "".join(f"{day},{'Ice' if k < 12 else 1}\n" for k, day in enumerate(days))
    fault = fault_of(tmp_path, f"date,q\n{rows}")
    assert fault.line == 2
    assert "'Ice' (line 6) and 7 more are not numbers" in fault.message
    assert "[Ice]" in fault.message
