import numpy as np
import pytest

from preflight_magic.kernels.canova_hansen import canova_hansen
from preflight_magic.kernels.seasonal_evidence import LONGEST_PERIOD, seasonal_evidence
from preflight_magic.kernels.seasonal_strength import fill_along_pattern
from preflight_magic.kernels.seasonal_unit_root import hegy


def series(n: int = 120, period: int = 12) -> np.ndarray:
    rng = np.random.default_rng(1)
    return np.resize(3.0 * rng.standard_normal(period), n) + rng.standard_normal(n).cumsum()


@pytest.mark.parametrize("differences", [0, 1, 2])
def test_a_finding_can_be_repeated_from_what_it_reports(differences: int) -> None:
    y = series()
    found = seasonal_evidence(y, 12, differences, "log")
    roots, stability = found.tests
    assert (roots.test, stability.test) == ("HEGY", "Canova-Hansen")
    again = hegy(y, 12, roots.terms, lags=roots.lags)
    assert again is not None
    assert roots.statistic == pytest.approx(again.seasonal.statistic)
    assert (roots.p_value, roots.p_bound, roots.nobs) == (again.seasonal.p_value, again.seasonal.p_bound, again.nobs)
    changes = np.diff(y, differences)
    other = canova_hansen(changes, 12, stability.terms, lagged=True, bandwidth=stability.lags)
    assert other is not None
    assert stability.statistic == pytest.approx(other.statistic)
    assert stability.terms == ("ct" if differences == 0 else "c")
    assert stability.options["series"] == "log" + ("", ", differenced once", ", differenced twice")[differences]
    assert roots.options["lag choice"] == "modified AIC"
    chosen = hegy(y, 12, "ct", criterion="MAIC")
    assert chosen is not None
    assert roots.lags == chosen.lags
    assert found.hegy == {f"{one.cycle:.4g}": pytest.approx(one.p_value) for one in again.roots[1:]}
    assert list(found.canova_hansen) == ["12", "6", "4", "3", "2.4", "2"]


def test_critical_values_fit_the_p_value() -> None:
    for seed in range(20):
        steps = np.random.default_rng(seed).standard_normal((12, 12))
        test = seasonal_evidence(steps.cumsum(axis=0).ravel(), 12, 0, "as given").tests[0]
        assert list(test.critical_values) == ["1%", "5%", "10%"]
        for text, value in test.critical_values.items():
            assert (test.statistic > value) == (test.p_value < float(text[:-1]) / 100.0)


def test_long_periods_and_short_series_have_none() -> None:
    assert seasonal_evidence(series(400, LONGEST_PERIOD + 1), LONGEST_PERIOD + 1, 0, "as given").tests == ()
    assert seasonal_evidence(series(13), 12, 0, "as given").tests == ()
    many = seasonal_evidence(series(300, 52), 52, 0, "as given")
    assert [test.test for test in many.tests] == ["HEGY", "Canova-Hansen"]
    assert many.hegy == many.canova_hansen == {}


@pytest.mark.parametrize("period", [1, 4])
def test_gaps_are_filled_along_the_pattern(period: int) -> None:
    pattern = np.resize([4.0, -1.0, 2.0, 7.0][:period], 40)
    # Whole cycles on a line would leave its rise inside a cycle in the pattern; a level is filled exactly.
    y = pattern + 100.0
    holed = y.copy()
    holed[[3, 17, 18]] = np.nan
    kept = holed.copy()
    np.testing.assert_allclose(fill_along_pattern(holed, period), y, rtol=1e-12)
    np.testing.assert_array_equal(holed, kept)
    assert fill_along_pattern(y, period) is y
