"""Makes the records of the demo sites and of the starting site files. Every value is invented.

    python demo_sites/make_records.py

writes each record byte for byte as it lies in the repository. A further demo is one more `Demo`
in `DEMOS`; the starting site files share one short record, with a column for each kind of water.

The model is a shot-noise process through linear reservoirs, as in Weiss (1977), Water Resour.
Res. 13(1): 101-108, cited from memory: wet days come in spells (a Markov chain of two states),
the depth of rain on them is random, the soil holds part of it back and evaporates it, and the
rest leaves through a quick store and two slow stores that keep the river going in dry weather.
In the mountains it snows on cold days, and the snow melts by degree-days (Hock, 2003, J. Hydrol.
282: 104-115, cited from memory).
Weather that persists from month to month makes wet and dry years.
"""

from __future__ import annotations

import datetime
import math
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

HERE = Path(__file__).resolve().parent
STARTING_RECORD = HERE.parent / "site_configs" / "record.csv"
DAY = datetime.timedelta(days=1)
SECONDS_PER_DAY = 86400.0
WARM_UP_DAYS = 1461  # before the record starts, so that the stores forget how they began
WEATHER_MEMORY = 0.55  # correlation of the weather of one month with that of the month before
WARMTH_MEMORY = 0.8  # correlation of the temperature of one day with that of the day before

Floats = NDArray[np.float64]
Monthly = tuple[float, ...]  # 12 values, January first


@dataclass(frozen=True)
class Climate:
    """Rain and evaporation of a catchment, monthly values January first.

    wet_share : share of days with rain
    wet_spell : 0, wet days are independent, to 1, rain never stops
    depth : mean rain of a wet day [mm]
    depth_shape : 1, depths are exponential; above 1, more of the rain comes in few large events
    evaporation : from moist soil [mm/d]
    spread : standard deviation of the logarithm of a month's weather
    """

    wet_share: Monthly
    wet_spell: float
    depth: Monthly
    depth_shape: float
    evaporation: Monthly
    spread: float


@dataclass(frozen=True)
class Snow:
    """The cold of a mountain catchment, temperatures of a month January first.

    temperature : mean at each height band [degC], lowest band first; bands are equally large
    spread : standard deviation of single days [degC]
    melt : of a degree above freezing [mm/(degC d)]
    """

    temperature: tuple[Monthly, ...]
    spread: float
    melt: float


@dataclass(frozen=True)
class Catchment:
    """How a catchment turns rain into discharge.

    area : at the gauge [km2]
    soil : water that the soil can lack before nothing runs off [mm]
    stores : (share of the runoff, time constant [d]) of each linear reservoir; shares add up to 1
    """

    area: float
    soil: float
    stores: tuple[tuple[float, float], ...]


@dataclass(frozen=True)
class Gap:
    """Days without a value, both ends included."""

    first: datetime.date
    last: datetime.date


@dataclass(frozen=True)
class Demo:
    """One demo site's record.

    folder, file : where the record lies, below this script
    gauge : its name for the comment in the file
    seed : of the random numbers
    first, last : first and last day
    gaps : days left blank
    snow : None where all of it is rain
    """

    folder: str
    file: str
    gauge: str
    seed: int
    first: datetime.date
    last: datetime.date
    climate: Climate
    catchment: Catchment
    gaps: tuple[Gap, ...]
    snow: Snow | None = None

    @property
    def path(self) -> Path:
        """Where the record lies."""
        return HERE / self.folder / self.file


DEMOS = (
    Demo(
        folder="quernholm_weir",
        file="ashwen_daily.csv",
        gauge="River Ashwen at Sallow Bridge",
        seed=4717,
        first=datetime.date(1995, 10, 1),
        last=datetime.date(2023, 9, 30),
        climate=Climate(
            wet_share=(0.58, 0.52, 0.50, 0.45, 0.44, 0.43, 0.44, 0.47, 0.48, 0.56, 0.58, 0.59),
            wet_spell=0.35,
            depth=(6.8, 6.0, 5.5, 4.9, 5.0, 5.4, 5.8, 6.2, 6.3, 6.9, 7.1, 7.2),
            depth_shape=1.3,
            evaporation=(0.4, 0.6, 1.1, 1.9, 2.7, 3.1, 3.1, 2.6, 1.7, 0.9, 0.5, 0.3),
            spread=0.22,
        ),
        catchment=Catchment(
            area=486.0, soil=160.0, stores=((0.46, 1.4), (0.34, 14.0), (0.20, 110.0))
        ),
        gaps=(
            Gap(datetime.date(1998, 7, 14), datetime.date(1998, 7, 16)),
            Gap(datetime.date(2001, 12, 25), datetime.date(2002, 2, 11)),
            Gap(datetime.date(2010, 6, 3), datetime.date(2010, 6, 4)),
            Gap(datetime.date(2016, 12, 26), datetime.date(2016, 12, 27)),
            Gap(datetime.date(2019, 8, 19), datetime.date(2019, 8, 21)),
        ),
    ),
    Demo(
        folder="skarrig_burn",
        file="skarrig_daily.csv",
        gauge="Skarrig Burn at Low Sheepfold",
        seed=5121,
        first=datetime.date(2001, 10, 1),
        last=datetime.date(2024, 9, 30),
        climate=Climate(
            wet_share=(0.70, 0.66, 0.64, 0.56, 0.54, 0.55, 0.60, 0.62, 0.64, 0.69, 0.71, 0.72),
            wet_spell=0.30,
            depth=(9.4, 8.3, 7.6, 6.3, 6.2, 6.6, 7.2, 7.8, 8.3, 9.3, 9.6, 9.9),
            depth_shape=1.2,
            evaporation=(0.2, 0.4, 0.8, 1.4, 2.0, 2.3, 2.3, 1.9, 1.2, 0.6, 0.3, 0.2),
            spread=0.24,
        ),
        catchment=Catchment(area=6.1, soil=60.0, stores=((0.55, 1.2), (0.27, 9.0), (0.18, 80.0))),
        gaps=(
            Gap(datetime.date(2006, 1, 9), datetime.date(2006, 1, 10)),
            Gap(datetime.date(2013, 8, 2), datetime.date(2013, 8, 4)),
        ),
    ),
    Demo(
        folder="osterby_mill",
        file="wennet_daily.csv",
        gauge="River Wennet at Osterby Bridge",
        seed=6093,
        first=datetime.date(2008, 5, 1),
        last=datetime.date(2016, 1, 31),
        climate=Climate(
            wet_share=(0.50, 0.46, 0.45, 0.42, 0.42, 0.42, 0.42, 0.42, 0.43, 0.47, 0.50, 0.51),
            wet_spell=0.32,
            depth=(4.9, 4.6, 4.5, 4.6, 5.0, 5.6, 6.0, 5.9, 5.4, 5.3, 5.3, 5.2),
            depth_shape=1.3,
            evaporation=(0.3, 0.5, 1.0, 1.7, 2.4, 2.8, 2.8, 2.3, 1.5, 0.8, 0.4, 0.2),
            spread=0.20,
        ),
        catchment=Catchment(
            area=150.0, soil=130.0, stores=((0.30, 1.8), (0.34, 18.0), (0.36, 150.0))
        ),
        gaps=(
            Gap(datetime.date(2010, 12, 18), datetime.date(2010, 12, 29)),
            Gap(datetime.date(2013, 6, 6), datetime.date(2013, 6, 8)),
        ),
    ),
    Demo(
        folder="tamsel_fork",
        file="tamsel_daily.csv",
        gauge="Tamsel Fork above Cinder Meadow",
        seed=7309,
        first=datetime.date(2003, 10, 1),
        last=datetime.date(2023, 9, 30),
        climate=Climate(
            wet_share=(0.46, 0.45, 0.45, 0.44, 0.45, 0.46, 0.45, 0.44, 0.40, 0.40, 0.43, 0.46),
            wet_spell=0.35,
            depth=(8.0, 7.8, 7.6, 7.4, 7.6, 8.0, 8.2, 8.0, 7.2, 7.2, 7.8, 8.0),
            depth_shape=1.2,
            evaporation=(0.1, 0.1, 0.2, 0.5, 1.1, 1.8, 2.1, 1.8, 1.1, 0.5, 0.2, 0.1),
            spread=0.22,
        ),
        catchment=Catchment(area=8.6, soil=50.0, stores=((0.40, 1.5), (0.30, 12.0), (0.30, 130.0))),
        gaps=(
            Gap(datetime.date(2009, 2, 3), datetime.date(2009, 2, 4)),
            Gap(datetime.date(2011, 6, 11), datetime.date(2011, 6, 19)),
            Gap(datetime.date(2018, 11, 20), datetime.date(2018, 11, 21)),
        ),
        snow=Snow(
            temperature=(
                (-5.5, -4.8, -2.4, 1.0, 5.2, 9.0, 11.6, 11.2, 8.0, 3.6, -1.4, -4.6),
                (-7.5, -7.0, -4.8, -1.6, 2.8, 6.6, 9.2, 8.8, 5.8, 1.6, -3.4, -6.6),
                (-9.5, -9.2, -7.2, -4.2, 0.4, 4.2, 6.8, 6.4, 3.6, -0.4, -5.4, -8.6),
            ),
            spread=3.0,
            melt=3.8,
        ),
    ),
)


@dataclass(frozen=True)
class Stream:
    """A natural column of the record of the starting site files."""

    seed: int
    climate: Climate
    catchment: Catchment


@dataclass(frozen=True)
class Supply:
    """A pipe that supplies a town: a nearly constant flow.

    mean : [m3/s]
    season : half the swing over the year, largest in July, as a share of the mean
    weekend : drop on Saturdays and Sundays, as a share of the mean
    spread : standard deviation of single days, as a share of the mean
    """

    seed: int
    mean: float
    season: float
    weekend: float
    spread: float


STARTING_FIRST = datetime.date(2020, 10, 1)
STARTING_LAST = datetime.date(2023, 9, 30)
STARTING_RIVER = Stream(
    seed=2203,
    climate=Climate(
        wet_share=(0.56, 0.52, 0.50, 0.46, 0.44, 0.44, 0.45, 0.47, 0.48, 0.54, 0.57, 0.58),
        wet_spell=0.35,
        depth=(6.5, 5.9, 5.4, 4.9, 5.0, 5.5, 5.9, 6.2, 6.2, 6.7, 6.9, 7.0),
        depth_shape=1.25,
        evaporation=(0.4, 0.6, 1.1, 1.9, 2.7, 3.1, 3.1, 2.6, 1.7, 0.9, 0.5, 0.3),
        spread=0.18,
    ),
    catchment=Catchment(area=480.0, soil=150.0, stores=((0.42, 1.6), (0.36, 16.0), (0.22, 120.0))),
)
STARTING_STREAM = Stream(
    seed=2204,
    climate=Climate(
        wet_share=(0.62, 0.58, 0.57, 0.52, 0.50, 0.50, 0.52, 0.54, 0.55, 0.60, 0.62, 0.63),
        wet_spell=0.3,
        depth=(8.0, 7.2, 6.8, 6.0, 6.0, 6.4, 6.8, 7.2, 7.4, 8.0, 8.2, 8.4),
        depth_shape=1.25,
        evaporation=(0.3, 0.5, 0.9, 1.6, 2.2, 2.6, 2.6, 2.2, 1.4, 0.7, 0.4, 0.2),
        spread=0.18,
    ),
    catchment=Catchment(area=9.0, soil=110.0, stores=((0.52, 0.9), (0.28, 10.0), (0.20, 90.0))),
)
STARTING_PIPE = Supply(seed=2205, mean=0.282, season=0.15, weekend=0.05, spread=0.03)


def uniforms(seed: int) -> Iterator[float]:
    """Random numbers between 0 and 1, neither included.

    They are made from the raw stream of the generator, which numpy keeps for good; its
    distributions may change from version to version.
    """
    generator = np.random.PCG64(seed)
    while True:
        for raw in generator.random_raw(4096):
            yield (int(raw >> np.uint64(11)) + 0.5) / 2**53


def days_between(first: datetime.date, last: datetime.date) -> list[datetime.date]:
    """All days from `first` to `last`, both included."""
    return [first + k * DAY for k in range((last - first).days + 1)]


def rainfall(days: list[datetime.date], climate: Climate, draw: Iterator[float]) -> Floats:
    """Rain of each day [mm], shape (n,)."""
    rain = np.zeros(len(days))
    wet, weather = False, 0.0
    mean_of_shape = math.gamma(1 + climate.depth_shape)
    for k, day in enumerate(days):
        if day.day == 1:
            news = math.sqrt(1 - WEATHER_MEMORY**2) * standard_normal(draw)
            weather = WEATHER_MEMORY * weather + news
        share = climate.wet_share[day.month - 1]
        wet = next(draw) < share + climate.wet_spell * (wet - share)
        size = (-math.log(next(draw))) ** climate.depth_shape / mean_of_shape
        factor = math.exp(climate.spread * weather - climate.spread**2 / 2)
        rain[k] = wet * climate.depth[day.month - 1] * factor * size
    return rain


def warmth(days: list[datetime.date], spread: float, draw: Iterator[float]) -> Floats:
    """How much warmer than its month each day is [degC], shape (n,)."""
    warmer = np.zeros(len(days))
    now = 0.0
    for k in range(len(days)):
        news = math.sqrt(1 - WARMTH_MEMORY**2) * spread * standard_normal(draw)
        now = WARMTH_MEMORY * now + news
        warmer[k] = now
    return warmer


def melted(falling: Floats, temperature: Floats, melt: float) -> Floats:
    """Rain and melt water at the ground [mm/d], shape (n,).

    falling : rain or snow [mm/d]; snow below freezing
    temperature : [degC]
    melt : of a degree above freezing [mm/(degC d)]
    """
    water = np.zeros(falling.size)
    lying = 0.0
    for k, (depth, degrees) in enumerate(zip(falling, temperature, strict=True)):
        if degrees < 0:
            lying += depth
            continue
        thaw = min(lying, melt * degrees)
        lying -= thaw
        water[k] = depth + thaw
    return water


def snowed(days: list[datetime.date], falling: Floats, snow: Snow, seed: int) -> Floats:
    """What reaches the ground as water, mean over the height bands [mm/d], shape (n,)."""
    warmer = warmth(days, snow.spread, uniforms(seed))
    bands = []
    for monthly in snow.temperature:
        mean = np.array([mean_of_day(monthly, day) for day in days])
        bands.append(melted(falling, mean + warmer, snow.melt))
    return sum(bands, np.zeros(len(days))) / len(bands)


def mean_of_day(monthly: Monthly, day: datetime.date) -> float:
    """A monthly value on one day: it holds on the 15th, and is linear from there to the next."""
    here = day.month - 1 if day.day >= 15 else (day.month - 2) % 12
    past = (day.day - 15) / 30 if day.day >= 15 else (day.day + 15) / 30
    return monthly[here] + min(past, 1.0) * (monthly[(here + 1) % 12] - monthly[here])


def runoff(days: list[datetime.date], rain: Floats, evaporation: Monthly, soil: float) -> Floats:
    """What the soil lets go [mm/d], shape (n,): little in a dry summer, nearly all in winter."""
    released = np.zeros(len(days))
    lacking = 0.0
    for k, day in enumerate(days):
        moist = 1 - lacking / soil
        held_back = min(lacking, rain[k] * (1 - moist**2))
        released[k] = rain[k] - held_back
        lacking += evaporation[day.month - 1] * moist - held_back
    return released


def drained(inflow: Floats, time_constant: float) -> Floats:
    """Outflow of a linear reservoir that starts empty, in the unit of `inflow`, shape (n,).

    time_constant : days in which an undisturbed outflow falls to 1/e
    """
    kept = math.exp(-1 / time_constant)
    outflow = np.zeros(inflow.size)
    stored = 0.0
    for k, entering in enumerate(inflow):
        stored += entering
        outflow[k] = stored * (1 - kept)
        stored *= kept
    return outflow


def discharge(water: Demo | Stream, first: datetime.date, last: datetime.date) -> Floats:
    """Daily mean discharge from the first to the last day [m3/s], gaps not yet made."""
    days = days_between(first - WARM_UP_DAYS * DAY, last)
    rain = rainfall(days, water.climate, uniforms(water.seed))
    if isinstance(water, Demo) and water.snow is not None:
        rain = snowed(days, rain, water.snow, water.seed + 1)
    released = runoff(days, rain, water.climate.evaporation, water.catchment.soil)
    depth = sum(
        (drained(share * released, time) for share, time in water.catchment.stores),
        np.zeros(len(days)),
    )
    return depth[WARM_UP_DAYS:] * water.catchment.area * 1000 / SECONDS_PER_DAY


def standard_normal(draw: Iterator[float]) -> float:
    """A number that is close to standard normal."""
    return sum(next(draw) for _ in range(12)) - 6


def supplied(supply: Supply, days: list[datetime.date]) -> Floats:
    """Daily mean flow of a supply [m3/s], shape (n,)."""
    draw = uniforms(supply.seed)
    flow = np.zeros(len(days))
    for k, day in enumerate(days):
        season = supply.season * math.cos(2 * math.pi * (day.timetuple().tm_yday - 196) / 365.25)
        weekend = supply.weekend if day.weekday() >= 5 else 0.0
        flow[k] = supply.mean * (1 + season - weekend + supply.spread * standard_normal(draw))
    return flow


def three_digits(value: float) -> str:
    """A discharge as gauges report it: "0.873", "10.0", "123"."""
    text = np.format_float_positional(value, precision=3, unique=False, fractional=False, trim="k")
    return text.rstrip(".")


def record_text(demo: Demo) -> str:
    """The record as the text of a CSV file."""
    blank = {day for gap in demo.gaps for day in days_between(gap.first, gap.last)}
    days = days_between(demo.first, demo.last)
    rows = [
        f"{day.isoformat()},{'' if day in blank else three_digits(value)}"
        for day, value in zip(days, discharge(demo, demo.first, demo.last), strict=True)
    ]
    comments = [
        f"# {demo.gauge}, daily mean discharge. The river is invented, and so are all values:",
        f"# made by demo_sites/make_records.py with seed {demo.seed}.",
    ]
    return "\n".join([*comments, "date,discharge_m3s", *rows]) + "\n"


def starting_record_text() -> str:
    """The record beside the starting site files: a river, a hill stream and a pipe."""
    days = days_between(STARTING_FIRST, STARTING_LAST)
    river = discharge(STARTING_RIVER, STARTING_FIRST, STARTING_LAST)
    stream = discharge(STARTING_STREAM, STARTING_FIRST, STARTING_LAST)
    pipe = supplied(STARTING_PIPE, days)
    rows = [
        ",".join([day.isoformat(), *map(three_digits, values)])
        for day, *values in zip(days, river, stream, pipe, strict=True)
    ]
    comments = [
        "# Invented, all of it: no such river, stream or pipe exists. Daily mean discharge, to try",
        "# the starting site files with. Put a record of your own in its place.",
    ]
    return "\n".join([*comments, "date,river_m3s,stream_m3s,pipe_m3s", *rows]) + "\n"


def main() -> None:
    """Write all records."""
    for demo in DEMOS:
        demo.path.write_bytes(record_text(demo).encode("ascii"))
    STARTING_RECORD.write_bytes(starting_record_text().encode("ascii"))


if __name__ == "__main__":
    main()
