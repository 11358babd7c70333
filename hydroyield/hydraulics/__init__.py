"""Water, levels and losses: the head that a river discharge and a turbine discharge leave."""

from hydroyield.hydraulics.heads import Heads, HeadState
from hydroyield.hydraulics.levels import (
    FixedLevel,
    LevelTable,
    NormalDepth,
    StageDischarge,
    Weir,
)
from hydroyield.hydraulics.water import density, gravity

__all__ = [
    "FixedLevel",
    "HeadState",
    "Heads",
    "LevelTable",
    "NormalDepth",
    "StageDischarge",
    "Weir",
    "density",
    "gravity",
]
