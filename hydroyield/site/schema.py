"""The site file as a JSON Schema, with which editors complete keys and underline slips.

An editor sees less than the tool: a quantity is a number or text to it, whatever the unit. It is
stricter in one thing: whole numbers and switches (true, false) must stand without quotes.
"""

from __future__ import annotations

import json
from typing import Any

from hydroyield.site.models import SiteFile

DIALECT = "https://json-schema.org/draft/2020-12/schema"
TITLE = "Site file of hydroyield"
_NULL = {"type": "null"}


def schema_text() -> str:
    """The JSON Schema of a site file, draft 2020-12, as the text of a file."""
    return json.dumps(site_schema(), indent=2, ensure_ascii=False) + "\n"


def site_schema() -> dict[str, Any]:
    """The JSON Schema of a site file, draft 2020-12."""
    schema = SiteFile.model_json_schema()
    blocks = {name: _block(block) for name, block in schema.pop("$defs").items()}
    return {"$schema": DIALECT, **_block(schema), "title": TITLE, "$defs": blocks}


def _block(block: dict[str, Any]) -> dict[str, Any]:
    """The schema of a block without the titles that pydantic makes up from the names of keys."""
    plain = {name: entry for name, entry in block.items() if name != "title"}
    plain["properties"] = {key: _key(entry) for key, entry in block["properties"].items()}
    return plain


def _key(entry: dict[str, Any]) -> dict[str, Any]:
    """The schema of a key. A key is written with a value or left out: there is no null."""
    plain = {name: part for name, part in entry.items() if name != "title"}
    if plain.get("default", "") is None:
        del plain["default"]
    if _NULL in plain.get("anyOf", ()):
        forms = [form for form in plain.pop("anyOf") if form != _NULL]
        plain |= forms[0] if len(forms) == 1 else {"anyOf": forms}
    return plain
