"""A progress bar for people: only on a terminal, and only for work that takes a while."""

from __future__ import annotations

import sys
import time
from collections.abc import Iterator
from contextlib import contextmanager
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from rich.progress import Progress

PATIENCE = 2.0  # s without a bar


class Steps:
    """Work of a known number of steps. Call `done` after each."""

    def __init__(self, total: int, wanted: bool) -> None:
        self._total, self._wanted = total, wanted
        self._finished, self._start = 0, time.monotonic()
        self._bar: Progress | None = None

    def done(self, what: str) -> None:
        """Count a step; `what` says what was done."""
        self._finished += 1
        late = time.monotonic() - self._start > PATIENCE
        if self._bar is None and self._wanted and late:
            self._bar = _started_bar(self._total)
        if self._bar is not None:
            self._bar.update(self._bar.task_ids[0], completed=self._finished, description=what)

    def close(self) -> None:
        """Take the bar away."""
        if self._bar is not None:
            self._bar.stop()


def _started_bar(total: int) -> Progress:
    from rich.console import Console
    from rich.progress import Progress

    bar = Progress(console=Console(stderr=True), transient=True)
    bar.add_task("", total=total)
    bar.start()
    return bar


@contextmanager
def progress(total: int, *, quiet: bool = False) -> Iterator[Steps]:
    """Steps with a bar on the terminal's stderr after two seconds; none when quiet or piped."""
    steps = Steps(total, wanted=not quiet and sys.stderr.isatty())
    try:
        yield steps
    finally:
        steps.close()
