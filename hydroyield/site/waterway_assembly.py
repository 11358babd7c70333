"""The waterway of a described site in numbers."""

from __future__ import annotations

from collections.abc import Iterable, Sequence

from hydroyield.hydraulics.losses import (
    Pipe,
    Waterway,
    canal_coefficient,
    exit_coefficient,
    rack_coefficient,
)
from hydroyield.hydraulics.water import (
    STANDARD_GRAVITY,
    USUAL_TEMPERATURE,
    gravity,
    kinematic_viscosity,
)
from hydroyield.site.models import Site
from hydroyield.site.waterway_models import TrashRack, WaterwayLoss

MONTHS = range(12)


def site_gravity(site: Site) -> float:
    """Gravity at the site [m/s2]; 9.81 where no latitude is given."""
    if site.latitude is None:
        return STANDARD_GRAVITY
    return gravity(site.latitude, site.altitude or 0.0)


def site_viscosity(site: Site) -> float:
    """Kinematic viscosity of the water [m2/s]; that of 10 degC where no temperature is given."""
    known = site.water_temperature
    return kinematic_viscosity(USUAL_TEMPERATURE if known is None else known)


def waterway_of(losses: Sequence[WaterwayLoss], site: Site) -> Waterway:
    """Everything that one discharge loses on its way."""
    fall = site_gravity(site)
    racks = [loss.trash_rack for loss in losses if loss.trash_rack is not None]
    return Waterway(
        fixed=sum(_fixed(losses, fall)),
        pipes=tuple(_pipes(losses, site)),
        racks_by_month=tuple(sum(_rack(rack, m, fall) for rack in racks) for m in MONTHS),
    )


def _fixed(losses: Sequence[WaterwayLoss], fall: float) -> Iterable[float]:
    for loss in losses:
        if loss.loss_coefficient is not None:
            yield loss.loss_coefficient
        if loss.exit is not None:
            yield exit_coefficient(loss.exit.area, fall)
        if loss.canal is not None:
            canal = loss.canal
            yield canal_coefficient(
                canal.length, canal.bottom_width, canal.side_slope, canal.depth, canal.manning_n
            )


def _pipes(losses: Sequence[WaterwayLoss], site: Site) -> Iterable[Pipe]:
    for loss in losses:
        if loss.pipe is not None:
            pipe = loss.pipe
            yield Pipe(
                pipe.length,
                pipe.diameter,
                pipe.roughness,
                pipe.minor_losses,
                pipe.parallel,
                site_viscosity(site),
                site_gravity(site),
            )


def _rack(rack: TrashRack, month: int, fall: float) -> float:
    return rack_coefficient(
        rack.bar_thickness,
        rack.clear_spacing,
        rack.bar_shape,
        rack.inclination,
        rack.area,
        rack.blockage[month],
        fall,
    )
