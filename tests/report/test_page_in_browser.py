"""The page in a real browser: headless Chromium, driven through its own driver.

Skipped, with the reason, on a machine that has no Chromium; CI requires one.
"""

from __future__ import annotations

import base64
import io
import os
import shutil
import unicodedata
from collections.abc import Iterator
from pathlib import Path

import pytest

import hydroyield
from hydroyield import jobs
from hydroyield.report.comparison_files import write_comparison_page
from hydroyield.report.files import write_page, write_tables
from hydroyield.report.progress import Steps

CHROMIUM, DRIVER = shutil.which("chromium"), shutil.which("chromedriver")
HERE = Path(__file__).resolve().parents[2]
OPTIONS = "plant options"  # the page of a comparison
DEMOS = sorted(path.parent.name for path in (HERE / "demo_sites").glob("*/site.yaml"))

if not (CHROMIUM and DRIVER) and os.environ.get("HYDROYIELD_REQUIRE_BROWSER"):
    raise RuntimeError("chromium and chromedriver are required here and not installed")
pytestmark = [
    pytest.mark.skipif(not (CHROMIUM and DRIVER), reason="no chromium and chromedriver here"),
    pytest.mark.filterwarnings("ignore::ResourceWarning"),  # of the driver's sockets
    pytest.mark.slow,
]


@pytest.fixture(scope="module")
def browser() -> Iterator[object]:
    from selenium import webdriver

    options = webdriver.ChromeOptions()
    options.binary_location = str(CHROMIUM)
    for argument in (
        "--headless", "--no-sandbox", "--disable-gpu", "--disable-quic", "--no-first-run",
        "--disable-background-networking", "--disable-component-update", "--disable-sync",
    ):  # fmt: skip
        options.add_argument(argument)
    options.set_capability("goog:loggingPrefs", {"browser": "ALL"})
    driver = webdriver.Chrome(options=options, service=webdriver.ChromeService(str(DRIVER)))
    yield driver
    driver.quit()


def written(folder: Path, site: Path) -> Path:
    """The page of a site, written into `folder`."""
    estimate = hydroyield.estimate(hydroyield.read_site(site))
    write_tables(estimate, folder)
    write_page(estimate, folder, Steps(0, wanted=False))
    return folder / "report.html"


@pytest.fixture(scope="module", params=[*DEMOS, OPTIONS])
def page(request: pytest.FixtureRequest, tmp_path_factory: pytest.TempPathFactory) -> Path:
    folder = tmp_path_factory.mktemp("page")
    if request.param != OPTIONS:
        return written(folder, HERE / "demo_sites" / request.param / "site.yaml")
    site = hydroyield.read_site(HERE / "demo_sites" / "quernholm_weir" / "site.yaml")
    write_comparison_page(jobs.compare(site), folder, Steps(0, wanted=False))
    return folder / "report.html"


def opened(browser: object, page: Path, width: int = 1000, scheme: str = "light") -> object:
    browser.execute_cdp_cmd(
        "Emulation.setDeviceMetricsOverride",
        {"width": width, "height": 900, "deviceScaleFactor": 1, "mobile": width < 500},
    )
    browser.execute_cdp_cmd(
        "Emulation.setEmulatedMedia",
        {"features": [{"name": "prefers-color-scheme", "value": scheme}]},
    )
    browser.get(page.as_uri())
    return browser


@pytest.mark.parametrize("scheme", ["light", "dark"])
def test_the_page_opens_without_an_error(browser: object, page: Path, scheme: str) -> None:
    opened(browser, page, scheme=scheme)
    assert browser.get_log("browser") == []


def test_every_link_leads_somewhere(browser: object, page: Path) -> None:
    opened(browser, page)
    missing = browser.execute_script(
        "return [...document.querySelectorAll('a')].map(a => a.getAttribute('href'))"
        ".filter(h => !h.startsWith('#') || !document.getElementById(h.slice(1)))"
    )
    assert missing == []
    assert browser.execute_script("return document.querySelectorAll('a').length") >= 5


@pytest.mark.parametrize("width", [1000, 360])
def test_every_figure_is_drawn_within_the_page(browser: object, page: Path, width: int) -> None:
    opened(browser, page, width)
    images = browser.execute_script(
        "return [...document.images].map(i => [i.complete, i.naturalWidth,"
        " i.getBoundingClientRect().left, i.getBoundingClientRect().right, i.alt])"
    )
    assert len(images) == len(list((page.parent / "figures").glob("*.svg"))) >= 4
    for complete, natural, left, right, alt in images:
        assert complete
        assert natural > 0
        assert 0 <= left < right <= width
        assert len(alt) > 10


def test_axes_of_every_figure_lie_within_it(browser: object, page: Path) -> None:
    for figure in sorted((page.parent / "figures").glob("*.svg")):
        browser.get(figure.as_uri())
        outside = browser.execute_script(
            "const box = document.documentElement.getBoundingClientRect();"
            "return [...document.querySelectorAll('text')].filter(t => {"
            " const r = t.getBoundingClientRect();"
            " return r.left < box.left - 1 || r.right > box.right + 1"
            "  || r.top < box.top - 1 || r.bottom > box.bottom + 1; })"
            ".map(t => t.textContent)"
        )
        assert outside == [], figure.name


def test_a_phone_needs_no_sideways_scrolling(browser: object, page: Path) -> None:
    opened(browser, page, width=360)
    assert browser.execute_script("return document.documentElement.scrollWidth") <= 360


def test_dark_and_light_differ_and_stay_legible(browser: object, page: Path) -> None:
    """Text against its ground has a contrast of at least 4.5 (WCAG 2.1, level AA)."""
    seen = {}
    for scheme in ("light", "dark"):
        opened(browser, page, scheme=scheme)
        seen[scheme] = browser.execute_script(
            "const s = getComputedStyle(document.body); return [s.color, s.backgroundColor]"
        )
        assert contrast(*seen[scheme]) > 4.5
    assert seen["light"] != seen["dark"]


def contrast(ink: str, paper: str) -> float:
    """Contrast of two `rgb(r, g, b)` colours by the formula of WCAG 2.1."""

    def luminance(colour: str) -> float:
        parts = [int(part) / 255 for part in colour[4:-1].split(",")]
        linear = [p / 12.92 if p <= 0.04045 else ((p + 0.055) / 1.055) ** 2.4 for p in parts]
        return sum(w * p for w, p in zip((0.2126, 0.7152, 0.0722), linear, strict=True))

    low, high = sorted((luminance(ink), luminance(paper)))
    return (high + 0.05) / (low + 0.05)


def test_headings_tables_and_figures_can_be_read_aloud(browser: object, page: Path) -> None:
    opened(browser, page)
    assert browser.execute_script("return document.querySelectorAll('h1').length") == 1
    assert browser.execute_script(
        "return [...document.querySelectorAll('table')].every(t => t.caption"
        " && t.querySelector('th[scope]'))"
    )
    assert browser.execute_script("return document.documentElement.lang") == "en"


def test_printed_on_a4_no_figure_is_cut(browser: object, page: Path) -> None:
    """Each caption stands on the page of its figure, as the two are kept together."""
    from pypdf import PdfReader

    opened(browser, page)
    printed = browser.execute_cdp_cmd(
        "Page.printToPDF", {"preferCSSPageSize": True, "printBackground": True}
    )
    pages = PdfReader(io.BytesIO(base64.b64decode(printed["data"]))).pages
    assert 4 <= len(pages) <= 20
    width, height = (float(pages[0].mediabox[i]) for i in (2, 3))
    assert (width, height) == pytest.approx((595.3, 841.9), abs=1)  # A4 in points
    # ligatures of the font are taken apart
    text = [unicodedata.normalize("NFKC", sheet.extract_text()) for sheet in pages]
    titles = browser.execute_script(
        "return [...document.querySelectorAll('figure img')].map(i => i.alt.slice(8))"
    )
    for number, title in enumerate(titles, start=1):
        with_caption = [words for words in text if f"Figure {number}. " in words]
        assert len(with_caption) == 1
        assert "".join(title.split()) in "".join(with_caption[0].split())


def test_printed_on_a4_no_table_is_cut(browser: object, page: Path) -> None:
    """182 mm between the margins are 688 pixels."""
    opened(browser, page, width=688)
    browser.execute_cdp_cmd("Emulation.setEmulatedMedia", {"media": "print"})
    cut = browser.execute_script(
        "return [...document.querySelectorAll('table, pre')].filter(t =>"
        " t.getBoundingClientRect().left + t.scrollWidth > innerWidth + 1)"
        ".map(t => t.textContent.slice(0, 60))"
    )
    browser.execute_cdp_cmd("Emulation.setEmulatedMedia", {"media": ""})
    assert cut == []


def test_a_hostile_name_is_shown_as_text(browser: object, tmp_path: Path) -> None:
    demo = HERE / "demo_sites" / "quernholm_weir"
    text = (demo / "site.yaml").read_text("utf-8")
    hostile = '"<script>alert(1)</script> & <b>bold</b>"'
    (tmp_path / "site.yaml").write_text(
        text.replace("name: Quernholm Weir", f"name: {hostile}"), "utf-8"
    )
    shutil.copy(demo / "ashwen_daily.csv", tmp_path)
    out = tmp_path / "out"
    out.mkdir()
    opened(browser, written(out, tmp_path / "site.yaml"))
    heading = browser.execute_script("return document.querySelector('h1').textContent")
    assert heading == "<script>alert(1)</script> & <b>bold</b>"
    assert browser.execute_script("return document.querySelectorAll('script, h1 b').length") == 0
    assert browser.get_log("browser") == []
