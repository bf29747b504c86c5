"""How often each test errs at nominal 5 % where its null hypothesis holds: a sample of tests/bench/size_*.py."""

from collections.abc import Callable

import numpy as np
import pytest

from preflight_magic.kernels.correlation import ljung_box
from preflight_magic.kernels.df_gls import df_gls
from preflight_magic.kernels.phillips_perron import phillips_perron
from preflight_magic.kernels.residual_tests import jarque_bera
from preflight_magic.kernels.seasonal_presence import season_presence
from preflight_magic.kernels.seasonal_unit_root import hegy
from preflight_magic.kernels.union_of_rejections import union_of_rejections
from preflight_magic.kernels.unit_root import adf, kpss
from preflight_magic.kernels.zivot_andrews import zivot_andrews

RUNS = 1500
CLOSE = 0.015
ERROR = 2.5 * (0.05 * 0.95 / RUNS) ** 0.5

Case = tuple[str, Callable[[np.ndarray], object]]
# Random walks, and for the tests of the second group white noise. Those of the third search their lags by the modified
# AIC, which Ng and Perron (2001), Econometrica 69, found to reject somewhat too seldom where the errors are white; they
# may not reject too often.
WALK: list[Case] = [
    ("ADF c, 1 lag", lambda y: adf(y, "c", lags=1)),
    ("ADF ct, 1 lag", lambda y: adf(y, "ct", lags=1)),
    ("DF-GLS c, no lags", lambda y: df_gls(y, "c", lags=0)),
    ("DF-GLS ct, no lags", lambda y: df_gls(y, "ct", lags=0)),
    ("DF-GLS ct, 2 lags", lambda y: df_gls(y, "ct", lags=2)),
    ("Phillips-Perron c, bandwidth 0", lambda y: phillips_perron(y, "c", 0)),
    ("Zivot-Andrews level, no lags", lambda y: zivot_andrews(y, "level", lags=0)),
    ("Zivot-Andrews both, no lags", lambda y: zivot_andrews(y, "both", lags=0)),
    ("union of rejections, no lags", lambda y: union_of_rejections(y, 0)),
    ("HEGY, s = 4, no lags", lambda y: hegy(seasonal(y, 4), 4, "ct", lags=0).seasonal),  # type: ignore[union-attr]
    ("HEGY, s = 12, no lags", lambda y: hegy(seasonal(y, 12), 12, "ct", lags=0).seasonal),  # type: ignore[union-attr]
]
NOISE: list[Case] = [
    ("KPSS c", lambda y: kpss(np.diff(y), "c")),
    ("KPSS ct, bandwidth 0", lambda y: kpss(np.diff(y), "ct", 0)),
    ("Ljung-Box", lambda y: ljung_box(np.diff(y), 6)),
    ("Jarque-Bera", lambda y: jarque_bera(np.diff(y))),
    ("presence of a season", lambda y: season_presence(np.diff(y), 4)),
]
SEARCHED: list[Case] = [
    ("ADF c, modified AIC", lambda y: adf(y, "c", criterion="MAIC")),
    ("ADF ct, modified AIC", lambda y: adf(y, "ct", criterion="MAIC")),
    ("DF-GLS c", lambda y: df_gls(y, "c")),
    ("DF-GLS ct", lambda y: df_gls(y, "ct")),
    ("union of rejections", union_of_rejections),
]


def seasonal(y: np.ndarray, period: int) -> np.ndarray:
    """The differences of a random walk as those of one random walk for each season."""
    steps = np.diff(y, prepend=0.0)
    whole = steps[: len(steps) // period * period]
    return np.asarray(whole.reshape(-1, period).cumsum(axis=0).ravel())


def share(test: Callable[[np.ndarray], object], n: int) -> float:
    """Share of p-values below 0.05."""
    rng = np.random.default_rng([n, 2001])
    found = [test(rng.standard_normal(n).cumsum()) for _ in range(RUNS)]
    assert all(one is not None for one in found)
    return float(np.mean([one.p_value < 0.05 for one in found]))  # type: ignore[attr-defined]


@pytest.mark.slow
@pytest.mark.parametrize("n", [100, 400])
@pytest.mark.parametrize(("name", "test"), WALK + NOISE, ids=[name for name, _ in WALK + NOISE])
def test_size_is_nominal(name: str, test: Callable[[np.ndarray], object], n: int) -> None:
    assert abs(share(test, n) - 0.05) < CLOSE + ERROR, name


@pytest.mark.slow
@pytest.mark.parametrize("n", [50, 100])
@pytest.mark.parametrize(("name", "test"), SEARCHED, ids=[name for name, _ in SEARCHED])
def test_searched_lags_do_not_reject_too_often(name: str, test: Callable[[np.ndarray], object], n: int) -> None:
    found = share(test, n)
    assert found < 0.05 + CLOSE + ERROR, name
    assert found > 0.01, name
