"""Time and memory of reading and checking a large record against a bare parser.

    python tests/benchmarks/record_ratio.py [years] [runs]

The record is one of 15-minute values in plain ISO CSV. Each reading is a process of its own, in
turn, so that a busy machine slows both; the shortest time and the largest memory of each count.
Memory is the peak above that after the imports, as Linux reports it.
"""

from __future__ import annotations

import subprocess
import sys
import tempfile
from pathlib import Path

import numpy as np

BARE = 'pandas.read_csv(path, parse_dates=["time"])'
OWN = "hydroyield.record.read_record(path)"
PROBE = """
import re, sys, time, pandas, hydroyield.record
def peak():
    return int(re.search(r"VmHWM:\\s*(\\d+)", open("/proc/self/status").read())[1]) / 1024
path = sys.argv[1]
before, start = peak(), time.perf_counter()
kept = {call}
print(time.perf_counter() - start, peak() - before)
"""


def write_record(path: Path, years: int) -> int:
    """Write an invented record; returns its rows."""
    rows = round(years * 365.25 * 96)
    times = np.datetime64("1924-01-01T00:00") + np.arange(rows) * np.timedelta64(15, "m")
    stamps = np.char.replace(np.datetime_as_string(times, unit="m"), "T", " ")
    level = np.cumsum(np.random.default_rng(1).normal(scale=0.02, size=rows // 96 + 1))
    season = 0.8 * np.cos(np.arange(rows) / 35064 * 2 * np.pi)
    flow = np.exp(1 + season + np.repeat(level, 96)[:rows] - level.mean())
    with open(path, "w") as file:
        file.write("time,discharge_m3s\n")
        file.writelines(f"{t},{q:.3f}\n" for t, q in zip(stamps, flow, strict=True))
    return rows


def probe(call: str, path: Path) -> tuple[float, float]:
    """Seconds and megabytes of one reading."""
    command = [sys.executable, "-c", PROBE.format(call=call), str(path)]
    said = subprocess.run(command, check=True, capture_output=True, text=True).stdout
    seconds, megabytes = map(float, said.split())
    return seconds, megabytes


def main(years: str = "100", runs: str = "5") -> None:
    """Print times, memory and their ratios."""
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "record.csv"
        rows = write_record(path, int(years))
        found: dict[str, list[tuple[float, float]]] = {BARE: [], OWN: []}
        for _ in range(int(runs)):
            for call, results in found.items():
                results.append(probe(call, path))
    best = {call: np.min(results, axis=0)[0] for call, results in found.items()}
    most = {call: np.max(results, axis=0)[1] for call, results in found.items()}
    print(f"{rows} rows")
    for call in found:
        print(f"{call}: {best[call]:.2f} s, {most[call]:.0f} MB")
    print(f"time {best[OWN] / best[BARE]:.2f}, memory {most[OWN] / most[BARE]:.2f}")


if __name__ == "__main__":
    main(*sys.argv[1:])
