"""From findings in a site file to faults that a person can act on.

A finding is a path into the file and a sentence; it becomes a fault once the lines of the file
are known. The models report findings through pydantic, and what pydantic has to say in its own
words is put into ours here.
"""

from __future__ import annotations

import difflib
from collections.abc import Iterable, Mapping, Sequence
from typing import Any, NoReturn

from pydantic import ValidationError
from pydantic_core import ErrorDetails, InitErrorDetails, PydanticCustomError

KeyPath = tuple[str | int, ...]
Finding = tuple[KeyPath, str]

_LONGEST_SHOWN = 60  # characters of the user's text that a message repeats

# what pydantic may still find by itself; everything else is found by our own validators
_PLAIN_WORDS = {
    "missing": "is missing",
    "extra_forbidden": "is not a key that is read here",
    "frozen_instance": "cannot be changed; build a new block instead",
    "tuple_type": "write a list here",
    "list_type": "write a list here",
    "dict_type": "write a block of keys here",
    "model_type": "write a block of keys here",
    "string_type": "write text here",
    "int_type": "write a whole number here",
    "float_type": "write a number here",
    "bool_type": "write true or false here",
    "literal_error": "is not one of the words that are read here",
}
_FALLBACK = "cannot be read; compare it with the reference page of the site file"


def refuse(findings: Iterable[Finding]) -> NoReturn:
    """Report findings from inside a validator; paths are relative to what is validated.

    Raises ValidationError, which pydantic merges into the findings of the whole file.
    """
    raise ValidationError.from_exception_data(
        "site file",
        [
            InitErrorDetails(
                type=PydanticCustomError("site_file", "{message}", {"message": message}),
                loc=path,
                input=None,
            )
            for path, message in findings
        ],
    )


def findings_of(error: ValidationError) -> list[Finding]:
    """Everything that a validation found, in our words."""
    return [(found["loc"], _message(found)) for found in error.errors(include_url=False)]


def _message(found: ErrorDetails) -> str:
    if found["type"] == "site_file":
        return found["msg"]
    if found["type"] == "value_error":
        return str(found["ctx"]["error"])
    return _PLAIN_WORDS.get(found["type"], _FALLBACK)


def key_text(path: KeyPath) -> str:
    """A path as people write it: ("turbines", 0, "rated_head") is "turbines[0].rated_head"."""
    text = ""
    for part in path:
        if isinstance(part, int):
            text += f"[{part}]"
        else:
            text += f".{shown(part)}" if text else shown(part)
    return text


def closest(word: str, known: Iterable[str]) -> str | None:
    """The known word that was probably meant, or None."""
    by_lower = {name.lower(): name for name in known}
    found = difflib.get_close_matches(word.lower(), by_lower, n=1, cutoff=0.7)
    return by_lower[found[0]] if found else None


def shown(value: object) -> str:
    """The user's text for use in a message: on one line and not too long."""
    text = " ".join(str(value).split())
    return text if len(text) <= _LONGEST_SHOWN else text[: _LONGEST_SHOWN - 3] + "..."


def flow(value: Any) -> str:
    """An example as one would write it on one line of a site file."""
    if isinstance(value, Mapping):
        return "{" + ", ".join(f"{key}: {flow(item)}" for key, item in value.items()) + "}"
    if isinstance(value, Sequence) and not isinstance(value, str):
        return "[" + ", ".join(flow(item) for item in value) + "]"
    return str(value).lower() if isinstance(value, bool) else str(value)
