import time

import numpy as np
import pytest
from scipy.signal import lfilter

from preflight_magic.kernels.canova_hansen import canova_hansen
from preflight_magic.kernels.canova_hansen_law import canova_hansen_p_value
from tests.references import seasonal


def pattern(n: int, period: int, seed: int = 1) -> np.ndarray:
    rng = np.random.default_rng(seed)
    return np.resize(3.0 * rng.standard_normal(period), n) + rng.standard_normal(n)


def wandering(n: int, period: int, seed: int = 1) -> np.ndarray:
    steps = np.random.default_rng(seed).standard_normal((-(-n // period), period))
    return steps.cumsum(axis=0).ravel()[:n]


# The R package uroot, function ch.test with trigonometric regressors.
@pytest.mark.parametrize("row", seasonal.record()["canova_hansen"], ids=lambda row: row["series"])
def test_statistics_are_those_of_uroot(row: dict) -> None:
    y, period = seasonal.series(row["series"])
    terms = "ct" if row["trend"] else "c"
    found = canova_hansen(y, period, terms, lagged=row["lag1"], bandwidth=row["bandwidth"])
    assert found is not None
    ours = [one.statistic for one in found.frequencies] + [found.statistic]
    np.testing.assert_allclose(ours, row["statistics"], rtol=1e-9)
    assert [one.degrees for one in found.frequencies] == [2] * ((period - 1) // 2) + [1] * (period % 2 == 0)
    assert [one.cycle for one in found.frequencies] == [period / k for k in range(1, period // 2 + 1)]
    assert (found.bandwidth, found.nobs, found.terms) == (row["bandwidth"], y.size - row["lag1"], terms)


def test_p_values_are_those_of_this_length() -> None:
    found = canova_hansen(pattern(96, 4), 4, "ct", lagged=True, bandwidth=2)
    assert found is not None
    columns = 6  # constant, line, three waves and the lag, on 95 observations
    assert found.p_value == canova_hansen_p_value(found.statistic, "joint", 3, 95, columns, 2)
    for one in found.frequencies:
        kind = "pi" if one.degrees == 1 else "pair"
        assert one.p_value == canova_hansen_p_value(one.statistic, kind, one.degrees, 95, columns, 2)


@pytest.mark.parametrize("n", [50, 75])
def test_few_cycles_reject_a_fixed_pattern_about_as_often_as_they_should(n: int) -> None:
    p = []
    for seed in range(500):
        found = canova_hansen(pattern(n, 12, seed), 12, "ct", lagged=True)
        assert found is not None
        p.append(found.p_value)
    assert abs(np.mean(np.array(p) < 0.05) - 0.05) < 0.015 + 2.5 * np.sqrt(0.05 * 0.95 / 500)


@pytest.mark.parametrize("period", [4, 7, 12])
def test_a_wandering_pattern_is_told_from_a_fixed_one(period: int) -> None:
    rejected = {pattern: 0, wandering: 0}
    for kind in rejected:
        for seed in range(40):
            found = canova_hansen(kind(20 * period, period, seed), period, lagged=True)
            assert found is not None
            rejected[kind] += found.p_value < 0.05
    assert rejected[pattern] <= 7  # 2 expected; more than 7 has a probability of 0.001
    assert rejected[wandering] >= 36


@pytest.mark.parametrize("coefficient", [0.0, 0.6])
def test_dependence_does_not_reject_where_a_lag_takes_it_up(coefficient: float) -> None:
    rng = np.random.default_rng(4)
    p_values = []
    for _ in range(400):
        found = canova_hansen(lfilter([1.0], [1.0, -coefficient], rng.standard_normal(250))[50:], 4, lagged=True)
        assert found is not None
        p_values.append(found.p_value)
    for level in (0.05, 0.23, 0.5, 0.9):
        error = np.sqrt(level * (1.0 - level) / 400)
        assert abs(np.mean(np.array(p_values) < level) - level) < 3.5 * error + 0.01


@pytest.mark.parametrize("lagged", [False, True])
@pytest.mark.parametrize(("scale", "constant"), [(1e-6, 0.0), (1e6, 0.0), (1.0, 1e5), (1.0, -3.0)])
def test_neither_unit_nor_origin_is_seen(lagged: bool, scale: float, constant: float) -> None:
    y = pattern(120, 12)
    plain = canova_hansen(y, 12, "ct", lagged=lagged)
    other = canova_hansen(scale * y + constant, 12, "ct", lagged=lagged)
    assert plain is not None
    assert other is not None
    assert other.bandwidth == plain.bandwidth
    assert other.statistic == pytest.approx(plain.statistic, rel=1e-8)


@pytest.mark.parametrize("start", [0, 3])
def test_the_direction_of_time_is_not_seen(start: int) -> None:
    # Reversed, the sums of residuals change their sign alone; a cycle may begin anywhere.
    y = pattern(124, 12)[start : start + 120]
    forward, backward = canova_hansen(y, 12, bandwidth=3), canova_hansen(y[::-1].copy(), 12, bandwidth=3)
    assert forward is not None
    assert backward is not None
    assert backward.statistic == pytest.approx(forward.statistic, rel=1e-8)


def test_legacy_bandwidth_is_that_of_uroot() -> None:
    found = canova_hansen(pattern(144, 12), 12, bandwidth="legacy")
    assert found is not None
    assert found.bandwidth == round(12 * 1.44**0.25)  # default of ch.test in uroot


def test_what_cannot_carry_the_test_is_none() -> None:
    assert canova_hansen(np.full(60, 0.1), 4) is None
    assert canova_hansen(np.array([]), 4) is None
    assert canova_hansen(pattern(7, 4), 4) is None
    assert canova_hansen(np.resize([1.0, 5.0, 2.0, 7.0], 60), 4) is None  # a pattern fitted without error
    assert canova_hansen(0.1 * np.arange(60.0), 4, "ct") is None
    assert canova_hansen(pattern(8, 4), 4, bandwidth=0) is not None


def test_wrong_input_is_refused() -> None:
    y = pattern(60, 4)
    with pytest.raises(ValueError, match="finite"):
        canova_hansen(np.where(np.arange(60) == 5, np.nan, y), 4)
    with pytest.raises(ValueError, match="terms"):
        canova_hansen(y, 4, "n")  # type: ignore[arg-type]
    with pytest.raises(ValueError, match="period"):
        canova_hansen(y, 1)
    with pytest.raises(ValueError, match="bandwidth"):
        canova_hansen(y, 4, bandwidth=60)


def test_input_is_not_changed() -> None:
    y = pattern(60, 4)
    kept = y.copy()
    canova_hansen(y, 4, "ct", lagged=True)
    assert np.array_equal(y, kept)


def test_it_takes_less_than_a_millisecond() -> None:
    y = pattern(120, 12)
    taken = []
    for _ in range(60):
        start = time.perf_counter()
        canova_hansen(y, 12, lagged=True)
        taken.append(time.perf_counter() - start)
    assert min(taken) < 1e-3
