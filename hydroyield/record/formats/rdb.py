"""USGS RDB: tabs, comment lines, a row of names, a row of widths, and then the data.

Columns of values are named by series, parameter code and, for daily values, statistic code:
`18268_00060_00003` is discharge in cubic feet per second, daily mean.
"""

from __future__ import annotations

import re
from dataclasses import dataclass, replace

from hydroyield.checks import Check
from hydroyield.record.faults import Source
from hydroyield.record.formats.build import Facts, Raw, make_rows
from hydroyield.record.formats.common import (
    choose_series,
    head,
    listed,
    not_discharge,
    refuse_ragged,
)
from hydroyield.record.numbers import is_number
from hydroyield.record.options import RecordOptions
from hydroyield.record.rows import Rows

# parameter codes of discharge, each with its unit; tidally filtered discharge comes last
DISCHARGE = {"00060": "cfs", "00061": "cfs", "30208": "m3/s", "30209": "m3/s", "72137": "cfs"}
_STATISTICS = {"00001": "maximum", "00002": "minimum", "00003": "mean", "00008": "median"}
_PARAMETERS = {"00065": "gage height", "00010": "water temperature", "00045": "precipitation"}
_WIDTH = re.compile(r"\d+[sdn]")
_REMARK = re.compile(r"[A-Za-z*]+")  # "Ice", "Eqp", "***"
_ICE_OR_ESTIMATED = {"e", "ice", "estimated"}


@dataclass(frozen=True)
class _Block:
    """Names, the line they stand in, and the rows below with their line numbers."""

    names: list[str]
    line: int
    rows: list[list[str]]
    numbers: list[int]


def recognises(text: str) -> bool:
    """A tabbed row of names, agency and site among them, above a row of widths."""
    lines = [line for line in head(text, 400) if not line.startswith("#") and line.strip()]
    return len(lines) > 1 and _is_header(lines[0], lines[1])


def read(text: str, options: RecordOptions, source: Source) -> Rows:
    """Read the discharge of an RDB file. Raises RecordError."""
    blocks = _blocks(text, source)
    series = _series(blocks)
    best = _best(series, source) if options.value_column is None else []
    site, column = series[choose_series(series, best, options, source)]
    parameter, statistic = _codes(column)
    if parameter not in DISCHARGE:
        raise not_discharge(_word(parameter), source, blocks[0].line)
    raw = _raw(blocks, site, column)
    remarks = {value: remark for value in set(raw.values) if (remark := _remark(value))}
    facts = Facts(
        "tab",
        "datetime",
        column,
        missing=("-999999", *remarks),
        unit=DISCHARGE[parameter],
        unit_line=blocks[0].line,
        station=site,
        series=f"parameter {parameter}"
        + (f", daily {_STATISTICS.get(statistic, statistic)}" if statistic else ""),
        is_doubtful=lambda code: not _ICE_OR_ESTIMATED.isdisjoint(code.lower().split(":")),
        checks=_no_mean_check(column, statistic),
    )
    flags = [remarks.get(value, code) for value, code in zip(raw.values, raw.flags, strict=True)]
    return make_rows(replace(raw, flags=flags), facts, options, source)


def _no_mean_check(column: str, statistic: str) -> tuple[Check, ...]:
    if statistic in ("", "00003"):
        return ()
    message = (
        f"'{column}' is the daily {_STATISTICS.get(statistic, statistic)}, not the daily mean; "
        "download the mean (statistic 00003) if there is one."
    )
    return (Check("record_statistic", "warn", None, None, message),)


def _word(parameter: str) -> str:
    return _PARAMETERS.get(parameter, f"parameter {parameter}")


def _is_header(names: str, widths: str) -> bool:
    fields = names.split("\t")
    return "site_no" in fields and all(
        _WIDTH.fullmatch(width.strip()) for width in widths.split("\t")
    )


def _blocks(text: str, source: Source) -> list[_Block]:
    blocks: list[_Block] = []
    lines = text.split("\n")
    for number, line in enumerate(lines, 1):
        if line.startswith("#") or not line.strip():
            continue
        if number < len(lines) and _is_header(line, lines[number]):
            names = [name.strip() for name in line.split("\t")]
            blocks.append(_Block(names, number, [], []))
        elif blocks and number != blocks[-1].line + 1:
            blocks[-1].rows.append(line.split("\t"))
            blocks[-1].numbers.append(number)
    for block in blocks:
        refuse_ragged([len(row) for row in block.rows], block.numbers, len(block.names), source)
        if "datetime" not in block.names:
            raise source.error("there is no column 'datetime' among the names", block.line)
    return blocks


def _codes(column: str) -> tuple[str, str]:
    """Parameter and statistic code in the name of a column, "" where there is none."""
    parts = column.split("_")
    numeric = [len(part) == 5 and part.isdigit() for part in parts]
    if len(parts) > 1 and all(numeric[-2:]) and (len(parts) > 2 or parts[-1] in _STATISTICS):
        return parts[-2], parts[-1]
    return (parts[-1], "") if len(parts) > 1 and numeric[-1] else ("", "")


def _series(blocks: list[_Block]) -> dict[str, tuple[str, str]]:
    """{name for the user: (site, column)}; the site is part of the name where there are several."""
    found: dict[tuple[str, str], None] = {}
    for block in blocks:
        place = block.names.index("site_no")
        columns = [name for name in block.names if _codes(name)[0]]
        for site in dict.fromkeys(row[place].strip() for row in block.rows):
            found.update(dict.fromkeys((site, column) for column in columns))
    several = len({site for site, _ in found}) > 1
    return {f"{site} {column}" if several else column: (site, column) for site, column in found}


def _best(series: dict[str, tuple[str, str]], source: Source) -> list[str]:
    """The series of the first parameter of discharge that occurs: daily means, else sub-daily."""
    codes = {name: _codes(column) for name, (_, column) in series.items()}
    for parameter in DISCHARGE:
        of_parameter = {name: code[1] for name, code in codes.items() if code[0] == parameter}
        for statistic in ("00003", ""):
            best = [name for name, found in of_parameter.items() if found == statistic]
            if best:
                return best
        if of_parameter:
            kinds = {_STATISTICS.get(found, found) for found in of_parameter.values()}
            raise not_discharge(f"the daily {' and '.join(sorted(kinds))} of discharge", source)
    if not series:
        raise source.error("the file has its head but no rows with values; download it again")
    words = dict.fromkeys(_word(code[0]) for code in codes.values())
    raise not_discharge(f"{', '.join(words)} ({listed(series)})", source)


def _raw(blocks: list[_Block], site: str, column: str) -> Raw:
    dates: list[str] = []
    values: list[str] = []
    lines: list[int] = []
    flags: list[str] = []
    zones: list[str] = []
    for block in blocks:
        if column not in block.names:
            continue
        places = {name: k for k, name in enumerate(block.names)}
        flag, zone = places.get(column + "_cd"), places.get("tz_cd")
        for row, number in zip(block.rows, block.numbers, strict=True):
            if row[places["site_no"]].strip() != site:
                continue
            dates.append(row[places["datetime"]])
            values.append(row[places[column]].strip())
            lines.append(number)
            flags.append("" if flag is None else row[flag].strip())
            zones.append("" if zone is None else row[zone].strip())
    return Raw(dates, values, lines, flags, zones if any(zones) else ())


def _remark(value: str) -> str:
    """The class of a text that stands for a value ("Ice", "***"), "" for a number or nothing."""
    words = value.split()
    if not words or is_number(value) or not _REMARK.fullmatch(words[0]):
        return ""
    return words[0]
