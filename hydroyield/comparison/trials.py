"""Plant options at one site, each computed as fully as an estimate.

`evaluated` runs them one after another, or over all processors where there are many; the numbers
are the same either way.
"""

from __future__ import annotations

import os
import signal
from collections.abc import Callable, Iterator, Sequence
from concurrent.futures import ProcessPoolExecutor
from contextlib import contextmanager
from dataclasses import dataclass

from hydroyield.energy import Estimate, estimate_energy
from hydroyield.errors import SiteFileError
from hydroyield.evidence.outages import with_placed_outage
from hydroyield.options.combination import Combination
from hydroyield.options.option import Option, option_of
from hydroyield.powerhouse import machine_types
from hydroyield.powerhouse.types import SMALL_MACHINE
from hydroyield.quantities import W_PER_KW
from hydroyield.site.assembly import assemble
from hydroyield.site.option_assembly import Machine, lacking, site_with, turbines_of
from hydroyield.site.plant_models import TurbineGroup
from hydroyield.site.reading import SiteDescription
from hydroyield.site.river_assembly import RiverAtSite

WORTH_SHARING = 40  # options; fewer are done before other processes have started
CHUNK = 4  # options that a process takes at once


@dataclass(frozen=True)
class Refused:
    """A combination that is no plant.

    number : 1, 2, ..., counted together with the options
    combination : what it would have been
    type : of the turbines
    machine : name of the machine, see `Machine`
    reason : why it cannot be
    """

    number: int
    combination: Combination
    type: str
    machine: str
    reason: str


@dataclass(frozen=True)
class Trial:
    """Everything that an option needs to be computed.

    site, river : where
    machines : to try
    """

    site: SiteDescription
    river: RiverAtSite
    machines: tuple[Machine, ...]

    def turbines(self, combination: Combination) -> tuple[TurbineGroup, ...]:
        """The turbine groups of a combination."""
        return turbines_of(self.machines[combination.machine], combination)

    def estimate(self, combination: Combination) -> Estimate:
        """The energy of a combination. Raises SiteFileError where it is no plant."""
        site = site_with(self.site, self.turbines(combination), combination.pipe_diameter)
        found = estimate_energy(assemble(site, self.river).scheme)
        return with_placed_outage(site, found)

    def option(self, number: int, combination: Combination) -> Option | Refused:
        """A combination as an option, or why it cannot be one."""
        machine = self.machines[combination.machine]
        reason = lacking(machine)
        if not reason:
            try:
                found = self.estimate(combination)
            except SiteFileError as error:
                reason = "; ".join(fault.message for fault in error.faults)
        if reason:
            return Refused(number, combination, machine.type, machine.name, reason)
        notes = tuple(_notes(machine, combination, found))
        return option_of(number, combination, machine.name, found, notes)


def _notes(machine: Machine, combination: Combination, found: Estimate) -> Iterator[str]:
    """What speaks against an option, beside its energy."""
    offered = float(found.operation.offered.max())
    if offered < combination.design_discharge * (1 - 1e-9):
        yield f"at most {offered:.3g} m3/s is offered, less than the design discharge"
    kind = machine_types().get(machine.type)
    groups = found.scheme.plant.groups
    if kind is None:
        return
    low, high = kind.head_range
    if any(not low <= group.rated_head <= high for group in groups):
        yield f"the rated head lies outside the usual {low:g} to {high:g} m of {machine.type}"
    typical = machine.keys.get("efficiency", "typical") == "typical"
    if typical and min(group.unit_capacity for group in groups) < SMALL_MACHINE:
        yield (
            f"the typical curve is for machines above {SMALL_MACHINE / W_PER_KW:.0f} kW; smaller "
            "ones reach 3 to 8 points less"
        )


def evaluated(
    trial: Trial, combinations: Sequence[Combination], done: Callable[[], None] = lambda: None
) -> list[Option | Refused]:
    """Every combination computed, in their order and numbered from 1.

    done : called after each
    """
    workers = os.cpu_count() or 1
    if len(combinations) < WORTH_SHARING or workers == 1:
        found = []
        for number, combination in enumerate(combinations, 1):
            found.append(trial.option(number, combination))
            done()
    else:
        found = _shared(trial, combinations, workers, done)
    return found


_TRIAL: list[Trial] = []  # of a worker process, set when it starts


def _start_worker(trial: Trial) -> None:
    _TRIAL[:] = [trial]


def _in_worker(number: int, combination: Combination) -> Option | Refused:
    return _TRIAL[0].option(number, combination)


def _shared(
    trial: Trial, combinations: Sequence[Combination], workers: int, done: Callable[[], None]
) -> list[Option | Refused]:
    """All processors take combinations in turn.

    The first is computed here, so that processes that are copies of this one find everything that
    it loads.
    """
    found = [trial.option(1, combinations[0])]
    done()
    pool = ProcessPoolExecutor(workers, initializer=_start_worker, initargs=(trial,))
    try:
        numbers = range(2, len(combinations) + 1)
        with _interrupts_wait():
            results = pool.map(_in_worker, numbers, combinations[1:], chunksize=CHUNK)
        for each in results:
            found.append(each)
            done()
    except BaseException:
        pool.shutdown(wait=False, cancel_futures=True)
        raise
    pool.shutdown()
    return found


@contextmanager
def _interrupts_wait() -> Iterator[None]:
    """Hold interrupts back while processes start: they inherit it, and this one stops them."""
    if not hasattr(signal, "pthread_sigmask"):
        yield
        return
    before = signal.pthread_sigmask(signal.SIG_BLOCK, {signal.SIGINT})
    try:
        yield
    finally:
        signal.pthread_sigmask(signal.SIG_SETMASK, before)
