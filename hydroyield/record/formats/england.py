"""England's hydrology service: `measure,dateTime,date,value,completeness,quality,qcode`.

The measure says what the values are: `...-flow-m-86400-m3s-qualified` is the mean flow of a day
in cubic metres per second, `flow-i-900` the flow of the moment every 900 seconds.
"""

from __future__ import annotations

import re

from hydroyield.record.faults import Source
from hydroyield.record.formats.build import Facts, Raw, make_rows
from hydroyield.record.formats.common import choose_series, fields_of, head, not_discharge, rows_of
from hydroyield.record.formats.nrfa import WATER_DAY
from hydroyield.record.options import RecordOptions
from hydroyield.record.rows import Rows

_KIND = re.compile(r"(?:^|-)([a-z]+)-([a-z]+)-(\d+)-([A-Za-z0-9]+)")
_NEEDED = {"measure", "dateTime", "value"}
_DAY = "86400"


def recognises(text: str) -> bool:
    """The names of the columns in the first line."""
    return set(fields_of(head(text, 1)[0], ",")) >= _NEEDED


def read(text: str, options: RecordOptions, source: Source) -> Rows:
    """Read the flow of an England Hydrology file. Raises RecordError."""
    lines = text.split("\n")
    names = fields_of(lines[0], ",")
    numbers, columns = rows_of(lines, 1, ",", names, source)
    table = dict(zip(names, columns, strict=False))
    measures = list(dict.fromkeys(table["measure"]))
    kinds = {measure: _kind(measure) for measure in measures}
    best = [m for m in measures if kinds[m][0] in ("flow", "") and kinds[m][1] in ("m", "i", "")]
    if not best and measures and options.value_column is None:
        kind = kinds[measures[0]]
        raise not_discharge(f"'{'-'.join(part for part in kind if part)}'", source, numbers[0])
    if not measures:
        raise source.error("there are column names but no rows with values; download it again", 1)
    measure = choose_series(measures, best, options, source, "value")
    daily = kinds[measure][2] == _DAY
    date = "date" if daily and "date" in table else "dateTime"
    which = [k for k, found in enumerate(table["measure"]) if found == measure]
    quality = table.get("quality", [""] * len(numbers))
    raw = Raw(
        [table[date][k] for k in which],
        [table["value"][k] for k in which],
        [numbers[k] for k in which],
        [quality[k] for k in which],
    )
    facts = Facts(
        "comma",
        date,
        "value",
        unit=kinds[measure][3] or None,
        unit_line=raw.lines[0],
        station=measure.rsplit("/", 1)[-1].split("-flow")[0],
        series=measure.rsplit("/", 1)[-1],
        is_doubtful=lambda code: code.lower() == "estimated",
        checks=(WATER_DAY,) if daily else (),
    )
    return make_rows(raw, facts, options, source)


def _kind(measure: str) -> tuple[str, str, str, str]:
    """Parameter, statistic, period [s] and unit of a measure, "" where it does not say."""
    found = _KIND.findall(measure.rsplit("/", 1)[-1])
    return found[-1] if found else ("", "", "", "")
