"""The command line: parse, call one job, write. Heavy rooms are imported inside the commands."""

from __future__ import annotations

import json
import sys
from pathlib import Path
from typing import Annotated

import typer

import hydroyield

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
    from hydroyield.report.files import result_text, steps_of_page, write_page, write_tables
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
        place = out
        with progress(0 if as_json else steps_of_page(), quiet=quiet or as_json) as steps:

            def fill(folder: Path) -> None:
                write_tables(found, folder)
                if not as_json:
                    write_page(found, folder, steps)

            write_folder(place, fill)
    if as_json:
        sys.stdout.write(result_text(found))
    elif out is not None and not quiet:
        print_summary(found)
        typer.echo(f"\nWritten to {out}; open {out / 'report.html'}")


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
