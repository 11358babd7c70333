"""Invented files in the format of each agency, made in code, so that what they hold is known.

Each maker knows the values, the unit and the flags it writes, and the quirks of its format.
"""

from __future__ import annotations

import datetime
import json
from collections.abc import Callable
from dataclasses import dataclass, field

from hydroyield.record import RecordOptions

CFS = 0.3048**3  # m3/s, by definition of the foot
NO_OPTIONS = RecordOptions()
M3S = RecordOptions(unit="m3/s")
FIRST = datetime.date(2019, 10, 25)
DAYS = [FIRST + datetime.timedelta(days=k) for k in range(20)]  # over 1 November
VALUES: list[float | None] = [
    None if k in (3, 12) else round(2.125 + 0.375 * ((7 * k) % 11), 3) for k in range(20)
]


@dataclass(frozen=True)
class FormatFile:
    """A file in pieces: what stands above the rows, the rows, and what stands below.

    name : of the format; factor : one unit of the file [m3/s]
    flags : {code: rows}; estimated : rows with a value whose code says estimated or ice
    other : (text, replacement) that turns it into a file of another parameter
    no_unit : (text, replacement) that takes the unit away, None where the format implies it
    cut : characters of the last row that are left when it is cut
    """

    name: str
    head: str
    rows: list[str]
    foot: str = ""
    unit: str = "m3/s"
    unit_source: str = "file"
    factor: float = 1.0
    flags: dict[str, int] = field(default_factory=dict)
    estimated: int = 0
    options: RecordOptions = NO_OPTIONS
    codec: str = "utf-8"
    other: tuple[str, str] | None = None
    no_unit: tuple[str, str] | None = None
    cut: int = 0
    between: str = "\n"

    def text(self, rows: list[str] | None = None) -> str:
        return self.head + self.between.join(self.rows if rows is None else rows) + self.foot

    def content(self, rows: list[str] | None = None) -> bytes:
        return self.text(rows).encode(self.codec)


def rows(row: Callable[[datetime.date, float | None, int], str]) -> list[str]:
    return [row(day, value, k) for k, (day, value) in enumerate(zip(DAYS, VALUES, strict=True))]


def point(value: float | None, missing: str = "") -> str:
    return missing if value is None else f"{value:.3f}"


def comma(value: float | None, missing: str = "") -> str:
    return point(value, missing).replace(".", ",")


def usgs() -> FormatFile:
    """A maximum beside the mean, a gage height, a remark in the place of a value, leading zeros."""
    names = [f"{series}{end}" for series in ("1_00060_00001", "2_00060_00003", "3_00065_00003")
             for end in ("", "_cd")]  # fmt: skip
    codes = {0: "A:e", 1: "P", 2: "P:e"}
    return FormatFile(
        "usgs-rdb",
        "# invented\n#\nagency_cd\tsite_no\tdatetime\t" + "\t".join(names) + "\n"
        "5s\t15s\t20d" + "\t14n\t10s" * 3 + "\n",
        rows(lambda day, value, k: (
            f"USGS\t01234500\t{day}\t99\tA\t{point(value, 'Ice' if k == 3 else '')}"
            f"\t{codes.get(k, 'A')}\t1.2\tA"
        )),
        "\n",
        unit="cfs",
        factor=CFS,
        flags={"A:e": 1, "P": 1, "P:e": 1, "A": 16, "Ice": 1},
        estimated=2,
        other=("00060", "00010"),
        cut=40,
    )  # fmt: skip


def nrfa() -> FormatFile:
    head = (
        "file,timestamp,2020-01-01T00:00:00\nstation,id,99001\n"
        'station,name,"Lark at Beck, Mill"\ndataType,id,gdf\n'
        "dataType,name,Gauged Daily Flow\ndataType,units,m3/s\n"
        "data,first,2019-10-25\ndata,last,2019-11-13\n"
    )
    end = {3: "M", 12: "M", 5: "E"}
    return FormatFile(
        "uk-nrfa",
        head + "# Pégase\n",
        rows(lambda day, value, k: (
            f"{day},{point(value)}" + (f",{end[k]}" if k in end else "")
        )),
        flags={"M": 2, "E": 1},
        estimated=1,
        codec="latin-1",
        other=("Gauged Daily Flow", "Catchment Daily Rainfall"),
        no_unit=("dataType,units,m3/s\n", ""),
        cut=10,
    )  # fmt: skip


def england() -> FormatFile:
    measure = "http://example.org/measures/abcd-flow-m-86400-m3s-qualified"
    return FormatFile(
        "england-hydrology",
        "measure,dateTime,date,value,completeness,quality,qcode\n",
        rows(lambda day, value, k: (
            f"{measure},{day}T09:00:00,{day},{point(value)},Complete,"
            f"{'Missing' if value is None else 'Estimated' if k == 7 else 'Good'},"
        )),
        "\n",
        flags={"Good": 17, "Missing": 2, "Estimated": 1},
        estimated=1,
        other=("flow-m-86400-m3s", "level-i-900-m"),
        cut=70,
    )  # fmt: skip


def grdc() -> FormatFile:
    return FormatFile(
        "grdc",
        "# Title: invented\n# GRDC-No.:   9999001\n# Catchment area (km²):   -999\n"
        "# Unit of measure:   m³/s\n# DATA\nYYYY-MM-DD;hh:mm; Value\n",
        rows(lambda day, value, k: f"{day};--:--;{point(value, '-999.000'):>12}"),
        codec="cp1252",
        other=("m³/s", "cm"),
        cut=12,
    )


def grdc_older() -> FormatFile:
    """The values are in the column Original; Calculated has none."""
    return FormatFile(
        "grdc",
        "# Title: invented\n# DATA\nYYYY-MM-DD;hh:mm; Original; Calculated; Flag\n",
        rows(lambda day, value, k: (
            f"{day};--:--;{point(value, '-999.000'):>10};  -999.000; {k % 2 * 99}"
        )),
        flags={"0": 10, "99": 10},
        cut=20,
    )  # fmt: skip


def canada() -> FormatFile:
    """A level (PARAM 2) between the rows of flow, and the header once more in the middle."""
    banner = "Daily Discharge (m3/s) (PARAM = 1) and Daily Water Level (m) (PARAM = 2)"
    names = " ID,PARAM,Date,Value,SYM"
    codes = {0: "B", 1: "B", 2: "E", 6: "A", 8: "D"}
    made = rows(lambda day, value, k: (
        f"08XX001,1,{day:%Y/%m/%d},{point(value)},{codes.get(k, '')}"
    ))  # fmt: skip
    made[4] += "\n08XX001,2,2019/10/29,1.234,"
    made[9] += f"\n{banner}\n{names}"
    return FormatFile(
        "canada-daily",
        f"{banner}\n{names}\n",
        made,
        flags={"B": 2, "E": 1, "A": 1, "D": 1},
        estimated=3,
        other=(",1,", ",2,"),
        cut=14,
    )


def france_values() -> FormatFile:
    return FormatFile(
        "france-values",
        "Date (TU),Valeur (en m3/s),Statut,Qualification,Méthode,Continuité\n",
        rows(lambda day, value, k: (
            f"{day}T00:00:00.000Z,{point(value)},Donnée validée,Bonne,"
            f"{'Estimée' if k == 0 else 'Calculée'},Continue"
        )),
        flags={"Bonne, Calculée": 19, "Bonne, Estimée": 1},
        estimated=1,
        other=("en m3/s", "en mm"),
        no_unit=("Valeur (en m3/s)", "Valeur"),
        cut=30,
    )  # fmt: skip


def france_means(kind: str = "QmnJ") -> FormatFile:
    """Litres per second; a monthly mean stands between the daily ones."""
    made = rows(lambda day, value, k: f"X001;{day};{point(value)};{kind};Bonne")
    made[5] += "\nX001;2019-10-01;3.000;QmM;Bonne"
    return FormatFile(
        "france-daily-means",
        "code_station;date_obs_elab;resultat_obs_elab;grandeur_hydro_elab;libelle_qualification\n",
        made,
        unit="l/s",
        factor=1e-3,
        flags={"Bonne": 20},
        other=("QmnJ", "HIXnJ"),
        cut=12,
    )


def france_means_json() -> FormatFile:
    return FormatFile(
        "france-daily-means",
        '{"count": 20, "data": [\n',
        rows(lambda day, value, k: json.dumps(
            {"date_obs_elab": str(day), "resultat_obs_elab": value, "grandeur_hydro_elab": "QmnJ"}
        )),
        "\n]}\n",
        unit="l/s",
        factor=1e-3,
        other=("QmnJ", "HIXnJ"),
        between=",\n",
        cut=30,
    )  # fmt: skip


def bavaria() -> FormatFile:
    """A byte order mark, a name too many in the header, and two blank gaps."""
    return FormatFile(
        "germany-bavaria",
        "Quelle:;Invented\nZeitbezug:;MEZ\nMessstellen-Nr.:;99\nParameter:;Abfluss [m³/s]\n\n"
        "Datum;Mittelwert;Maximum;Minimum;Prüfstatus;\n",
        rows(lambda day, value, k: f"{day};{comma(value)};9,9;0,1;Geprüft"),
        "\n",
        flags={"Geprüft": 20},
        codec="utf-8-sig",
        other=("Abfluss [m³/s]", "Wasserstand [cm]"),
        no_unit=("Parameter:;Abfluss [m³/s]\n", ""),
        cut=12,
    )


def germany_daily() -> FormatFile:
    return FormatFile(
        "germany-daily-means",
        'Datum;Tagesmittelwert;Einheit: m³/s;"Fehlwerte: -777"\n',
        rows(lambda day, value, k: f"{day:%d.%m.%Y};{comma(value, '-777')}"),
        codec="latin-1",
        other=("Einheit: m³/s", "Einheit: cm"),
        no_unit=("Einheit: m³/s;", ""),
        cut=7,
    )


def germany_pairs() -> FormatFile:
    return FormatFile(
        "germany-pairs",
        '"date";"value"\n',
        rows(lambda day, value, k: f'"{day}";"{point(value)}"'),
        unit_source="site file",
        options=M3S,
        cut=9,
    )


def germany_stamps() -> FormatFile:
    return FormatFile(
        "germany-stamps",
        "#SANR123|*|#SNAMELarkbeck|*|#CNAMEQ|*|#CUNITm³/s|*|#RINVAL-777.0|*|\n",
        rows(lambda day, value, k: f"{day:%Y%m%d}1200 {point(value, '-777.000')}"),
        other=("CNAMEQ", "CNAMEW"),
        no_unit=("#CUNITm³/s|*|", ""),
        cut=10,
    )


def austria() -> FormatFile:
    return FormatFile(
        "austria",
        "Messstelle:              ;Lärchenbach\n  HZB-Nummer:            ;200001\n"
        "  gültig ab:             ;01.01.2011\nEinheit:                 ;m³/s\nWerte:\n",
        rows(lambda day, value, k: f"{day:%d.%m.%Y} 00:00:00   ;   {comma(value, 'Lücke')}"),
        codec="latin-1",
        other=("m³/s", "cm"),
        no_unit=("Einheit:                 ;m³/s\n", ""),
        cut=12,
    )


def switzerland() -> FormatFile:
    return FormatFile(
        "switzerland",
        "Größe;Abfluss\n" * 8 + "Stationsname;Stationsnummer;Parameter;Zeitreihe;Parametereinheit;"
        "Zeitstempel;Zeitpunkt_des_Auftretens;Wert;Freigabestatus\n",
        rows(lambda day, value, k: (
            f"Bach;2999;Abfluss;Tagesmittel;m³/s;{day} 00:00:00;;{point(value)};Freigegeben"
        )),
        "\n",
        flags={"Freigegeben": 20},
        codec="latin-1",
        other=(";Abfluss;", ";Pegel;"),
        no_unit=(";m³/s;", ";;"),
        cut=50,
    )  # fmt: skip


def norway_json() -> FormatFile:
    return FormatFile(
        "norway-json",
        '{"data": [{"stationId": "1.2.3", "parameter": 1001, "parameterName": "Vannføring",'
        ' "unit": "m³/s", "observations": [\n',
        rows(lambda day, value, k: json.dumps({
            "time": f"{day}T11:00:00Z", "value": -9999 if k == 3 else value,
            "correction": 2 if k == 5 else 0, "quality": 3,
        })),
        "\n]}]}\n",
        flags={"quality 3": 19, "correction 2": 1},
        estimated=1,
        other=("1001", "1000"),
        between=",\n",
        cut=30,
    )  # fmt: skip


def norway_text() -> FormatFile:
    return FormatFile(
        "norway-text",
        "",
        rows(lambda day, value, k: f"{day:%Y%m%d}/1200 {point(value, '-9999.000')}"),
        "\n",
        unit_source="site file",
        options=M3S,
        cut=11,
    )


def kiwis() -> FormatFile:
    return FormatFile(
        "kiwis",
        "#station_no;99\n#stationparameter_name;Q\n#ts_unitsymbol;m³/s\n#ts_name;Day.Mean\n"
        "#rows;20\n#Timestamp;Value;Quality Code\n",
        rows(lambda day, value, k: (
            f"{day}T00:00:00.000+01:00;{point(value, '-1' if k == 3 else '')};{40 + k % 2}"
        )),
        "\n",
        flags={"40": 10, "41": 10},
        other=("m³/s", "m"),
        no_unit=("#ts_unitsymbol;m³/s\n", ""),
        cut=15,
    )  # fmt: skip


def poland() -> FormatFile:
    """November 2019 is month 1 of the hydrological year 2020."""
    return FormatFile(
        "poland",
        "",
        rows(lambda day, value, k: (
            f'"149000001","Ścieżka","Rzeka (1)","{day.year + (day.month > 10)}",'
            f'"{(day.month - 11) % 12 + 1:02d}","{day.day:02d}",9999,'
            f'{point(value, "99999.999")},99.9,"{day.month:02d}"'
        )),
        "\n",
        codec="cp1250",
        cut=60,
    )  # fmt: skip


def spain() -> FormatFile:
    return FormatFile(
        "spain",
        "",
        rows(lambda day, value, k: f"2001;{day.day};{day.month};{day.year};{point(value, '-100')}"),
        "\n",
        cut=10,
    )


def waterml() -> FormatFile:
    def tvp(day: datetime.date, value: float | None, k: int) -> str:
        held = '<w:value xsi:nil="true"/>' if value is None else f"<w:value>{value:.3f}</w:value>"
        mark = '<w:metadata><w:TVPMeasurementMetadata><w:quality xlink:href="q/estimated"/>'
        mark += "</w:TVPMeasurementMetadata></w:metadata>"
        return (
            f"<w:point><w:MeasurementTVP><w:time>{day}T00:00:00+01:00</w:time>{held}"
            f"{mark if k == 1 else ''}</w:MeasurementTVP></w:point>"
        )

    return FormatFile(
        "waterml2",
        '<?xml version="1.0" encoding="UTF-8"?>\n<w:Collection '
        'xmlns:w="http://www.opengis.net/waterml/2.0" xmlns:gml="http://www.opengis.net/gml/3.2" '
        'xmlns:xlink="http://www.w3.org/1999/xlink" '
        'xmlns:xsi="http://www.w3.org/2001/XMLSchema-instance">\n'
        '<w:MeasurementTimeseries gml:id="ts1"><w:defaultPointMetadata>'
        '<w:DefaultTVPMeasurementMetadata><w:uom code="m3/s"/></w:DefaultTVPMeasurementMetadata>'
        "</w:defaultPointMetadata>\n",
        rows(tvp),
        "\n</w:MeasurementTimeseries></w:Collection>\n",
        flags={"estimated": 1},
        estimated=1,
        other=('code="m3/s"', 'code="m"'),
        no_unit=('<w:uom code="m3/s"/>', ""),
        cut=30,
    )


FILES = {
    maker.__name__: maker()
    for maker in (
        usgs, nrfa, england, grdc, grdc_older, canada, france_values, france_means,
        france_means_json, bavaria, germany_daily, germany_pairs, germany_stamps, austria,
        switzerland, norway_json, norway_text, kiwis, poland, spain, waterml,
    )
}  # fmt: skip
