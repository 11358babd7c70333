"""Small invented sites with options, for the tests."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pandas as pd

SITE = """\
format: 1
site: {{name: Two Mills, latitude: 51}}
discharge:
  record: {{file: daily.csv, unit: m3/s}}   # the mill's own gauge
environmental_flow:
  - {{rule: constant, discharge: {kept}}}
head: {{headwater: {{level: 104 m}}, tailwater: {{level: 100 m}}}}
{more}
turbines:
  # an offer of last year
  - count: 1
    type: {type}
    rated_discharge: 4
    minimum_discharge: {minimum}
    efficiency: {curve}
electrical: {{generator_efficiency: 95 %}}

# what to try
options:
{options}
"""
PIPE = "waterway:\n  - {pipe: {length: 120 m, diameter: 1.6 m, roughness: 0.1 mm}}  # old\n"
FLAT = "[[0.0, 0.8], [1.0, 0.8]]"


def write_site(
    folder: Path,
    daily: np.ndarray,
    options: str,
    *,
    curve: str = FLAT,
    minimum: str = "0",
    kind: str = "kaplan",
    kept: str = "0",
    more: str = "",
) -> Path:
    """A site with a record of whole hydrological years from 2001 on."""
    days = pd.date_range("2001-10-01", periods=daily.size, freq="D")
    rows = "\n".join(f"{day:%Y-%m-%d},{q:.6g}" for day, q in zip(days, daily, strict=True))
    (folder / "daily.csv").write_text(f"date,discharge\n{rows}\n", "utf-8")
    lines = "\n".join(f"  {line}" for line in options.strip().splitlines())
    path = folder / "mills.yaml"
    text = SITE.format(options=lines, curve=curve, minimum=minimum, type=kind, kept=kept, more=more)
    path.write_text(text, "utf-8")
    return path


def river(years: int = 4) -> np.ndarray:
    """Invented daily values with seasons and weather."""
    days = np.arange(np.datetime64("2001-10-01"), np.datetime64(f"{2001 + years}-10-01")).size
    noise = np.convolve(np.random.default_rng(3).normal(size=days), 0.9 ** np.arange(50), "same")
    season = 0.6 * np.cos(2 * np.pi * (np.arange(days) - 120) / 365.25)
    return np.round(4 * np.exp(0.7 * noise / noise.std() + season - 0.3), 2)
