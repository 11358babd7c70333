"""Invented site files that the tests of the site file start from."""

from __future__ import annotations

# a complete file, with two keys that are not read yet
EXAMPLE = """\
format: 1
site:
  name: Larkbeck Weir
  latitude: 54.2              # degrees
  altitude: 62 m
  water_temperature: 9 degC

discharge:
  record:
    file: larkbeck_daily.csv  # relative to the site file
    unit: m3/s
    date_column: date
    value_column: discharge
    missing: [-999]
  year_start_month: 10
  minimum_month_coverage: 90 %
  transfer: {method: area_ratio, gauge_area: 312 km2, site_area: 287 km2, exponent: 1.0}

environmental_flow:
  - {rule: constant, discharge: 0.6 m3/s}
abstractions:
  - {name: fish pass, discharge: 0.15 m3/s, months: [3, 4], counts_as_environmental_flow: true}

head:
  headwater: {level: 101.20 m}
  tailwater: {table: [[0 m3/s, 97.90 m], [20 m3/s, 98.35 m], [100 m3/s, 99.8 m]], follows: river}
  minimum_net_head: 1.0 m

waterway:
  - {loss_coefficient: 0.0021}

turbines:
  - count: 2
    type: kaplan
    unit_capacity: 125 kW
    rated_discharge: 6.2 m3/s
    rated_head: 2.65 m
    minimum_discharge: 20 %
    efficiency: [[0.2, 0.71], [0.4, 0.86], [0.7, 0.91], [1.0, 0.89]]

electrical:
  drive_efficiency: 98 %
  generator_efficiency: 94 %
  transformer_efficiency: 98.5 %
  own_use: 1.5 kW
  export_limit: 220 kW

operation:
  shutdown_above: 90 m3/s
  planned_outage: {days: 10, months: [8]}
  forced_outage_rate: 2 %
"""

BASE = "".join(line for line in EXAMPLE.splitlines(keepends=True) if "outage" not in line)

SMALLEST = """\
format: 1
site: {name: Larkbeck Weir}
discharge: {record: {file: daily.csv}}
head: {headwater: {level: 101.2}, tailwater: {level: 97.9}}
turbines:
  - {count: 1, type: francis, rated_discharge: 6.2}
"""

# the same site in US customary units; the numbers follow from the exact definitions
# 1 ft = 0.3048 m, 1 mi = 5280 ft, 1 cfs = 1 ft3/s, 1 US gallon = 231 in3
IN_METRIC = """\
format: 1
site: {name: Two Units, altitude: 30.48 m, water_temperature: 10 degC}
discharge:
  record: {file: daily.csv}
  transfer: {method: area_ratio, gauge_area: 258.9988110336 km2, site_area: 0.40468564224 km2}
environmental_flow:
  - {rule: constant, discharge: 0.028316846592 m3/s}
  - {rule: inflow_share, share: 0.5, above: 0.0438126363888888888 m3/s}
head:
  headwater: {table: [[0 m3/s, 30.48 m], [28.316846592 m3/s, 30.7848 m]]}
  tailwater: {level: 0.0254 m}
turbines:
  - {count: 1, type: francis, unit_capacity: 74569.98715822702 W, rated_head: 3.048 m}
"""
IN_US_UNITS = """\
format: 1
site: {name: Two Units, altitude: 100 ft, water_temperature: 50 degF}
discharge:
  record: {file: daily.csv}
  transfer: {method: area_ratio, gauge_area: 100 mi2, site_area: 100 acre}
environmental_flow:
  - {rule: constant, discharge: 1 cfs}
  - {rule: inflow_share, share: 50 %, above: 1 mgd}
head:
  headwater: {table: [[0 cfs, 100 ft], [1000 cfs, 101 ft]]}
  tailwater: {level: 1 in}
turbines:
  - {count: 1, type: francis, unit_capacity: 100 hp, rated_head: 10 ft}
"""
