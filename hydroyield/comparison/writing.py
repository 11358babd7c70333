"""An option as a site of its own: a site file that runs where it lies, with its records."""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path

from hydroyield.comparison.trials import Refused, Trial
from hydroyield.errors import SiteFileError
from hydroyield.site.assembly import read_site
from hydroyield.site.option_assembly import combinations_of, machines_to_try
from hydroyield.site.option_writing import site_text_with, turbines_text
from hydroyield.site.reading import SiteDescription
from hydroyield.site.river_assembly import RiverAtSite

SITE_FILE = "site.yaml"  # unless the file of an old plant is called so


def option_files(site: SiteDescription, river: RiverAtSite, number: int) -> dict[str, bytes]:
    """{name: content} of a folder for one option, its site file first.

    river : at the site
    number : of the option, from 1

    Raises SiteFileError where there is no such option.
    """
    tried = combinations_of(site, river.valid_discharge)
    if not 1 <= number <= len(tried):
        message = f"there is no option {number}; write one from 1 to {len(tried)}"
        raise SiteFileError([site.fault(("options",), message)])
    trial = Trial(site, river, tuple(machines_to_try(site)))
    combination = tried[number - 1]
    if isinstance(found := trial.option(number, combination), Refused):
        message = f"option {number} is no plant: {found.reason}"
        raise SiteFileError([site.fault(("options",), message)])
    block = turbines_text(trial.turbines(combination))
    text = site_text_with(site.text, block, combination.pipe_diameter)
    files = {
        path.relative_to(site.folder).as_posix(): path.read_bytes() for path in _files_named(site)
    }
    name = SITE_FILE if SITE_FILE not in files else f"option_{number}.yaml"
    return {name: text.encode("utf-8"), **files}


def _files_named(site: SiteDescription) -> Iterator[Path]:
    """Every file that a site file names: its records, and those of the plant it replaces."""
    yield from (*site.record_paths, *site.reference_paths)
    baseline = site.model.baseline
    if baseline is not None and baseline.site is not None:
        old = site.folder / baseline.site
        yield old
        yield from _files_named(read_site(old))
