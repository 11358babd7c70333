"""France: `Date (TU),Valeur (en m3/s),Statut,...`, and the daily means of `resultat_obs_elab`.

The second service gives litres per second; `grandeur_hydro_elab` names the quantity, and QmnJ is
the mean of a day. It answers as CSV or as JSON.
"""

from __future__ import annotations

import json

from hydroyield.record.faults import Source
from hydroyield.record.formats.build import Facts, Raw, make_rows
from hydroyield.record.formats.common import (
    choose_series,
    fields_of,
    head,
    listed,
    not_discharge,
    rows_of,
)
from hydroyield.record.options import RecordOptions
from hydroyield.record.rows import Rows
from hydroyield.record.units import unit_in_header

_MARKS = {",": "comma", ";": "semicolon"}
_RESULT, _QUANTITY, _DATE = "resultat_obs_elab", "grandeur_hydro_elab", "date_obs_elab"
_DAILY_MEAN = "QmnJ"
_ESTIMATED = ("estim", "interpol", "reconstitu")


def recognises_values(text: str) -> bool:
    """A date in universal time beside a value, by name."""
    names = _names(head(text, 1)[0])
    return len(names) > 1 and names[0].startswith("Date (") and names[1].startswith("Valeur")


def _mark(line: str) -> str:
    return ";" if line.count(";") > line.count(",") else ","


def _names(line: str) -> list[str]:
    return fields_of(line, _mark(line))


def read_values(text: str, options: RecordOptions, source: Source) -> Rows:
    """Read a file of `Date (TU),Valeur (en m3/s)`. Raises RecordError."""
    lines = text.split("\n")
    mark, names = _mark(lines[0]), _names(lines[0])
    numbers, columns = rows_of(lines, 1, mark, names, source)
    table = dict(zip(names, columns, strict=False))
    value = names[1]
    choose_series([value], [value], options, source)
    unit = value.split("(en ")[-1].rstrip(") ") if "(en " in value else unit_in_header(value)
    kinds = [table[name] for name in ("Qualification", "Méthode") if name in table]
    facts = Facts(
        _MARKS[mark],
        names[0],
        value,
        decimal_mark=None,
        unit=unit,
        unit_line=1,
        is_doubtful=lambda code: any(word in code.lower() for word in _ESTIMATED),
    )
    flags = [", ".join(filter(None, parts)) for parts in zip(*kinds, strict=True)]
    return make_rows(Raw(table[names[0]], table[value], numbers, flags), facts, options, source)


def recognises_means(text: str) -> bool:
    """The name of the results, in the names of the columns or in the keys of a JSON answer."""
    start = text[:20_000].lstrip()
    if start.startswith("{"):
        return f'"{_RESULT}"' in start
    return _RESULT in _names(head(text, 1)[0])


def read_means(text: str, options: RecordOptions, source: Source) -> Rows:
    """Read daily means in litres per second. Raises RecordError."""
    is_json = text.lstrip().startswith("{")
    numbers, table = _from_json(text, source) if is_json else _from_table(text, source)
    needed = [name for name in (_DATE, _RESULT, _QUANTITY) if name not in table]
    if needed:
        raise source.error(f"{listed(needed)} is not there; download the table with all columns", 1)
    kinds = set(table[_QUANTITY])
    if numbers and _DAILY_MEAN not in kinds:
        raise not_discharge(f"{listed(sorted(kinds))} instead of {_DAILY_MEAN}", source, numbers[0])
    stations = table.get("code_station") or [""] * len(numbers)
    daily = [k for k, kind in enumerate(table[_QUANTITY]) if kind == _DAILY_MEAN]
    names = list(dict.fromkeys(stations[k] for k in daily)) or [""]
    station = choose_series(names, names, options, source, _RESULT)
    which = [k for k in daily if stations[k] == station]
    method = table.get("libelle_methode") or [""] * len(numbers)
    quality = table.get("libelle_qualification") or [""] * len(numbers)
    facts = Facts(
        "none" if is_json else _MARKS[_mark(text.split("\n", 1)[0])],
        _DATE,
        _RESULT,
        usual_unit="l/s",
        station=station,
        series=_DAILY_MEAN,
        is_doubtful=lambda code: any(word in code.lower() for word in _ESTIMATED),
    )
    raw = Raw(
        [table[_DATE][k] for k in which],
        [table[_RESULT][k] for k in which],
        [numbers[k] for k in which],
        [", ".join(filter(None, (quality[k], method[k]))) for k in which],
    )
    return make_rows(raw, facts, options, source)


def _from_table(text: str, source: Source) -> tuple[list[int], dict[str, list[str]]]:
    lines = text.split("\n")
    names = _names(lines[0])
    numbers, columns = rows_of(lines, 1, _mark(lines[0]), names, source)
    return numbers, dict(zip(names, columns, strict=False))


def _from_json(text: str, source: Source) -> tuple[list[int], dict[str, list[str]]]:
    rows = json_object(text, source).get("data")
    if not isinstance(rows, list) or not all(isinstance(row, dict) for row in rows):
        raise source.error("there is no list 'data' with rows; download the answer again")
    names = dict.fromkeys(name for row in rows for name in row)
    table = {name: [json_text(row.get(name)) for row in rows] for name in names}
    return json_lines(text, _RESULT, len(rows)), table


def json_object(text: str, source: Source) -> dict[str, object]:
    """The object that a JSON text holds. Raises RecordError where it is cut or damaged."""
    try:
        found = json.loads(text)
    except (json.JSONDecodeError, RecursionError) as error:
        raise source.error(
            "this JSON text is cut short or damaged; download it again",
            getattr(error, "lineno", None),
        ) from None
    return found if isinstance(found, dict) else {}


def json_text(value: object) -> str:
    """A scalar of JSON as text, "" for null."""
    return "" if value is None else str(value)


def json_lines(text: str, key: str, count: int) -> list[int]:
    """The lines in which a key stands, once for each row; 1 for all where that is not plain."""
    lines = [n for n, line in enumerate(text.split("\n"), 1) for _ in range(line.count(f'"{key}"'))]
    return lines if len(lines) == count else [1] * count
