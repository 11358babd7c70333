"""The files of an estimate."""

from __future__ import annotations

import json
from pathlib import Path

from hydroyield.jobs import SiteEstimate
from hydroyield.report.result import result

RESULT, CURVES, POWER_DURATION = "result.json", "curves.csv", "power_duration.csv"


def write_estimate(estimate: SiteEstimate, folder: Path) -> None:
    """Write result.json and the tables of an estimate into an existing folder."""
    (folder / RESULT).write_text(result_text(estimate), "utf-8")
    # seven digits are more than any input has; the file stays readable
    estimate.curves().to_csv(folder / CURVES, index=False, float_format="%.7g")
    estimate.power_duration().to_csv(folder / POWER_DURATION, index=False, float_format="%.10g")


def result_text(estimate: SiteEstimate) -> str:
    """The result as the text of a JSON file."""
    return json.dumps(result(estimate), indent=2, allow_nan=False, ensure_ascii=False) + "\n"
