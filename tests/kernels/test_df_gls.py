import numpy as np
import pytest
from scipy.signal import lfilter

from preflight_magic.kernels.df_gls import df_gls, quasi_difference_detrend
from preflight_magic.kernels.response_surfaces import critical_values
from tests.references.records import of, unit_root_series

SERIES = unit_root_series()


def walk(n: int) -> np.ndarray:
    return np.random.default_rng(n).standard_normal(n).cumsum()


def named(row: dict[str, str]) -> str:
    return " ".join(row[key] for key in ("series", "terms", "lags"))


@pytest.mark.parametrize("row", of("unit_root_r", "urca::ur.ers"), ids=named)
def test_statistic_is_that_of_urca(row: dict[str, str]) -> None:
    found = df_gls(SERIES[row["series"]], row["terms"], lags=int(row["lags"]))
    assert found is not None
    assert found.lags == int(row["lags"])
    assert found.statistic == pytest.approx(float(row["statistic"]), rel=1e-6)


@pytest.mark.parametrize("row", of("unit_root_arch", "DFGLS"), ids=lambda row: f"{named(row)} {row['rule']}")
def test_search_is_that_of_arch(row: dict[str, str]) -> None:
    y = SERIES[row["series"]]
    # Without terms arch's search goes as far as its cap for short series allows; all five series are longer.
    found = df_gls(y, row["terms"], criterion=row["rule"].upper(), search="OLS")
    assert found is not None
    assert found.lags == int(row["lags"])
    assert found.statistic == pytest.approx(float(row["statistic"]), rel=1e-6)


@pytest.mark.parametrize("terms", ["c", "ct"])
def test_detrending_is_least_squares_on_quasi_differences(terms: str) -> None:
    # Elliott, Rothenberg and Stock (1996): c-bar = -7 with a constant, -13.5 with a line.
    y, n = walk(60) + 100.0, 60
    root = 1.0 - {"c": 7.0, "ct": 13.5}[terms] / n
    z = np.vander(np.arange(1.0, n + 1), {"c": 1, "ct": 2}[terms])
    whiten = np.eye(n) - root * np.eye(n, k=-1)
    beta = np.linalg.lstsq(whiten @ z, whiten @ y, rcond=None)[0]
    np.testing.assert_allclose(quasi_difference_detrend(y, terms), y - z @ beta, atol=1e-10)


@pytest.mark.parametrize("search", ["OLS", "GLS"])
@pytest.mark.parametrize("terms", ["c", "ct"])
def test_modified_aic_is_its_definition(terms: str, search: str) -> None:
    # Ng and Perron (2001), on the detrended series without terms: log variance + 2 (tau + k) / nobs.
    for seed in range(25):
        y = lfilter([1.0, -0.5], [1.0], np.random.default_rng(seed).standard_normal(100)).cumsum()
        x = quasi_difference_detrend(y, terms)
        if search == "OLS":
            z = np.vander(np.arange(100.0), {"c": 1, "ct": 2}[terms])
            x = y - z @ np.linalg.lstsq(z, y, rcond=None)[0]
        d, values = np.diff(x), []
        t = np.arange(8, d.size)
        for k in range(9):
            regressors = np.column_stack([x[t], *(d[t - lag] for lag in range(1, k + 1))])
            beta, rss = np.linalg.lstsq(regressors, d[t], rcond=None)[:2]
            variance = float(rss[0]) / t.size
            tau = beta[0] ** 2 * (x[t] @ x[t]) / variance
            values.append(np.log(variance) + 2.0 * (tau + k) / t.size)
        found = df_gls(y, terms, max_lags=8, search=search)
        assert found is not None
        assert found.lags == int(np.argmin(values))
        assert (found.nobs, found.search) == (99 - found.lags, search)


# Elliott, Rothenberg and Stock (1996), table 1, constant and line, as in R's urca: 50, 100 and 200 values. They
# simulated without lags; the tolerance is their rounding, our surface and three standard errors of a quantile
# simulated with their 20,000 series or so.
@pytest.mark.parametrize(
    ("n", "published"), [(50, (-3.77, -3.19, -2.89)), (100, (-3.58, -3.03, -2.74)), (200, (-3.46, -2.93, -2.64))]
)
def test_critical_values_are_those_of_the_authors(n: int, published: tuple[float, ...]) -> None:
    ours = critical_values("df_gls", "ct", n)
    for value, theirs, error in zip(ours.values(), published, (0.06, 0.035, 0.03), strict=True):
        assert value == pytest.approx(theirs, abs=error)


@pytest.mark.parametrize(
    "row", of("unit_root_arch", "critical DFGLS"), ids=lambda row: f"{row['terms']} {row['lags']} {row['rule']}"
)
def test_critical_values_are_those_of_arch(row: dict[str, str]) -> None:
    # arch counts the observations of the regression, one less than the series. Both are surfaces fitted to simulated
    # quantiles; at 50 values each may miss them by 0.02, and at 1 % a quantile of 50,000 series has the error 0.02.
    n = 100_000 if row["lags"] == "inf" else int(row["lags"]) + 1
    ours = critical_values("df_gls", row["terms"], n)[row["rule"]]
    assert ours == pytest.approx(float(row["statistic"]), abs=0.05 if n == 51 else 0.03)


def test_lags_pull_the_critical_value_towards_zero() -> None:
    # Cheung and Lai (1995), Journal of Business and Economic Statistics 13, found this in samples of any length.
    for terms in ("c", "ct"):
        by_lags = [critical_values("df_gls", terms, 60, lags)["5%"] for lags in (0, 3, 6, 9)]
        assert by_lags == sorted(by_lags)
        assert by_lags[-1] - by_lags[0] > 0.1


@pytest.mark.parametrize("terms", ["c", "ct"])
@pytest.mark.parametrize(("scale", "constant"), [(1e-6, 0.0), (1e6, 0.0), (1.0, 1e4), (1.0, -3.0)])
def test_sees_neither_unit_nor_origin(terms: str, scale: float, constant: float) -> None:
    y = walk(120)
    plain, other = df_gls(y, terms), df_gls(scale * y + constant, terms)
    assert plain is not None
    assert other is not None
    assert other.lags == plain.lags
    assert other.statistic == pytest.approx(plain.statistic, rel=1e-9)


def test_p_value_meets_the_critical_values() -> None:
    rng = np.random.default_rng(5)
    for _ in range(40):
        found = df_gls(rng.standard_normal(80).cumsum(), "ct")
        assert found is not None
        for level, value in found.critical_values.items():
            assert (found.statistic < value) == (found.p_value < float(level[:-1]) / 100.0)


def test_white_noise_is_beyond_the_table() -> None:
    found = df_gls(np.random.default_rng(1).standard_normal(200), "c", lags=0)
    assert found is not None
    assert (found.p_value, found.p_bound) == (0.001, "at most")
    found = df_gls(np.exp(0.05 * np.arange(100.0)) + walk(100) * 0.01, "c", lags=0)
    assert found is not None
    assert (found.p_value, found.p_bound) == (0.999, "at least")


def test_refuses_what_cannot_carry_it() -> None:
    assert df_gls(np.full(50, 2.5)) is None
    assert df_gls(np.array([1.0, 3.0, 2.0])) is None
    assert df_gls(np.array([])) is None
    assert df_gls(0.1 * np.arange(60.0), "ct") is None
    assert df_gls(walk(20), lags=9) is None
    with pytest.raises(ValueError, match="finite"):
        df_gls(np.array([1.0, np.nan, 2.0, 3.0, 1.0, 4.0]))
    with pytest.raises(ValueError, match="terms"):
        df_gls(walk(20), "n")  # type: ignore[arg-type]
    with pytest.raises(ValueError, match="detrending"):
        df_gls(walk(20), search="none")  # type: ignore[arg-type]
    with pytest.raises(ValueError, match="negative"):
        df_gls(walk(20), lags=-1)


def test_does_not_change_its_input() -> None:
    y = walk(50)
    kept = y.copy()
    df_gls(y)
    assert np.array_equal(y, kept)
