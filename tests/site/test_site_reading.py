"""Reading whole site files: values in SI, lines, files that cannot be read, use from Python."""

from __future__ import annotations

import hashlib
import json
import os
import subprocess
import sys
from pathlib import Path
from typing import Any

import pytest
from pydantic import ValidationError
from site_examples import BASE, EXAMPLE, IN_METRIC, IN_US_UNITS, SMALLEST

from hydroyield.errors import SiteFileError
from hydroyield.site import SiteDescription, read_site_file, read_site_text
from hydroyield.site.discharge_models import Discharge
from hydroyield.site.head_models import Head, Headwater, Tailwater
from hydroyield.site.models import Site, SiteFile
from hydroyield.site.plant_models import Electrical, TurbineGroup
from hydroyield.site.record_models import RECORD_UNITS, Record
from hydroyield.site.river_models import RULES, ConstantRule


def faults_of(text: str, path: str | Path = "site.yaml") -> list[tuple[int | None, str, str]]:
    with pytest.raises(SiteFileError) as caught:
        read_site_text(text, path)
    return [(fault.line, fault.key, fault.message) for fault in caught.value.faults]


def test_values_are_si() -> None:
    model = read_site_text(BASE).model
    assert model.site.name == "Larkbeck Weir"
    assert model.site.altitude == 62.0
    assert model.discharge.record.missing == ("-999",)
    assert model.discharge.transfer is not None
    assert model.discharge.transfer.gauge_area == 312e6  # m2
    assert model.discharge.minimum_month_coverage == 0.9
    assert model.environmental_flow == (ConstantRule(rule="constant", discharge=0.6),)
    assert model.abstractions[0].months == (3, 4)
    assert model.abstractions[0].counts_as_environmental_flow
    assert model.abstractions[0].returns
    assert model.head.headwater.level == 101.2
    assert model.head.tailwater.table == ((0.0, 97.9), (20.0, 98.35), (100.0, 99.8))
    assert model.turbines[0].unit_capacity == 125e3  # W
    assert model.turbines[0].minimum_discharge == 0.2
    assert model.turbines[0].efficiency == ((0.2, 0.71), (0.4, 0.86), (0.7, 0.91), (1.0, 0.89))
    assert model.electrical.transformer_efficiency == 0.985
    assert model.electrical.export_limit == 220e3
    assert model.operation.shutdown_above == 90.0


def test_outages_are_read() -> None:
    operation = read_site_text(EXAMPLE).model.operation
    assert operation.planned_outage is not None
    assert (operation.planned_outage.days, operation.planned_outage.months) == (10.0, (8,))
    assert operation.forced_outage_rate == 0.02


@pytest.mark.parametrize(
    ("written", "months"),
    [
        ("8", (8,)), ("aug", (8,)), ("August", (8,)), ("apr-jun", (4, 5, 6)),
        ("nov - feb", (11, 12, 1, 2)), ("[3, may]", (3, 5)), ("[oct-dec, 1]", (10, 11, 12, 1)),
    ],
)  # fmt: skip
def test_months_are_numbers_names_or_ranges(written: str, months: tuple[int, ...]) -> None:
    text = BASE.replace("shutdown_above: 90 m3/s", f"closed: {written}")
    assert read_site_text(text).model.operation.closed == months


def test_left_out_keys_are_filled_in_and_told_apart() -> None:
    site = read_site_text(SMALLEST)
    model = site.model
    assert model.discharge.year_start_month == 10
    assert model.discharge.minimum_month_coverage == 0.9
    assert model.discharge.transfer is None
    assert model.site.latitude is model.site.altitude is model.site.water_temperature is None
    assert model.environmental_flow == model.abstractions == model.waterway == ()
    assert model.head.tailwater.follows == "river"
    assert model.head.minimum_net_head is None
    turbine = model.turbines[0]
    assert turbine.efficiency is turbine.minimum_discharge is turbine.unit_capacity is None
    assert model.electrical == Electrical()
    assert model.operation.shutdown_above is None
    assert site.is_given(("turbines", 0, "rated_discharge"))
    assert not site.is_given(("discharge", "year_start_month"))


def test_us_units_give_the_same_site() -> None:
    metric = flat(read_site_text(IN_METRIC).model.model_dump())
    customary = flat(read_site_text(IN_US_UNITS).model.model_dump())
    assert metric.keys() == customary.keys()
    for path, value in metric.items():
        expected = pytest.approx(value, rel=1e-12) if isinstance(value, float) else value
        assert customary[path] == expected, path


def flat(value: Any, path: tuple[Any, ...] = ()) -> dict[tuple[Any, ...], Any]:
    if isinstance(value, dict):
        return {k: v for key in value for k, v in flat(value[key], (*path, key)).items()}
    if isinstance(value, list | tuple):
        return {k: v for i, item in enumerate(value) for k, v in flat(item, (*path, i)).items()}
    return {path: value}


@pytest.mark.parametrize(
    ("rule", "expected"),
    [
        ("{rule: constant, discharge: 350 l/s}", {"discharge": 0.35}),
        ("{rule: monthly, discharge: [1, 2, 3, 4, 5, 6, 7, 8, 9, 10, 11, 1200 l/s]}", {}),
        ("{rule: exceedance, percent: 95}", {"percent": 95.0}),
        ("{rule: exceedance, percent: 95 %}", {"percent": 95.0}),
        ("{rule: mean_share, share: 10 %}", {"share": 0.1}),
        ("{rule: inflow_share, share: 50 %, above: 1.2}", {"share": 0.5, "above": 1.2}),
        ("{rule: constant, discharge: 0, source: licence of 1931}", {"source": "licence of 1931"}),
    ],
)
def test_every_rule_is_read(rule: str, expected: dict[str, Any]) -> None:
    text = BASE.replace("{rule: constant, discharge: 0.6 m3/s}", rule)
    (read,) = read_site_text(text).model.environmental_flow
    assert read.rule in rule
    assert isinstance(read, RULES[read.rule])
    for key, value in expected.items():
        assert getattr(read, key) == pytest.approx(value) or getattr(read, key) == value


@pytest.mark.parametrize(
    "tailwater",
    [
        "{level: 97.9 m}",
        "{table: [[0, 97.9], [20, 97.9]], follows: turbine}",
        "{rating: {zero_level: 97.6 m, coefficient: 18, exponent: 1.7}}",
        "{channel: {bed_level: 97.2, bottom_width: 9, side_slope: 0, slope: 0.2 %, "
        "manning_n: 0.03}}",
    ],
)
def test_every_tailwater_is_read(tailwater: str) -> None:
    text = SMALLEST.replace("{level: 97.9}", tailwater)
    read = read_site_text(text).model.head.tailwater
    given = read.model_fields_set - {"follows"}
    assert len(given) == 1
    assert getattr(read, given.pop()) is not None


@pytest.mark.parametrize(
    "headwater",
    [
        "{level: 332 ft}",
        "{weir: {crest: 100.9 m, length: 22 m, coefficient: 1.8}}",
        "{table: [[0 m3/s, 101.4 m], [50 m3/s, 101.0 m]]}",  # gates may lower the level
    ],
)
def test_every_headwater_is_read(headwater: str) -> None:
    read_site_text(SMALLEST.replace("{level: 101.2}", headwater))


@pytest.mark.parametrize(
    ("old", "new"),
    [
        (
            "environmental_flow:\n  - {rule: constant, discharge: 0.6 m3/s}",
            "environmental_flow: []",
        ),
        ("missing: [-999]", "missing: -999"),
        ("missing: [-999]", "missing: [-999, n/a, 'null', \"\\u2013\"]"),
        ("unit: m3/s", "unit: mm/d"),
        ("unit: m3/s", "unit: L/s\n    date_order: day_first\n    decimal_mark: comma"),
        ("file: larkbeck_daily.csv", "file: records/larkbeck daily.csv"),
        ("name: Larkbeck Weir", "name: 'Weir: the lower one'"),
        ("name: Larkbeck Weir", "name: Mühlwehr Üfingen"),
        ("name: Larkbeck Weir", "name: 12:30"),
        ("  latitude", "  source: surveyed in May\n  latitude"),
        ("format: 1\n", "# a remark\n---\nformat: 1\n"),
        ("format: 1\n", "format: '1'\nsource: all of it invented\n"),
        ("type: kaplan", "type: pelton\n    axis_level: 98.1 m"),
        ("efficiency: [[0.2, 0.71],", "efficiency: [[0, 0], [20 %, 71 %],"),
        ("efficiency: [[0.2, 0.71], [0.4, 0.86], [0.7, 0.91], [1.0, 0.89]]", "efficiency: typical"),
        ("minimum_discharge: 20 %", "minimum_discharge: 0"),
        ("\n", "\r\n"),
    ],
)
def test_variants_are_read(old: str, new: str) -> None:
    assert old in BASE
    read_site_text(BASE.replace(old, new))


def test_yaml_readings_of_scalars_do_not_slip_in() -> None:
    text = BASE.replace("name: Larkbeck Weir", "name: no").replace(
        "date_column: date", "date_column: 017"
    )
    model = read_site_text(text.replace("6.2 m3/s", "010")).model
    assert model.site.name == "no"
    assert model.discharge.record.date_column == "017"
    assert model.turbines[0].rated_discharge == 10.0  # not eight


def test_lines_lead_back_into_the_file() -> None:
    site = read_site_text(BASE)
    lines = BASE.splitlines()
    for path, start in {
        ("site", "name"): "  name:",
        ("discharge", "record"): "  record:",
        ("discharge", "record", "unit"): "    unit:",
        ("discharge", "transfer", "gauge_area"): "  transfer:",
        ("turbines",): "turbines:",
        ("turbines", 0): "  - count:",
        ("turbines", 0, "rated_head"): "    rated_head:",
        ("turbines", 0, "axis_level"): "  - count:",  # not in the file: the block it belongs in
        ("turbines", 0, "efficiency", 2, 1): "    efficiency:",
        ("site", "anything", "deeper"): "site:",
    }.items():
        assert lines[site.line_of(path) - 1].startswith(start)
    assert site.line_of(()) == 1
    fault = site.fault(("turbines", 0, "rated_head"), "is above the gross head; write less")
    number = next(n for n, line in enumerate(lines, 1) if "rated_head" in line)
    assert str(fault) == (
        f"site.yaml:{number}: turbines[0].rated_head: is above the gross head; write less"
    )


def test_description_of_a_file(tmp_path: Path) -> None:
    path = tmp_path / "site.yaml"
    path.write_text(BASE, encoding="utf-8")
    site = read_site_file(str(path))
    assert isinstance(site, SiteDescription)
    assert site.path == path
    assert site.file_name == str(path)
    assert site.folder == tmp_path
    assert site.name == "Larkbeck Weir"
    assert site.record_paths == (tmp_path / "larkbeck_daily.csv",)
    assert site.sha256 == hashlib.sha256(path.read_bytes()).hexdigest()
    path.write_bytes(b"\xef\xbb\xbf" + BASE.encode())  # a byte order mark, as some editors write
    assert read_site_file(path).model == site.model


@pytest.mark.parametrize(
    ("content", "line", "fragment"),
    [
        (b"", 1, "the file is empty; write 'format: 1'"),
        (b"# nothing but a remark\n", 1, "the file is empty"),
        (b"---\n...\n", 2, "the file is empty"),
        (b"just words\n", 1, "holds no keys"),
        (b"- format: 1\n", 1, "holds no keys"),
        (b"format: 1\nsite: {name: M\xfchle}\n", 2, "not UTF-8 text; save the file"),
        ("format: 1\n".encode("utf-16"), 1, "not UTF-8 text"),
        (b"format: 1\nsite: {name: a\x00b}\n", 2, "unprintable character"),
        (b"format: 1\n" + b"#" * 1_000_000, None, "larger than 1 MB"),
    ],
)
def test_file_that_is_no_site_file(
    tmp_path: Path, content: bytes, line: int | None, fragment: str
) -> None:
    path = tmp_path / "site.yaml"
    path.write_bytes(content)
    with pytest.raises(SiteFileError) as caught:
        read_site_file(path)
    (fault,) = caught.value.faults
    assert fault.file == str(path)
    assert fault.line == line
    assert fragment in fault.message


def test_missing_file_and_folder(tmp_path: Path) -> None:
    with pytest.raises(SiteFileError, match="there is no such file; check the name"):
        read_site_file(tmp_path / "none.yaml")
    with pytest.raises(SiteFileError, match="is a folder; name the site file in it"):
        read_site_file(tmp_path)
    with pytest.raises(SiteFileError, match=r"no such file|cannot be read"):
        read_site_file("a\0b")
    with pytest.raises(SiteFileError, match=r"no such file|cannot be read"):
        read_site_file("x" * 5000)
    os.mkfifo(tmp_path / "pipe")
    with pytest.raises(SiteFileError, match="not a regular file"):
        read_site_file(tmp_path / "pipe")


def test_record_may_not_leave_the_folder_by_a_link(tmp_path: Path) -> None:
    (tmp_path / "in").mkdir()
    (tmp_path / "outside.csv").write_text("")
    (tmp_path / "in" / "larkbeck_daily.csv").symlink_to(tmp_path / "outside.csv")
    path = tmp_path / "in" / "site.yaml"
    path.write_text(BASE)
    with pytest.raises(SiteFileError, match=r"discharge\.record\.file: .* leads out of the folder"):
        read_site_file(path)
    (tmp_path / "in" / "larkbeck_daily.csv").unlink()
    (tmp_path / "in" / "larkbeck_daily.csv").symlink_to(tmp_path / "in" / "other.csv")
    read_site_file(path)


def test_several_faults_come_together_in_the_order_of_lines() -> None:
    text = (
        BASE.replace("export_limit: 220 kW", "export_limit: 0")
        .replace("tailwater:", "tailwatr:")
        .replace("count: 2", "count: 0")
        .replace("  latitude: 54.2 ", "  latitude: 154.2 ")
        .replace("unit: m3/s", "unit: m3")
        .replace("format: 1\n", "")
        .replace("type: kaplan", "type: kaplan\n    type: francis")
        .replace("own_use: 1.5 kW", "own_use: &own 1.5 kW")
    )
    found = faults_of(text)
    assert [key for _, key, _ in found] == [
        "format",
        "site.latitude",
        "discharge.record.unit",
        "head.tailwatr",
        "turbines[0].count",
        "turbines[0].type",
        "electrical.own_use",
        "electrical.export_limit",
    ]
    lines = [line for line, _, _ in found]
    assert lines == sorted(lines)


def test_models_take_numbers_from_python() -> None:
    file = SiteFile(
        format=1,
        site=Site(name="Built in code", latitude=-12),
        discharge=Discharge(record=Record(file="daily.csv", missing=[-999, "x"])),
        environmental_flow=[ConstantRule(rule="constant", discharge="350 l/s")],
        head=Head(headwater=Headwater(level=101.2), tailwater=Tailwater(table=[(0, 97), (9, 98)])),
        turbines=[
            TurbineGroup(
                count=2, type="kaplan", unit_capacity=125, efficiency=[(0.2, 0.7), (1, 0.9)]
            )
        ],
    )
    assert file.turbines[0].unit_capacity == 125e3  # a bare number is in kW, as in the file
    assert file.discharge.record.missing == ("-999", "x")
    assert file.head.tailwater.table == ((0.0, 97.0), (9.0, 98.0))
    assert file.environmental_flow[0].discharge == pytest.approx(0.35)
    with pytest.raises(ValidationError):
        file.site.name = "other"
    with pytest.raises(ValidationError, match="is not a length"):
        Headwater(level=float("nan"))
    with pytest.raises(ValidationError, match="is not a length"):
        Headwater(level=True)
    with pytest.raises(ValidationError, match="unknown key 'levl'; did you mean 'level'"):
        Headwater(levl=3)


def test_every_key_is_documented() -> None:
    schema = SiteFile.model_json_schema()
    assert json.loads(json.dumps(schema)) == schema
    blocks = [schema, *schema["$defs"].values()]
    assert len(blocks) == 38  # seven of them rules
    for block in blocks:
        assert block["additionalProperties"] is False
        assert block["description"].endswith(".")
        for name, key in block["properties"].items():
            assert key["description"].endswith("."), (block["title"], name)
            refers = [part for part in _parts(key) if part.startswith("#/$defs/")]
            assert all(part.removeprefix("#/$defs/") in schema["$defs"] for part in refers)
    assert schema["properties"]["turbines"]["type"] == "array"
    assert set(schema["required"]) == {"format", "site", "discharge", "head", "turbines"}


def _parts(schema: Any) -> list[str]:
    if isinstance(schema, dict):
        own = [schema["$ref"]] if isinstance(schema.get("$ref"), str) else []
        return own + [part for value in schema.values() for part in _parts(value)]
    return [part for item in schema for part in _parts(item)] if isinstance(schema, list) else []


def test_every_record_unit_is_read() -> None:
    for unit in RECORD_UNITS:
        read = read_site_text(BASE.replace("unit: m3/s", f"unit: {unit}")).model
        assert read.discharge.record.unit == unit


def test_reading_needs_no_numeric_packages() -> None:
    code = (
        "import sys, hydroyield.site; "
        "print([m for m in ('numpy', 'pandas', 'scipy', 'matplotlib') if m in sys.modules])"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert done.stdout.strip() == "[]"
