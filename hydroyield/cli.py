"""The command line: parse, call one job, write. Heavy rooms are imported inside the commands."""

from __future__ import annotations

import json
import sys
from pathlib import Path
from typing import TYPE_CHECKING, Annotated

import typer

import hydroyield

if TYPE_CHECKING:
    from hydroyield.site.reading import SiteDescription

app = typer.Typer(
    name="hydroyield",
    help="Annual energy of small run-of-river hydropower sites, from a site file and a discharge "
    "record.",
    no_args_is_help=True,
    add_completion=False,
    pretty_exceptions_enable=False,
    rich_markup_mode=None,
)

SiteArgument = Annotated[Path, typer.Argument(metavar="SITE.yaml", help="The site file.")]
JsonOption = Annotated[
    bool, typer.Option("--json", help="Print the result as JSON on stdout, and nothing else.")
]


def _print_version(wanted: bool) -> None:
    if wanted:
        typer.echo(f"hydroyield {hydroyield.__version__}")
        raise typer.Exit


@app.callback()
def _common(
    version: Annotated[
        bool,
        typer.Option(
            "--version", help="Print the version.", callback=_print_version, is_eager=True
        ),
    ] = False,
) -> None:
    """Annual energy of small run-of-river hydropower sites."""


@app.command()
def estimate(
    site: SiteArgument,
    out: Annotated[
        Path | None,
        typer.Option("--out", metavar="FOLDER", help="Folder to write; needed without --json."),
    ] = None,
    as_json: JsonOption = False,
    quiet: Annotated[
        bool, typer.Option("--quiet", help="Print nothing but faults; write the folder.")
    ] = False,
) -> None:
    """Annual energy and capacity factor of a site: page, figures, tables and checks.

    With --json no page and no figures are made; FOLDER then gets the tables alone.
    """
    from hydroyield import jobs
    from hydroyield.report.files import figure_count, result_text, write_page, write_tables
    from hydroyield.report.folder import check_folder, write_folder
    from hydroyield.report.progress import progress
    from hydroyield.report.summary import print_summary
    from hydroyield.site.assembly import read_site

    if out is None and not as_json:
        raise typer.BadParameter("name the folder to write: --out FOLDER (or --json)")
    if out is not None:
        check_folder(out)
    found = jobs.estimate(read_site(site))
    if out is not None:
        with progress(0 if as_json else figure_count(), quiet=quiet or as_json) as steps:

            def fill(folder: Path) -> None:
                write_tables(found, folder)
                if not as_json:
                    write_page(found, folder, steps)

            write_folder(out, fill)
    if as_json:
        sys.stdout.write(result_text(found))
    elif out is not None and not quiet:
        print_summary(found)
        typer.echo(f"\nWritten to {out}; open {out / 'report.html'}")


@app.command()
def record(
    files: Annotated[
        list[Path],
        typer.Argument(metavar="FILE...", help="The record; several files of one gauge are one."),
    ],
    out: Annotated[
        Path | None,
        typer.Option("--out", metavar="FOLDER", help="Folder to write: page, figures, tables."),
    ] = None,
    as_json: JsonOption = False,
    unit: Annotated[
        str | None, typer.Option("--unit", help="Unit of the values, such as m3/s, l/s, cfs, mm/d.")
    ] = None,
    file_format: Annotated[
        str | None,
        typer.Option("--file-format", metavar="NAME", help="Format, such as grdc or plain."),
    ] = None,
    date_column: Annotated[
        str | None, typer.Option("--date-column", metavar="NAME", help="Column of dates.")
    ] = None,
    value_column: Annotated[
        str | None,
        typer.Option("--value-column", metavar="NAME", help="Column of discharges, or the series."),
    ] = None,
    missing: Annotated[
        list[str] | None,
        typer.Option("--missing", metavar="MARK", help="A mark for no value; may be repeated."),
    ] = None,
    date_order: Annotated[
        str | None, typer.Option("--date-order", help="day_first or month_first.")
    ] = None,
    decimal_mark: Annotated[
        str | None, typer.Option("--decimal-mark", help="point or comma.")
    ] = None,
    gauge_area: Annotated[
        str | None,
        typer.Option("--gauge-area", metavar="AREA", help='Catchment area, such as "312 km2".'),
    ] = None,
    year_start_month: Annotated[
        int,
        typer.Option("--year-start-month", min=1, max=12, help="First month of the water year."),
    ] = 10,
    quiet: Annotated[bool, typer.Option("--quiet", help="Print nothing but faults.")] = False,
) -> None:
    """Read a discharge record and say what it is worth: receipt, checks, figures of the river."""
    from hydroyield import jobs
    from hydroyield.record import RecordOptions
    from hydroyield.report.files import (
        figure_count,
        record_result_text,
        write_record_page,
        write_record_tables,
    )
    from hydroyield.report.folder import check_folder, write_folder
    from hydroyield.report.progress import progress
    from hydroyield.report.record_summary import print_record_summary

    if out is not None:
        check_folder(out)
    options = RecordOptions(
        unit=unit,
        date_column=date_column,
        value_column=value_column,
        missing=tuple(missing or ()),
        date_order=date_order,
        decimal_mark=decimal_mark,
        gauge_area_m2=None if gauge_area is None else _area(gauge_area),
        file_format=file_format,
    )
    found = jobs.look_at_record(files, options, year_start_month=year_start_month)
    if out is not None:
        steps_wanted = 0 if as_json else figure_count(of_record=True)
        with progress(steps_wanted, quiet=quiet or as_json) as steps:

            def fill(folder: Path) -> None:
                write_record_tables(found, folder)
                if not as_json:
                    write_record_page(found, folder, steps)

            write_folder(out, fill)
    if as_json:
        sys.stdout.write(record_result_text(found))
    elif not quiet:
        print_record_summary(found)
        if out is not None:
            typer.echo(f"\nWritten to {out}; open {out / 'report.html'}")


@app.command()
def compare(
    site: SiteArgument,
    out: Annotated[
        Path | None,
        typer.Option("--out", metavar="FOLDER", help="Folder to write; needed without --json."),
    ] = None,
    as_json: JsonOption = False,
    write: Annotated[
        int | None,
        typer.Option(
            "--write",
            metavar="OPTION",
            help="Write this option as a site file of its own into FOLDER, and compare nothing.",
        ),
    ] = None,
    quiet: Annotated[
        bool, typer.Option("--quiet", help="Print nothing but faults; write the folder.")
    ] = False,
) -> None:
    """Compute the options of a site and compare them: how many units, of what size and type."""
    from hydroyield import jobs
    from hydroyield.report.comparison_files import (
        comparison_figure_count,
        comparison_text,
        write_comparison_page,
        write_comparison_tables,
    )
    from hydroyield.report.comparison_summary import print_comparison
    from hydroyield.report.folder import check_folder, write_folder
    from hydroyield.report.progress import progress
    from hydroyield.site.assembly import read_site

    if out is None and (write is not None or not as_json):
        raise typer.BadParameter("name the folder to write: --out FOLDER (or --json)")
    if out is not None:
        check_folder(out)
    described = read_site(site)
    if write is not None:
        assert out is not None  # refused above
        _write_option(described, write, out, quiet=quiet)
        return
    figures = 0 if as_json else comparison_figure_count()
    with progress(jobs.option_count(described) + figures, quiet=quiet or as_json) as steps:
        found = jobs.compare(described, lambda: steps.done("options"))

        def fill(folder: Path) -> None:
            write_comparison_tables(found, folder)
            if not as_json:
                write_comparison_page(found, folder, steps)

        if out is not None:
            write_folder(out, fill)
    if as_json:
        sys.stdout.write(comparison_text(found))
    elif out is not None and not quiet:
        print_comparison(found)
        typer.echo(f"\nWritten to {out}; open {out / 'report.html'}")


def _write_option(site: SiteDescription, number: int, out: Path, *, quiet: bool) -> None:
    """A folder in which one option is a site of its own."""
    from hydroyield import jobs
    from hydroyield.report.folder import write_folder

    files = jobs.write_option(site, number)

    def fill(folder: Path) -> None:
        for name, content in files.items():
            (folder / name).parent.mkdir(parents=True, exist_ok=True)
            (folder / name).write_bytes(content)

    write_folder(out, fill)
    if not quiet:
        typer.echo(
            f"Written to {out}; try hydroyield estimate {out / next(iter(files))} --out results"
        )


def _area(text: str) -> float:
    """Catchment area that the user wrote [m2]."""
    from hydroyield.quantities import CATCHMENT_AREA, parse

    try:
        area = parse(text, CATCHMENT_AREA)
    except ValueError as error:
        raise typer.BadParameter(str(error), param_hint="--gauge-area") from None
    if not area > 0:
        raise typer.BadParameter(
            "write an area above 0, such as 312 km2", param_hint="--gauge-area"
        )
    return area


@app.command()
def new(
    folder: Annotated[Path, typer.Argument(metavar="FOLDER", help="The folder to make.")],
    layout: Annotated[
        str,
        typer.Option(
            "--layout",
            metavar="NAME",
            help="low-head-weir, high-head-diversion, mill-or-canal-drop or pipe-outfall.",
        ),
    ],
) -> None:
    """Start a site: a commented site file, an invented record to try it, a schema for editors."""
    from hydroyield.report.folder import write_new_folder
    from hydroyield.site.starting import SITE_FILE, starting_files

    files = starting_files(layout)

    def fill(place: Path) -> None:
        for name, text in files.items():
            (place / name).write_text(text, "utf-8")

    write_new_folder(folder, fill)
    typer.echo(f"Written to {folder}. Put your record there, and edit {folder / SITE_FILE}.")


@app.command()
def machines(site: SiteArgument, as_json: JsonOption = False) -> None:
    """List the types of turbine that suit the site, with the reason for each that does not."""
    from hydroyield import jobs
    from hydroyield.report.machines import machines_facts, print_machines
    from hydroyield.site.assembly import read_site

    found = jobs.machines(read_site(site))
    if as_json:
        facts = machines_facts(found)
        sys.stdout.write(json.dumps(facts, indent=2, allow_nan=False, ensure_ascii=False) + "\n")
    else:
        print_machines(found)


@app.command()
def schema() -> None:
    """Print the JSON Schema of the site file, with which editors complete and underline."""
    from hydroyield.site.schema import schema_text

    sys.stdout.write(schema_text())


@app.command()
def check(site: SiteArgument, as_json: JsonOption = False) -> None:
    """Validate a site file, and show in SI what was understood, filled in and left out."""
    from hydroyield.report.understood import understood, understood_text
    from hydroyield.site.assembly import read_site

    described = read_site(site)
    if as_json:
        sys.stdout.write(json.dumps(understood(described), indent=2, ensure_ascii=False) + "\n")
    else:
        typer.echo(understood_text(described))
