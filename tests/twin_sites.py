"""Invented sites for the naive twin: each function writes site.yaml and a record into a folder.

All quantities are bare numbers in the default units. The records are made from a seed: a season,
persistent weather and floods, rounded to three digits as gauges report, with days that are blank.
"""

from __future__ import annotations

import datetime
import math
import random
from collections.abc import Callable
from pathlib import Path


def write_record(
    path: Path,
    seed: int,
    first: str,
    last: str,
    mean: float,
    spread: float = 0.8,
    wettest_month: int = 2,
    blank_share: float = 0.004,
    blank_spells: tuple[tuple[str, int], ...] = (),
) -> None:
    """Write `date,discharge` [m3/s].

    spread : standard deviation of the logarithm of the weather part
    blank_share : share of single days without a value
    blank_spells : (first day, days) of longer gaps
    """
    draw = random.Random(seed)
    day, end = datetime.date.fromisoformat(first), datetime.date.fromisoformat(last)
    blank = set()
    for start, length in blank_spells:
        begin = datetime.date.fromisoformat(start)
        blank |= {begin + datetime.timedelta(days=i) for i in range(length)}
    weather, rows = 0.0, ["date,discharge"]
    while day <= end:
        weather = 0.93 * weather + math.sqrt(1 - 0.93**2) * draw.gauss(0, 1)
        angle = 2 * math.pi * (day.timetuple().tm_yday / 365.25 - (wettest_month - 0.5) / 12)
        value = mean * math.exp(spread * weather - spread**2 / 2 + 0.5 * math.cos(angle))
        missing = day in blank or draw.random() < blank_share
        rows.append(f"{day.isoformat()},{'' if missing else f'{value:.3g}'}")
        day += datetime.timedelta(days=1)
    path.write_text("\n".join(rows) + "\n")


def write_site(folder: Path, text: str) -> Path:
    """Write site.yaml and return its path."""
    folder.mkdir(parents=True, exist_ok=True)
    path = folder / "site.yaml"
    path.write_text(text)
    return path


def one_kaplan(folder: Path) -> Path:
    """One Kaplan unit behind a fixed level; a constant environmental flow."""
    path = write_site(
        folder,
        """\
format: 1
site: {name: Alder Mill}
discharge:
  record: {file: flow.csv, unit: m3/s}
environmental_flow:
  - {rule: constant, discharge: 0.6}
head:
  headwater: {level: 101.2}
  tailwater: {level: 97.9}
turbines:
  - count: 1
    type: kaplan
    rated_discharge: 6.2
    rated_head: 3.1
    unit_capacity: 155
    minimum_discharge: 0.2
    efficiency: [[0.2, 0.71], [0.4, 0.86], [0.7, 0.91], [1.0, 0.89]]
electrical: {drive_efficiency: 0.98, generator_efficiency: 0.94}
""",
    )
    write_record(folder / "flow.csv", 11, "1989-10-01", "1995-09-30", 5.0)
    return path


def two_kaplans_rising_tailwater(folder: Path) -> Path:
    """Two equal Kaplan units, a tailwater that rises with the river, capacity below full output."""
    path = write_site(
        folder,
        """\
format: 1
site: {name: Birch Weir}
discharge:
  record: {file: flow.csv, unit: m3/s}
environmental_flow:
  - {rule: constant, discharge: 0.8}
head:
  headwater: {level: 101.2}
  tailwater:
    table: [[2, 97.9], [20, 98.35], [60, 99.5], [100, 100.2]]
    follows: river
  minimum_net_head: 1.0
turbines:
  - count: 2
    type: kaplan
    unit_capacity: 125
    rated_discharge: 6.2
    rated_head: 2.8
    minimum_discharge: 0.2
    efficiency: [[0.2, 0.71], [0.4, 0.86], [0.7, 0.91], [1.0, 0.89]]
electrical: {drive_efficiency: 0.98, generator_efficiency: 0.94, transformer_efficiency: 0.985}
operation: {shutdown_above: 90}
""",
    )
    spells = (("1992-07-03", 12), ("1994-02-10", 2))
    write_record(
        folder / "flow.csv", 12, "1990-01-01", "1996-12-31", 13.0, 0.9, blank_spells=spells
    )
    return path


def unequal_francis_with_losses(folder: Path) -> Path:
    """A large and a small Francis unit on one penstock whose losses count."""
    path = write_site(
        folder,
        """\
format: 1
site: {name: Cobble Gill}
discharge:
  record: {file: flow.csv, unit: m3/s, date_column: date, value_column: discharge}
environmental_flow:
  - {rule: constant, discharge: 0.15}
head:
  headwater: {level: 412.0}
  tailwater: {level: 368.5}
waterway:
  - {loss_coefficient: 0.35}
  - {loss_coefficient: 0.12}
turbines:
  - count: 1
    type: francis
    rated_discharge: 2.0
    rated_head: 40.0
    minimum_discharge: 0.4
    efficiency: [[0.4, 0.74], [0.6, 0.86], [0.8, 0.925], [0.9, 0.92], [1.0, 0.88]]
  - count: 1
    type: francis
    rated_discharge: 0.8
    rated_head: 40.0
    unit_capacity: 265
    efficiency: typical
electrical: {generator_efficiency: 0.955}
""",
    )
    write_record(folder / "flow.csv", 13, "1998-10-01", "2003-09-30", 1.9, 0.85, wettest_month=12)
    return path


def weir_and_abstractions(folder: Path) -> Path:
    """A headwater that rises over a weir; water for a fish pass, a farm and a town."""
    path = write_site(
        folder,
        """\
format: 1
site: {name: Dipper Weir}
discharge:
  record: {file: flow.csv, unit: m3/s}
environmental_flow:
  - {rule: constant, discharge: 0.5}
abstractions:
  - {name: fish pass, discharge: 0.3, months: [3, 4, 5, 6], counts_as_environmental_flow: true}
  - {name: farm, discharge: 0.2, months: [5, 6, 7, 8], returns: false}
  - {name: town, discharge: 0.1, returns: false}
head:
  headwater: {weir: {crest: 100.9, length: 14, coefficient: 1.8}}
  tailwater: {table: [[0, 97.9], [10, 98.3], [50, 99.6]], follows: river}
turbines:
  - count: 2
    type: semi_kaplan
    rated_discharge: 3.0
    rated_head: 2.7
    unit_capacity: 70
    efficiency: typical
electrical: {drive_efficiency: 0.97, generator_efficiency: 0.93, own_use: 0.8}
""",
    )
    write_record(folder / "flow.csv", 14, "2001-03-15", "2007-11-20", 5.5, 0.9)
    return path


def turbine_tailrace(folder: Path) -> Path:
    """A long tailrace canal whose depth follows the turbines (uniform flow)."""
    path = write_site(
        folder,
        """\
format: 1
site: {name: Elder Canal}
discharge:
  record: {file: flow.csv, unit: m3/s}
environmental_flow:
  - {rule: constant, discharge: 1.0}
head:
  headwater: {table: [[0, 55.0], [10, 55.2], [60, 55.9]]}
  tailwater:
    channel: {bed_level: 51.4, bottom_width: 4, side_slope: 1.5, slope: 0.001, manning_n: 0.03}
    follows: turbine
turbines:
  - count: 2
    type: kaplan
    rated_discharge: 4.5
    rated_head: 2.3
    efficiency: typical
electrical: {drive_efficiency: 0.97, generator_efficiency: 0.94}
""",
    )
    write_record(folder / "flow.csv", 15, "2004-10-01", "2009-09-30", 8.5, 0.7)
    return path


def several_flow_rules(folder: Path) -> Path:
    """Monthly values, an exceedance discharge, a share of the inflow and of the mean."""
    path = write_site(
        folder,
        """\
format: 1
site: {name: Fern Beck}
discharge:
  record: {file: flow.csv, unit: m3/s}
  minimum_month_coverage: 0.8
environmental_flow:
  - {rule: monthly, discharge: [0.5, 0.5, 0.7, 0.9, 0.9, 0.7, 0.4, 0.4, 0.4, 0.5, 0.6, 0.6]}
  - {rule: exceedance, percent: 90}
  - {rule: inflow_share, share: 0.25, above: 0.5}
  - {rule: mean_share, share: 0.1}
head:
  headwater: {level: 220.0}
  tailwater: {rating: {zero_level: 210.4, coefficient: 9, exponent: 1.8}}
turbines:
  - count: 1
    type: crossflow
    rated_discharge: 3.2
    rated_head: 9.0
electrical: {drive_efficiency: 0.96, generator_efficiency: 0.92, own_use: 1.0}
""",
    )
    spells = (("1986-05-04", 5), ("1987-08-01", 15))
    write_record(folder / "flow.csv", 16, "1983-10-01", "1990-09-30", 3.0, 0.9, blank_spells=spells)
    return path


def flood_limits(folder: Path) -> Path:
    """A lowland weir: floods leave too little head, and the plant is shut in large ones."""
    path = write_site(
        folder,
        """\
format: 1
site: {name: Gravel Lock}
discharge:
  record: {file: flow.csv, unit: m3/s}
environmental_flow:
  - {rule: exceedance, percent: 95}
head:
  headwater: {table: [[0, 31.6], [20, 31.7], [80, 32.3]]}
  tailwater: {table: [[0, 29.2], [10, 29.6], [30, 30.5], [80, 31.9]]}
  minimum_net_head: 1.25
turbines:
  - count: 2
    type: kaplan
    rated_discharge: 8.0
    rated_head: 2.0
    unit_capacity: 130
    efficiency: [[0.15, 0.55], [0.3, 0.79], [0.5, 0.88], [0.8, 0.905], [1.0, 0.885]]
    minimum_discharge: 0.15
electrical: {drive_efficiency: 0.97, generator_efficiency: 0.94, export_limit: 230}
operation: {shutdown_above: 40}
""",
    )
    write_record(folder / "flow.csv", 17, "1995-10-01", "2001-09-30", 18.0, 0.8, wettest_month=1)
    return path


def two_peltons(folder: Path) -> Path:
    """Two Pelton units set above the tailwater, on a long pipe with high losses."""
    path = write_site(
        folder,
        """\
format: 1
site: {name: Heron Fall, altitude: 900}
discharge:
  record: {file: flow.csv, unit: m3/s}
environmental_flow:
  - {rule: constant, discharge: 0.03}
head:
  headwater: {level: 1080.0}
  tailwater: {table: [[0, 899.0], [1, 899.9], [4, 901.5]], follows: river}
waterway:
  - {loss_coefficient: 110}
turbines:
  - count: 2
    type: pelton
    rated_discharge: 0.22
    rated_head: 158.0
    axis_level: 901.0
    efficiency: [[0.1, 0.66], [0.3, 0.87], [0.6, 0.905], [1.0, 0.88]]
    minimum_discharge: 0.1
electrical: {generator_efficiency: 0.95, transformer_efficiency: 0.985, own_use: 2}
""",
    )
    write_record(folder / "flow.csv", 18, "1992-10-01", "1997-09-30", 0.45, 1.0, wettest_month=6)
    return path


def two_propellers(folder: Path) -> Path:
    """Two fixed-blade propellers: between one at full and two at minimum nothing more fits."""
    path = write_site(
        folder,
        """\
format: 1
site: {name: Iris Mill}
discharge:
  record: {file: flow.csv, unit: m3/s}
environmental_flow:
  - {rule: mean_share, share: 0.12}
head:
  headwater: {level: 64.0}
  tailwater: {table: [[0, 60.8], [15, 61.3], [60, 62.6]]}
waterway:
  - {loss_coefficient: 0.0015}
turbines:
  - count: 2
    type: propeller
    rated_discharge: 4.0
    rated_head: 2.9
    efficiency: typical
electrical: {drive_efficiency: 0.98, generator_efficiency: 0.93}
""",
    )
    write_record(folder / "flow.csv", 19, "2010-10-01", "2015-09-30", 7.5, 0.8)
    return path


def screw_and_kaplan(folder: Path) -> Path:
    """An Archimedes screw, which passes the same water at any head, beside a Kaplan unit."""
    path = write_site(
        folder,
        """\
format: 1
site: {name: Juniper Sluice}
discharge:
  record: {file: flow.csv, unit: m3/s}
environmental_flow:
  - {rule: constant, discharge: 0.7}
head:
  headwater: {weir: {crest: 78.3, length: 25, coefficient: 1.75}}
  tailwater: {table: [[0, 75.4], [8, 75.8], [40, 77.1]], follows: river}
  minimum_net_head: 0.8
turbines:
  - count: 1
    type: screw
    rated_discharge: 2.0
    rated_head: 2.6
    unit_capacity: 36
  - count: 1
    type: kaplan
    rated_discharge: 5.0
    rated_head: 2.5
    unit_capacity: 100
    efficiency: [[0.15, 0.55], [0.3, 0.79], [0.5, 0.88], [0.8, 0.905], [1.0, 0.885]]
    minimum_discharge: 0.18
electrical: {drive_efficiency: 0.96, generator_efficiency: 0.93, own_use: 0.5}
""",
    )
    write_record(folder / "flow.csv", 20, "1979-10-01", "1984-09-30", 7.0, 0.85)
    return path


def three_francis_steep(folder: Path) -> Path:
    """Three Francis units whose efficiency falls steeply after its peak."""
    path = write_site(
        folder,
        """\
format: 1
site: {name: Kestrel Works}
discharge:
  record: {file: flow.csv, unit: m3/s}
environmental_flow:
  - {rule: constant, discharge: 0.9}
head:
  headwater: {level: 150.0}
  tailwater: {table: [[0, 137.8], [20, 138.4], [80, 139.9]]}
waterway:
  - {loss_coefficient: 0.004}
turbines:
  - count: 3
    type: francis
    rated_discharge: 3.5
    rated_head: 11.3
    minimum_discharge: 0.35
    efficiency: [[0.35, 0.60], [0.5, 0.76], [0.7, 0.90], [0.78, 0.93], [0.9, 0.85], [1.0, 0.74]]
electrical: {drive_efficiency: 0.985, generator_efficiency: 0.945}
""",
    )
    write_record(folder / "flow.csv", 21, "1990-10-01", "1995-09-30", 7.5, 0.8)
    return path


def derived_ratings(folder: Path) -> Path:
    """Only the unit capacity is known; own use, transformer and export limit."""
    path = write_site(
        folder,
        """\
format: 1
site: {name: Larch Bridge}
discharge:
  record: {file: flow.csv, unit: m3/s}
  year_start_month: 11
environmental_flow:
  - {rule: monthly, discharge: [1, 1, 1.5, 1.5, 1.5, 1, 0.8, 0.8, 0.8, 1, 1, 1]}
head:
  headwater: {level: 88.0}
  tailwater: {rating: {zero_level: 82.6, coefficient: 18, exponent: 1.7}, follows: river}
waterway:
  - {loss_coefficient: 0.0021}
turbines:
  - count: 2
    type: semi_kaplan
    unit_capacity: 170
    minimum_discharge: 0.3
    efficiency: typical
electrical:
  drive_efficiency: 0.98
  generator_efficiency: 0.94
  transformer_efficiency: 0.985
  own_use: 1.5
  export_limit: 300
""",
    )
    write_record(folder / "flow.csv", 22, "1985-11-01", "1991-10-31", 10.0, 0.8)
    return path


def calendar_years_and_transfer(folder: Path) -> Path:
    """Calendar years, a gauge elsewhere on the river, cold water high up, typical curves."""
    path = write_site(
        folder,
        """\
format: 1
site: {name: Marten Pass, latitude: 47.1, altitude: 1250, water_temperature: 6}
discharge:
  record: {file: flow.csv, unit: m3/s}
  year_start_month: 1
  transfer: {method: area_ratio, gauge_area: 312, site_area: 214, exponent: 0.85}
environmental_flow:
  - {rule: exceedance, percent: 95}
  - {rule: inflow_share, share: 0.1, above: 0}
head:
  headwater: {level: 1312.0}
  tailwater: {level: 1252.0}
waterway:
  - {loss_coefficient: 0.14}
turbines:
  - count: 1
    type: turgo
    rated_discharge: 1.2
    rated_head: 57.0
    axis_level: 1252.6
  - count: 1
    type: francis
    rated_discharge: 2.4
    rated_head: 57.5
electrical: {generator_efficiency: 0.95, transformer_efficiency: 0.99}
""",
    )
    write_record(folder / "flow.csv", 23, "1999-06-01", "2005-12-31", 4.2, 0.8, wettest_month=6)
    return path


def water_joining_below(folder: Path) -> Path:
    """A gauge moved by mean flows, and a brook that lifts the tailwater below a long diversion."""
    path = write_site(
        folder,
        """\
format: 1
site: {name: Otter Reach}
discharge:
  record: {file: flow.csv, unit: m3/s}
  transfer: {method: mean_ratio, gauge_mean: 7.5, site_mean: 6.0}
  inflow_below_intake: {discharge: 1.8}
environmental_flow:
  - {rule: mean_share, share: 0.1}
head:
  headwater: {table: [[0, 88.2], [30, 88.8]]}
  tailwater: {rating: {zero_level: 84.1, coefficient: 9, exponent: 1.6}}
turbines:
  - count: 1
    type: kaplan
    rated_discharge: 5.5
    rated_head: 3.1
electrical: {generator_efficiency: 0.94, own_use: 0.8}
""",
    )
    write_record(folder / "flow.csv", 27, "1997-10-01", "2001-09-30", 7.5, 0.8)
    return path


def penstock_and_rack(folder: Path) -> Path:
    """Two pipes, a canal, an outlet and a rack that leaves close in autumn."""
    path = write_site(
        folder,
        """\
format: 1
site: {name: Bracken Chute, latitude: 46.5, altitude: 600, water_temperature: 7}
discharge:
  record: {file: flow.csv, unit: m3/s}
environmental_flow:
  - {rule: constant, discharge: 0.3}
head:
  headwater: {level: 640.0}
  tailwater: {level: 610.0}
waterway:
  - canal: {length: 350, bottom_width: 1.8, side_slope: 1.0, depth: 0.9, manning_n: 0.025}
  - trash_rack: {bar_thickness: 0.01, clear_spacing: 0.02, bar_shape: rounded_upstream,
      inclination: 65, area: 3.0,
      blockage: [0.1, 0.1, 0.1, 0.1, 0.1, 0.1, 0.1, 0.1, 0.4, 0.7, 0.6, 0.2]}
  - pipe: {length: 420, diameter: 0.7, roughness: 0.0002, minor_losses: 1.4, parallel: 2}
  - exit: {area: 0.9}
turbines:
  - count: 1
    type: francis
    rated_discharge: 1.9
electrical: {generator_efficiency: 0.95}
""",
    )
    write_record(folder / "flow.csv", 31, "1998-10-01", "2002-09-30", 1.6, 0.9)
    return path


def generator_load_curve(folder: Path) -> Path:
    """Two crossflow units whose generators are poor at part load, one limited by its capacity."""
    path = write_site(
        folder,
        """\
format: 1
site: {name: Sorrel Mill}
discharge:
  record: {file: flow.csv, unit: m3/s}
head:
  headwater: {level: 25.0}
  tailwater: {table: [[0, 12.0], [20, 13.1]]}
waterway:
  - {loss_coefficient: 0.012}
turbines:
  - count: 2
    type: crossflow
    rated_discharge: 1.5
    rated_head: 11.0
    unit_capacity: 125
electrical:
  drive_efficiency: 0.97
  generator_efficiency: [[0.1, 0.72], [0.25, 0.85], [0.5, 0.92], [0.75, 0.94], [1.0, 0.945]]
  own_use: 1.2
""",
    )
    write_record(folder / "flow.csv", 33, "1998-10-01", "2001-09-30", 2.2, 0.9)
    return path


def rules_of_permits(folder: Path) -> Path:
    """Steps against the inflow, a hands-off flow in summer with a largest take, spring water."""
    path = write_site(
        folder,
        """\
format: 1
site: {name: Heron Sill}
discharge:
  record: {file: flow.csv, unit: m3/s}
environmental_flow:
  - {rule: steps, steps: [[0, 0.3], [1.5, 0.6], [4.0, 1.2]]}
  - {rule: inflow_share, share: 0.6, above: 1.0, maximum_take: 2.2, months: [5, 6, 7, 8, 9]}
  - {rule: constant, discharge: 1.1, months: [3, 4]}
head:
  headwater: {level: 58.0}
  tailwater: {table: [[0, 52.1], [30, 53.4]]}
turbines:
  - count: 1
    type: kaplan
    rated_discharge: 3.0
    rated_head: 5.6
electrical: {generator_efficiency: 0.93}
""",
    )
    write_record(folder / "flow.csv", 35, "1998-10-01", "2002-09-30", 3.0, 0.9)
    return path


def output_limited_by_head(folder: Path) -> Path:
    """A generator that must give less at low heads and at very high ones; head falls in floods."""
    path = write_site(
        folder,
        """\
format: 1
site: {name: Yarrow Lock}
discharge:
  record: {file: flow.csv, unit: m3/s}
environmental_flow:
  - {rule: constant, discharge: 0.5}
head:
  headwater: {level: 41.0}
  tailwater: {table: [[0, 37.0], [10, 38.0], [50, 39.9]]}
waterway:
  - {loss_coefficient: 0.003}
turbines:
  - count: 1
    type: kaplan
    rated_discharge: 5.0
    rated_head: 3.0
    unit_capacity: 125
    output_limit: [[1.5, 28], [2.6, 96], [3.2, 118], [3.7, 112]]
  - count: 1
    type: francis
    rated_discharge: 2.5
    rated_head: 3.0
    unit_capacity: 60
    efficiency: [[0.3, 0.6], [0.6, 0.84], [0.85, 0.9], [1.0, 0.87]]
electrical: {drive_efficiency: 0.98, generator_efficiency: 0.94}
""",
    )
    write_record(folder / "flow.csv", 37, "1999-10-01", "2001-09-30", 7.0, 0.9)
    return path


def branches_of_units(folder: Path) -> Path:
    """Unlike units, each behind a pipe and an outlet of its own, beside a shared loss."""
    path = write_site(
        folder,
        """\
format: 1
site: {name: Comfrey Leat, water_temperature: 8}
discharge:
  record: {file: flow.csv, unit: m3/s}
environmental_flow:
  - {rule: constant, discharge: 0.2}
head:
  headwater: {level: 140.0}
  tailwater: {table: [[0, 118.0], [4, 118.4], [20, 119.5]]}
waterway:
  - {loss_coefficient: 0.08}
turbines:
  - count: 1
    type: francis
    rated_discharge: 2.2
    minimum_discharge: 0.35
    starting_discharge: 0.45
    waterway:
      - {pipe: {length: 60, diameter: 0.9, roughness: 0.0003, minor_losses: 0.8}}
      - {exit: {area: 1.1}}
  - count: 1
    type: kaplan
    rated_discharge: 1.1
    rated_head: 19.5
    unit_capacity: 165
    waterway:
      - {loss_coefficient: 1.6}
electrical: {drive_efficiency: 0.98, generator_efficiency: 0.94}
""",
    )
    write_record(folder / "flow.csv", 40, "1999-10-01", "2001-09-30", 2.4, 0.9)
    return path


def jets_in_turn(folder: Path) -> Path:
    """Two Pelton units of three jets that close one after another."""
    path = write_site(
        folder,
        """\
format: 1
site: {name: Saxifrage Fall}
discharge:
  record: {file: flow.csv, unit: m3/s}
environmental_flow:
  - {rule: constant, discharge: 0.05}
head:
  headwater: {level: 600.0}
  tailwater: {table: [[0, 478.0], [3, 479.2], [8, 480.4]]}
waterway:
  - {loss_coefficient: 14.0}
turbines:
  - count: 2
    type: pelton
    jets: 3
    rated_discharge: 0.35
    rated_head: 112.0
    axis_level: 480.0
    efficiency: [[0.1, 0.55], [0.2, 0.74], [0.4, 0.87], [0.7, 0.9], [1.0, 0.86]]
electrical: {generator_efficiency: 0.94}
""",
    )
    write_record(folder / "flow.csv", 41, "1999-10-01", "2001-09-30", 0.45, 0.9)
    return path


def chart_over_heads(folder: Path) -> Path:
    """A maker's chart of a Kaplan unit whose head falls in floods, beside a small Francis unit."""
    path = write_site(
        folder,
        """\
format: 1
site: {name: Tansy Weir}
discharge:
  record: {file: flow.csv, unit: m3/s}
environmental_flow:
  - {rule: constant, discharge: 0.5}
head:
  headwater: {level: 41.0}
  tailwater: {table: [[0, 37.2], [10, 38.0], [50, 39.6]]}
turbines:
  - count: 1
    type: kaplan
    rated_discharge: 5.0
    rated_head: 3.2
    unit_capacity: 122
    efficiency:
      heads: [1.8, 2.6, 3.4]
      discharges: [0.8, 2.0, 3.5, 5.0]
      values: [[0.58, 0.74, 0.80, 0.74], [0.64, 0.82, 0.88, 0.84], [0.66, 0.86, 0.91, 0.88]]
  - count: 1
    type: francis
    rated_discharge: 2.0
    rated_head: 3.2
electrical: {drive_efficiency: 0.98, generator_efficiency: 0.94}
""",
    )
    write_record(folder / "flow.csv", 42, "1999-10-01", "2001-09-30", 6.0, 0.9)
    return path


def slow_to_start(folder: Path) -> Path:
    """Two unlike units that start at more water than they need, a gap, floods that stop them."""
    path = write_site(
        folder,
        """\
format: 1
site: {name: Burdock Race}
discharge:
  record: {file: flow.csv, unit: m3/s}
environmental_flow:
  - {rule: constant, discharge: 0.4}
  - {rule: constant, discharge: 0.7, months: [5, 6, 7, 8]}
head:
  headwater: {level: 41.0}
  tailwater: {table: [[0, 37.5], [10, 37.9], [50, 39.2]]}
waterway:
  - {loss_coefficient: 0.004}
turbines:
  - count: 1
    type: francis
    rated_discharge: 4.0
    rated_head: 3.2
    minimum_discharge: 0.35
    starting_discharge: 0.6
  - count: 1
    type: francis
    rated_discharge: 3.0
    rated_head: 3.2
    minimum_discharge: 0.4
    starting_discharge: 0.7
electrical: {drive_efficiency: 0.97, generator_efficiency: 0.93, own_use: 1.0}
operation: {shutdown_above: 18, forced_outage_rate: 0.02}
""",
    )
    spells = (("2000-06-03", 3), ("2001-11-11", 1))
    write_record(folder / "flow.csv", 39, "1999-10-01", "2002-03-20", 3.2, 0.9, blank_spells=spells)
    return path


def outages_by_dates(folder: Path) -> Path:
    """Two units that take turns in a window of late winter, and a standstill over New Year."""
    path = write_site(
        folder,
        """\
format: 1
site: {name: Sorrel Reach}
discharge:
  record: {file: flow.csv, unit: m3/s}
head:
  headwater: {level: 41.0}
  tailwater: {table: [[0, 37.5], [10, 37.9], [50, 39.2]]}
turbines:
  - count: 2
    type: kaplan
    rated_discharge: 2.5
    rated_head: 3.2
electrical: {drive_efficiency: 0.97, generator_efficiency: 0.93}
operation:
  planned_outage: {dates: [02-20 to 03-11, 08-03 to 08-09]}
  standstill: {dates: [12-24 to 01-06]}
  forced_outage_rate: 0.02
""",
    )
    write_record(folder / "flow.csv", 38, "1999-10-01", "2001-09-30", 4.0, 0.8)
    return path


def added_rules(folder: Path) -> Path:
    """Rules that add up, and together ask for more than half of what comes in summer."""
    return _combined(folder, "sum")


def first_of_rules(folder: Path) -> Path:
    """In each month the first rule that holds."""
    return _combined(folder, "priority")


def _combined(folder: Path, way: str) -> Path:
    path = write_site(
        folder,
        f"""\
format: 1
site: {{name: Teasel Sluice}}
discharge:
  record: {{file: flow.csv, unit: m3/s}}
environmental_flow_combination: {way}
environmental_flow:
  - {{rule: inflow_share, share: 0.3, above: 0.5, months: [5, 6, 7, 8, 9]}}
  - {{rule: constant, discharge: 0.4, months: [3, 4, 5, 6]}}
  - {{rule: steps, steps: [[0, 0.2], [2.5, 0.5]], months: [1, 2, 3, 6, 7]}}
  - {{rule: exceedance, percent: 90}}
abstractions:
  - {{name: fish pass, discharge: 0.3, counts_as_environmental_flow: true}}
head:
  headwater: {{level: 58.0}}
  tailwater: {{table: [[0, 52.1], [30, 53.4]]}}
turbines:
  - count: 1
    type: kaplan
    rated_discharge: 3.0
    rated_head: 5.6
electrical: {{generator_efficiency: 0.93}}
""",
    )
    write_record(folder / "flow.csv", 36, "1999-10-01", "2002-09-30", 3.0, 0.9)
    return path


def outages(folder: Path) -> Path:
    """Planned days in late summer and forced outages of two unequal Kaplan units."""
    path = write_site(
        folder,
        """\
format: 1
site: {name: Nettle Ford}
discharge:
  record: {file: flow.csv, unit: m3/s}
environmental_flow:
  - {rule: constant, discharge: 0.5}
head:
  headwater: {level: 41.0}
  tailwater: {table: [[0, 37.5], [10, 37.9], [50, 39.2]]}
turbines:
  - count: 1
    type: kaplan
    rated_discharge: 4.0
    rated_head: 3.2
  - count: 1
    type: kaplan
    rated_discharge: 2.0
    rated_head: 3.2
electrical: {drive_efficiency: 0.97, generator_efficiency: 0.93, own_use: 1.0}
operation:
  planned_outage: {days: 10, months: [8, 9]}
  forced_outage_rate: 0.03
""",
    )
    write_record(folder / "flow.csv", 24, "1996-10-01", "2001-09-30", 5.0, 0.8)
    return path


def stands_at_times(folder: Path) -> Path:
    """A plant that stands in spells, and then takes power: closed, flushed, off the grid."""
    path = write_site(
        folder,
        """\
format: 1
site: {name: Teasel Cut}
discharge:
  record: {file: flow.csv, unit: m3/s}
environmental_flow:
  - {rule: constant, discharge: 0.4}
head:
  headwater: {level: 41.0}
  tailwater: {table: [[0, 37.5], [10, 37.9], [50, 39.2]], not_below: 37.75}
turbines:
  - count: 2
    type: kaplan
    rated_discharge: 2.2
    rated_head: 3.1
electrical:
  generator_efficiency: 0.94
  transformer_no_load_loss: 0.6
  transformer_load_loss: 2.1
  own_use: 0.8
  standing_use: 1.5
operation:
  closed: [6]
  standstill: {days: 9, months: [1, 2]}
  common_outage_rate: 0.015
  forced_outage_rate: 0.02
""",
    )
    write_record(folder / "flow.csv", 41, "1999-10-01", "2002-09-30", 3.6, 0.9)
    return path


def weir_drowned_by_its_river(folder: Path) -> Path:
    """A weir that floods drown, and a tailrace of gaugings that the river holds up."""
    path = write_site(
        folder,
        """\
format: 1
site: {name: Pillwort Weir}
discharge:
  record: {file: flow.csv, unit: m3/s}
environmental_flow:
  - {rule: exceedance, percent: 92}
head:
  headwater:
    weir: {crest: 52.1, length: 18, coefficient: 1.8, drowned: true}
  tailwater:
    gaugings: [[0.8, 49.55], [2.1, 49.83], [4.4, 50.17], [7.9, 50.52]]
    follows: higher
    river: {table: [[0, 49.3], [15, 50.4], [60, 52.6]]}
turbines:
  - count: 1
    type: semi_kaplan
    rated_discharge: 5.0
    rated_head: 1.9
electrical: {generator_efficiency: 0.93, drive_efficiency: 0.97}
""",
    )
    write_record(folder / "flow.csv", 42, "1999-10-01", "2001-09-30", 6.5, 1.0)
    return path


SITES: dict[str, Callable[[Path], Path]] = {
    function.__name__: function
    for function in (
        one_kaplan,
        two_kaplans_rising_tailwater,
        unequal_francis_with_losses,
        weir_and_abstractions,
        turbine_tailrace,
        several_flow_rules,
        flood_limits,
        two_peltons,
        two_propellers,
        screw_and_kaplan,
        three_francis_steep,
        derived_ratings,
        calendar_years_and_transfer,
        generator_load_curve,
        rules_of_permits,
        output_limited_by_head,
        outages_by_dates,
        slow_to_start,
        branches_of_units,
        jets_in_turn,
        chart_over_heads,
        added_rules,
        first_of_rules,
        penstock_and_rack,
        water_joining_below,
        outages,
        stands_at_times,
        weir_drowned_by_its_river,
    )
}
