"""KiWIS, as in Scotland, Belgium and Australia: `#key;value`, `#Timestamp;Value;Quality Code`."""

from __future__ import annotations

import re
from dataclasses import dataclass

from hydroyield.record.faults import Source
from hydroyield.record.formats.build import Facts, Raw, make_rows
from hydroyield.record.formats.common import choose_series, fields_of, head, not_discharge, rows_of
from hydroyield.record.options import RecordOptions
from hydroyield.record.rows import Rows
from hydroyield.record.units import known_unit

_HEADER = re.compile(r"#\s*\"?Timestamp\"?\s*([;,\t])")
_NAMES = {";": "semicolon", ",": "comma", "\t": "tab"}
_UNIT_KEYS = ("ts_unitsymbol", "ts_unitname", "ts_unitsymbol_abs", "unit", "units")
_PARAMETER_KEYS = ("stationparameter_name", "parametertype_name", "stationparameter_no")


@dataclass(frozen=True)
class _Block:
    """One series: what its head says, with lines, and its columns by name with line numbers."""

    keys: dict[str, tuple[str, int]]
    delimiter: str
    numbers: list[int]
    table: dict[str, list[str]]

    def say(self, *names: str) -> tuple[str, int | None]:
        """The first of some keys that the head holds, and its line."""
        return next(
            (self.keys[name] for name in names if self.keys.get(name, ("", 0))[0]), ("", None)
        )


def recognises(text: str) -> bool:
    """A commented line of names that begins with the timestamp."""
    return any(map(_HEADER.match, head(text)))


def read(text: str, options: RecordOptions, source: Source) -> Rows:
    """Read the discharge of a KiWIS file. Raises RecordError."""
    blocks = _named(_blocks(text.split("\n"), source))
    unfit = [name for name, block in blocks.items() if _is_other(block)]
    best = [name for name in blocks if name not in unfit]
    if not best:
        block = blocks[unfit[0]]
        what = " in ".join(
            word for word in (block.say(*_PARAMETER_KEYS)[0], _unit(block)[0]) if word
        )
        raise not_discharge(f"'{what}'", source, _unit(block)[1])
    value = _value_column(blocks[best[0]], source)
    name = choose_series(blocks, best, options, source, value)
    block = blocks[name]
    _refuse_short(block, source)
    unit, line = _unit(block)
    facts = Facts(
        _NAMES[block.delimiter],
        "Timestamp",
        value,
        missing=("-1",),
        unit=unit or None,
        unit_line=line,
        station=block.say("station_no", "station_id")[0],
        series=name,
        is_doubtful=lambda code: code.lower().startswith("estimated"),
    )
    flags = next((c for n, c in block.table.items() if n.lower().startswith("quality")), [])
    return make_rows(
        Raw(block.table["Timestamp"], block.table[value], block.numbers, flags),
        facts, options, source,
    )  # fmt: skip


def _blocks(lines: list[str], source: Source) -> list[_Block]:
    blocks = []
    keys: dict[str, tuple[str, int]] = {}
    k = 0
    while k < len(lines):
        header = _HEADER.match(lines[k])
        if header is None:
            keys.update(_key(lines[k], k + 1))
            k += 1
            continue
        end = next((j for j in range(k + 1, len(lines)) if lines[j].startswith("#")), len(lines))
        names = fields_of(lines[k].lstrip("# "), header[1])
        numbers, columns = rows_of(lines[:end], k + 1, header[1], names, source)
        blocks.append(_Block(keys, header[1], numbers, dict(zip(names, columns, strict=False))))
        keys, k = dict(keys), end
    return blocks


def _key(line: str, number: int) -> dict[str, tuple[str, int]]:
    match = re.match(r"#\s*\"?([\w ]+)\"?\s*[;,:\t]\s*(.*)", line)
    return {match[1].strip().lower(): (match[2].strip().strip('"'), number)} if match else {}


def _named(blocks: list[_Block]) -> dict[str, _Block]:
    """{name of the series: block}; repeats of a head with the same name are one series."""
    named: dict[str, _Block] = {}
    for block in blocks:
        name = block.say("ts_id", "ts_path", "ts_name", *_PARAMETER_KEYS)[0] or "Value"
        if name not in named:
            named[name] = block
            continue
        before = named[name]
        table = {
            column: [*texts, *block.table[column]]
            for column, texts in before.table.items()
            if column in block.table
        }
        named[name] = _Block(
            {k: v for k, v in before.keys.items() if k != "rows"},
            before.delimiter,
            [*before.numbers, *block.numbers],
            table,
        )
    return named


def _unit(block: _Block) -> tuple[str, int | None]:
    return block.say(*_UNIT_KEYS)


def _is_other(block: _Block) -> bool:
    unit = _unit(block)[0]
    return bool(unit) and known_unit(unit) is None


def _value_column(block: _Block, source: Source) -> str:
    found = [name for name in block.table if name.lower().startswith("value")]
    if not found:
        raise source.error("there is no column 'Value' beside the timestamps")
    return found[0]


def _refuse_short(block: _Block, source: Source) -> None:
    stated, line = block.say("rows")
    if stated.isdigit() and int(stated) != len(block.numbers):
        raise source.error(
            f"the head announces {stated} rows, but there are {len(block.numbers)}; the file was "
            "cut or joined, so download it again",
            line,
        )
