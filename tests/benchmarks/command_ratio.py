"""Time of the whole command against the bare import of what it stands on.

    python tests/benchmarks/command_ratio.py [SITE.yaml] [runs]

Both are started fresh in turn, so that a busy machine slows both; the shortest of each counts.
"""

from __future__ import annotations

import subprocess
import sys
import time
from pathlib import Path

DEMO = Path(__file__).parents[2] / "demo_sites" / "quernholm_weir" / "site.yaml"
IMPORTS = "import numpy, pandas, pydantic, scipy.interpolate"


def seconds(arguments: list[str]) -> float:
    start = time.perf_counter()
    subprocess.run([sys.executable, *arguments], check=True, stdout=subprocess.DEVNULL)
    return time.perf_counter() - start


def main(site: str = str(DEMO), runs: str = "7") -> None:
    """Print both times and their ratio."""
    tried = {
        "bare import": ["-c", IMPORTS],
        "estimate --json": ["-m", "hydroyield", "estimate", site, "--json"],
    }
    times = {name: [seconds(arguments)] for name, arguments in tried.items()}
    for _ in range(int(runs) - 1):
        for name, arguments in tried.items():
            times[name].append(seconds(arguments))
    shortest = {name: min(found) for name, found in times.items()}
    for name, found in shortest.items():
        print(f"{name:<20}{found:>7.3f} s{found / shortest['bare import']:>7.2f}")


if __name__ == "__main__":
    main(*sys.argv[1:])
