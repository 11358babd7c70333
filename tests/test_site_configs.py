"""The starting site files: valid as they stand and with each optional line, and complete."""

from __future__ import annotations

import re
from collections.abc import Iterator
from itertools import pairwise
from pathlib import Path

import pytest
from pydantic import BaseModel

from hydroyield.site import read_site_file, read_site_text
from hydroyield.site.discharge_models import Discharge, Record, Transfer
from hydroyield.site.head_models import Channel, Head, Headwater, Rating, Tailwater, Weir
from hydroyield.site.models import Site, SiteFile
from hydroyield.site.plant_models import Electrical, Operation, TurbineGroup
from hydroyield.site.river_models import RULES, Abstraction

FILES = sorted((Path(__file__).parents[1] / "site_configs").glob("*.yaml"))
KEY = re.compile(r"(?P<indent> *)(?P<off>#?)(?P<entry>- )?(?P<key>[a-z_]+):")
MODELS: tuple[type[BaseModel], ...] = (
    SiteFile, Site, Discharge, Record, Transfer, Abstraction, Head, Headwater, Weir, Tailwater,
    Rating, Channel, TurbineGroup, Electrical, Operation, *RULES.values(),
)  # fmt: skip

files = pytest.mark.parametrize("path", FILES, ids=lambda path: path.stem)


def _switched_on(lines: list[str], number: int) -> str:
    """The file with one optional line in use, instead of the line with its key if there is one."""
    chosen = KEY.match(lines[number])
    assert chosen is not None
    kept = list(lines)
    kept[number] = lines[number].replace("#", "", 1)
    if not chosen["entry"]:
        for other in _same_block(lines, number, chosen["indent"]):
            found = KEY.match(lines[other])
            if found is None or found["off"]:
                continue
            if (found["indent"], found["key"]) == (chosen["indent"], chosen["key"]):
                kept[other] = "# " + lines[other]
    return "\n".join(kept)


def _same_block(lines: list[str], number: int, indent: str) -> Iterator[int]:
    """Lines before this one, back to the line that its block hangs from."""
    for other in range(number - 1, -1, -1):
        if lines[other].strip() and not lines[other].startswith(indent):
            return
        yield other


@files
def test_it_is_valid_as_it_stands(path: Path) -> None:
    assert read_site_file(path).record_path == path.parent / "record.csv"


@files
def test_each_optional_line_is_valid_when_its_mark_is_taken_away(path: Path) -> None:
    lines = path.read_text(encoding="utf-8").splitlines()
    optional = [n for n, line in enumerate(lines) if (found := KEY.match(line)) and found["off"]]
    assert len(optional) > 20
    for number in optional:
        read_site_text(_switched_on(lines, number), path)


@files
def test_each_key_of_the_site_file_stands_in_it(path: Path) -> None:
    text = path.read_text(encoding="utf-8")
    keys = {key for model in MODELS for key in model.model_fields}
    assert [key for key in sorted(keys) if not re.search(rf"\b{key}:", text)] == []


@files
def test_each_line_with_a_key_has_a_comment_above(path: Path) -> None:
    lines = path.read_text(encoding="utf-8").splitlines()
    opening = re.compile(r" *[a-z_]+:$")  # of a block, whose keys are explained one by one
    for above, line in pairwise(lines):
        if KEY.match(line) and not opening.match(line):
            assert above.lstrip().startswith("# "), line


@files
def test_examples_are_not_passed_off_as_sourced(path: Path) -> None:
    text = path.read_text(encoding="utf-8")
    assert not re.search(r"^ *source:", text, re.MULTILINE)
