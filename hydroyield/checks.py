"""One kind of finding, shared by all rooms: what was looked at, and how it came out."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

Outcome = Literal["pass", "warn", "fail"]


@dataclass(frozen=True)
class Check:
    """The outcome of one plausibility check.

    name : stable name in snake_case
    outcome : "pass"; "warn", the result stands but needs a look; "fail", the result should not be
        used as it is
    value : what was found, in the unit that the message states; None where there is no number
    limit : what it was held against, in the same unit; None where there is no number
    message : one sentence for people, ending with the remedy unless the outcome is "pass"
    """

    name: str
    outcome: Outcome
    value: float | None
    limit: float | None
    message: str


def warn_unless(
    name: str, good: bool, value: float | None, limit: float | None, fine: str, bad: str
) -> Check:
    """A check that passes with the sentence `fine`, or warns with `bad`."""
    return Check(name, "pass" if good else "warn", value, limit, fine if good else bad)
