"""Starting site files: one for each usual layout, with a record to try it out."""

from __future__ import annotations

from importlib import resources
from importlib.resources.abc import Traversable
from pathlib import Path

from hydroyield.errors import Fault, InputError
from hydroyield.site.faults import closest, shown
from hydroyield.site.schema import schema_text

SITE_FILE = "site.yaml"
RECORD_FILE = "record.csv"
REFERENCE_FILE = "REFERENCE.md"
SCHEMA_FILE = "site.schema.json"  # the name that the first line of each starting file gives


def layouts() -> dict[str, str]:
    """The layouts that have a starting file, by name, each with a sentence on what it is."""
    return {name: _what_it_is(_text(f"{_stem(name)}.yaml")) for name in _names()}


def starting_files(layout: str) -> dict[str, str]:
    """What a folder for a new site starts with.

    layout : a name from `layouts()`

    Returns {file name: text}: the site file, the record it names, the reference of its keys, and
    the schema for editors.
    Raises InputError for an unknown layout.
    """
    if layout not in _names():
        raise _unknown(layout)
    return {
        SITE_FILE: _text(f"{_stem(layout)}.yaml"),
        RECORD_FILE: _text(RECORD_FILE),
        REFERENCE_FILE: _text(REFERENCE_FILE),
        SCHEMA_FILE: schema_text(),
    }


def _names() -> list[str]:
    files = (entry.name for entry in _folder().iterdir())
    return sorted(name[: -len(".yaml")].replace("_", "-") for name in files if name[-5:] == ".yaml")


def _stem(layout: str) -> str:
    return layout.replace("-", "_")


def _folder() -> Traversable:
    """The starting files inside an installed package, or beside the package in a checkout."""
    installed = resources.files("hydroyield") / "site_configs"
    return installed if installed.is_dir() else Path(__file__).parents[2] / "site_configs"


def _text(name: str) -> str:
    return (_folder() / name).read_text("utf-8")


def _what_it_is(text: str) -> str:
    """The line below the one that names the schema."""
    return text.splitlines()[1].removeprefix("# ")


def _unknown(layout: str) -> InputError:
    known = _names()
    meant = closest(layout, known)
    hint = f"; did you mean {meant}?" if meant else ""
    message = f"'{shown(layout)}' is not known here; write one of {', '.join(known)}{hint}"
    return InputError([Fault("layout", None, "", message)])
