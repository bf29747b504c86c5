from collections.abc import Callable

import numpy as np
import pytest
from scipy.signal import lfilter
from scipy.stats import linregress
from scipy.stats import t as student

from preflight_magic.kernels.df_gls import df_gls
from preflight_magic.kernels.long_run_variance import long_run_variance
from preflight_magic.kernels.robust_trend import TrendTest, trend_test
from preflight_magic.kernels.unit_root import kpss

Filter = Callable[[np.ndarray], np.ndarray]
ERRORS: dict[str, Filter] = {
    "white": lambda e: e,
    "ar": lambda e: lfilter([1.0], [1.0, -0.5], e),
    "walk": np.cumsum,
    "walk with ma": lambda e: np.cumsum(lfilter([1.0, 0.4], [1.0], e)),
}


def trends_of(kind: str, n: int, slope: float, count: int) -> list[TrendTest]:
    rng = np.random.default_rng(2007)
    found = [trend_test(ERRORS[kind](rng.standard_normal(n + 50))[50:] + slope * np.arange(n)) for _ in range(count)]
    return [one for one in found if one is not None]


def test_the_statistic_is_the_weighted_mean_of_two_ratios() -> None:
    y = np.random.default_rng(1).standard_normal(80).cumsum() + 0.1 * np.arange(80)
    found = trend_test(y)
    assert found is not None
    time = np.arange(80)
    slope, level = np.polyfit(time, y, 1)
    options = {"kernel": "quadratic spectral", "bandwidth": "andrews", "prewhiten": True}
    levels = long_run_variance(y - level - slope * time, fitted=2, **options)
    changes = long_run_variance(np.diff(y), fitted=1, **options)
    assert levels is not None
    assert changes is not None
    assert found.slope == pytest.approx(slope)
    assert found.drift == pytest.approx(np.diff(y).mean())
    assert found.t_levels == pytest.approx(slope / np.sqrt(levels.value / (80 * time.var())), rel=1e-9)
    assert found.t_differences == pytest.approx(np.diff(y).mean() / np.sqrt(changes.value / 79), rel=1e-9)
    mean = (1.0 - found.weight) * found.t_levels + found.weight * found.t_differences
    assert found.statistic == pytest.approx(mean, rel=1e-12)
    assert found.p_value == pytest.approx(2.0 * student.sf(abs(mean), 78), rel=1e-9)
    assert found.nobs == 80
    root = df_gls(y, "ct", criterion="BIC", search="OLS")
    stationary = kpss(y, "ct", int(np.sqrt(30) / 5))
    assert root is not None
    assert stationary is not None
    assert found.weight == pytest.approx(np.exp(-((root.statistic / (75.0 * stationary.statistic)) ** 4)), rel=1e-9)


def test_the_weight_tells_a_walk_from_a_stationary_series() -> None:
    # The first and the last lie well apart at this length; under either kind it tends to its own end.
    weights = {kind: np.mean([one.weight for one in trends_of(kind, 400, 0.0, 60)]) for kind in ("white", "walk")}
    assert weights["walk"] > 0.95
    assert weights["white"] < 0.4


@pytest.mark.parametrize("n", [50, 300])
@pytest.mark.parametrize("kind", ERRORS)
def test_without_a_trend_it_seldom_rejects(kind: str, n: int) -> None:
    # Within 1.5 points of 5 % or below, beside Monte Carlo error; the docstring has the exact shares.
    share = np.mean([one.p_value < 0.05 for one in trends_of(kind, n, 0.0, 400)])
    assert share < 0.065 + 2.5 * np.sqrt(0.065 * 0.935 / 400)


@pytest.mark.slow
@pytest.mark.parametrize("kind", ["white", "walk"])
@pytest.mark.parametrize("n", [50, 100, 400])
def test_size_is_nominal_with_and_without_a_unit_root(kind: str, n: int) -> None:
    share = np.mean([one.p_value < 0.05 for one in trends_of(kind, n, 0.0, 2000)])
    assert abs(share - 0.05) < 0.015 + 2.5 * np.sqrt(0.05 * 0.95 / 2000)


@pytest.mark.parametrize(("kind", "slope"), [("white", 0.005), ("ar", 0.008), ("walk", 0.35), ("walk with ma", 0.5)])
@pytest.mark.parametrize("sign", [-1.0, 1.0])
def test_a_trend_is_seen_with_and_without_a_unit_root(kind: str, slope: float, sign: float) -> None:
    # Each slope is at least six standard errors of its estimate; under dependence the weight falls slowly.
    found = trends_of(kind, 300, sign * slope, 60)
    assert np.mean([one.p_value < 0.05 for one in found]) > (0.75 if kind == "ar" else 0.95)
    assert np.mean([sign * one.statistic > 0.0 for one in found]) > 0.95


def test_a_walk_is_not_taken_for_a_line() -> None:
    rng, plain, found = np.random.default_rng(2007), [], []
    for _ in range(200):
        y = rng.standard_normal(300).cumsum()
        one = trend_test(y)
        assert one is not None
        plain.append(linregress(np.arange(300), y).pvalue < 0.05)
        found.append(one.p_value < 0.05)
    assert np.mean(plain) > 0.85
    assert np.mean(found) < 0.05 + 0.015 + 2.5 * np.sqrt(0.05 * 0.95 / 200)


@pytest.mark.parametrize(("scale", "constant"), [(1e-6, 0.0), (1e6, 0.0), (1.0, 1e5), (1.0, -3.0)])
def test_neither_unit_nor_origin_is_seen(scale: float, constant: float) -> None:
    y = np.random.default_rng(3).standard_normal(120).cumsum()
    plain, other = trend_test(y), trend_test(scale * y + constant)
    assert plain is not None
    assert other is not None
    assert other.statistic == pytest.approx(plain.statistic, rel=1e-7)
    assert other.weight == pytest.approx(plain.weight, rel=1e-7)
    assert other.slope == pytest.approx(scale * plain.slope, rel=1e-7)


def test_what_cannot_carry_the_test_is_none() -> None:
    assert trend_test(np.full(50, 0.1)) is None
    assert trend_test(0.1 * np.arange(50.0)) is None
    assert trend_test(np.random.default_rng(1).standard_normal(11)) is None
    assert trend_test(np.array([])) is None
    assert trend_test(np.random.default_rng(1).standard_normal(12)) is not None
    with pytest.raises(ValueError, match="finite"):
        trend_test(np.array([1.0, np.nan] * 10))
