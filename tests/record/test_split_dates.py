"""Records whose year, month and day stand in columns of their own."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
import spotpy

from hydroyield.errors import RecordError
from hydroyield.record import Record, RecordOptions, read_record

LEAF_RIVER = Path(spotpy.__file__).parent / "examples" / "hymod_unix" / "bound.txt"


def read(folder: Path, text: str, **options: str) -> Record:
    path = folder / "daily.txt"
    path.write_text(text, "utf-8")
    return read_record(path, RecordOptions(unit="m3/s", **options))  # type: ignore[arg-type]


def test_leaf_river() -> None:
    """Leaf River, shipped with spotpy (MIT): 1952-07-28 to 1962-09-30, 3717 days, m3/s; minimum,
    median, mean and maximum as published beside the file's name in the tests of real records."""
    record = read_record(LEAF_RIVER, RecordOptions(unit="m3/s", value_column="column 4"))
    assert (str(record.dates[0]), str(record.dates[-1])) == ("1952-07-28", "1962-09-30")
    assert (record.receipt.days, record.receipt.missing_days) == (3717, 0)
    flow = record.discharge
    found = (flow.min(), float(np.median(flow)), flow.mean(), flow.max())
    assert found == pytest.approx((1.557, 8.325, 28.28, 1314), rel=5e-4)


@pytest.mark.parametrize(
    "text",
    [
        "year,month,day,flow\n2001,1,31,2.5\n2001,2,1,2.25\n",
        "flow;Tag;Monat;Jahr\n2.5;31;1;2001\n2.25;1;2;2001\n",
        "2001 1 31 2.5\n2001 2 1 2.25\n",
        "31 1 2001 2.5\n1 2 2001 2.25\n",
        "1\t31\t2001\t2.5\n2\t1\t2001\t2.25\n",
        "3.1e+001 1.0e+000 2.001e+003 2.5\n1 2 2001 2.25\n",
    ],
)
def test_every_order_is_read_where_only_one_makes_dates(tmp_path: Path, text: str) -> None:
    record = read(tmp_path, text)
    assert list(map(str, record.dates)) == ["2001-01-31", "2001-02-01"]
    assert record.discharge.tolist() == [2.5, 2.25]


def test_day_and_month_that_could_change_places_are_asked_for(tmp_path: Path) -> None:
    text = "1 2 2001 2.5\n2 2 2001 2.25\n"
    with pytest.raises(
        RecordError, match=r"daily.txt:1: discharge.record.date_order: day and month"
    ):
        read(tmp_path, text)
    day_first = read(tmp_path, text, date_order="day_first")
    assert str(day_first.dates[-1]) == "2001-02-02"
    month_first = read(tmp_path, "2 1 2001 2.5\n2 2 2001 2.25\n", date_order="month_first")
    assert str(month_first.dates[-1]) == "2001-02-02"


def test_an_impossible_date_is_named_with_its_line(tmp_path: Path) -> None:
    with pytest.raises(RecordError, match=r"daily.txt:3: '2001-02-30' \(line 3\) is an impossible"):
        read(tmp_path, "year,month,day,flow\n2001,1,31,2.5\n2001,2,30,2.25\n")


def test_numbers_that_are_no_dates_are_refused(tmp_path: Path) -> None:
    with pytest.raises(RecordError, match="no date that is read here"):
        read(tmp_path, "1 2 3 2.5\n2 2 3 2.25\n")
