"""All formats that are read, and which of them a text is written in."""

from __future__ import annotations

import difflib
from collections.abc import Callable
from dataclasses import dataclass

from hydroyield.record.faults import Source
from hydroyield.record.formats import (
    austria,
    bavaria,
    canada,
    england,
    france,
    germany,
    grdc,
    kiwis,
    norway,
    nrfa,
    poland,
    rdb,
    spain,
    switzerland,
    waterml,
)
from hydroyield.record.options import RecordOptions
from hydroyield.record.plain import read_plain
from hydroyield.record.rows import Rows


@dataclass(frozen=True)
class Format:
    """A format of files.

    name : as in the receipt and under `file_format:`
    looks_like : how its files are told, for messages
    recognises : whether a text is written in it
    read : the reader, raises RecordError
    legacy_encoding : of files that are not UTF-8
    """

    name: str
    looks_like: str
    recognises: Callable[[str], bool]
    read: Callable[[str, RecordOptions, Source], Rows]
    legacy_encoding: str = "cp1252"


PLAIN = Format("plain", "any delimited text", lambda text: False, read_plain)
FORMATS = (
    Format("usgs-rdb", "names with site_no above a row of widths", rdb.recognises, rdb.read),
    Format("uk-nrfa", "lines 'station,id,...' and 'dataType,...'", nrfa.recognises, nrfa.read),
    Format(
        "england-hydrology", "a header 'measure,dateTime,...,value'", england.recognises,
        england.read,
    ),
    Format("grdc", "'#' lines and 'YYYY-MM-DD;hh:mm; Value'", grdc.recognises, grdc.read),
    Format("canada-daily", "a header 'ID,PARAM,Date,Value,SYM'", canada.recognises, canada.read),
    Format(
        "france-values", "a header 'Date (TU),Valeur (en m3/s),...'", france.recognises_values,
        france.read_values,
    ),
    Format(
        "france-daily-means", "columns such as resultat_obs_elab", france.recognises_means,
        france.read_means,
    ),
    Format(
        "germany-bavaria", "lines 'Quelle:;' or 'Zeitbezug:;' above 'Datum;...'",
        bavaria.recognises, bavaria.read,
    ),
    Format(
        "germany-daily-means", "a header 'Datum;Tagesmittelwert;...;Fehlwerte: ...'",
        germany.recognises_daily, germany.read_daily,
    ),
    Format(
        "germany-pairs", "the header '\"date\";\"value\"'", germany.recognises_pairs,
        germany.read_pairs,
    ),
    Format(
        "germany-stamps", "'#' lines with RINVAL", germany.recognises_stamps, germany.read_stamps
    ),
    Format("austria", "a line 'Werte:' above the rows", austria.recognises, austria.read),
    Format(
        "switzerland", "a header '...;Zeitstempel;...;Wert;Freigabestatus'",
        switzerland.recognises, switzerland.read,
    ),
    Format("norway-json", "JSON with observations", norway.recognises_json, norway.read_json),
    Format(
        "norway-text", "rows such as '19731214/1200 10.76'", norway.recognises_text,
        norway.read_text,
    ),
    Format("kiwis", "a line '#Timestamp;Value;...'", kiwis.recognises, kiwis.read),
    Format(
        "poland", "ten columns without a header, by hydrological year", poland.recognises,
        poland.read, "cp1250",
    ),
    Format("spain", "rows 'station;d;m;y;value'", spain.recognises, spain.read),
    Format("waterml2", "XML of WaterML 2.0", waterml.recognises, waterml.read),
)  # fmt: skip
_BY_NAME = {known.name: known for known in (*FORMATS, PLAIN)}


def format_of_text(text: str, options: RecordOptions, source: Source) -> Format:
    """The format that the user names, else the only one that claims the text, else plain.

    Raises RecordError for an unknown name and for a format that the text is not written in.
    """
    claims = [known for known in FORMATS if known.recognises(text)]
    if options.file_format is None:
        return claims[0] if len(claims) == 1 else PLAIN
    named = _named(options.file_format, source)
    if named is not PLAIN and named not in claims:
        raise _misfit(named, claims, source)
    return named


def _named(name: str, source: Source) -> Format:
    if name in _BY_NAME:
        return _BY_NAME[name]
    close = difflib.get_close_matches(name.lower(), _BY_NAME, n=1)
    hint = f"; did you mean {close[0]}?" if close else ""
    raise source.error(
        f"format '{name}' is not read here; write one of {', '.join(_BY_NAME)}{hint}",
        key="file_format",
    )


def _misfit(named: Format, claims: list[Format], source: Source) -> Exception:
    found = f"write {claims[0].name}" if len(claims) == 1 else "write plain"
    return source.error(
        f"this is no file of format {named.name}, which has {named.looks_like}; {found}, or leave "
        "`file_format:` out",
        key="file_format",
    )
