"""The package as it is installed and started: light, complete, and with help everywhere."""

from __future__ import annotations

import subprocess
import sys
import zipfile
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest
import typer.main

import hydroyield
from hydroyield.cli import app

ROOT = Path(__file__).parents[1]
# pydantic is missing here: the command-line library loads it on its own where it is installed
HEAVY = ["numpy", "pandas", "matplotlib", "scipy", "yaml", "jinja2"]

START = """\
import sys
from hydroyield.__main__ import main
for arguments in {asked}:
    sys.argv = ["hydroyield", *arguments]
    try:
        main()
    except SystemExit as done:
        assert not done.code, (arguments, done.code)
    print("loaded:", *[name for name in {heavy} if name in sys.modules])
"""


def python(*arguments: str, **options: Any) -> subprocess.CompletedProcess[str]:
    command = [sys.executable, *arguments]
    return subprocess.run(command, capture_output=True, text=True, check=False, **options)


def commands() -> dict[str, Any]:
    group: Any = typer.main.get_command(app)
    return dict(group.commands)


def every_parameter() -> Iterator[tuple[str, Any]]:
    group: Any = typer.main.get_command(app)
    for name, command in [("", group), *commands().items()]:
        for parameter in command.params:
            yield f"{name} {parameter.name}", parameter


# --- starting -------------------------------------------------------------------------------------


def test_asking_for_help_loads_nothing_heavy() -> None:
    asked = [["--version"], ["--help"], *([name, "--help"] for name in commands())]
    said = python("-c", START.format(heavy=HEAVY, asked=asked))
    assert said.returncode == 0, said.stderr
    loaded = [line for line in said.stdout.splitlines() if line.startswith("loaded:")]
    assert loaded == ["loaded:"] * len(asked)


def test_importing_the_package_loads_nothing_heavy() -> None:
    said = python("-c", f"import sys, hydroyield; print(set({HEAVY}) & sys.modules.keys())")
    assert said.stdout.strip() == "set()", said.stderr


def test_it_runs_as_a_module() -> None:
    said = python("-m", "hydroyield", "--version")
    assert (said.returncode, said.stderr) == (0, "")
    assert said.stdout.strip() == f"hydroyield {hydroyield.__version__}"


def test_a_bad_input_is_one_message_and_exit_2(tmp_path: Path) -> None:
    said = python("-m", "hydroyield", "check", str(tmp_path / "none.yaml"))
    assert (said.returncode, said.stdout) == (2, "")
    assert said.stderr.count("\n") == 1
    assert "there is no such file" in said.stderr


# --- help -----------------------------------------------------------------------------------------


def test_every_command_has_help() -> None:
    assert set(commands()) >= {"estimate", "check"}
    for name, command in commands().items():
        assert command.help, name
        assert command.help.strip()[0].isupper(), name
        assert command.help.strip().endswith("."), name


@pytest.mark.parametrize(
    "parameter", [pytest.param(found, id=name.strip()) for name, found in every_parameter()]
)
def test_every_option_and_argument_has_help(parameter: Any) -> None:
    if parameter.name == "help":
        return
    assert parameter.help
    assert parameter.help.strip().endswith(".")


# --- the public face ------------------------------------------------------------------------------


def test_all_names_are_there_and_no_others() -> None:
    for name in hydroyield.__all__:
        assert getattr(hydroyield, name) is not None
    assert dir(hydroyield) == sorted(hydroyield.__all__)
    assert set(hydroyield.__all__) == set(hydroyield._HOMES) | {"__version__"}
    assert {"read_site", "read_record", "estimate"} <= set(hydroyield.__all__)


def test_a_name_that_is_not_there_is_an_attribute_error() -> None:
    with pytest.raises(AttributeError, match="no attribute 'estimat'"):
        hydroyield.estimat  # noqa: B018


@pytest.mark.parametrize("name", sorted(hydroyield._HOMES))
def test_public_things_say_what_they_are(name: str) -> None:
    found = getattr(hydroyield, name)
    assert found.__doc__
    assert found.__doc__.strip().split("\n")[0].endswith(".")


# --- the wheel ------------------------------------------------------------------------------------


@pytest.fixture(scope="module")
def wheel(tmp_path_factory: pytest.TempPathFactory) -> list[str]:
    """Names of the files in a wheel built from this folder."""
    folder = tmp_path_factory.mktemp("wheel")
    said = python(
        "-m", "pip", "wheel", "--no-deps", "--quiet", "--wheel-dir", str(folder), str(ROOT)
    )
    assert said.returncode == 0, said.stderr
    (built,) = folder.glob("hydroyield-*.whl")
    return zipfile.ZipFile(built).namelist()


@pytest.mark.slow
def test_the_wheel_holds_code_and_data(wheel: list[str]) -> None:
    assert f"hydroyield-{hydroyield.__version__}.dist-info/METADATA" in wheel
    inside = {name.removeprefix("hydroyield/") for name in wheel if name.startswith("hydroyield/")}
    assert inside >= {"__main__.py", "py.typed", "powerhouse/machine_types.csv"}
    source = ROOT / "hydroyield"
    wanted = {
        path.relative_to(source).as_posix()
        for path in source.rglob("*")
        if path.is_file() and "__pycache__" not in path.parts
    }
    assert wanted - inside == set()


@pytest.mark.slow
def test_the_wheel_holds_the_starting_site_files(wheel: list[str]) -> None:
    wanted = {f"hydroyield/site_configs/{p.name}" for p in (ROOT / "site_configs").glob("*.yaml")}
    assert wanted
    assert wanted - set(wheel) == set()


@pytest.mark.slow
def test_the_wheel_holds_no_tests_and_no_demos(wheel: list[str]) -> None:
    rooms = {name.split("/")[0] for name in wheel}
    assert rooms == {"hydroyield", f"hydroyield-{hydroyield.__version__}.dist-info"}
