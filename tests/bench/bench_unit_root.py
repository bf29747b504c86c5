"""Time of the unit-root tests against arch (where it is installed) and statsmodels; prints ratios, never fails on them.

Run ``OPENBLAS_NUM_THREADS=1 python -m tests.bench.bench_unit_root`` from the root of the project.
"""

from __future__ import annotations

import warnings
from collections.abc import Callable
from functools import partial

import numpy as np
from statsmodels.tsa import stattools

from preflight_magic.kernels.df_gls import df_gls
from preflight_magic.kernels.largest_root import largest_root
from preflight_magic.kernels.phillips_perron import phillips_perron
from preflight_magic.kernels.union_of_rejections import union_of_rejections
from preflight_magic.kernels.unit_root import adf, kpss
from preflight_magic.kernels.zivot_andrews import zivot_andrews
from tests.bench.bench_adf import best_times

Task = Callable[[np.ndarray], object]


def tasks() -> dict[str, tuple[Task, Task | None, str]]:
    """Ours, the other library's equal and its name."""
    found: dict[str, tuple[Task, Task | None, str]] = {
        "ADF, AIC": (adf, lambda y: stattools.adfuller(y, autolag="AIC"), "statsmodels"),
        "ADF, t-stat": (
            lambda y: adf(y, criterion="t-stat"),
            lambda y: stattools.adfuller(y, autolag="t-stat"),
            "statsmodels",
        ),
        "ADF, modified AIC": (lambda y: adf(y, criterion="MAIC"), None, ""),
        "KPSS": (kpss, lambda y: stattools.kpss(y, nlags="auto"), "statsmodels"),
        "DF-GLS, modified AIC": (df_gls, None, ""),
        "DF-GLS, AIC": (lambda y: df_gls(y, criterion="AIC"), None, ""),
        "Phillips-Perron": (lambda y: phillips_perron(y, "ct", "schwert"), None, ""),
        "Zivot-Andrews, level": (
            lambda y: zivot_andrews(y, "level"),
            lambda y: stattools.zivot_andrews(y, regression="c"),
            "statsmodels",
        ),
        "Zivot-Andrews, both": (
            zivot_andrews,
            lambda y: stattools.zivot_andrews(y, regression="ct"),
            "statsmodels",
        ),
        "union of rejections": (union_of_rejections, None, ""),
    }
    try:
        from arch import unitroot
    except ImportError:
        return found
    theirs: dict[str, Task] = {
        "DF-GLS, AIC": lambda y: unitroot.DFGLS(y, trend="ct").stat,
        "Phillips-Perron": lambda y: unitroot.PhillipsPerron(y, trend="ct").stat,
        "Zivot-Andrews, level": lambda y: unitroot.ZivotAndrews(y, trend="c").stat,
        "Zivot-Andrews, both": lambda y: unitroot.ZivotAndrews(y, trend="ct").stat,
    }
    return found | {name: (found[name][0], task, "arch") for name, task in theirs.items()}


def main() -> None:
    """Print one line per test and length."""
    warnings.simplefilter("ignore")  # other libraries announce other forms of result and the edges of their tables
    rng = np.random.default_rng(20)
    print(f"{'test':24}{'n':>6}{'ours ms':>10}{'other ms':>10}{'ratio':>7}  against")
    for n in (120, 480):
        y = rng.standard_normal(n).cumsum()
        for name, (ours, theirs, against) in tasks().items():
            slow, fast = best_times(partial(theirs or ours, y), partial(ours, y), rounds=9)
            other = f"{slow * 1e3:10.2f}{slow / fast:7.0f}  {against}" if theirs else ""
            print(f"{name:24}{n:6d}{fast * 1e3:10.3f}{other}")
        slow, _ = best_times(partial(largest_root, y), float, rounds=2)
        print(f"{'largest root, interval':24}{n:6d}{slow * 1e3:10.0f}")


if __name__ == "__main__":
    main()
