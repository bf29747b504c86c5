import warnings

import numpy as np
import pytest
from scipy.signal import lfilter
from statsmodels.tsa import stattools

from preflight_magic.kernels.distributions import kpss_p_value
from preflight_magic.kernels.unit_root import adf, kpss


def quiet(test: object, *args: object, **options: object) -> tuple:
    """A statsmodels test as a tuple, without its announcements of other result types and its table-edge warnings."""
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        return tuple(test(*args, **options))[:4]  # type: ignore[operator]


def series(kind: str, n: int) -> np.ndarray:
    noise = np.random.default_rng(n).standard_normal(n + 100)
    made = {
        "white": noise[100:],
        "ar": lfilter([1.0], [1.0, -0.8, 0.2], noise)[100:],
        "ma": lfilter([1.0, 0.3, 0.5], [1.0], noise)[100:],
        "walk": noise[100:].cumsum(),
        "drift": (noise[100:] + 0.3).cumsum(),
        "twice": noise[100:].cumsum().cumsum(),
        "seasonal walk": noise[100:].cumsum() + 5.0 * np.sin(np.arange(n) * np.pi / 6.0),
        "exponential": np.exp(0.02 * noise[100:].cumsum() + 0.01 * np.arange(n)),
        "far away": 1000.0 + noise[100:].cumsum(),
    }
    return made[kind]


KINDS = ("white", "ar", "ma", "walk", "drift", "twice", "seasonal walk", "exponential", "far away")
TERMS = ("n", "c", "ct", "ctt")


@pytest.mark.parametrize("kind", KINDS)
@pytest.mark.parametrize("terms", TERMS)
@pytest.mark.parametrize("criterion", ["AIC", "BIC", "t-stat"])
@pytest.mark.parametrize("n", [24, 61, 300])
def test_adf_with_searched_lags_is_that_of_statsmodels(kind: str, terms: str, criterion: str, n: int) -> None:
    y = series(kind, n)
    with warnings.catch_warnings():
        warnings.simplefilter("ignore", FutureWarning)
        statistic, p_value, lags, nobs, critical, _ = stattools.adfuller(y, regression=terms, autolag=criterion)
    found = adf(y, terms, criterion=criterion)
    assert found is not None
    assert (found.lags, found.nobs, found.terms) == (lags, nobs, terms)
    assert found.statistic == pytest.approx(statistic, abs=1e-9, rel=1e-9)
    if found.p_bound == "exact":
        assert found.p_value == pytest.approx(p_value, abs=1e-9)
    else:
        assert p_value in (0.0, 1.0)
    np.testing.assert_allclose(list(found.critical_values.values()), list(critical.values()), rtol=1e-12)


@pytest.mark.parametrize("kind", KINDS)
@pytest.mark.parametrize("terms", TERMS)
@pytest.mark.parametrize("lags", [0, 1, 5, 11])
def test_adf_with_given_lags_is_that_of_statsmodels(kind: str, terms: str, lags: int) -> None:
    y = series(kind, 60)
    statistic, p_value, _, nobs = quiet(stattools.adfuller, y, regression=terms, maxlag=lags, autolag=None)
    for found in (adf(y, terms, lags=lags), adf(y, terms, max_lags=lags, criterion=None)):
        assert found is not None
        assert (found.lags, found.nobs) == (lags, nobs)
        assert found.statistic == pytest.approx(statistic, abs=1e-9, rel=1e-9)
        assert found.p_bound != "exact" or found.p_value == pytest.approx(p_value, abs=1e-9)


def test_adf_searches_up_to_the_lags_allowed() -> None:
    y = series("ma", 300)
    statistic, _, lags, _ = quiet(stattools.adfuller, y, maxlag=3)
    found = adf(y, max_lags=3)
    assert found is not None
    assert found.lags == lags <= 3
    assert found.statistic == pytest.approx(statistic, abs=1e-9)


@pytest.mark.parametrize("terms", TERMS)
@pytest.mark.parametrize("criterion", ["AIC", "BIC", "t-stat", "MAIC"])
@pytest.mark.parametrize("scale", [1e-6, 1e6])
def test_adf_does_not_see_the_unit(terms: str, criterion: str, scale: float) -> None:
    y = series("ar", 120)
    plain, scaled = adf(y, terms, criterion=criterion), adf(scale * y, terms, criterion=criterion)
    assert plain is not None
    assert scaled is not None
    assert scaled.lags == plain.lags
    assert scaled.statistic == pytest.approx(plain.statistic, rel=1e-10)


@pytest.mark.parametrize("terms", ["c", "ct", "ctt"])
@pytest.mark.parametrize("constant", [-3.0, 1e4])
def test_adf_does_not_see_the_origin(terms: str, constant: float) -> None:
    y = series("walk", 120)
    plain, moved = adf(y, terms), adf(y + constant, terms)
    assert plain is not None
    assert moved is not None
    assert moved.lags == plain.lags
    assert moved.statistic == pytest.approx(plain.statistic, rel=1e-9)


def test_modified_aic_takes_longer_lags_against_a_moving_average_near_minus_one() -> None:
    # Ng and Perron (2001): AIC stops too early there, and the test then rejects a unit root that is there.
    rng = np.random.default_rng(7)
    lags, rejections = {"AIC": 0, "MAIC": 0}, {"AIC": 0, "MAIC": 0}
    for _ in range(200):
        y = lfilter([1.0, -0.8], [1.0], rng.standard_normal(200)).cumsum()
        for criterion in lags:
            found = adf(y, "c", criterion=criterion)
            assert found is not None
            lags[criterion] += found.lags
            rejections[criterion] += found.p_value < 0.05
    assert lags["MAIC"] > 1.5 * lags["AIC"]
    assert rejections["MAIC"] < 0.5 * rejections["AIC"]


def test_adf_refuses_what_cannot_carry_it() -> None:
    assert adf(np.full(50, 2.5)) is None
    assert adf(np.array([1.0, 3.0, 2.0])) is None
    assert adf(np.array([]), "n") is None
    assert adf(series("walk", 20), lags=9) is None  # statsmodels' own limit: n // 2 - 2 = 8
    assert adf(series("walk", 20), lags=8) is not None
    assert adf(0.1 * np.arange(60.0)) is None  # a straight line is fitted without error
    assert adf(np.resize([1.0, -1.0], 60), lags=1) is None  # the lagged difference repeats the level
    with pytest.raises(ValueError, match="finite"):
        adf(np.array([1.0, np.nan, 2.0, 3.0, 1.0, 4.0]))
    with pytest.raises(ValueError, match="deterministic"):
        adf(series("walk", 20), "cc")  # type: ignore[arg-type]
    with pytest.raises(ValueError, match="negative"):
        adf(series("walk", 20), lags=-1)
    with pytest.raises(ValueError, match="lag choice"):
        adf(series("walk", 20), criterion="HQ")  # type: ignore[arg-type]


def test_adf_keeps_a_degree_of_freedom_in_short_series() -> None:
    # Without terms, n // 2 - 1 lags would leave as many coefficients as observations.
    found = adf(series("walk", 20), "n")
    assert found is not None
    assert found.lags <= 8
    assert np.isfinite(found.statistic)


def test_adf_searches_only_lags_that_do_not_depend_on_others() -> None:
    # Zero until near the end: on the common sample the two longest lags are columns of zeros.
    y = np.concatenate([np.zeros(45), np.random.default_rng(1).standard_normal(15)])
    assert adf(y, lags=16) is None
    found = adf(y, max_lags=16, criterion="BIC")
    given = adf(y, lags=2)
    assert found is not None
    assert given is not None
    assert found.lags < 15
    assert given.statistic == pytest.approx(quiet(stattools.adfuller, y, maxlag=2, autolag=None)[0], abs=1e-9)


def test_adf_does_not_change_its_input() -> None:
    y = series("walk", 50)
    kept = y.copy()
    adf(y)
    kpss(y)
    assert np.array_equal(y, kept)


@pytest.mark.parametrize("kind", KINDS)
@pytest.mark.parametrize("terms", ["c", "ct"])
@pytest.mark.parametrize("n", [20, 61, 300])
@pytest.mark.parametrize("bandwidth", ["auto", "legacy", 0, 4, 19])
def test_kpss_statistic_is_that_of_statsmodels(kind: str, terms: str, n: int, bandwidth: str | int) -> None:
    y = series(kind, n)
    statistic, p_value, lags, _ = quiet(stattools.kpss, y, regression=terms, nlags=bandwidth)
    found = kpss(y, terms, bandwidth)
    assert found is not None
    assert (found.bandwidth, found.nobs, found.terms) == (lags, n, terms)
    assert found.statistic == pytest.approx(statistic, abs=1e-9, rel=1e-9)
    assert found.p_value == kpss_p_value(found.statistic, terms)
    if 0.01 < p_value < 0.1:  # inside its table, which simulation and interpolation leave rough
        assert found.p_value == pytest.approx(p_value, abs=0.01)


def test_kpss_bandwidth_is_automatic_by_default() -> None:
    y = series("ar", 150)
    assert kpss(y) == kpss(y, "c", "auto")


@pytest.mark.parametrize("terms", ["c", "ct"])
@pytest.mark.parametrize(("scale", "constant"), [(1e-6, 0.0), (1e6, 0.0), (1.0, 1e4), (1.0, -2.0)])
def test_kpss_sees_neither_unit_nor_origin(terms: str, scale: float, constant: float) -> None:
    y = series("ar", 120)
    plain, other = kpss(y, terms), kpss(scale * y + constant, terms)
    assert plain is not None
    assert other is not None
    assert other.bandwidth == plain.bandwidth
    assert other.statistic == pytest.approx(plain.statistic, rel=1e-9)


def test_kpss_refuses_what_cannot_carry_it() -> None:
    assert kpss(np.full(50, 0.1)) is None
    assert kpss(np.array([1.0, 2.0, 1.0])) is None
    assert kpss(0.1 * np.arange(60.0), "ct") is None
    assert kpss(0.1 * np.arange(60.0), "c") is not None
    with pytest.raises(ValueError, match="finite"):
        kpss(np.array([1.0, np.inf, 2.0, 3.0, 4.0]))
    with pytest.raises(ValueError, match="terms"):
        kpss(series("walk", 20), "n")  # type: ignore[arg-type]
    with pytest.raises(ValueError, match="bandwidth"):
        kpss(series("walk", 20), bandwidth=20)


def test_kpss_p_values_are_uniform_under_the_null() -> None:
    rng = np.random.default_rng(12)
    p_values = []
    for _ in range(2000):
        found = kpss(rng.standard_normal(400), "c", 0)
        assert found is not None
        p_values.append(found.p_value)
    shares = [np.mean(np.array(p_values) < level) for level in (0.05, 0.23, 0.5, 0.9)]
    # standard errors .005, .009, .011, .007
    np.testing.assert_allclose(shares, [0.05, 0.23, 0.5, 0.9], atol=0.035)
