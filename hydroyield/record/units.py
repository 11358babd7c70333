"""The unit of a record: from the site file, the header of the column or a row of units."""

from __future__ import annotations

import functools
import re
from collections.abc import Iterator

from hydroyield.quantities import DAY, DISCHARGE, HOUR, unit_factor
from hydroyield.record.faults import Source
from hydroyield.record.options import RecordOptions

DEPTHS = {"mm/d": 1e-3 / DAY, "mm/h": 1e-3 / HOUR}  # m/s
UNITS = (*DISCHARGE.units, *DEPTHS)
_VOLUMES = {
    "m3": ("m3", "cbm", "cubic meters", "cubic metres", "cubic meter", "cubic metre"),
    "l": ("l", "liter", "litre", "liters", "litres"),
    "cf": ("ft3", "cubic feet", "cu ft"),
    "Ml": ("megal", "megaliter", "megalitre", "megaliters", "megalitres"),
    "mm": ("mm",),
}
_TIMES = {
    "s": ("s", "sec", "second"),
    "h": ("h", "hr", "hour"),
    "d": ("d", "day"),
}
_WORDS = {
    "cumec": "m3/s", "cumecs": "m3/s", "cms": "m3/s", "m3s": "m3/s",
    "ls": "l/s", "lps": "l/s", "cfs": "cfs", "cusec": "cfs", "cusecs": "cfs", "ft3s": "cfs",
    "m3h": "m3/h", "m3d": "m3/d", "mld": "Ml/d", "mgd": "mgd", "mmd": "mm/d", "mmh": "mm/h",
}  # fmt: skip


@functools.cache
def _spellings() -> dict[str, str]:
    """{spelling in lower case: unit} of all spellings that are read."""
    table = dict(_WORDS)
    for volume, volume_words in _VOLUMES.items():
        for time, time_words in _TIMES.items():
            unit = "cfs" if (volume, time) == ("cf", "s") else f"{volume}/{time}"
            if unit in UNITS:
                for v in volume_words:
                    for t in time_words:
                        forms = (f"{v}/{t}", f"{v}_{t}", f"{v} per {t}", f"{v} {t}-1", f"{v}{t}-1")
                        table.update(dict.fromkeys(forms, unit))
    return table


def known_unit(text: str) -> str | None:
    """The unit that a text spells ("m³ s⁻¹", "cumecs", "[l/s]"), or None."""
    return _spellings().get(_normal(text))


def unit_in_header(name: str) -> str | None:
    """The unit that the name of a column ends with or holds in brackets, or None."""
    return next((unit for end in _endings(name) if (unit := known_unit(end))), None)


def _endings(name: str) -> Iterator[str]:
    """Pieces of a name that may be a unit, the longest first."""
    for piece in [*re.findall(r"[(\[{]([^)\]}]*)[)\]}]", name), name]:
        yield piece
        yield from (piece[match.end() :] for match in re.finditer(r"[\s_,;:.-]+", piece))


def _normal(text: str) -> str:
    text = text.strip().strip("()[]{}").strip()
    for written, plain in (("³", "3"), ("⁻¹", "-1"), ("−", "-"), ("^", ""), ("**", ""), ("·", " ")):
        text = text.replace(written, plain)
    text = re.sub(r"\bM[lL](?![A-Za-z])", "megal", text)
    text = re.sub(r"\s*/\s*", "/", text.lower())
    return re.sub(r"\s+|(?<=[a-z0-9])\.(?=[a-z])", " ", text)


def settle_unit(
    options: RecordOptions,
    column: str,
    in_header: str | None,
    in_unit_row: str | None,
    line: int | None,
    source: Source,
) -> tuple[str, str]:
    """The unit of the values and where it was found.

    column : name of the column of values, for messages
    in_header, in_unit_row : what the file says, None where it says nothing
    line : line of the header

    Raises RecordError when nothing gives the unit, when it is unknown, or when two disagree.
    """
    found = {"column header": in_header, "unit row": in_unit_row}
    said = {place: unit for place, unit in found.items() if unit is not None}
    if options.unit is not None:
        said = {"site file": _option_unit(options.unit, source), **said}
    if not said:
        raise source.error(
            f"the unit of column '{column}' is not stated; add `unit: m3/s` (or "
            f"{', '.join(UNITS[1:])}) under discharge.record",
            line,
            "unit",
        )
    if len(set(said.values())) > 1:
        words = " but ".join(f"the {place} says {unit}" for place, unit in said.items())
        raise source.error(f"{words}; correct the one that is wrong", line, "unit")
    place, unit = next(iter(said.items()))
    return unit, place


def _option_unit(text: str, source: Source) -> str:
    unit = known_unit(text)
    if unit is None:
        raise source.error(
            f"unit '{text}' is not read here; write one of {', '.join(UNITS)}", key="unit"
        )
    return unit


def factor_of(unit: str, gauge_area_m2: float | None, source: Source) -> float:
    """Discharge [m3/s] of one of the unit.

    gauge_area_m2 : catchment area [m2], needed for depths. Raises RecordError without it.
    """
    if unit not in DEPTHS:
        return unit_factor(unit, DISCHARGE)
    if gauge_area_m2 is None:
        raise source.error(
            f"values in {unit} need the catchment area of the gauge; add `transfer: "
            "{method: area_ratio, gauge_area: 312 km2, site_area: 287 km2}` with your areas "
            "under discharge",
            key="unit",
        )
    return DEPTHS[unit] * gauge_area_m2
