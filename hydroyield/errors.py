"""What can go wrong, as one tree.

    HydroyieldError
    ├── InputError            the user's input is at fault (exit 2); carries every fault found
    │   ├── SiteFileError     ... in the site file
    │   ├── RecordError       ... in the discharge record
    │   └── OutputError       ... the folder to write to
    └── ComputationError      the described plant cannot be computed (a fault of ours, exit 1)

The command line catches HydroyieldError and nothing else.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass


@dataclass(frozen=True)
class Fault:
    """One thing wrong with the input.

    file : name of the file as the user gave it
    line : line in that file, first line 1; None where the whole file is meant
    key : path of the key in a site file ("turbines[0].rated_head"); "" elsewhere
    message : what is wrong, and what to write instead
    """

    file: str
    line: int | None
    key: str
    message: str

    def __str__(self) -> str:
        where = self.file if self.line is None else f"{self.file}:{self.line}"
        return ": ".join(part for part in (where, self.key, self.message) if part)


class HydroyieldError(Exception):
    """Base of every error that the package raises on purpose."""


class InputError(HydroyieldError):
    """The input is at fault. `faults` lists everything found, in the order of the file."""

    def __init__(self, faults: Iterable[Fault]) -> None:
        self.faults = tuple(faults)
        super().__init__("\n".join(str(fault) for fault in self.faults))


class SiteFileError(InputError):
    """The site file is at fault."""


class RecordError(InputError):
    """The discharge record is at fault."""


class OutputError(InputError):
    """The folder to write to is at fault."""


class ComputationError(HydroyieldError):
    """A described plant that should be computable is not."""
