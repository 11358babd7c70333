"""The page of the first demo as a gold file, without what differs from day to day.

    python tests/report_gold.py

accepts the page as it is now; read the difference before you commit it.
"""

from __future__ import annotations

import re
from pathlib import Path

import hydroyield
from hydroyield.report.figures import FIGURES
from hydroyield.report.page import DrawnFigure, page

HERE = Path(__file__).resolve().parent
GOLD = HERE / "gold" / "report.html"
DEMO = HERE.parent / "demo_sites" / "quernholm_weir" / "site.yaml"


def scrubbed_page() -> str:
    """The page with empty figures (their data are tested by themselves), and without versions,
    dates of computing and sums of files."""
    estimate = hydroyield.estimate(hydroyield.read_site(DEMO))
    figures = [DrawnFigure(f.name, f.title, "what the figure shows", "<svg/>") for f in FIGURES]
    text = page(estimate, figures).replace(hydroyield.__version__, "VERSION")
    text = re.sub(r"(Computed on</th><td>)[0-9-]+", r"\1DATE", text)
    return re.sub(r"\b[0-9a-f]{64}\b", "SHA-256", text)


if __name__ == "__main__":
    GOLD.parent.mkdir(exist_ok=True)
    GOLD.write_text(scrubbed_page(), "utf-8")
    print(f"accepted: {GOLD}")
