"""The schema for editors, held against site files by an independent validator."""

from __future__ import annotations

import copy
import json
from collections.abc import Callable
from pathlib import Path
from typing import Any

import jsonschema
import pytest
import yaml
from site_examples import BASE, IN_METRIC, IN_US_UNITS, SMALLEST

from hydroyield.errors import SiteFileError
from hydroyield.site import read_site_text
from hydroyield.site.schema import schema_text, site_schema

ROOT = Path(__file__).parents[2]
FILES = sorted([*(ROOT / "site_configs").glob("*.yaml"), *(ROOT / "demo_sites").glob("*/*.yaml")])
TEXTS = {"base": BASE, "smallest": SMALLEST, "metric": IN_METRIC, "customary": IN_US_UNITS}

validator = jsonschema.Draft202012Validator(json.loads(schema_text()))


def faults_of(content: Any) -> list[str]:
    return [f"{fault.json_path}: {fault.message}" for fault in validator.iter_errors(content)]


def test_it_is_a_schema_of_the_draft_that_it_names() -> None:
    schema = json.loads(schema_text())
    jsonschema.Draft202012Validator.check_schema(schema)
    assert schema == site_schema()
    assert schema["$schema"] == "https://json-schema.org/draft/2020-12/schema"
    assert schema["title"] == "Site file of hydroyield"
    assert "$id" not in schema


def test_it_keeps_what_is_said_about_every_block_and_key() -> None:
    schema = site_schema()
    for block in [schema, *schema["$defs"].values()]:
        assert block["description"]
        assert block["additionalProperties"] is False
        for key, entry in block["properties"].items():
            assert entry["description"].endswith("."), key
            assert entry["examples"], key
            assert "title" not in entry


@pytest.mark.parametrize("path", FILES, ids=lambda path: f"{path.parent.name}-{path.stem}")
def test_starting_files_and_demos_are_in_order(path: Path) -> None:
    assert faults_of(yaml.safe_load(path.read_text(encoding="utf-8"))) == []


def test_what_is_shown_as_an_example_is_in_order() -> None:
    schema = site_schema()
    faults = [
        f"{name}.{key}: {fault.message}"
        for name, block in {"SiteFile": schema, **schema["$defs"]}.items()
        for key, entry in block["properties"].items()
        for example in entry["examples"]
        for fault in jsonschema.Draft202012Validator(
            entry | {"$defs": schema["$defs"]}
        ).iter_errors(example)
    ]
    assert faults == []


@pytest.mark.parametrize("text", TEXTS.values(), ids=TEXTS)
def test_examples_are_in_order(text: str) -> None:
    assert faults_of(yaml.safe_load(text)) == []


Slip = Callable[[dict[str, Any]], Any]
SLIPS: dict[str, tuple[Slip, str]] = {
    "unknown key": (lambda site: site.update(turbine=[]), "$: "),
    "unknown key below": (lambda site: site["turbines"][0].update(rated_haed=2), "$.turbines[0]: "),
    "no format": (lambda site: site.pop("format"), "$: 'format' is a required"),
    "another format": (lambda site: site.update(format=2), "$.format: "),
    "no name": (lambda site: site["site"].pop("name"), "$.site: 'name' is a required"),
    "no record": (lambda site: site["discharge"].pop("record"), "$.discharge: "),
    "no head": (lambda site: site.pop("head"), "$: 'head' is a required"),
    "no turbines": (lambda site: site.update(turbines=[]), "$.turbines: "),
    "turbines no list": (lambda site: site.update(turbines=site["turbines"][0]), "$.turbines: "),
    "no type": (lambda site: site["turbines"][0].pop("type"), "$.turbines[0]: 'type' is"),
    "unknown type": (
        lambda site: site["turbines"][0].update(type="kapplan"), "$.turbines[0].type: ",
    ),
    "no units": (lambda site: site["turbines"][0].update(count=0), "$.turbines[0].count: "),
    "half a unit": (lambda site: site["turbines"][0].update(count=1.5), "$.turbines[0].count: "),
    "a list as a level": (
        lambda site: site["head"].update(headwater={"level": [1]}), "$.head.headwater.level: ",
    ),
    "two levels": (
        lambda site: site["head"].update(headwater={"level": 101, "weir": {
            "crest": 100, "length": 20, "coefficient": 1.8}}), "$.head.headwater: ",
    ),
    "no level": (
        lambda site: site["head"].update(tailwater={"follows": "river"}), "$.head.tailwater: ",
    ),
    "a key without a value": (lambda site: site["site"].update(altitude=None), "$.site.altitude: "),
    "a triple in a table": (
        lambda site: site["head"]["tailwater"].update(table=[[0, 1, 2], [1, 2]]),
        "$.head.tailwater.table[0]: ",
    ),
    "one pair": (
        lambda site: site["head"]["tailwater"].update(table=[[0, 97]]), "$.head.tailwater.table: ",
    ),
    "unknown rule": (
        lambda site: site.update(environmental_flow=[{"rule": "q95"}]), "$.environmental_flow[0]: ",
    ),
    "a rule without its value": (
        lambda site: site.update(environmental_flow=[{"rule": "exceedance"}]),
        "$.environmental_flow[0]: ",
    ),
    "eleven months": (
        lambda site: site.update(environmental_flow=[{"rule": "monthly", "discharge": [1] * 11}]),
        "$.environmental_flow[0]: ",
    ),
    "month 13": (
        lambda site: site["abstractions"][0].update(months=[13]), "$.abstractions[0].months: ",
    ),
    "a word as a switch": (
        lambda site: site["abstractions"][0].update(returns="maybe"), "$.abstractions[0].returns: ",
    ),
}  # fmt: skip


@pytest.mark.parametrize(("slip", "start"), SLIPS.values(), ids=SLIPS)
def test_a_slip_is_flagged_where_it_is_and_refused_by_the_reader(slip: Slip, start: str) -> None:
    content = copy.deepcopy(yaml.safe_load(BASE))
    slip(content)
    found = faults_of(content)
    assert [fault for fault in found if fault.startswith(start)], found
    with pytest.raises(SiteFileError):
        read_site_text(yaml.safe_dump(content))


def test_a_unit_without_a_size_is_flagged() -> None:
    content = yaml.safe_load(BASE)
    for key in ("unit_capacity", "rated_discharge"):
        del content["turbines"][0][key]
    (fault,) = faults_of(content)
    assert fault.startswith("$.turbines[0]: ")
