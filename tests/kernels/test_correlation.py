import numpy as np
import pytest
from scipy.signal import lfilter
from statsmodels.stats.diagnostic import acorr_ljungbox
from statsmodels.tsa.stattools import acf, pacf

from preflight_magic.kernels.correlation import autocorrelation, ljung_box, partial_autocorrelation


def ar2(n: int, seed: int = 2) -> np.ndarray:
    noise = np.random.default_rng(seed).standard_normal(n + 100)
    return lfilter([1.0], [1.0, -0.8, 0.3], noise)[100:]


def with_gaps(y: np.ndarray) -> np.ndarray:
    y = y.copy()
    y[np.random.default_rng(9).choice(y.size, y.size // 5, replace=False)] = np.nan
    return y


@pytest.mark.parametrize("n", [30, 200, 1000])
def test_autocorrelation_is_that_of_statsmodels(n: int) -> None:
    y = ar2(n)
    found = autocorrelation(y, n - 1)
    assert found is not None
    np.testing.assert_allclose(found, acf(y, nlags=n - 1, fft=False), atol=1e-12)


def test_autocorrelation_averages_the_pairs_that_are_there() -> None:
    y = with_gaps(ar2(200))
    found = autocorrelation(y, 20)
    assert found is not None
    by_pairs = acf(y, nlags=20, missing="conservative", adjusted=True, fft=False)
    np.testing.assert_allclose(found, by_pairs * (1.0 - np.arange(21) / 200), atol=1e-12)


def test_gaps_do_not_shrink_the_autocorrelation() -> None:
    y = ar2(20_000)
    full, gaps = autocorrelation(y, 3), autocorrelation(with_gaps(y), 3)
    assert full is not None
    assert gaps is not None
    np.testing.assert_allclose(gaps, full, atol=0.02)


def test_lag_without_pairs_is_not_a_number() -> None:
    y = np.array([1.0, np.nan, 3.0, np.nan, 2.0, np.nan, 5.0])
    found = autocorrelation(y, 6)
    assert found is not None
    assert np.isnan(found).tolist() == [False, True, False, True, False, True, False]


@pytest.mark.parametrize("n", [30, 200])
def test_partial_autocorrelation_is_that_of_statsmodels(n: int) -> None:
    y = ar2(n)
    found = partial_autocorrelation(y, n // 2 - 1)
    assert found is not None
    np.testing.assert_allclose(found, pacf(y, nlags=n // 2 - 1, method="ldb"), atol=1e-12)


def test_partial_autocorrelation_stops_where_pairs_contradict_each_other() -> None:
    y = np.array([1.0, 1.0, np.nan, -1.0, -1.0, np.nan, 1.0, 1.0, np.nan, -1.0, -1.0, np.nan])
    found = partial_autocorrelation(y, 8)
    assert found is not None
    known = np.isfinite(found)
    assert known[0]
    assert (np.abs(found[known][1:]) < 1.0).all()
    assert not known[-1]


@pytest.mark.parametrize("model_df", [0, 2])
@pytest.mark.parametrize("lags", [3, 12, 24])
def test_ljung_box_is_that_of_statsmodels(model_df: int, lags: int) -> None:
    y = np.random.default_rng(4).standard_normal(150)
    expected = acorr_ljungbox(y, lags=[lags], model_df=model_df)
    found = ljung_box(y, lags, model_df)
    assert found is not None
    assert found.statistic == pytest.approx(expected["lb_stat"].iloc[0], rel=1e-10)
    assert found.p_value == pytest.approx(expected["lb_pvalue"].iloc[0], rel=1e-9)
    assert (found.lags, found.degrees, found.nobs) == (lags, lags - model_df, 150)


def test_ljung_box_keeps_its_size_with_gaps() -> None:
    rng = np.random.default_rng(7)
    rejected = 0
    for _ in range(1000):
        y = rng.standard_normal(120)
        y[rng.random(120) < 0.25] = np.nan
        found = ljung_box(y, 10)
        assert found is not None
        rejected += found.p_value < 0.05
    # standard error of the share: sqrt(.05 * .95 / 1000) = .007
    assert 0.03 < rejected / 1000 < 0.075


def test_series_that_cannot_be_tested() -> None:
    constant = np.full(40, 0.1)
    assert autocorrelation(constant, 5) is None
    assert partial_autocorrelation(constant, 5) is None
    assert ljung_box(constant, 5) is None
    assert autocorrelation(np.full(5, np.nan), 2) is None
    y = ar2(40)
    assert ljung_box(y, 2, model_df=2) is None
    assert ljung_box(y, 40) is None


@pytest.mark.parametrize("scale", [1e-6, 1e6])
def test_unit_and_origin_change_nothing(scale: float) -> None:
    y = with_gaps(ar2(100))
    np.testing.assert_allclose(autocorrelation(scale * (y + 100.0), 12), autocorrelation(y, 12), atol=1e-9)
    np.testing.assert_allclose(
        partial_autocorrelation(scale * (y + 100.0), 12), partial_autocorrelation(y, 12), atol=1e-9
    )
    one, other = ljung_box(y, 12), ljung_box(scale * (y + 100.0), 12)
    assert one is not None
    assert other is not None
    assert other.statistic == pytest.approx(one.statistic, rel=1e-9)
