"""Checks of the waterway: each loss has one owner, and none that matters is missing."""

from __future__ import annotations

from collections.abc import Iterator, Sequence

from hydroyield.checks import Check, warn_unless
from hydroyield.energy import Estimate
from hydroyield.site.models import SiteFile
from hydroyield.site.waterway_models import WaterwayLoss

LOW_HEAD = 10.0  # m of net head, below which the velocity head at the outlet counts
VERY_LOW_HEAD = 5.0  # m of net head, below which trash in the rack counts
TO_TAILWATER = ("kaplan", "semi_kaplan", "propeller", "francis", "other")  # with a draught tube
FAST_PIPE = 5.0  # m/s, above which a pipe is too narrow (common practice)


def waterway_checks(model: SiteFile, estimate: Estimate) -> Iterator[Check]:
    """Losses that seem counted twice, and losses that seem to be missing."""
    every = [*model.waterway, *(loss for group in model.turbines for loss in group.waterway)]
    yield _twice(model, every)
    yield from _missing(model, every, estimate)
    yield from _fast_pipes(model, estimate)


def _twice(model: SiteFile, every: Sequence[WaterwayLoss]) -> Check:
    doubts = []
    stated = [name for name in ("pipe", "trash_rack", "canal", "exit") if _has(every, name)]
    if _has(every, "loss_coefficient") and stated:
        doubts.append(f"a loss_coefficient stands beside {' and '.join(stated)}")
    in_branches = [loss for group in model.turbines for loss in group.waterway]
    if _has(model.waterway, "exit") and _has(in_branches, "exit"):
        doubts.append("the outlet is stated for the plant and for single units")
    if sum(loss.exit is not None for loss in model.waterway) > 1:
        doubts.append("the outlet is stated more than once")
    pipes = [loss.pipe for loss in every if loss.pipe is not None]
    if _has(every, "exit") and any(pipe.minor_losses >= 1.5 for pipe in pipes):
        doubts.append("minor_losses of a pipe may hold its exit (1.0), which stands by itself")
    return warn_unless(
        "loss_counted_twice",
        not doubts,
        len(doubts),
        0,
        "No loss of the waterway seems to be counted twice.",
        f"A loss may be counted twice: {'; '.join(doubts)}. Give each loss one place.",
    )


def _has(losses: Sequence[WaterwayLoss], name: str) -> bool:
    return any(getattr(loss, name) is not None for loss in losses)


def _missing(model: SiteFile, every: Sequence[WaterwayLoss], estimate: Estimate) -> Iterator[Check]:
    if not every or _has(every, "loss_coefficient"):
        return  # none at all has its own check, and a bare coefficient may hold anything
    groups = estimate.scheme.plant.groups
    heads = [group.rated_head for group in groups if group.type in TO_TAILWATER]
    if heads and min(heads) < LOW_HEAD:
        yield warn_unless(
            "loss_at_outlet",
            _has(every, "exit"),
            min(heads),
            LOW_HEAD,
            "The velocity head behind the draught tubes is stated.",
            f"At {min(heads):.3g} m of head the velocity head behind the draught tubes counts, and "
            "net head by IEC 60041 does not contain it; state exit: {area: ...} under waterway.",
        )
    low = min(group.rated_head for group in groups)
    if low < VERY_LOW_HEAD:
        yield warn_unless(
            "loss_at_rack",
            _has(every, "trash_rack"),
            low,
            VERY_LOW_HEAD,
            "The trash rack and its blockage are stated.",
            f"At {low:.3g} m of head trash in the rack counts; state trash_rack under waterway, "
            "with its blockage by month.",
        )


def _fast_pipes(model: SiteFile, estimate: Estimate) -> Iterator[Check]:
    pipes = estimate.scheme.heads.waterway.pipes
    if not pipes:
        return
    fastest = max(estimate.scheme.plant.rated_discharge / pipe.area for pipe in pipes)
    yield warn_unless(
        "pipe_velocity",
        fastest <= FAST_PIPE,
        fastest,
        FAST_PIPE,
        f"Water runs at up to {fastest:.2g} m/s in the pipe.",
        f"At rated discharge water runs at {fastest:.2g} m/s in the pipe, more than usual "
        f"({FAST_PIPE:g} m/s, common practice); losses and water hammer grow. Widen it.",
    )
