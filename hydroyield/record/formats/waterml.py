"""WaterML 2.0 of the Open Geospatial Consortium (OGC 10-126r4): points of time and value in XML."""

from __future__ import annotations

import re
from collections.abc import Iterator
from dataclasses import dataclass
from typing import TYPE_CHECKING

from hydroyield.record.faults import Source
from hydroyield.record.formats.build import Facts, Raw, make_rows
from hydroyield.record.formats.common import choose_series, listed, not_discharge
from hydroyield.record.options import RecordOptions
from hydroyield.record.rows import Rows
from hydroyield.record.units import known_unit

if TYPE_CHECKING:
    from xml.etree import ElementTree

_NAMESPACE = re.compile(r"[\"'][^\"']*waterml/2\.0[\"']")
_POINT = re.compile(r"<(?:[\w.-]+:)?MeasurementTVP[\s>]")
_DECLARATION = re.compile(r"<!(?:DOCTYPE|ENTITY)", re.IGNORECASE)
_NIL = "{http://www.w3.org/2001/XMLSchema-instance}nil"
_HREF = "{http://www.w3.org/1999/xlink}href"
_ID = re.compile(r"\{http://www\.opengis\.net/gml(?:/[\d.]+)?\}id")


@dataclass(frozen=True)
class _Series:
    """One series of measurements: its unit, what it observes, and its points."""

    unit: str
    parameter: str
    raw: Raw


def recognises(text: str) -> bool:
    """XML that names the namespace of WaterML 2.0."""
    start = text[:20_000].lstrip("\ufeff \n\t")
    return start.startswith("<") and _NAMESPACE.search(start) is not None


def read(text: str, options: RecordOptions, source: Source) -> Rows:
    """Read the discharge of a WaterML 2.0 document. Raises RecordError."""
    series = _series(_root(text, source), text)
    if not series:
        raise source.error("there is no series of measurements in this document; download it again")
    best = [name for name, one in series.items() if not one.unit or known_unit(one.unit)]
    if not best:
        words = listed(f"{one.parameter} in {one.unit}".strip() for one in series.values())
        raise not_discharge(words, source)
    name = choose_series(series, best, options, source, "value")
    chosen = series[name]
    facts = Facts(
        "none",
        "time",
        "value",
        missing=("-999999",),
        unit=chosen.unit or None,
        series=chosen.parameter or name,
        is_doubtful=lambda code: re.search(r"estimat|\bice\b", code.lower()) is not None,
    )
    return make_rows(chosen.raw, facts, options, source)


def _root(text: str, source: Source) -> ElementTree.Element:
    from xml.etree import ElementTree

    if declared := _DECLARATION.search(text):
        raise source.error(
            "a document type or entities are declared here; a record needs none, so remove them",
            text.count("\n", 0, declared.start()) + 1,
        )
    try:
        return ElementTree.fromstring(text.lstrip("\ufeff \n\t"))
    except ElementTree.ParseError as error:
        raise source.error(
            "the XML is cut short or damaged here; download the document again", error.position[0]
        ) from None


def _local(element: ElementTree.Element) -> str:
    return element.tag.rsplit("}", 1)[-1]


def _below(element: ElementTree.Element, name: str) -> Iterator[ElementTree.Element]:
    """All elements of a local name below one."""
    return (item for item in element.iter() if _local(item) == name)


def _series(root: ElementTree.Element, text: str) -> dict[str, _Series]:
    lines = iter(_lines_of_points(text))
    parameters = _parameters(root)
    found: dict[str, _Series] = {}
    for number, series in enumerate(_below(root, "MeasurementTimeseries"), 1):
        key = next((value for name, value in series.attrib.items() if _ID.fullmatch(name)), "")
        name = key or f"series {number}"
        units = {
            uom.get("code") or uom.get("uom") or ""
            for default in _below(series, "defaultPointMetadata")
            for uom in _below(default, "uom")
        }
        unit = " and ".join(sorted(units))
        found[name] = _Series(unit, parameters.get(id(series), ""), _points(series, lines))
    return found


def _parameters(root: ElementTree.Element) -> dict[int, str]:
    """{identity of a series: what its observation says it observes}."""
    named = {}
    for observation in _below(root, "OM_Observation"):
        observed = next(_below(observation, "observedProperty"), None)
        if observed is not None:
            words = " ".join(filter(None, (_title(observed), (observed.text or "").strip())))
            named.update(
                dict.fromkeys(map(id, _below(observation, "MeasurementTimeseries")), words)
            )
    return named


def _title(element: ElementTree.Element) -> str:
    """The title of a reference, else the end of its address."""
    titles = [value for name, value in element.attrib.items() if name.endswith("}title")]
    return titles[0] if titles else re.split("[/#:]", element.get(_HREF, ""))[-1]


def _lines_of_points(text: str) -> Iterator[int]:
    line, place = 1, 0
    for match in _POINT.finditer(text):
        line += text.count("\n", place, match.start())
        place = match.start()
        yield line


def _points(series: ElementTree.Element, lines: Iterator[int]) -> Raw:
    dates: list[str] = []
    values: list[str] = []
    numbers: list[int] = []
    flags: list[str] = []
    for point in _below(series, "MeasurementTVP"):
        parts = {_local(child): child for child in point}
        value = parts.get("value")
        is_nil = value is None or value.get(_NIL, "").strip() in ("true", "1")
        dates.append((parts["time"].text or "").strip() if "time" in parts else "")
        values.append("" if is_nil or value is None else (value.text or "").strip())
        numbers.append(next(lines, 1))
        flags.append(_flag(parts.get("metadata")))
    return Raw(dates, values, numbers, flags if any(flags) else ())


def _flag(metadata: ElementTree.Element | None) -> str:
    """Quality or qualifier of a point, "" where it has none of its own."""
    if metadata is None:
        return ""
    names = ("qualifier", "quality", "nilReason")
    marks = (item for name in names for item in _below(metadata, name))
    return next(filter(None, map(_title, marks)), "")
