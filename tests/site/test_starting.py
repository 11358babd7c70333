"""Starting a new site: the layouts by name, and the files of each."""

from __future__ import annotations

import os
import shutil
import subprocess
import sys
import tomllib
from pathlib import Path

import pytest

import hydroyield
from hydroyield.errors import InputError
from hydroyield.site.schema import schema_text
from hydroyield.site.starting import layouts, starting_files

ROOT = Path(__file__).parents[2]
CONFIGS = ROOT / "site_configs"
NAMES = ["high-head-diversion", "low-head-weir", "mill-or-canal-drop", "pipe-outfall"]


def test_layouts_are_named_and_each_has_one_sentence() -> None:
    found = layouts()
    assert sorted(found) == NAMES
    for sentence in found.values():
        assert sentence[0].isupper()
        assert sentence.endswith(".")
        assert ". " not in sentence


@pytest.mark.parametrize("layout", NAMES)
def test_a_new_site_can_be_computed_where_it_was_put(layout: str, tmp_path: Path) -> None:
    files = starting_files(layout)
    assert sorted(files) == ["REFERENCE.md", "record.csv", "site.schema.json", "site.yaml"]
    for name, text in files.items():
        (tmp_path / name).write_text(text, encoding="utf-8")
    estimate = hydroyield.estimate(hydroyield.read_site(tmp_path / "site.yaml"))
    assert estimate.mean_annual_energy_mwh > 0


@pytest.mark.parametrize("layout", NAMES)
def test_the_files_are_those_of_the_folder(layout: str) -> None:
    files = starting_files(layout)
    source = CONFIGS / f"{layout.replace('-', '_')}.yaml"
    assert files["site.yaml"] == source.read_text(encoding="utf-8")
    assert files["record.csv"] == (CONFIGS / "record.csv").read_text(encoding="utf-8")
    assert files["site.schema.json"] == schema_text()


@pytest.mark.parametrize(
    ("layout", "hint"),
    [
        ("low-head-wier", "; did you mean low-head-weir?"),
        ("low_head_weir", "; did you mean low-head-weir?"),
        ("../pyproject", ""),
        ("", ""),
    ],
)
def test_an_unknown_layout_is_refused_with_those_that_are_known(layout: str, hint: str) -> None:
    with pytest.raises(InputError) as caught:
        starting_files(layout)
    known = f"'{layout}' is not known here; write one of {', '.join(NAMES)}"
    assert str(caught.value) == f"layout: {known}{hint}"


@pytest.mark.slow
def test_an_installed_package_brings_its_own(tmp_path: Path) -> None:
    """As in a wheel, into which the folder is put as hydroyield/site_configs."""
    settings = tomllib.loads((ROOT / "pyproject.toml").read_text(encoding="utf-8"))
    wheel = settings["tool"]["hatch"]["build"]["targets"]["wheel"]
    assert wheel["force-include"] == {"site_configs": "hydroyield/site_configs"}
    package = tmp_path / "hydroyield"
    shutil.copytree(ROOT / "hydroyield", package, ignore=shutil.ignore_patterns("__pycache__"))
    shutil.copytree(CONFIGS, package / "site_configs")
    code = (
        "import hydroyield.site.starting as s; print(s.__file__); print(*sorted(s.layouts())); "
        "print(*sorted(s.starting_files('pipe-outfall')))"
    )
    done = subprocess.run(
        [sys.executable, "-c", code],
        cwd=tmp_path, env={**os.environ, "PYTHONPATH": str(tmp_path)},
        capture_output=True, text=True, check=True,
    )  # fmt: skip
    where, names, files = done.stdout.splitlines()
    assert Path(where).is_relative_to(tmp_path)
    assert names.split() == NAMES
    assert files.split() == ["REFERENCE.md", "record.csv", "site.schema.json", "site.yaml"]
