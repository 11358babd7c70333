"""Raising faults of a record: which lines, what is wrong, what to write instead."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass
from typing import TypeVar

import numpy as np
from numpy.typing import NDArray

from hydroyield.errors import Fault, RecordError

SHOWN = 5  # lines named one by one in a message; the rest is counted
T = TypeVar("T")


@dataclass(frozen=True)
class Source:
    """The record file as the user knows it.

    name : the file's name as given
    """

    name: str

    def fault(self, message: str, line: int | None = None, key: str = "") -> Fault:
        """One fault of this file; `key` is the key of the site file that holds the remedy."""
        path = f"discharge.record.{key}" if key else ""
        return Fault(self.name, None if line is None else int(line), path, message)

    def error(self, message: str, line: int | None = None, key: str = "") -> RecordError:
        """The same as an error to raise."""
        return RecordError([self.fault(message, line, key)])


def attempt(faults: list[Fault], step: Callable[[], T]) -> T | None:
    """Run a step; on a record error keep its faults and return None, so that others can follow."""
    try:
        return step()
    except RecordError as error:
        faults.extend(error.faults)
        return None


def first_lines(lines: Iterable[int] | NDArray[np.int64]) -> tuple[int, ...]:
    """The first few line numbers, rising."""
    return tuple(int(line) for line in sorted(lines)[:SHOWN])


def in_lines(lines: Sequence[int] | NDArray[np.int64]) -> str:
    """ "line 4", "lines 4 and 9", "lines 4, 9, 12, 13, 20 and 7 more"."""
    shown = [str(line) for line in first_lines(lines)]
    if len(lines) == 1:
        return f"line {shown[0]}"
    if len(lines) > SHOWN:
        return f"lines {', '.join(shown)} and {len(lines) - SHOWN} more"
    return f"lines {', '.join(shown[:-1])} and {shown[-1]}"


def quoted_texts(texts: Sequence[str], lines: Sequence[int] | NDArray[np.int64]) -> str:
    """ "'Ice' (line 4), 'Eqp' (line 9) and 12 more"."""
    shown = [
        f"'{shorten(text)}' (line {line})"
        for text, line in zip(texts[:SHOWN], lines[:SHOWN], strict=True)
    ]
    rest = len(texts) - len(shown)
    return ", ".join(shown) + (f" and {rest} more" if rest else "")


def shorten(text: str, width: int = 40) -> str:
    """A text for a message, cut where it is long."""
    return text if len(text) <= width else text[: width - 3] + "..."
