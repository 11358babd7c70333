"""A site file as it was understood, in SI, with what was filled in and what was left out."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Any

from hydroyield.site.notes import filled_in, left_out, to_derive, without_source
from hydroyield.site.reading import SiteDescription


def understood(site: SiteDescription) -> dict[str, Any]:
    """What a site file says, as plain data."""
    return {
        "format": 1,
        "site": {"name": site.name},
        "stated": site.model.model_dump(mode="json", exclude_none=True, exclude_unset=True),
        "filled_in": {note.key: note.text for note in filled_in(site)},
        "to_derive": to_derive(site),
        "left_out": {note.key: note.text for note in left_out(site)},
        "without_source": without_source(site),
        "records_missing": [
            str(path) for path in (*site.record_paths, *site.reference_paths) if not path.exists()
        ],
    }


def understood_text(site: SiteDescription) -> str:
    """The same for people."""
    facts = understood(site)
    lines = [f"{site.file_name} is in order.", "", "Stated, in SI (m, m3/s, W, m2, degC, shares):"]
    lines += [f"  {line}" for line in _lines(facts["stated"])]
    for title, key in (("Filled in:", "filled_in"), ("Left out of the calculation:", "left_out")):
        if facts[key]:
            lines += ["", title, *(f"  {name}: {text}" for name, text in facts[key].items())]
    if facts["to_derive"]:
        lines += ["", "Derived from the rest when the record is read:"]
        lines += [f"  {name}" for name in facts["to_derive"]]
    if facts["without_source"]:
        lines += ["", "Without a source, so taken as assumptions:"]
        lines += [f"  {name}" for name in facts["without_source"]]
    for path in facts["records_missing"]:
        lines += ["", f"The record {path} is not there yet; estimate needs it."]
    return "\n".join(lines)


def _lines(value: Any, path: str = "") -> Iterator[str]:
    """One line for each value, its path in front."""
    if isinstance(value, Mapping):
        for key, entry in value.items():
            yield from _lines(entry, f"{path}.{key}" if path else str(key))
    elif isinstance(value, list) and any(isinstance(entry, Mapping) for entry in value):
        for number, entry in enumerate(value):
            yield from _lines(entry, f"{path}[{number}]")
    else:
        yield f"{path}: {_shown(value)}"


def _shown(value: Any) -> str:
    if isinstance(value, list):
        return "[" + ", ".join(_shown(entry) for entry in value) + "]"
    return f"{value:.6g}" if isinstance(value, float) else str(value)
