"""The starting site files: valid as they stand and with each optional line, and complete."""

from __future__ import annotations

import importlib.util
import re
import sys
from collections.abc import Iterator
from functools import cache
from itertools import pairwise
from pathlib import Path
from types import ModuleType

import numpy as np
import pytest
from pydantic import BaseModel

import hydroyield
from hydroyield.jobs import SiteEstimate
from hydroyield.site import read_site_file, read_site_text
from hydroyield.site.baseline_models import Baseline
from hydroyield.site.discharge_models import Discharge, InflowBelowIntake, Transfer
from hydroyield.site.head_models import Channel, Head, Headwater, Rating, Tailwater, Weir
from hydroyield.site.models import Site, SiteFile
from hydroyield.site.operation_models import Operation
from hydroyield.site.plant_models import Electrical, TurbineGroup
from hydroyield.site.record_models import Record, Reference
from hydroyield.site.river_models import RULES, Abstraction
from hydroyield.site.waterway_models import Canal, Exit, Pipe, TrashRack, WaterwayLoss

ROOT = Path(__file__).parents[1]
FOLDER = ROOT / "site_configs"
FILES = sorted(FOLDER.glob("*.yaml"))
KEY = re.compile(r"(?P<indent> *)(?P<off>#?)(?P<entry>- )?(?P<key>[a-z_]+):")
MODELS: tuple[type[BaseModel], ...] = (
    SiteFile, Site, Baseline, Discharge, Record, Reference, Transfer, InflowBelowIntake,
    Abstraction, Head, Headwater, Weir, Tailwater, Rating, Channel,
    TurbineGroup, Electrical, Operation, WaterwayLoss, Pipe, TrashRack, Canal, Exit,
    *RULES.values(),
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


@cache
def _estimate(path: Path) -> SiteEstimate:
    return hydroyield.estimate(hydroyield.read_site(path))


def test_there_is_one_for_each_layout_and_nothing_that_is_not_shipped() -> None:
    assert [path.stem for path in FILES] == [
        "high_head_diversion", "low_head_weir", "mill_or_canal_drop", "pipe_outfall",
    ]  # fmt: skip
    others = {path.name for path in FOLDER.iterdir() if path.name[0] != "."} - {
        p.name for p in FILES
    }
    assert others == {"README.md", "REFERENCE.md", "record.csv"}


@files
def test_it_is_valid_as_it_stands(path: Path) -> None:
    assert read_site_file(path).record_paths == (path.parent / "record.csv",)


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


@files
def test_its_first_line_names_the_schema_and_its_second_says_what_it_is(path: Path) -> None:
    schema, what = path.read_text(encoding="utf-8").splitlines()[:2]
    assert schema == "# yaml-language-server: $schema=site.schema.json"
    assert re.fullmatch(r"# [A-Z].*\.", what)
    assert path.name in (FOLDER / "README.md").read_text(encoding="utf-8")


# --- with the record beside them ------------------------------------------------------------------


@files
def test_it_can_be_computed_as_it_stands(path: Path) -> None:
    estimate = _estimate(path)
    assert estimate.mean_annual_energy_mwh > 0
    assert 0.2 < estimate.capacity_factor < 0.9
    assert estimate.years_used == ["2021", "2022", "2023"]


@files
def test_only_what_the_example_leaves_open_is_warned_of(path: Path) -> None:
    # a short record, no transfer, no own use, no outages, no offer and no sources; levels, sizes
    # and heads are right for the type
    assert {check.name for check in _estimate(path).warnings()} == {
        "years_used", "left_out_transfer", "left_out_own_use", "left_out_outages",
        "typical_curve", "sources",
    }  # fmt: skip


@files
def test_its_energy_agrees_with_a_plain_loop_over_the_days(path: Path) -> None:
    """The best number of equal units, equally loaded, at the net head of each day.

    By hand and on purpose coarse: it takes the curve, levels and losses from the file, lets units
    share equally, and ignores that a unit's full discharge follows the head. It comes within
    1.3 % at the weir, where head moves most, and within 0.2 % elsewhere.
    """
    estimate = _estimate(path)
    total = sum(_power_of_a_day(estimate, float(flow)) for flow in estimate.scheme.discharge)
    days = estimate.scheme.discharge.size
    assert total / days * 8.766 == pytest.approx(estimate.mean_annual_energy_mwh, rel=0.015)


def _power_of_a_day(estimate: SiteEstimate, river: float) -> float:
    """Net power [kW] at a river discharge [m3/s]."""
    model = estimate.site.model
    group, electrical = model.turbines[0], model.electrical
    typical = estimate.scheme.plant.groups[0]
    reserve = [rule.discharge for rule in model.environmental_flow if rule.rule == "constant"]
    reserve += [
        float(np.quantile(estimate.scheme.discharge, 1 - rule.percent / 100))
        for rule in model.environmental_flow
        if rule.rule == "exceedance"
    ]
    taken = sum(abstraction.discharge for abstraction in model.abstractions)
    offered = max(0.0, river - min(river, max(reserve)) - taken)
    if group.axis_level is not None:
        lower = group.axis_level
    else:
        assert model.head.tailwater.table is not None
        lower = float(np.interp(river, *zip(*model.head.tailwater.table, strict=True)))
    assert model.head.headwater.level is not None
    best = 0.0
    for units in range(1, group.count + 1):
        assert group.rated_discharge is not None
        unit = min(offered / units, group.rated_discharge)
        share = unit / group.rated_discharge
        losses = sum(loss.loss_coefficient for loss in model.waterway) * (units * unit) ** 2
        head = model.head.headwater.level - lower - losses
        if share < typical.minimum_share or head <= 0:
            continue
        shaft = 9.81 * unit * head * float(typical.curve(np.array([share]))[0])
        chain = (electrical.drive_efficiency or 1) * (electrical.generator_efficiency or 1)
        best = max(best, units * min(shaft * chain, typical.unit_capacity / 1000))
    return best * (electrical.transformer_efficiency or 1)


def _script() -> ModuleType:
    script = ROOT / "demo_sites" / "make_records.py"
    spec = importlib.util.spec_from_file_location("make_starting_record", script)
    assert spec is not None
    assert spec.loader is not None
    module = importlib.util.module_from_spec(spec)
    sys.modules[spec.name] = module  # dataclasses look their module up
    spec.loader.exec_module(module)
    return module


def test_the_record_is_what_the_script_makes_and_says_that_it_is_invented() -> None:
    script, written = _script(), (FOLDER / "record.csv").read_bytes()
    assert script.STARTING_RECORD == FOLDER / "record.csv"
    assert script.starting_record_text().encode("ascii") == written
    assert written.startswith(b"# Invented")


@files
def test_its_column_of_the_record_is_read_without_a_doubt(path: Path) -> None:
    record = _estimate(path).record
    assert (record.days, record.missing_days) == (365 * 3, 0)  # no leap day in between
    assert [check.name for check in record.checks if check.outcome != "pass"] == []


def test_a_record_of_ones_own_needs_no_name_of_a_column(tmp_path: Path) -> None:
    rows = [f"{day},{1 + k % 9}" for k, day in enumerate(_days())]
    (tmp_path / "record.csv").write_text("\n".join(["date,flow", *rows]), encoding="utf-8")
    text = (FOLDER / "low_head_weir.yaml").read_text(encoding="utf-8")
    own = re.sub(r"^ *value_column: .*\n", "", text, flags=re.MULTILINE)
    site = read_site_text(own, tmp_path / "site.yaml")
    assert hydroyield.estimate(site).mean_annual_energy_mwh > 0


def _days() -> list[str]:
    return [str(day) for day in np.arange("2020-10-01", "2022-10-01", dtype="datetime64[D]")]
