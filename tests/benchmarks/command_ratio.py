"""Time of the whole command against the bare import of what it stands on.

    python tests/benchmarks/command_ratio.py [SITE.yaml] [runs]

All are started fresh in turn, so that a busy machine slows both; the shortest of each counts.
"""

from __future__ import annotations

import shutil
import subprocess
import sys
import tempfile
import time
from pathlib import Path

DEMO = Path(__file__).parents[2] / "demo_sites" / "quernholm_weir" / "site.yaml"
IMPORTS = "import numpy, pandas, pydantic, scipy.interpolate"


def seconds(arguments: list[str]) -> float:
    start = time.perf_counter()
    subprocess.run([sys.executable, *arguments], check=True, stdout=subprocess.DEVNULL)
    return time.perf_counter() - start


def main(site: str = str(DEMO), runs: str = "7") -> None:
    """Print the times and their ratios."""
    command = ["-m", "hydroyield", "estimate", site]
    folder = Path(tempfile.mkdtemp()) / "results"
    tried = {
        "bare import": ["-c", IMPORTS],
        "estimate --json": [*command, "--json"],
        "bare import with pyplot": ["-c", f"{IMPORTS}, matplotlib.pyplot"],
        "estimate with page": [*command, "--out", str(folder)],
    }
    times = {name: [seconds(arguments)] for name, arguments in tried.items()}
    for _ in range(int(runs) - 1):
        for name, arguments in tried.items():
            times[name].append(seconds(arguments))
    shortest = {name: min(found) for name, found in times.items()}
    names = list(shortest)
    for bare, whole in ((names[0], names[1]), (names[2], names[3])):
        ratio = shortest[whole] / shortest[bare]
        print(f"{whole}: {shortest[whole]:.3f} s, {bare}: {shortest[bare]:.3f} s, {ratio:.2f}")
    shutil.rmtree(folder.parent)


if __name__ == "__main__":
    main(*sys.argv[1:])
