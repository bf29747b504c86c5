"""p-values do not see the unit of a series, nor, where no log is taken, its origin."""

from __future__ import annotations

from collections.abc import Callable, Iterator

import numpy as np
import pytest
from scipy.signal import lfilter

from preflight_magic.kernels.arma import fit
from preflight_magic.kernels.arma_parameters import Order
from preflight_magic.kernels.box_cox import box_cox
from preflight_magic.kernels.breaks import date_shift
from preflight_magic.kernels.canova_hansen import canova_hansen
from preflight_magic.kernels.correlation import ljung_box
from preflight_magic.kernels.df_gls import df_gls
from preflight_magic.kernels.guerrero import guerrero
from preflight_magic.kernels.halves import compare_halves
from preflight_magic.kernels.largest_root import largest_root
from preflight_magic.kernels.long_run_variance import long_run_variance
from preflight_magic.kernels.phillips_perron import phillips_perron
from preflight_magic.kernels.residual_tests import arch_lm, jarque_bera
from preflight_magic.kernels.robust_trend import trend_test
from preflight_magic.kernels.root_bootstrap import root_bootstrap
from preflight_magic.kernels.seasonal_evidence import seasonal_evidence
from preflight_magic.kernels.seasonal_presence import season_presence
from preflight_magic.kernels.seasonal_strength import average_strength, stl_strength
from preflight_magic.kernels.seasonal_unit_root import hegy
from preflight_magic.kernels.shift_date import broken_trend, shift_interval
from preflight_magic.kernels.trend_evidence import trend_evidence
from preflight_magic.kernels.union_of_rejections import union_of_rejections
from preflight_magic.kernels.unit_root import adf, kpss
from preflight_magic.kernels.unit_root_evidence import level_tests
from preflight_magic.kernels.zivot_andrews import zivot_andrews

PERIOD, LENGTH = 12, 132
Numbers = dict[str, float]


def made(seed: int) -> np.ndarray:
    """Line, wandering pattern and autoregression; positive, of order ten."""
    rng = np.random.default_rng(seed)
    pattern = rng.standard_normal((LENGTH // PERIOD, PERIOD)).cumsum(axis=0).ravel() * 0.1
    errors = lfilter([1.0, 0.3], [1.0, -0.8], 0.3 * rng.standard_normal(LENGTH))
    return np.asarray(10.0 + 0.02 * np.arange(LENGTH) + np.tile(np.cos(np.arange(PERIOD)), 11) + pattern + errors)


def picked(found: object, *names: str) -> Numbers:
    assert found is not None
    return {name: getattr(found, name) for name in names}


def of_tests(tests: object) -> Numbers:
    return {f"{k} {one.test} {one.terms}": one.p_value for k, one in enumerate(tests)}  # type: ignore[arg-type, var-annotated]


def hegy_numbers(y: np.ndarray) -> Numbers:
    found = hegy(y, PERIOD, "ct")
    assert found is not None
    each = (*found.roots, found.seasonal, found.all)
    return {f"p {k}": one.p_value for k, one in enumerate(each)} | {"lags": found.lags}


def canova_hansen_numbers(y: np.ndarray) -> Numbers:
    found = canova_hansen(y, PERIOD, "ct", lagged=True)
    assert found is not None
    return {f"p {k}": one.p_value for k, one in enumerate(found.frequencies)} | picked(found, "p_value", "bandwidth")


def trend_numbers(y: np.ndarray) -> Numbers:
    found = trend_evidence(y, PERIOD, 60, True, True, "as given")
    assert found.test is not None
    assert found.interval is not None
    return {"p": found.test.p_value} | picked(found.interval, "first", "last")


def shift_numbers(y: np.ndarray) -> Numbers:
    columns = np.column_stack([np.ones(LENGTH), np.arange(LENGTH) - LENGTH / 2])
    dated = date_shift(y, columns)
    assert dated is not None
    interval = shift_interval(y, columns, dated.position)
    return picked(dated, "position", "statistic") | picked(interval, "first", "last")


def corner_numbers(y: np.ndarray) -> Numbers:
    return picked(broken_trend(y), "position", "statistic", "t_levels", "t_differences")


def season_numbers(y: np.ndarray) -> Numbers:
    found = seasonal_evidence(y, PERIOD, 1, "as given")
    waves = {f"wave {cycle}": p for cycle, p in found.canova_hansen.items()}
    return of_tests(found.tests) | dict(found.hegy) | waves


def arma_numbers(y: np.ndarray) -> Numbers:
    found = fit(np.diff(y), Order(1, 1, 0, 1, PERIOD), mean=True)
    assert found is not None
    return {f"c {k}": value for k, value in enumerate(found.coefficients.tolist())}


def bootstrap_numbers(y: np.ndarray) -> Numbers:
    found = fit(y[:40], Order(1), mean=True)
    assert found is not None
    (one,) = root_bootstrap(found, replications=99).intervals
    return {"lower": one.lower, "upper": one.upper}


def largest_numbers(y: np.ndarray) -> Numbers:
    found = largest_root(y, "ct", replications=99)
    assert found is not None
    return {"lower": found.lower.coefficient_sum, "upper": found.upper.coefficient_sum, "lags": found.lags}


def residual_numbers(y: np.ndarray) -> Numbers:
    changes = np.diff(y)
    return {
        "Ljung-Box": picked(ljung_box(changes, 12), "p_value")["p_value"],
        "ARCH-LM": picked(arch_lm(changes - changes.mean(), 4), "p_value")["p_value"],
        "Jarque-Bera": picked(jarque_bera(changes), "p_value")["p_value"],
    }


def halves_numbers(y: np.ndarray) -> Numbers:
    found = compare_halves(np.diff(y), (1, 2))
    assert found is not None
    return {one.name: one.z for one in found}


def unit_root_numbers() -> Iterator[tuple[str, Callable[[np.ndarray], Numbers]]]:
    for terms in ("c", "ct"):
        for criterion in ("AIC", "BIC", "t-stat", "MAIC"):
            yield (
                f"ADF {terms}, {criterion}",
                lambda y, t=terms, c=criterion: picked(adf(y, t, criterion=c), "p_value", "lags"),
            )
        yield f"DF-GLS {terms}", lambda y, t=terms: picked(df_gls(y, t), "p_value", "lags")
        yield f"Phillips-Perron {terms}", lambda y, t=terms: picked(phillips_perron(y, t), "p_value", "bandwidth")
        yield f"KPSS {terms}", lambda y, t=terms: picked(kpss(y, t), "p_value", "bandwidth")
    yield "ADF ctt", lambda y: picked(adf(y, "ctt"), "p_value", "lags")
    for model in ("level", "trend", "both"):
        yield f"Zivot-Andrews {model}", lambda y, m=model: picked(zivot_andrews(y, m), "p_value", "break_at", "lags")
    yield "union of rejections", lambda y: picked(union_of_rejections(y), "p_value")
    yield "unit root, as shown", lambda y: of_tests(level_tests(y, "", str))


# Both the unit and the origin are free.
FREE: dict[str, Callable[[np.ndarray], Numbers]] = {
    **dict(unit_root_numbers()),
    "HEGY": hegy_numbers,
    "Canova-Hansen": canova_hansen_numbers,
    "season, as shown": season_numbers,
    "presence of a season": lambda y: picked(season_presence(y, PERIOD), "p_value"),
    "strength of a season": lambda y: picked(average_strength(y, PERIOD), "seasonal"),
    "strength of a season, STL": lambda y: picked(stl_strength(y, PERIOD), "seasonal"),
    "Harvey-Leybourne-Taylor": lambda y: picked(trend_test(y), "p_value"),
    "trend, as shown": trend_numbers,
    "shift": shift_numbers,
    "corner": corner_numbers,
    "halves": halves_numbers,
    "ARMA": arma_numbers,
    "residuals": residual_numbers,
    "largest root": largest_numbers,
    "root bootstrap": bootstrap_numbers,
}
# Those of the unit alone: no kernel without a log but these sees the origin.
UNIT: dict[str, Callable[[np.ndarray], Numbers]] = {
    "ADF n": lambda y: picked(adf(y, "n"), "p_value", "lags"),
    "Phillips-Perron n": lambda y: picked(phillips_perron(y, "n"), "p_value"),
    "HEGY n": lambda y: picked(hegy(y, PERIOD, "n", dummies=False).seasonal, "p_value"),  # type: ignore[union-attr]
    "Box-Cox": lambda y: picked(box_cox(y, PERIOD), "exponent", "lower", "upper"),
    "Guerrero": lambda y: {"exponent": guerrero(y, PERIOD) or 0.0},
}
# Estimates found by a search that stops at a tolerance, and what rests on them; none is a p-value.
SEARCHED = {"ARMA": 1e-5, "root bootstrap": 1e-2, "Box-Cox": 1e-4, "Guerrero": 1e-5}


def check(numbers: Callable[[np.ndarray], Numbers], name: str, before: np.ndarray, after: np.ndarray) -> None:
    one, other = numbers(before), numbers(after)
    assert one
    assert all(np.isfinite(value) for value in one.values())
    assert other == pytest.approx(one, rel=1e-7, abs=SEARCHED.get(name, 1e-9))


@pytest.mark.parametrize("scale", [1e-6, 1e6])
@pytest.mark.parametrize("name", [*FREE, *UNIT])
def test_the_unit_is_not_seen(name: str, scale: float) -> None:
    y = made(1)
    check((FREE | UNIT)[name], name, y, scale * y)


@pytest.mark.parametrize("constant", [-10.0, 1000.0])
@pytest.mark.parametrize("name", FREE)
def test_the_origin_is_not_seen(name: str, constant: float) -> None:
    y = made(2)
    check(FREE[name], name, y, y + constant)


@pytest.mark.parametrize("kernel", ["bartlett", "parzen", "quadratic spectral"])
@pytest.mark.parametrize("rule", ["andrews", "newey-west"])
def test_long_run_variance_goes_with_the_square_of_the_unit(kernel: str, rule: str) -> None:
    y = np.diff(made(3))
    one = long_run_variance(y, kernel=kernel, bandwidth=rule)  # type: ignore[arg-type]
    other = long_run_variance(1e-6 * y, kernel=kernel, bandwidth=rule)  # type: ignore[arg-type]
    assert one is not None
    assert other is not None
    assert other.value == pytest.approx(1e-12 * one.value, rel=1e-9)
