"""Habits that hold across the package: units in docstrings, in names and in the nomenclature."""

from __future__ import annotations

import ast
import csv
import json
import re
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import pytest
import twin_sites
import yaml
from typer.testing import CliRunner

from hydroyield.cli import app

ROOT = Path(__file__).parents[1]

# --- units in docstrings --------------------------------------------------------------------------

NUMERIC_ROOMS = ("record", "river", "hydraulics", "powerhouse", "energy")
# parameters and fields that are a physical quantity wherever they occur
QUANTITIES = {
    "above", "abstracted", "altitude", "axis_level", "bed_level", "bottom_width", "coefficient",
    "counted", "crest", "days", "density", "discharge", "discharges", "energy_by_month",
    "export_limit", "fixed", "full_discharge", "fully_open", "gauge_area_m2", "gravity",
    "gross_head", "highest", "highest_discharge", "hours", "latitude", "length", "level", "levels",
    "loss_coefficient", "manning_n", "minimum_net_head", "net_head", "net_power", "offered",
    "output", "own_use", "rated_discharge", "rated_head", "reach", "river_discharge", "seen",
    "shutdown_above", "step_minutes", "temperature", "terminal_weight", "turbined",
    "unit_capacity", "unreturned", "wanted", "zero_level",
}  # fmt: skip
ENTRY = re.compile(r"^ *(?P<names>[a-z]\w*(?:, [a-z]\w*)*) : ")


def modules() -> list[Path]:
    return sorted(p for room in NUMERIC_ROOMS for p in (ROOT / "hydroyield" / room).rglob("*.py"))


def docstrings(path: Path) -> Iterator[tuple[str, str]]:
    """(name, docstring) of each class and function of a module."""
    for node in ast.walk(ast.parse(path.read_text("utf-8"))):
        if isinstance(node, ast.ClassDef | ast.FunctionDef):
            yield node.name, ast.get_docstring(node) or ""


def entries(docstring: str) -> Iterator[tuple[list[str], str]]:
    """(names, text) of each `name : text`, which goes on to the next entry or empty line."""
    names: list[str] = []
    text: list[str] = []
    for line in [*docstring.splitlines(), ""]:
        found = ENTRY.match(line)
        if names and (found or not line.strip()):
            yield names, " ".join(text)
            names = []
        if found:
            names, text = found["names"].split(", "), [line]
        elif names:
            text.append(line)


def test_documented_quantities_carry_a_unit() -> None:
    """A rule that matches nothing would pass everything: it sees more than 35 quantities."""
    documented = [
        (f"{path.parent.name}/{path.stem}, {owner}", name, text)
        for path in modules()
        for owner, docstring in docstrings(path)
        for names, text in entries(docstring)
        for name in names
        if name in QUANTITIES
    ]
    lacking = [(owner, name) for owner, name, text in documented if not re.search(r"\[.+?\]", text)]
    assert lacking == []
    assert len({name for _, name, _ in documented}) > 35


# --- units in names -------------------------------------------------------------------------------

UNIT_OF_SUFFIX = {
    "_mwh": "MWh", "_kwh": "kWh", "_kw": "kW", "_m3s": "m3/s", "_m": "m", "_m2": "m2",
    "_km2": "km2", "_percent": "%", "_kg_m3": "kg/m3", "_m_s2": "m/s2", "_share": "1",
    "_hours": "h", "_days": "d", "_factor": "1", "_index": "1", "_minutes": "min", "_m3": "m3",
    "_years": "a", "_kwh_per_kw": "kWh/kW", "_per_kwh": "1/kWh",
}  # fmt: skip
# counts, and what has its unit in the message beside it
WITHOUT_SUFFIX = {
    "best_option", "capital_cost", "correlation", "count", "date",
    "days", "days_at_residual_flow", "filled", "first_option", "indistinguishable_options",
    "intercept", "limit", "low_flow_count", "low_flow_start_month", "month", "net_present_value",
    "on_frontier", "option", "rows_read", "rows_used", "second_option", "slope", "unit_count",
    "within_limits", "price_factor", "capital_factor",
    "value", "year", "year_start_month",
}  # fmt: skip
# labels and settings, no quantities: version of the format, seed, counts by a reason in words
NO_QUANTITY = {"format", "seed", "rows_dropped", "first_lines_dropped", "flags"}


TEXT_COLUMNS = {"split", "type", "machine", "notes", "reason"}
OPTIONS = """
options: {unit_counts: [1, 2], exceedances: [20, 40]}
cost: {fixed: 100000, per_kw: 2000, energy_price: 0.12, life: 30, discount_rate: 4 %}
"""


def has_unit(name: str) -> bool:
    return name.endswith(tuple(UNIT_OF_SUFFIX))


def is_number(value: Any) -> bool:
    return isinstance(value, int | float) and not isinstance(value, bool)


def numeric_names(content: Any, name: str = "") -> Iterator[str]:
    """Keys that hold numbers. Numbers under years, percentages or days belong to the key above."""
    if isinstance(content, dict):
        for key, value in content.items():
            of_parent = has_unit(name) or name in NO_QUANTITY
            yield from numeric_names(value, name if of_parent else key)
    elif isinstance(content, list):
        for value in content:
            inside = isinstance(value, dict)
            yield from numeric_names(value, "" if inside else name)
    elif is_number(content):
        yield name


@pytest.fixture(scope="module")
def names_in_files(tmp_path_factory: pytest.TempPathFactory) -> set[str]:
    """Numeric keys of result.json and columns of the tables, of a site with rules by month."""
    site = twin_sites.several_flow_rules(tmp_path_factory.mktemp("site"))
    stated = yaml.safe_load(site.read_text("utf-8"))
    stated.setdefault("operation", {})["degradation"] = 0.003
    stated.setdefault("electrical", {})["metered_at"] = "generator"
    site.write_text(yaml.safe_dump(stated) + OPTIONS, "utf-8")
    folder = site.parent / "out"
    names: set[str] = set()
    for command in ("estimate", "compare"):
        out = folder / command
        said = CliRunner().invoke(app, [command, str(site), "--out", str(out), "--json"])
        assert said.exit_code == 0, said.output
        names |= set(numeric_names(json.loads((out / "result.json").read_text("utf-8"))))
    for path in folder.rglob("*.csv"):
        with open(path, newline="") as file:
            names |= set(next(csv.reader(file)))
    return names - NO_QUANTITY - TEXT_COLUMNS


def test_names_in_files_end_with_their_unit(names_in_files: set[str]) -> None:
    assert len(names_in_files) > 20
    lacking = {name for name in names_in_files if not has_unit(name)}
    assert lacking - WITHOUT_SUFFIX == set()


# --- the nomenclature -----------------------------------------------------------------------------

COLUMNS = ["quantity", "name", "symbol", "unit", "definition"]


@dataclass(frozen=True)
class Term:
    """A row of the nomenclature; a row may hold several names of one unit."""

    quantity: str
    names: tuple[str, ...]
    unit: str
    definition: str


def nomenclature() -> list[Term]:
    """Rows of the table under the heading Nomenclature in DEVELOPERS.md."""
    text = (ROOT / "DEVELOPERS.md").read_text("utf-8")
    section = re.split(r"^## ", text.split("\n## Nomenclature\n", 1)[1], flags=re.MULTILINE)[0]
    lines = [line for line in section.splitlines() if line.startswith("|")]
    rows = [[cell.strip() for cell in line.strip().strip("|").split("|")] for line in lines]
    assert rows[0] == COLUMNS
    assert {len(row) for row in rows} == {len(COLUMNS)}
    return [Term(r[0], tuple(re.findall(r"`(\w+)`", r[1])), r[3], r[4]) for r in rows[2:]]


def test_every_name_in_files_is_in_the_nomenclature(names_in_files: set[str]) -> None:
    known = {name for term in nomenclature() for name in term.names}
    assert names_in_files - known == set()


def test_the_nomenclature_names_each_thing_once_and_says_what_it_is() -> None:
    names = [name for term in nomenclature() for name in term.names]
    assert sorted(names) == sorted(set(names))
    for term in nomenclature():
        assert term.names, term
        assert term.definition, term


def test_units_of_the_nomenclature_are_those_of_the_names() -> None:
    for term in nomenclature():
        for name in term.names:
            suffixes = [suffix for suffix in UNIT_OF_SUFFIX if name.endswith(suffix)]
            if suffixes:
                assert term.unit == UNIT_OF_SUFFIX[max(suffixes, key=len)], name
