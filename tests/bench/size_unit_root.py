"""Size of the unit-root tests at nominal 5 %: how often each errs where its null hypothesis holds.

Run ``OPENBLAS_NUM_THREADS=1 python -m tests.bench.size_unit_root [replications] [theta ...]`` from the root of the
project. The series are random walks whose differences are ``e[t] + theta e[t - 1]``, white noise for theta = 0; for
KPSS they are the ``e`` themselves. The ordinary run takes ADF with the modified AIC; bandwidths are searched as in it.

What the literature says of a moving average in the differences: with theta near -1 the walk is hard to tell from white
noise. Schwert (1989), Journal of Business and Economic Statistics 7, finds at theta = -0.8 that Phillips-Perron rejects
a true unit root almost always and ADF far too often unless it takes many lags. Ng and Perron (2001), Econometrica 69,
show that AIC and BIC choose too few lags there and that the modified AIC brings ADF and DF-GLS back to their size.
Positive theta does little harm to any of them.
"""

from __future__ import annotations

import sys
from collections.abc import Callable

import numpy as np

from preflight_magic.kernels.df_gls import df_gls
from preflight_magic.kernels.phillips_perron import phillips_perron
from preflight_magic.kernels.union_of_rejections import union_of_rejections
from preflight_magic.kernels.unit_root import adf, kpss
from preflight_magic.kernels.zivot_andrews import zivot_andrews

TESTS: dict[str, Callable[[np.ndarray], object]] = {
    "ADF c, AIC": lambda y: adf(y, "c"),
    "ADF c, modified AIC": lambda y: adf(y, "c", criterion="MAIC"),
    "ADF ct, AIC": lambda y: adf(y, "ct"),
    "ADF ct, BIC": lambda y: adf(y, "ct", criterion="BIC"),
    "ADF ct, t-stat": lambda y: adf(y, "ct", criterion="t-stat"),
    "ADF ct, modified AIC": lambda y: adf(y, "ct", criterion="MAIC"),
    "DF-GLS c, modified AIC": lambda y: df_gls(y, "c"),
    "DF-GLS ct, modified AIC": lambda y: df_gls(y, "ct"),
    "DF-GLS ct, no lags": lambda y: df_gls(y, "ct", lags=0),
    "Phillips-Perron c": lambda y: phillips_perron(y, "c"),
    "Phillips-Perron ct": lambda y: phillips_perron(y, "ct"),
    "Zivot-Andrews level, AIC": lambda y: zivot_andrews(y, "level"),
    "Zivot-Andrews both, AIC": lambda y: zivot_andrews(y, "both"),
    "Zivot-Andrews both, no lags": lambda y: zivot_andrews(y, "both", lags=0),
    "union of rejections": union_of_rejections,
}
STATIONARY: dict[str, Callable[[np.ndarray], object]] = {
    "KPSS c": lambda y: kpss(y, "c"),
    "KPSS ct": lambda y: kpss(y, "ct"),
}


def rejections(n: int, theta: float, replications: int) -> dict[str, float]:
    """Share of rejections at 5 %, by test."""
    counts = dict.fromkeys([*TESTS, *STATIONARY], 0)
    rng = np.random.default_rng([n, 7])
    for _ in range(replications):
        noise = rng.standard_normal(n + 1)
        moving = noise[1:] + theta * noise[:-1]
        for tests, y in ((TESTS, moving.cumsum()), (STATIONARY, moving)):
            for name, test in tests.items():
                counts[name] += getattr(test(y), "p_value", 1.0) < 0.05
    return {name: count / replications for name, count in counts.items()}


def main() -> None:
    """Print one table for each moving average."""
    replications = int(sys.argv[1]) if len(sys.argv) > 1 else 1000
    lengths = (50, 100, 400)
    print(f"{replications} replications: a share of 0.05 has the standard error {(0.0475 / replications) ** 0.5:.3f}")
    for theta in [float(one) for one in sys.argv[2:]] or [0.0, -0.5, -0.8, 0.5]:
        shares = [rejections(n, theta, replications) for n in lengths]
        print(f"\ntheta = {theta:g}{'':20}" + "".join(f"n = {n:<6d}" for n in lengths))
        for name in shares[0]:
            print(f"{name:30}" + "".join(f"{share[name]:<10.3f}" for share in shares))


if __name__ == "__main__":
    main()
