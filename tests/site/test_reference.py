"""The reference page of the site file: current, complete, and true to what is read."""

from __future__ import annotations

import re
import subprocess
import sys
from collections.abc import Callable, Iterator
from pathlib import Path
from typing import Any, get_args

import pytest
from pydantic import ValidationError
from pydantic.fields import FieldInfo

from hydroyield.powerhouse import machine_types
from hydroyield.quantities import ANGLE, NUMBER, SHARE
from hydroyield.site.blocks import Block
from hydroyield.site.fields import Quantity
from hydroyield.site.models import SiteFile
from hydroyield.site.reference import reference_text, units_of
from hydroyield.site.tables import Pairs

PAGE = Path(__file__).parents[2] / "site_configs" / "REFERENCE.md"
COMMAND = "python -m hydroyield.site.reference > site_configs/REFERENCE.md"


def blocks_in(annotation: Any) -> Iterator[type[Block]]:
    """All blocks that an annotation leads to, itself included."""
    if isinstance(annotation, type) and issubclass(annotation, Block):
        yield annotation
        for field in annotation.model_fields.values():
            yield from blocks_in(field.annotation)
    else:
        for part in get_args(annotation):
            yield from blocks_in(part)


BLOCKS = list(dict.fromkeys(blocks_in(SiteFile)))
KEYS = [(block, key) for block in BLOCKS for key in block.model_fields]


def test_the_committed_page_is_current() -> None:
    current = PAGE.read_text(encoding="utf-8") == reference_text()
    assert current, f"site_configs/REFERENCE.md is out of date; run: {COMMAND}"


@pytest.mark.slow
def test_the_command_prints_the_page() -> None:
    done = subprocess.run(
        [sys.executable, "-X", "utf8", "-m", "hydroyield.site.reference"],
        capture_output=True, check=True,
    )  # fmt: skip
    assert done.stdout.decode("utf-8").replace("\r\n", "\n") == reference_text()
    assert done.stderr == b""


def test_every_block_is_found() -> None:
    # counted in models, baseline_, record_, discharge_, river_, head_, waterway_, plant_,
    # operation_ and option_models
    assert len(BLOCKS) == 2 + 1 + 2 + 3 + 8 + 7 + 5 + 3 + 3 + 4
    assert {key for block in BLOCKS for key in block.model_fields} <= set(
        re.findall(r"`([a-z_]+)(?::.*)?`", reference_text())
    )


def faults_of_keys(fault: Callable[[type[Block], str], str]) -> list[str]:
    """What is wrong with each key, empty where nothing is."""
    found = [(f"{block.__name__}.{key}", fault(block, key)) for block, key in KEYS]
    return [f"{name}: {wrong}" for name, wrong in found if wrong]


def test_every_key_has_an_example_that_is_read() -> None:
    assert faults_of_keys(_fault_of_example) == []


def _fault_of_example(block: type[Block], key: str) -> str:
    field = block.model_fields[key]
    if not field.examples:
        return "give the field examples=[...]; the page shows the first one"
    written = {
        name: value for name, value in block.example.items() if not _excludes(block, key, name)
    }
    if block is SiteFile:
        written |= {name: f.examples[0] for name, f in block.model_fields.items() if f.examples}
    if block.__name__ in ("TurbineGroup", "OptionMachine"):
        written["type"] = "pelton" if key == "jets" else "kaplan"
    if key == "river":
        written["follows"] = "higher"  # needs the key that it is read with
    written[key] = field.examples[0]
    try:
        block.model_validate(written)
    except ValidationError as error:
        return f"{written}: {error}"
    return ""


def _excludes(block: type[Block], key: str, other: str) -> bool:
    if (key, other) == ("dates", "months"):  # these are of a number of days
        return True
    return key in block.exactly_one_of and other in block.exactly_one_of


def test_what_happens_without_a_key_is_told_where_it_may_be_left_out() -> None:
    def fault(block: type[Block], key: str) -> str:
        field = block.model_fields[key]
        told = (field.description or "").endswith(" if left out.")
        needed = field.is_required() or key in block.exactly_one_of
        return f"told: {told}, needed: {needed}" if told == needed else ""

    assert faults_of_keys(fault) == []


def quantities_of(field: FieldInfo) -> list[Quantity]:
    """The quantities that a key holds, in the order of their columns."""
    found: list[Quantity] = []

    def look(part: Any) -> None:
        if isinstance(part, Quantity):
            found.append(part)
        elif isinstance(part, Pairs):
            found.extend([part.first, part.second])
        for inner in (*get_args(part), *getattr(part, "__metadata__", ())):
            if inner is not part:
                look(inner)

    for part in (field.annotation, *field.metadata):
        look(part)
    return list(dict.fromkeys(found))


def test_units_on_the_page_are_those_in_which_a_bare_number_is_read() -> None:
    def fault(block: type[Block], key: str) -> str:
        field = block.model_fields[key]
        held = [quantity.dimension for quantity in quantities_of(field)]
        wanted = ["share or %" if d is SHARE else d.bare_unit for d in held if d is not NUMBER]
        if NUMBER in held:  # plain numbers may have a unit that cannot be written, as m^0.5/s
            return ""
        given, wanted = units_of(field), list(dict.fromkeys(wanted))
        return f"{given}, not {wanted}" if given != wanted else ""

    assert faults_of_keys(fault) == []
    assert ANGLE.bare_unit == "degrees"


def test_left_out_column_holds_the_values_that_are_filled_in() -> None:
    """Each row by hand, from the table of defaults in the README of the project."""
    page = reference_text()
    for key, filled_in in [
        ("year_start_month", "10 (October)"), ("minimum_month_coverage", "90 %"),
        ("exponent", "1.0"), ("latitude", "gravity is 9.81 m/s2"), ("altitude", "0 m"),
        ("water_temperature", "density is 1000 kg/m3"), ("follows", "river"),
        ("minimum_net_head", "any net head above 0 will do"), ("minimum_discharge", "by type"),
        ("efficiency", "typical of the type"),
    ]:  # fmt: skip
        assert re.search(rf"^\| `{key}` \|[^|]*\|[^|]*\| {re.escape(filled_in)} \|", page, re.M), (
            key
        )


def test_types_of_turbine_stand_with_what_is_filled_in() -> None:
    page = reference_text()
    for name in machine_types():
        assert f"\n| `{name}` | " in page
    # by hand from the table of types: 15 %, and 0.72, 0.885, 0.915, 0.92, 0.905 at every fifth
    row = "| `kaplan` | 15 % | 2 to 40 m | 0.72 | 0.885 | 0.915 | 0.92 | 0.905 |"
    assert row in page


def test_it_says_how_leakage_gates_and_branches_are_written() -> None:
    page = reference_text()
    assert "Leakage past gates, seals and canal walls is written as an abstraction" in page
    assert "Gates that hold the level are a table with equal levels" in page
    assert "before the branch of one unit" in page


def test_every_link_leads_to_a_heading() -> None:
    page = reference_text()
    anchors = {
        re.sub(r"[^\w -]", "", title.lower()).replace(" ", "-")
        for title in re.findall(r"^#+ (.*)$", page, re.MULTILINE)
    }
    links = set(re.findall(r"\]\(#([^)]*)\)", page))
    assert links
    assert links <= anchors


def test_every_table_is_regular() -> None:
    for block in re.findall(r"(?:^\|.*\n)+", reference_text(), re.MULTILINE):
        widths = {line.count("|") for line in block.splitlines()}
        assert len(widths) == 1, block
