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
) -> None:
    """Annual energy and capacity factor of a site, with tables and checks."""
    from hydroyield import jobs
    from hydroyield.report.files import result_text, write_estimate
    from hydroyield.report.folder import check_folder, write_folder
    from hydroyield.report.summary import summary
    from hydroyield.site.assembly import read_site

    if out is None and not as_json:
        raise typer.BadParameter("name the folder to write: --out FOLDER (or --json)")
    if out is not None:
        check_folder(out)
    found = jobs.estimate(read_site(site))
    if out is not None:
        write_folder(out, lambda folder: write_estimate(found, folder))
    if as_json:
        sys.stdout.write(result_text(found))
    else:
        typer.echo(summary(found))
        typer.echo(f"\nWritten to {out}")


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
