"""What an option costs, against one `np.interp` over the same forty years of daily values.

    python tests/benchmarks/option_ratio.py

prints ratios and the errors of the sweep over sizes against options that are computed in full.
"""

from __future__ import annotations

import timeit
import tracemalloc
from collections.abc import Callable
from functools import partial

from test_speed import SITE, interpolation, series

from hydroyield.comparison.trials import Trial
from hydroyield.options.combination import Combination
from hydroyield.options.option import Option
from hydroyield.options.sweep import SizeSweep
from hydroyield.record import Record
from hydroyield.site.option_assembly import machines_to_try
from hydroyield.site.reading import read_site_text
from hydroyield.site.river_assembly import river_at_site

OPTIONS = "options: {unit_counts: [1], exceedances: [30]}\n"
LOSSES = "waterway: [{loss_coefficient: 0.0005}]\n"
SPLITS = [(1.0,), (0.5, 0.5), (1 / 3,) * 3, (0.25,) * 4, (0.33, 0.67), (0.2, 0.3, 0.5)]
SIZES = (4.0, 8.0, 12.0, 16.0, 25.0)  # m3/s; the river's mean is 13


def trial(kind: str) -> Trial:
    """The site of the other benchmarks, with losses and another machine."""
    site = read_site_text(SITE.replace("type: kaplan", f"type: {kind}") + LOSSES + OPTIONS)
    river = river_at_site(site, Record.from_series(series()), None)
    return Trial(site, river, tuple(machines_to_try(site)))


def seconds(work: Callable[[], object], number: int = 20) -> float:
    """The least time of one call over several rounds [s]."""
    return min(timeit.repeat(work, number=number, repeat=5)) / number


def main() -> None:
    """Print a line for each machine and split."""
    yardstick = seconds(interpolation())
    print(f"one np.interp over {series().size} values: {1e6 * yardstick:.0f} us")
    print("machine    split          table    option  in full   largest error")
    for kind in ("kaplan", "francis", "propeller"):
        tried = trial(kind)
        for split in SPLITS:
            mix = Combination(0, split, 12.0)
            full = tried.estimate(mix)
            sweep = SizeSweep(full, 12.0)
            errors = []
            for size in SIZES:
                known = tried.option(1, Combination(0, split, size))
                assert isinstance(known, Option)
                errors.append(abs(sweep.mean_annual_energy(size) / known.mean_annual_energy - 1))
            table = seconds(partial(SizeSweep, full, 12.0), 1)
            swept = seconds(partial(sweep.mean_annual_energy, 12.0))
            in_full = seconds(partial(tried.option, 1, mix), 1)
            print(
                f"{kind:10} {mix.split_text[:14]:14} {table / yardstick:5.0f}    "
                f"{swept / yardstick:6.2f}  {in_full / yardstick:7.0f}   {max(errors):.1e}"
            )
    _memory()


def _memory() -> None:
    """Peak of what 200 options hold, without the processes that compute them."""
    tried = trial("kaplan")
    tracemalloc.start()
    kept = [tried.option(n, Combination(0, (0.5, 0.5), 4 + n / 20)) for n in range(200)]
    peak = tracemalloc.get_traced_memory()[1]
    print(f"{len(kept)} options: at most {peak / 1e6:.0f} MB")


if __name__ == "__main__":
    main()
