"""The summary in the terminal."""

from __future__ import annotations

import io
from functools import cache
from pathlib import Path

from rich.console import Console

import hydroyield
from hydroyield.jobs import SiteEstimate
from hydroyield.report.summary import print_summary

DEMO = Path(__file__).resolve().parents[2] / "demo_sites" / "quernholm_weir" / "site.yaml"


@cache
def demo() -> SiteEstimate:
    return hydroyield.estimate(hydroyield.read_site(DEMO))


def printed(**terminal: object) -> str:
    console = Console(file=io.StringIO(), width=100, highlight=False, **terminal)
    print_summary(demo(), console)
    return console.file.getvalue()


def test_it_is_plain_where_no_terminal_is() -> None:
    assert "\x1b[" not in printed()


def test_checks_have_colour_where_a_terminal_is() -> None:
    assert "\x1b[33mwarn" in printed(force_terminal=True, color_system="standard")


def test_it_fits_a_hundred_columns() -> None:
    assert all(len(line) <= 100 for line in printed().splitlines())


def test_it_says_the_answer_and_what_to_look_at() -> None:
    text = " ".join(printed().split())
    energy = demo().mean_annual_energy_mwh
    assert f"Mean annual energy {energy:.0f} MWh" in text
    assert f"{len(demo().checks) - len(demo().warnings())} passed" in text
    for check in demo().warnings():
        assert check.message in text


def test_markup_in_a_name_is_shown_as_it_is() -> None:
    """Square brackets are the terminal library's markup; user text never is."""
    from dataclasses import replace

    site = demo().site
    model = site.model.model_copy(
        update={"site": site.model.site.model_copy(update={"name": "[red]Weir[/red]"})}
    )
    console = Console(file=io.StringIO(), width=100)
    print_summary(replace(demo(), site=replace(site, model=model)), console)
    assert "[red]Weir[/red]" in console.file.getvalue()
