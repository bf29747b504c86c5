"""Time of all tests of one monthly series against one SARIMAX fit of statsmodels; prints and never fails.

Run ``OPENBLAS_NUM_THREADS=1 python -m tests.bench.bench_evidence [rounds]`` from the root of the project. All tests
together are meant to cost less than a fortieth of one fit of SARIMAX(1,1,1)(0,1,1,12). Five series take turns, since a
fit costs two or three times as much for one as for another, and so do model and tests; medians of the time of the
processor are shown.
"""

from __future__ import annotations

import sys
import time
import warnings
from collections.abc import Callable
from functools import partial
from statistics import median

import numpy as np
from scipy.signal import lfilter
from statsmodels.tsa.statespace.sarimax import SARIMAX

from preflight_magic.kernels.box_cox import box_cox
from preflight_magic.kernels.canova_hansen import canova_hansen
from preflight_magic.kernels.correlation import ljung_box
from preflight_magic.kernels.df_gls import df_gls
from preflight_magic.kernels.guerrero import guerrero
from preflight_magic.kernels.phillips_perron import phillips_perron
from preflight_magic.kernels.residual_tests import arch_lm, jarque_bera
from preflight_magic.kernels.robust_trend import trend_test
from preflight_magic.kernels.seasonal_evidence import seasonal_evidence
from preflight_magic.kernels.seasonal_unit_root import hegy
from preflight_magic.kernels.trend_evidence import trend_evidence
from preflight_magic.kernels.union_of_rejections import union_of_rejections
from preflight_magic.kernels.unit_root import adf, kpss
from preflight_magic.kernels.unit_root_evidence import level_tests, root_tests
from preflight_magic.kernels.zivot_andrews import zivot_andrews

PERIOD, LENGTH, REPEATS, SERIES = 12, 120, 3, 5
BAR = 40
Task = Callable[[], object]


def monthly_series(seed: int) -> tuple[np.ndarray, np.ndarray]:
    """A series of passengers by the airline model, its spread growing with its level; and its innovations."""
    innovations = 0.04 * np.random.default_rng(seed).standard_normal(LENGTH + PERIOD + 1)
    moving = lfilter(np.convolve([1.0, -0.4], [1.0, *[0.0] * 11, -0.6]), [1.0], innovations)
    logs = lfilter([1.0], np.convolve([1.0, -1.0], [1.0, *[0.0] * 11, -1.0]), moving)[-LENGTH:]
    return np.exp(6.0 + logs), innovations[-LENGTH:]


def one_of_each(y: np.ndarray, innovations: np.ndarray) -> dict[str, Task]:
    """Every test once, about constant and line where it has terms."""
    logs, changes = np.log(y), np.diff(np.log(y))
    return {
        "ADF": lambda: adf(logs, "ct", criterion="MAIC"),
        "DF-GLS": lambda: df_gls(logs, "ct"),
        "Phillips-Perron": lambda: phillips_perron(logs, "ct"),
        "KPSS": lambda: kpss(logs, "ct"),
        "Zivot-Andrews": lambda: zivot_andrews(logs),
        "union of rejections": lambda: union_of_rejections(logs),
        "HEGY": lambda: hegy(logs, PERIOD, "ct"),
        "Canova-Hansen": lambda: canova_hansen(changes, PERIOD, lagged=True),
        "Harvey-Leybourne-Taylor": lambda: trend_test(logs),
        "Box-Cox": lambda: box_cox(y, PERIOD),
        "Guerrero": lambda: guerrero(y, PERIOD),
        "Ljung-Box, 12 and 24 lags": lambda: [ljung_box(innovations, lags, 2) for lags in (PERIOD, 2 * PERIOD)],
        "ARCH-LM": lambda: arch_lm(innovations, 4),
        "Jarque-Bera": lambda: jarque_bera(innovations),
    }


def as_shown(y: np.ndarray, innovations: np.ndarray) -> dict[str, Task]:
    """What the rungs compute: both sets of terms, level and differences, all frequencies, critical values, a shift."""
    logs, changes = np.log(y), np.diff(np.log(y))
    each = one_of_each(y, innovations)
    return {
        "unit root, of the level": lambda: level_tests(logs, "log", str),
        "unit root, of the differences": lambda: root_tests(changes, "log, differenced once"),
        "season": lambda: seasonal_evidence(logs, PERIOD, 1, "log"),
        "trend, shift and corner": lambda: trend_evidence(logs, PERIOD, LENGTH // 2, True, True, "log"),
        "spread": lambda: (each["Box-Cox"](), each["Guerrero"]()),
        "residuals": lambda: [each[name]() for name in ("Ljung-Box, 12 and 24 lags", "ARCH-LM", "Jarque-Bera")],
    }


def sarimax(logs: np.ndarray) -> object:
    """The fit that all tests are measured against."""
    return SARIMAX(logs, order=(1, 1, 1), seasonal_order=(0, 1, 1, PERIOD)).fit(disp=0)


def taken(task: Task) -> float:
    """Milliseconds of the processor in one call, so that what else the machine does is not counted."""
    start = time.process_time()
    task()
    return 1e3 * (time.process_time() - start)


def main() -> None:
    """Print a line per test, and both sums as parts of the fit."""
    warnings.simplefilter("ignore")  # a search of the other library that ends early is still what it costs
    rounds = int(sys.argv[1]) if len(sys.argv) > 1 else 15
    fits: list[float] = []
    times: dict[str, dict[str, list[float]]] = {"one of each": {}, "as a report shows them": {}}
    for turn in range(rounds):
        y, innovations = monthly_series(turn % SERIES)
        fits.append(taken(partial(sarimax, np.log(y))))
        for table, make in zip(times.values(), (one_of_each, as_shown), strict=True):
            for name, task in make(y, innovations).items():
                assert task() is not None
                table.setdefault(name, []).extend(taken(task) for _ in range(REPEATS))
    fit = median(fits)
    print(
        f"one SARIMAX(1,1,1)(0,1,1,{PERIOD}) fit of {LENGTH} values: {fit:.0f} ms, {min(fits):.0f} to {max(fits):.0f}"
    )
    for title, table in times.items():
        print(f"\n{title}")
        for name, found in table.items():
            print(f"  {name:32}{median(found):8.3f} ms")
        total = sum(median(found) for found in table.values())
        print(f"  {'together':32}{total:8.3f} ms = 1/{fit / total:.0f} of the fit; wanted: less than 1/{BAR}")


if __name__ == "__main__":
    main()
