"""What the README shows is what the tool does."""

from __future__ import annotations

import io
import re
from pathlib import Path

import pytest
import yaml
from rich.console import Console

import hydroyield
from hydroyield.report.summary import print_summary
from hydroyield.site import read_site_text

ROOT = Path(__file__).parents[1]
README = (ROOT / "README.md").read_text("utf-8")
DEMO = ROOT / "demo_sites" / "quernholm_weir" / "site.yaml"


def blocks(language: str) -> list[str]:
    """The fenced blocks in one language."""
    return re.findall(rf"^```{language}\n(.*?)^```", README, re.S | re.M)


def test_the_site_file_shown_is_valid() -> None:
    text, options = blocks("yaml")
    assert read_site_text(text).name == yaml.safe_load(text)["site"]["name"]
    assert read_site_text(text + options).model.options is not None


def test_the_summary_shown_is_printed() -> None:
    console = Console(file=io.StringIO(), width=100, highlight=False)
    print_summary(hydroyield.estimate(hydroyield.read_site(DEMO)), console)
    printed = [line.rstrip() for line in console.file.getvalue().splitlines()]
    shown = re.search(r"^```\n(Mean annual energy.*?)^```", README, re.S | re.M)
    assert shown
    assert set(shown[1].replace("\u202f", " ").splitlines()) <= {
        line.replace("\u202f", " ") for line in printed
    }


def test_the_example_for_python_runs(
    monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    import matplotlib as mpl

    mpl.use("Agg")
    monkeypatch.chdir(ROOT)
    names: dict[str, object] = {}
    (text,) = blocks("python")
    exec(compile(text, "README.md", "exec"), names)
    assert "exceedance_percent" in capsys.readouterr().out
    two, one = names["estimate"], names["one"]
    assert one.installed_capacity_kw == two.installed_capacity_kw / 2
    assert one.mean_annual_energy_mwh < two.mean_annual_energy_mwh


def test_every_link_leads_to_a_file() -> None:
    for target in re.findall(r"\]\(([^)#]+)\)", README):
        assert (ROOT / target).exists(), target
