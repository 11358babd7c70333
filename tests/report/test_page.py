"""The page: what it says, and that it holds nothing it should not."""

from __future__ import annotations

import re
import shutil
from functools import cache
from html.parser import HTMLParser
from pathlib import Path

import pytest
from report_gold import GOLD, scrubbed_page

import hydroyield
from hydroyield.jobs import SiteEstimate
from hydroyield.report import words
from hydroyield.report.page import page, page_data

DEMO = Path(__file__).resolve().parents[2] / "demo_sites" / "quernholm_weir"


@cache
def demo() -> SiteEstimate:
    return hydroyield.estimate(hydroyield.read_site(DEMO / "site.yaml"))


def test_the_page_is_the_gold_page() -> None:
    """To accept a new page: python tests/report_gold.py."""
    assert scrubbed_page().splitlines() == GOLD.read_text("utf-8").splitlines()


class Balance(HTMLParser):
    """Every element that is opened is closed, in order."""

    VOID = frozenset({"meta", "img", "br", "link"})

    def __init__(self) -> None:
        super().__init__()
        self.open: list[str] = []
        self.ids: list[str] = []

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.ids += [value for name, value in attrs if name == "id" and value]
        if tag not in self.VOID:
            self.open.append(tag)

    def handle_endtag(self, tag: str) -> None:
        assert self.open.pop() == tag


def test_elements_are_closed_and_ids_are_unique() -> None:
    parser = Balance()
    parser.feed(page(demo(), []))
    assert parser.open == []
    assert len(parser.ids) == len(set(parser.ids))


def test_nothing_is_fetched() -> None:
    """No address of another place, and a policy that forbids all."""
    text = page(demo(), [])
    assert not re.search(r"""(src|href)\s*=\s*["'](?!#|data:)""", text)
    assert "default-src 'none'" in text


def test_user_text_is_escaped(tmp_path: Path) -> None:
    text = (DEMO / "site.yaml").read_text("utf-8")
    text = text.replace("name: Quernholm Weir", 'name: "<script>alert(1)</script>"')
    text = re.sub(r"name: fish pass", 'name: "<img src=x onerror=alert(2)>"', text)
    (tmp_path / "site.yaml").write_text(text, "utf-8")
    shutil.copy(DEMO / "ashwen_daily.csv", tmp_path)
    shown = page(hydroyield.estimate(hydroyield.read_site(tmp_path / "site.yaml")), [])
    assert "<script" not in shown
    assert "<img" not in shown
    assert "&lt;script&gt;alert(1)&lt;/script&gt;" in shown
    assert "&lt;img src=x onerror=alert(2)&gt;" in shown


def test_every_warning_and_every_year_is_on_the_page() -> None:
    data = page_data(demo(), [])
    assert len(data["warnings"]) + len(data["passed"]) == len(demo().checks)
    assert [row[0] for row in data["years"]] == [
        words.year_name(demo(), year) for year in demo().years_used
    ]
    assert any(label == "Left out: 2001/02" for label, _ in data["basis"])


@pytest.mark.parametrize(
    ("mwh", "text"),
    [(954.9, "955 MWh"), (1239.6, "1\u202f240 MWh"), (0.01234, "0.0123 MWh"), (0.0, "0 MWh")],
)
def test_energy_has_three_figures(mwh: float, text: str) -> None:
    assert words.energy(mwh) == text


@pytest.mark.parametrize(
    ("metres", "text"), [(2.786, "2.79 m"), (9.994, "9.99 m"), (123.4, "123 m")]
)
def test_head_to_a_centimetre_under_ten_metres(metres: float, text: str) -> None:
    assert words.head(metres) == text


def test_a_capacity_factor_is_in_whole_per_cent() -> None:
    assert words.percent(0.4193) == "42 %"


@pytest.mark.parametrize(
    ("numbers", "text"),
    [(None, "all year"), ((3, 4, 5), "March to May"), ((1, 12), "January, December")],
)
def test_months_in_words(numbers: tuple[int, ...] | None, text: str) -> None:
    assert words.months(numbers) == text
