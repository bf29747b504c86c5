import numpy as np
import pytest

from preflight_magic.kernels.robust_trend import trend_test
from preflight_magic.kernels.shift_date import broken_trend, shift_interval
from preflight_magic.kernels.trend_evidence import TREND_TEST, trend_evidence


def series(n: int = 120) -> np.ndarray:
    rng = np.random.default_rng(4)
    return np.resize(3.0 * rng.standard_normal(12), n) + 5.0 * (np.arange(n) >= 70) + rng.standard_normal(n)


def test_a_plain_series_gives_what_the_kernels_give() -> None:
    y = np.random.default_rng(4).standard_normal(120).cumsum()
    found = trend_evidence(y, 1, 70, with_line=False, with_pattern=False, series="as given")
    test = trend_test(y)
    assert test is not None
    assert found.test is not None
    assert (found.test.test, found.test.statistic, found.test.p_value) == (TREND_TEST, test.statistic, test.p_value)
    assert found.test.options["series"] == "as given"
    assert found.test.options["weight of the mean difference"] == test.weight
    assert found.interval == shift_interval(y, np.ones((120, 1)), 70)
    assert found.corner == broken_trend(y)


def test_the_pattern_neither_hides_nor_makes_a_trend() -> None:
    y = np.random.default_rng(4).standard_normal(126)
    plain = trend_evidence(y, 12, None, with_line=True, with_pattern=True, series="as given").test
    pattern = np.resize(50.0 * np.arange(12.0), 126)
    other = trend_evidence(y + pattern, 12, None, with_line=True, with_pattern=True, series="as given").test
    assert plain is not None
    assert other is not None
    assert other.statistic == pytest.approx(plain.statistic, rel=1e-8)
    assert other.options["series"] == "as given, mean pattern of 12 removed"


def test_a_shift_beside_a_pattern_is_dated_narrowly() -> None:
    y = series()
    with_pattern = trend_evidence(y, 12, 70, with_line=False, with_pattern=True, series="log").interval
    without = trend_evidence(y, 12, 70, with_line=False, with_pattern=False, series="log").interval
    assert with_pattern is not None
    assert without is not None
    assert with_pattern.first <= 70 <= with_pattern.last
    assert with_pattern.last - with_pattern.first <= 6
    assert with_pattern.size == pytest.approx(5.0, abs=0.6)


def test_gaps_are_told() -> None:
    y = series()
    y[[3, 4, 80]] = np.nan
    found = trend_evidence(y, 12, 70, with_line=True, with_pattern=True, series="log")
    assert found.test is not None
    assert found.interval is not None
    assert found.corner is not None
    assert found.test.options["series"] == "log, gaps filled along the mean pattern, mean pattern of 12 removed"


def test_what_cannot_be_found_is_none() -> None:
    found = trend_evidence(np.arange(10.0), 1, 5, with_line=True, with_pattern=False, series="as given")
    assert (found.test, found.interval, found.corner) == (None, None, None)
    assert trend_evidence(series(), 12, None, with_line=True, with_pattern=True, series="as given").interval is None
