"""Time of the ADF lag search against statsmodels; prints ratios and never fails on them.

Run ``OPENBLAS_NUM_THREADS=1 python tests/bench/bench_adf.py`` from the root of the project.
"""

from __future__ import annotations

import time
import warnings
from collections.abc import Callable
from functools import partial

import numpy as np
from statsmodels.tsa.stattools import adfuller

from preflight_magic.kernels.unit_root import adf


def best_times(slow: Callable[[], object], fast: Callable[[], object], rounds: int = 15) -> tuple[float, float]:
    """Shortest run of each in seconds, taken in turns so that a busy machine slows both alike."""
    taken: dict[Callable[[], object], list[float]] = {slow: [], fast: []}
    for _ in range(rounds):
        for task, repeats in ((slow, 1), (fast, 20)):
            for _ in range(repeats):
                start = time.perf_counter()
                task()
                taken[task].append(time.perf_counter() - start)
    return min(taken[slow]), min(taken[fast])


def main() -> None:
    """Print one line per length."""
    warnings.simplefilter("ignore", FutureWarning)  # newer statsmodels announce another form of result
    rng = np.random.default_rng(20)
    print("     n  lags  statsmodels ms    ours ms   ratio  difference")
    for n in (120, 480, 2000):
        y = rng.standard_normal(n).cumsum()
        ours = adf(y)
        assert ours is not None
        slow, fast = best_times(partial(adfuller, y, autolag="AIC"), partial(adf, y))
        difference = abs(ours.statistic - adfuller(y, autolag="AIC")[0])
        print(f"{n:6d}{ours.lags:6d}{slow * 1e3:16.3f}{fast * 1e3:11.4f}{slow / fast:8.0f}{difference:12.1e}")


if __name__ == "__main__":
    main()
