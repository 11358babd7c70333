"""Every way in which a site file can be at fault: the line, the key and what the message says.

In each row a piece of a valid file is replaced; '@@' marks the line that the fault must name.
"""
# ruff: noqa: E501  (one row of a table, one line)

from __future__ import annotations

import pytest
import yaml
from site_examples import BASE

from hydroyield.errors import SiteFileError
from hydroyield.site import read_site_text, yaml_lines

RULE = "{rule: constant, discharge: 0.6 m3/s}"
LEVELS = "[[0 m3/s, 97.90 m], [20 m3/s, 98.35 m], [100 m3/s, 99.8 m]]"
TABLE = "{table: [[0 m3/s, 97.90 m], [20 m3/s, 98.35 m], [100 m3/s, 99.8 m]], follows: river}"
CURVE = "[[0.2, 0.71], [0.4, 0.86], [0.7, 0.91], [1.0, 0.89]]"
CHANNEL = "bed_level: 97.2, bottom_width: 9, side_slope: 1, slope: 0.002, manning_n: 0.03"
RECORD_FILE = "file: larkbeck_daily.csv"
WRONG_FORMAT = "is not read by this version; write format: 1"
SECOND_COLON = "a second colon in one entry, or a line indented too far"
NO_ALIGNMENT = "does not line up with the keys above it"

TOP = [
    ("format: 1\nsite", "@@site", "format", "is missing; write format: 1"),
    ("format: 1\n", "@@format: 2\n", "format", "format '2' " + WRONG_FORMAT),
    ("format: 1\n", "@@format: 1.0\n", "format", "format '1.0' " + WRONG_FORMAT),
    ("format: 1\n", "@@format: [1]\n", "format", "a list stands where the number of the format"),
    ("format: 1\n", "@@format: {a: 1}\n", "format", "a block of keys stands where"),
    ("format: 1\n", "@@format:\n", "format", "has no value"),
    ("format: 1\n", "@@formt: 1\n", "formt", "unknown key 'formt'; did you mean 'format'?"),
    ("operation:\n", "@@operations:\n", "operations", "did you mean 'operation'?"),
    ("operation:\n", "@@xyz: 1\noperation:\n", "xyz", "the keys read here are format, site, dis"),
    ("format: 1\n", "format: 1\n@@source: [a]\n", "source", "a list stands where text belongs"),
    ("site:\n  name: Larkbeck Weir\n", "@@site:\n", "site.name", "is missing; write name: Lark"),
    ("name: Larkbeck Weir", "@@name: ''", "site.name", "has no value; write one, or take"),
    ("name: Larkbeck Weir", "@@name: [a, b]", "site.name", "a list stands where text belongs"),
    ("name: Larkbeck Weir", '@@name: "a\\x07b"', "site.name", "an unprintable character"),
    ("name: Larkbeck Weir", '@@name: "a\\tb\\eb"', "site.name", "an unprintable character"),
    ("latitude: 54.2", "@@latitude: 90.5", "site.latitude", "'90.5' is out of range; write an an"),
    ("latitude: 54.2", "@@latitude: -91", "site.latitude", "of at least -90 and up to 90, such"),
    ("latitude: 54.2", "@@latitude: 54.2 N", "site.latitude", "carries a unit or stray text"),
    ("latitude: 54.2", "@@latitude:", "site.latitude", "has no value"),
    ("altitude: 62 m", "@@altitude: 6001 m", "site.altitude", "of at least -500 m and up to 6000 m"),
    ("altitude: 62 m", "@@altitude: -501 m", "site.altitude", "out of range"),
    ("altitude: 62 m", "@@altitude: 62 kg", "site.altitude", "unit 'kg' is not one of a length"),
    ("altitude: 62 m", "@@altitude: 6,2 m", "site.altitude", "decimal comma; write 6.2 m"),
    ("altitude: 62 m", "@@altitude: 1e305 m", "site.altitude", "out of range"),
    ("altitude: 62 m", "@@altitude: high", "site.altitude", "'high' is not a length; write for"),
    ("temperature: 9 degC", "@@temperature: 41", "site.water_temperature", "up to 40 degC"),
    ("temperature: 9 degC", "@@temperature: 31 degF", "site.water_temperature", "out of range"),
]  # fmt: skip

DISCHARGE = [
    ("record:\n    " + RECORD_FILE, "@@record:\n    # left out", "discharge.record.file", "write file: larkbeck_daily.csv"),
    ("record:\n    " + RECORD_FILE, "@@recrd:\n    file: a.csv", "discharge.recrd", "unknown key 'recrd'; did you mean 'record'?"),
    (RECORD_FILE, "@@file: /data/daily.csv", "discharge.record.file", "is an absolute path; put"),
    (RECORD_FILE, "@@file: C:/daily.csv", "discharge.record.file", "is an absolute path"),
    (RECORD_FILE, "@@file: c:\\daily.csv", "discharge.record.file", "holds a backslash; write /"),
    (RECORD_FILE, "@@file: ../daily.csv", "discharge.record.file", "leads out of the folder of the"),
    (RECORD_FILE, "@@file: a/../daily.csv", "discharge.record.file", "leads out of the folder"),
    (RECORD_FILE, "@@file: []", "discharge.record.file", "names no file; write the name"),
    (RECORD_FILE, "@@file: [a.csv, a.csv]", "discharge.record.file", "'a.csv' is named twice"),
    (RECORD_FILE, "@@file: [a.csv, ../b.csv]", "discharge.record.file", "leads out of the folder"),
    (RECORD_FILE, "@@file: [a.csv, [b.csv]]", "discharge.record.file[1]", "a list stands where the name of a file"),
    ("unit: m3/s", "@@unit: m3", "discharge.record.unit", "unit 'm3' is not read here; write one"),
    ("unit: m3/s", "@@unit: MM/D", "discharge.record.unit", "did you mean mm/d?"),
    ("unit: m3/s", "@@unit: {a: b}", "discharge.record.unit", "a block of keys stands where text"),
    ("date_column: date", "@@date_colum: date", "discharge.record.date_colum", "'date_column'?"),
    ("missing: [-999]", "@@missing: [1, [1]]", "discharge.record.missing[1]", "a list stands where a mark"),
    ("missing: [-999]", "@@missing: {a: 1}", "discharge.record.missing", "a block of keys stands"),
    ("missing: [-999]", "@@missing: [null]", "discharge.record.missing[0]", "goes in quotes"),
    ("unit: m3/s", "unit: m3/s\n    @@date_order: dmy", "discharge.record.date_order", "one of day_f"),
    ("unit: m3/s", "unit: m3/s\n    @@date_order: day-first", "discharge.record.date_order", "did you mean day_first?"),
    ("unit: m3/s", "unit: m3/s\n    @@decimal_mark: ','", "discharge.record.decimal_mark", "point, comma"),
    ("start_month: 10", "@@start_month: 13", "discharge.year_start_month", "a whole number from 1 to 12"),
    ("start_month: 10", "@@start_month: 0", "discharge.year_start_month", "'0' is out of range"),
    ("start_month: 10", "@@start_month: October", "discharge.year_start_month", "not a whole number"),
    ("start_month: 10", "@@start_month: 1.5", "discharge.year_start_month", "not a whole number"),
    ("coverage: 90 %", "@@coverage: 90", "discharge.minimum_month_coverage", "'90' is above 1; write 90 % or 0.9"),
    ("coverage: 90 %", "@@coverage: 101 %", "discharge.minimum_month_coverage", "write a share up to 100 %"),
    ("coverage: 90 %", "@@coverage: 0", "discharge.minimum_month_coverage", "a share above 0"),
    ("method: area_ratio", "@@method: regression", "discharge.transfer.method", "write one of area_ratio"),
    ("method: area_ratio, ", "@@", "discharge.transfer.method", "is missing; write method: area_ratio"),
    ("gauge_area: 312 km2, ", "@@", "discharge.transfer.gauge_area", "write gauge_area: 312 km2"),
    ("gauge_area: 312 km2", "@@gauge_area: 0", "discharge.transfer.gauge_area", "an area above 0"),
    ("site_area: 287 km2", "@@site_area: -1", "discharge.transfer.site_area", "an area above 0"),
    ("site_area: 287 km2", "@@site_area: 287 km", "discharge.transfer.site_area", "'km' is not one of an area"),
    ("exponent: 1.0}", "@@exponent: one}", "discharge.transfer.exponent", "'one' is not a number"),
    ("  transfer: {", "  @@duration_table: [[5, 21], [95, 2]]\n  transfer: {", "discharge.duration_table", "exclude each other; keep one"),
    ("  transfer: {", "  @@spot_gaugings: []\n  transfer: {", "discharge.spot_gaugings", "write a list of pairs [[2021-04-14, 1.32"),
    ("  transfer: {", "  @@spot_gaugings: [[14.04.2021, 2]]\n  transfer: {", "discharge.spot_gaugings[0]", "'14.04.2021' is no date; write year-month-day"),
    ("  transfer: {", "  @@spot_gaugings: [[2021-04-14, 2, 3]]\n  transfer: {", "discharge.spot_gaugings[0]", "not a pair; write [date, discharge]"),
    ("  transfer: {", "  @@spot_gaugings: [[2021-04-14, -2]]\n  transfer: {", "discharge.spot_gaugings[0]", "is out of range; write a discharge"),
    ("  transfer: {", "  @@reference: {unit: m3/s}\n  transfer: {", "discharge.reference.file", "is missing; write file:"),
    ("  transfer: {", "  @@inflow_below_intake: {}\n  transfer: {", "discharge.inflow_below_intake", "needs one of area, discharge"),
    ("  transfer: {method: area_ratio, gauge_area: 312 km2,", "  @@transfer: {method: area_ratio,", "discharge.transfer.gauge_area", "is missing; write gauge_area: 312 km2"),
    ("  transfer: {method: area_ratio,", "  @@transfer: {method: mean_ratio, gauge_mean: 5,", "discharge.transfer.site_mean", "is missing; write site_mean: 4.8 m3/s"),
    ("  transfer: {method: area_ratio,", "  @@transfer: {method: spot_gaugings,", "discharge.transfer.method", "write beside transfer spot_gaugings: [["),
    ("  transfer: {method: area_ratio,", "  @@transfer: {method: area_ratio, uncertainty: 8,", "discharge.transfer.uncertainty", "'8' is above 1; write 8 %"),
]  # fmt: skip

RIVER = [
    (f"environmental_flow:\n  - {RULE}", f"@@environmental_flow: {RULE}", "environmental_flow", "write a list: start the line with '- '"),
    (f"environmental_flow:\n  - {RULE}", "@@environmental_flow: 0.6", "environmental_flow", "'0.6' stands where a list belongs"),
    (RULE, "@@0.6 m3/s", "environmental_flow[0]", "'0.6 m3/s' is no rule; write {rule: constant"),
    (RULE, "@@{discharge: 1}", "environmental_flow[0].rule", "is missing; write rule: and one of constant"),
    (RULE, "@@{rule: constnt, discharge: 1}", "environmental_flow[0].rule", "did you mean constant?"),
    (RULE, "@@{rule: [a], discharge: 1}", "environmental_flow[0].rule", "is no rule; write one of constant"),
    (RULE, "@@{rule: constant}", "environmental_flow[0].discharge", "is missing; write discharge: 0.6 m3/s"),
    (RULE, "@@{rule: constant, discharge: -1}", "environmental_flow[0].discharge", "of at least 0, such"),
    (RULE, "@@{rule: constant, discharge: 1, share: 2}", "environmental_flow[0].share", "unknown key 'share'"),
    (RULE, "@@{rule: monthly, discharge: [1, 2, 3]}", "environmental_flow[0].discharge", "has 3 values; write 12"),
    (RULE, "@@{rule: monthly, discharge: 1}", "environmental_flow[0].discharge", "stands where values by month belong"),
    (RULE, "@@{rule: monthly, discharge: {apr-sep: 1}}", "environmental_flow[0].discharge", "no value for jan, feb, mar, oct, nov, dec"),
    (RULE, "@@{rule: monthly, discharge: {apr-mar: 1, may: 2}}", "environmental_flow[0].discharge.may", "may has a value already"),
    (RULE, "@@{rule: steps, steps: [[1, 0.5], [2, 0.7]]}", "environmental_flow[0].steps[0][0]", "the first step begins above 0"),
    (RULE, "@@{rule: preset, name: swiss}", "environmental_flow[0].name", "'swiss' is not known here"),
    (RULE, "@@{rule: monthly, discharge: [1, 2, -3]}", "environmental_flow[0].discharge[2]", "'-3' is out of range"),
    (RULE, "@@{rule: exceedance, percent: 100}", "environmental_flow[0].percent", "above 0 and below 100 %"),
    (RULE, "@@{rule: exceedance, percent: 0}", "environmental_flow[0].percent", "above 0 and below 100 %"),
    (RULE, "@@{rule: mean_share, share: 10}", "environmental_flow[0].share", "write 10 % or 0.1"),
    (RULE, "@@{rule: mean_share, share: -0.1}", "environmental_flow[0].share", "out of range"),
    (RULE, "@@{rule: inflow_share, share: 0.5}", "environmental_flow[0].above", "is missing; write above: 1.2"),
    (RULE, "@@{rule: inflow_share, share: 0.5, above: -1}", "environmental_flow[0].above", "out of range"),
    ("name: fish pass, ", "@@", "abstractions[0].name", "is missing; write name: fish pass"),
    ("discharge: 0.15 m3/s, ", "@@", "abstractions[0].discharge", "is missing; write discharge: 0.15"),
    ("months: [3, 4]", "@@months: [3, 3]", "abstractions[0].months", "month 3 stands twice"),
    ("months: [3, 4]", "@@months: [3, 13]", "abstractions[0].months[1]", "a whole number from 1 to 12"),
    ("months: [3, 4]", "@@months: []", "abstractions[0].months", "the list is empty; name months"),
    ("months: [3, 4]", "@@months: third", "abstractions[0].months", "'third' is no month; write 1 to 12, a name"),
    ("environmental_flow: true", "@@environmental_flow: yes", "abstractions[0].counts_as_environmental_flow", "neither true nor false"),
    ("environmental_flow: true", "@@environmental_flow: true, returns: 0", "abstractions[0].returns", "write true or false"),
]  # fmt: skip

HEAD = [
    ("headwater: {level: 101.20 m}", "@@headwater: 101.2 m", "head.headwater", "'101.2 m' stands where a block of keys belongs; write a block of keys, such as {level: 101.2 m}"),
    ("headwater: {level: 101.20 m}", "@@headwater: {}", "head.headwater", "needs one of level, table, weir; write"),
    ("headwater: {level: 101.20 m}", "@@headwater: {level: 1, table: [[0, 1], [1, 2]]}", "head.headwater.table", "'table' and 'level' exclude each other"),
    ("headwater: {level: 101.20 m}", "@@headwater: {rating: 1}", "head.headwater.rating", "unknown key 'rating'"),
    ("headwater: {level: 101.20 m}", "@@headwater: {weir: {crest: 1, length: 0, coefficient: 2}}", "head.headwater.weir.length", "a length above 0"),
    ("headwater: {level: 101.20 m}", "@@headwater: {weir: {length: 2, coefficient: 2}}", "head.headwater.weir.crest", "is missing; write crest: 100.9 m"),
    ("headwater: {level: 101.20 m}", "@@headwater: {weir: {crest: 1, length: 2, coefficient: -1}}", "head.headwater.weir.coefficient", "a number above 0"),
    ("head:\n  headwater: {level: 101.20 m}\n", "@@head:\n", "head.headwater", "is missing; write headwater: {level: 101.2 m}"),
    ("level: 101.20 m", "@@level: 101.20 s", "head.headwater.level", "unit 's' is not one of a length"),
    (TABLE, "@@[1, 2]", "head.tailwater", "a list stands where a block of keys belongs"),
    (LEVELS, "@@[[0, 97.9]]", "head.tailwater.table", "a table needs two pairs or more"),
    (LEVELS, "@@[0, 97.9]", "head.tailwater.table[0]", "not a pair; write [discharge, level]"),
    (LEVELS, "@@97.9 m", "head.tailwater.table", "'97.9 m' stands here; write a list of pairs [discharge"),
    (LEVELS, "@@[[0, 97.9], [1]]", "head.tailwater.table[1]", "not a pair"),
    (LEVELS, "@@[[0, 97.9], [0, 98]]", "head.tailwater.table[1][0]", "discharge '0' is not above '0' in the row before"),
    (LEVELS, "@@[[-1, 97.9], [0, 98]]", "head.tailwater.table[0][0]", "discharge: '-1' is out of range"),
    (LEVELS, "@@[[0, 97.9], [1, 97.8]]", "head.tailwater.table[1][1]", "a rating that falls"),
    (LEVELS, "@@[[0, 97.9], [1, [2]]]", "head.tailwater.table[1][1]", "level: a list stands where a length"),
    ("tailwater: {table: [[0 m3/s, 97.90 m], [20 m3/s, 98.35 m], [100 m3/s, 99.8 m]]", "tailwater: {@@gaugings: [[1, 97], [2, 97], [3, 98]]", "head.tailwater.gaugings", "three gaugings at different levels or more"),
    ("follows: river", "@@follows: higher", "head.tailwater.river", "is missing; write river: {table"),
    ("follows: river", "@@river: {level: 97 m}", "head.tailwater.river", "is read with follows: higher"),
    ("follows: river", "@@follows: rivr", "head.tailwater.follows", "write one of river, turbine, higher; did you mean river?"),
    (TABLE, "@@{follows: turbine}", "head.tailwater", "needs one of level, table, rating, channel"),
    (TABLE, "@@{rating: {zero_level: 1, coefficient: 0, exponent: 1}}", "head.tailwater.rating.coefficient", "a number above 0"),
    (TABLE, "@@{rating: {zero_level: 1, coefficient: 2}}", "head.tailwater.rating.exponent", "is missing; write exponent: 1.7"),
    (TABLE, "@@{channel: {" + CHANNEL.replace("0.002", "0") + "}}", "head.tailwater.channel.slope", "a share above 0"),
    (TABLE, "@@{channel: {" + CHANNEL.replace("0.03", "0") + "}}", "head.tailwater.channel.manning_n", "above 0"),
    (TABLE, "@@{channel: {" + CHANNEL.replace("9,", "0,").replace("side_slope: 1", "side_slope: 0") + "}}", "head.tailwater.channel.bottom_width", "needs a bottom_width or a side_slope"),
    ("minimum_net_head: 1.0 m", "@@minimum_net_head: 1e308 km", "head.minimum_net_head", "is too large; write for example"),
    ("minimum_net_head: 1.0 m", "@@minimum_net_head: -1", "head.minimum_net_head", "a length of at least 0"),
]  # fmt: skip

PLANT = [
    ("waterway:\n  - {loss_coefficient: 0.0021}", "@@waterway: {loss_coefficient: 1}", "waterway", "write a list: start the line with '- '"),
    ("{loss_coefficient: 0.0021}", "@@{loss_coefficient: -1}", "waterway[0].loss_coefficient", "of at least 0"),
    ("{loss_coefficient: 0.0021}", "@@{loss_coeficient: 1}", "waterway[0].loss_coeficient", "did you mean 'loss_coefficient'?"),
    ("{loss_coefficient: 0.0021}", "@@{source: a guess}", "waterway[0]", "needs one of loss_coefficient, pipe"),
    ("{loss_coefficient: 0.0021}", "@@{pipe: {length: 180 m, diametr: 1.1 m, roughness: 0.15 mm}}", "waterway[0].pipe.diametr", "did you mean 'diameter'?"),
    ("{loss_coefficient: 0.0021}", "@@{pipe: {length: 180 m, diameter: 1.1 m, roughness: 15 cm}}", "waterway[0].pipe.roughness", "more than a twentieth of the diameter"),
    ("{loss_coefficient: 0.0021}", "@@{loss_coefficient: 0.1, exit: {area: 2 m2}}", "waterway[0].exit", "exclude each other; keep one"),
    ("{loss_coefficient: 0.0021}", "@@{trash_rack: {bar_thickness: 10 mm, clear_spacing: 30 mm, bar_shape: rectangular, inclination: 70, area: 9 m2, blockage: 100 %}}", "waterway[0].trash_rack.blockage", "is out of range; write a share"),
    ("{loss_coefficient: 0.0021}", "@@{trash_rack: {bar_thickness: 10 mm, clear_spacing: 30 mm, bar_shape: rectangular, inclination: 70, area: 9 m2, blockage: [10 %, 20 %]}}", "waterway[0].trash_rack.blockage", "has 2 values; write 12, one for each month"),
    ("{loss_coefficient: 0.0021}", "@@{trash_rack: {bar_thickness: 10 mm, clear_spacing: 30 mm, bar_shape: rectangel, inclination: 70, area: 9 m2}}", "waterway[0].trash_rack.bar_shape", "did you mean rectangular?"),
    ("count: 2", "@@count: 0", "turbines[0].count", "a whole number from 1 to 50"),
    ("count: 2", "@@count: 51", "turbines[0].count", "a whole number from 1 to 50"),
    ("count: 2", "@@count: two", "turbines[0].count", "'two' is not a whole number"),
    ("  - count: 2\n    type", "  - @@type", "turbines[0].count", "is missing; write count: 2"),
    ("type: kaplan", "@@type: caplan", "turbines[0].type", "did you mean kaplan?"),
    ("type: kaplan", "@@type: Kaplan", "turbines[0].type", "did you mean kaplan?"),
    ("type: kaplan", "@@type: [kaplan]", "turbines[0].type", "a list stands where one word belongs"),
    ("capacity: 125 kW", "@@capacity: 0", "turbines[0].unit_capacity", "a power above 0"),
    ("capacity: 125 kW", "@@capacity: 125 KW", "turbines[0].unit_capacity", "did you mean kW?"),
    ("  - count: 2\n    type: kaplan\n    unit_capacity: 125 kW\n    rated_discharge: 6.2 m3/s", "  - @@count: 2\n    type: kaplan", "turbines[0]", "the size of the unit is missing; write rated_discharge"),
    ("rated_discharge: 6.2 m3/s", "@@rated_discharge: -6.2", "turbines[0].rated_discharge", "a discharge above 0"),
    ("rated_head: 2.65 m", "@@rated_head: 0 m", "turbines[0].rated_head", "a length above 0"),
    ("rated_head: 2.65 m", "@@rated_haed: 2.65 m", "turbines[0].rated_haed", "did you mean 'rated_head'?"),
    ("minimum_discharge: 20 %", "@@minimum_discharge: 120 %", "turbines[0].minimum_discharge", "the minimum discharge is above full discharge; write a share up to 100 %"),
    ("minimum_discharge: 20 %", "@@minimum_discharge: 20", "turbines[0].minimum_discharge", "above full discharge; write 20 % or 0.2"),
    ("minimum_discharge: 20 %", "@@minimum_discharge: -1 %", "turbines[0].minimum_discharge", "out of range"),
    (CURVE, "@@0.9", "turbines[0].efficiency", "'0.9' stands here; write typical, or a list of pairs"),
    (CURVE, "@@usual", "turbines[0].efficiency", "write typical, or a list"),
    (CURVE, "@@[[0.2, 0.7]]", "turbines[0].efficiency", "a table needs two pairs or more"),
    (CURVE, "@@[[20, 0.7], [1, 0.9]]", "turbines[0].efficiency[0][0]", "write 20 % or 0.2"),
    (CURVE, "@@[[0.2, 71], [1, 0.9]]", "turbines[0].efficiency[0][1]", "'71' is above 1; write 71 % or 0.71"),
    (CURVE, "@@[[0.2, 0.7], [1, 1.1]]", "turbines[0].efficiency[1][1]", "'1.1' is above 1"),
    (CURVE, "@@[[0.5, 0.7], [0.2, 0.8]]", "turbines[0].efficiency[1][0]", "'0.2' is not above '0.5' in the row"),
    (CURVE, "@@[[0, 0], [0.5, 0.8], [1, 0]]", "turbines[0].efficiency[2][1]", "an efficiency of 0 after one above 0"),
    (CURVE, "@@[[0, 0], [1, 0]]", "turbines[0].efficiency", "all efficiencies are 0"),
    (CURVE, "@@[]", "turbines[0].efficiency", "a table needs two pairs or more"),
    (f"type: kaplan\n    unit_capacity: 125 kW\n    rated_discharge: 6.2 m3/s\n    rated_head: 2.65 m\n    minimum_discharge: 20 %\n    efficiency: {CURVE}", "type: other\n    unit_capacity: 9\n    minimum_discharge: 1 %\n    @@efficiency: typical", "turbines[0].efficiency", "type other has no typical efficiency"),
    ("drive_efficiency: 98 %", "@@drive_efficiency: 98", "electrical.drive_efficiency", "write 98 % or 0.98"),
    ("drive_efficiency: 98 %", "@@drive_efficiency: 0", "electrical.drive_efficiency", "a share above 0"),
    ("generator_efficiency: 94 %", "@@generator_efficiency: [[0.5, 0.9]]", "electrical.generator_efficiency", "a table needs two pairs or more"),
    ("transformer_efficiency: 98.5 %", "@@transformer_efficiency: 1.1", "electrical.transformer_efficiency", "'1.1' is above 1; write a share up to 100 %"),
    ("own_use: 1.5 kW", "@@own_use: -1 W", "electrical.own_use", "a power of at least 0"),
    ("export_limit: 220 kW", "@@export_limit: 0", "electrical.export_limit", "a power above 0"),
    ("export_limit: 220 kW", "@@export_limit: {a: 1}", "electrical.export_limit", "a block of keys stands where a power"),
    ("shutdown_above: 90 m3/s", "@@shutdown_above: 0", "operation.shutdown_above", "a discharge above 0"),
    ("shutdown_above: 90 m3/s", "@@planned_outage: {months: [8]}", "operation.planned_outage", "needs one of days, dates; write for example {days: 10"),
    ("shutdown_above: 90 m3/s", "@@forced_outage_rate: 100 %", "operation.forced_outage_rate", "is out of range; write a share"),
    ("operation:\n  shutdown_above: 90 m3/s\n", "@@operation: none\n", "operation", "'none' stands where a block of keys belongs"),
    ("operation:\n  shutdown_above: 90 m3/s\n", "@@operation:\n", "operation", "has no value"),
]  # fmt: skip

YAML = [
    ("count: 2", "count: 2\n    @@count: 2", "turbines[0].count", "the key stands twice, first in line 33; keep one of the two"),
    ("operation:\n", "@@site: {name: a}\noperation:\n", "site", "the key stands twice, first in line 2"),
    ("own_use: 1.5 kW", "@@own_use: &own 1.5 kW", "electrical.own_use", "anchors (&) and aliases (*) are not read"),
    ("own_use: 1.5 kW", "@@own_use: *own", "electrical.own_use", "anchors (&) and aliases (*) are not read"),
    ("own_use: 1.5 kW", "@@own_use: !!float 1.5", "electrical.own_use", "tags (!) are not read; write the plain"),
    ("own_use: 1.5 kW", "@@own_use: !python/object:os.system x", "electrical.own_use", "tags (!) are not read"),
    ("own_use: 1.5 kW", "@@<<: {own_use: 1}", "electrical", "merge keys (<<) are not read"),
    ("own_use: 1.5 kW", "@@? [a, b]\n  : 1", "electrical", "a list or a block stands where a key belongs"),
    ("own_use: 1.5 kW", "@@: 1", "", "a colon without a key"),
    ("own_use: 1.5 kW", "@@~: 1", "electrical", "a colon without a key"),
    ("own_use: 1.5 kW", "@@own_use: " + "[" * 30 + "]" * 30, "", "nested deeper than 20 levels"),
    ("operation:\n", "@@---\noperation:\n", "", "a second document starts here"),
    ("operation:\n", "@@\toperation:\n", "", "a tab in the indentation; write spaces"),
    ("  own_use: 1.5 kW", "@@\town_use: 1.5 kW", "", "a tab in the indentation; write spaces"),
    ("name: Larkbeck Weir", "@@name: Weir: lower", "", SECOND_COLON),
    ("  own_use: 1.5 kW", "@@    own_use: 1.5 kW", "", SECOND_COLON),
    ("  own_use: 1.5 kW", "@@ own_use: 1.5 kW", "", NO_ALIGNMENT),
    ("months: [3, 4]", "@@months: [3, 4", "", "in brackets is not closed or lacks a comma"),
    ("exponent: 1.0}", "@@exponent: 1.0", "", "in braces is not closed or lacks a comma"),
    ("shutdown_above: 90 m3/s\n", '@@shutdown_above: "90 m3/s\n', "", "a quote is not closed"),
    ("name: Larkbeck Weir", '@@name: "Lark\\qbeck"', "", "a backslash in double quotes"),
    ("name: Larkbeck Weir", "@@name: @home", "", "a value cannot start with '@'; put the text in quotes"),
    ("name: Larkbeck Weir", "@@name: %home", "", "a value cannot start with '%'"),
    ("name: Larkbeck Weir", "@@name: - home", "", "start it on a new line"),
    ("name: Larkbeck Weir", "@@name: *", "", "anchors (&) and aliases (*) are not read"),
    ("name: Larkbeck Weir", "@@name: ]", "", "a bracket or a comma without a value"),
    ("operation:\n", "@@operation\n", "", "a line without a colon; write 'key: value'"),
    ("turbines:\n  - count", "turbines:\n  - source: x\n@@ - count", "", NO_ALIGNMENT),
    ("operation:\n", "@@%operation:\n", "", "a line cannot start with % or ---"),
]  # fmt: skip

ROWS = [*TOP, *DISCHARGE, *RIVER, *HEAD, *PLANT, *YAML]


def with_fault(old: str, new: str) -> tuple[str, int]:
    """The base file with one piece replaced, and the line that holds the mark."""
    assert BASE.count(old) == 1, f"{old!r} does not stand once in the base file"
    marked = BASE.replace(old, new)
    before, _, after = marked.partition("@@")
    return before + after, before.count("\n") + 1


@pytest.mark.parametrize(("old", "new", "key", "fragment"), ROWS)
def test_fault_names_line_key_and_remedy(old: str, new: str, key: str, fragment: str) -> None:
    text, line = with_fault(old, new)
    with pytest.raises(SiteFileError) as caught:
        read_site_text(text)
    fault = caught.value.faults[0]
    assert (fault.file, fault.line, fault.key) == ("site.yaml", line, key)
    assert fragment in fault.message
    others = [str(other) for other in caught.value.faults[1:]]
    assert not others or "table[0]" in key, others  # one slip, one fault


@pytest.mark.parametrize(("old", "new", "key", "fragment"), YAML)
def test_both_parsers_agree(
    monkeypatch: pytest.MonkeyPatch, old: str, new: str, key: str, fragment: str
) -> None:
    text, line = with_fault(old, new)
    monkeypatch.setattr(yaml_lines, "_LOADER", yaml.SafeLoader)
    with pytest.raises(SiteFileError) as caught:
        read_site_text(text)
    fault = caught.value.faults[0]
    assert fault.line is not None
    if "%" not in new:  # the Python parser sees a stray directive at the end of the file
        assert (fault.line, fault.key) == (line, key)
        assert fragment in fault.message


@pytest.mark.parametrize(
    ("new", "keys"),
    [
        ("{}", ["discharge"]),
        ("{duration_table: [[5, 21], [95, 31]]}", ["discharge.duration_table[1][1]"]),
        ("{duration_table: [[95, 1], [5, 21]]}", ["discharge.duration_table[1][0]"] * 1 + ["discharge.duration_table[1][1]"]),
        ("{duration_table: [[5, 21]]}", ["discharge.duration_table"]),
        ("{duration_table: [[5, 21], [105, 2]]}", ["discharge.duration_table[1][0]"]),
        ("{duration_table: [[5, 0], [95, 0]]}", ["discharge.duration_table[0][1]"]),
        ("{duration_table: [[5, 2], [95, 1]], reference: {file: a.csv}}", ["discharge.reference"]),
        ("{duration_table: [[5, 2], [95, 1]], spot_gaugings: [[2021-04-14, 1]]}", ["discharge.spot_gaugings"]),
        ("{record: {file: a.csv}, inflow_below_intake: {area: 5 km2}}", ["discharge.inflow_below_intake.area"]),
        ("{record: {file: a.csv, unit: mm/d}}", ["discharge.record.unit"]),
        ("{record: {file: a.csv, unit: mm/h, unti: x}}", ["discharge.record.unit", "discharge.record.unti"]),
        ("[a]", ["discharge"]),
        ("a.csv", ["discharge"]),
    ],
)  # fmt: skip
def test_discharge_block(new: str, keys: list[str]) -> None:
    text = (
        "format: 1\nsite: {name: A}\ndischarge: " + new + "\n"
        "head: {headwater: {level: 2}, tailwater: {level: 1}}\n"
        "turbines: [{count: 1, type: francis, unit_capacity: 9}]\n"
    )
    with pytest.raises(SiteFileError) as caught:
        read_site_text(text)
    assert sorted(fault.key for fault in caught.value.faults) == sorted(keys)
    assert {fault.line for fault in caught.value.faults} == {3}


def test_type_other_needs_what_is_not_typical() -> None:
    text = BASE.replace("type: kaplan", "type: other").replace("minimum_discharge: 20 %", "")
    text = text.replace(f"    efficiency: {CURVE}\n", "")
    with pytest.raises(SiteFileError) as caught:
        read_site_text(text)
    found = {fault.key: fault.message for fault in caught.value.faults}
    assert set(found) == {"turbines[0].efficiency", "turbines[0].minimum_discharge"}
    assert found["turbines[0].efficiency"].startswith("type other has no typical efficiency; write")
    assert "write for example minimum_discharge: 20 %" in found["turbines[0].minimum_discharge"]


@pytest.mark.parametrize(("new", "fragment"), [
    ("turbines: []\n", "the list is empty; write at least one entry: - {count: 2, type: kaplan"),
    ("turbines: {count: 1}\n", "write a list: start the line with '- ', such as - {count: 2"),
    ("", "is missing; write turbines: [{count: 2, type: kaplan, rated_discharge: 6.2 m3/s}]"),
])  # fmt: skip
def test_turbines_are_needed(new: str, fragment: str) -> None:
    before, _, rest = BASE.partition("turbines:\n")
    _, _, after = rest.partition("electrical:\n")
    with pytest.raises(SiteFileError) as caught:
        read_site_text(before + new + "electrical:\n" + after)
    (fault,) = caught.value.faults
    assert fault.key == "turbines"
    assert fragment in fault.message


def test_long_and_many_lined_text_is_cut_in_messages() -> None:
    text = BASE.replace("altitude: 62 m", 'altitude: "' + "very high\\n " * 200 + '"')
    with pytest.raises(SiteFileError) as caught:
        read_site_text(text)
    (fault,) = caught.value.faults
    assert "\n" not in fault.message
    assert len(fault.message) < 150
