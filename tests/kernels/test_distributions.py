import time

import numpy as np
import pytest
from scipy.integrate import quad
from statsmodels.tsa.adfvalues import mackinnoncrit, mackinnonp

from preflight_magic.kernels.distributions import (
    dickey_fuller_critical_values,
    dickey_fuller_p_value,
    kpss_critical_value,
    kpss_p_value,
)

RANGES = {"n": (-19.04, 3.0), "c": (-18.83, 2.74), "ct": (-16.18, 0.7), "ctt": (-17.17, 0.54)}


@pytest.mark.parametrize("terms", ["n", "c", "ct", "ctt"])
def test_dickey_fuller_p_values_are_mackinnons(terms: str) -> None:
    for x in np.linspace(*RANGES[terms], 101)[1:-1]:
        p_value, bound = dickey_fuller_p_value(float(x), terms)
        assert bound == "exact"
        assert p_value == pytest.approx(mackinnonp(x, terms), rel=1e-9, abs=1e-300)


def test_dickey_fuller_p_values_beyond_the_table_are_bounds() -> None:
    low, below = dickey_fuller_p_value(-40.0, "c")
    high, above = dickey_fuller_p_value(9.0, "c")
    assert below == "at most"
    assert 0.0 < low < 1e-20
    assert above == "at least"
    assert 0.999 < high < 1.0
    assert dickey_fuller_p_value(9.0, "n")[1] == "exact"  # this polynomial rises for ever


@pytest.mark.parametrize("terms", ["n", "c", "ct", "ctt"])
@pytest.mark.parametrize("nobs", [20, 119, 5000])
def test_dickey_fuller_critical_values_are_mackinnons(terms: str, nobs: int) -> None:
    ours = dickey_fuller_critical_values(terms, nobs)
    assert list(ours) == ["1%", "5%", "10%"]
    np.testing.assert_allclose(list(ours.values()), mackinnoncrit(1, terms, nobs), rtol=1e-12)


# Anderson and Darling (1952), Annals of Mathematical Statistics 23, table 1: the limit of the Cramer-von Mises
# statistic is the integral of a squared Brownian bridge.
@pytest.mark.parametrize(
    ("level", "value"),
    [(0.5, 0.11888), (0.2, 0.24124), (0.1, 0.34730), (0.05, 0.46136), (0.01, 0.74346), (0.001, 1.16786)],
)
def test_kpss_level_critical_values_are_those_of_cramer_and_von_mises(level: float, value: float) -> None:
    assert kpss_critical_value(level, "c") == pytest.approx(value, abs=1.01e-5)


# Kwiatkowski, Phillips, Schmidt and Shin (1992), Journal of Econometrics 54, table 1, to three digits from 50,000
# simulated series of 2,000 values. A simulated quantile at level p has the standard error
# sqrt(p (1 - p) / 50000) / density; rounding adds at most 0.0005 to three of them.
@pytest.mark.parametrize(
    ("terms", "level", "value"),
    [
        ("c", 0.1, 0.347),
        ("c", 0.05, 0.463),
        ("c", 0.025, 0.574),
        ("c", 0.01, 0.739),
        ("ct", 0.1, 0.119),
        ("ct", 0.05, 0.146),
        ("ct", 0.025, 0.176),
        ("ct", 0.01, 0.216),
    ],
)
def test_kpss_critical_values_agree_with_the_simulated_table(terms: str, level: float, value: float) -> None:
    exact = kpss_critical_value(level, terms)
    density = (kpss_p_value(exact - 1e-5, terms) - kpss_p_value(exact + 1e-5, terms)) / 2e-5
    standard_error = np.sqrt(level * (1.0 - level) / 50_000) / density
    assert abs(exact - value) < 3.0 * standard_error + 0.0005


def imhof(x: float, weights: np.ndarray) -> float:
    """Upper tail of a weighted sum of chi-squares with one degree of freedom: Imhof (1961), Biometrika 48."""

    def integrand(u: float) -> float:
        angle = 0.5 * np.sum(np.arctan(weights * u)) - 0.5 * x * u
        return float(np.sin(angle) / (u * np.exp(0.25 * np.sum(np.log1p((weights * u) ** 2)))))

    return 0.5 + quad(integrand, 0.0, 2500.0, limit=2000, epsabs=1e-12)[0] / np.pi


@pytest.mark.parametrize("x", [0.02, 0.05, 0.12, 0.3, 0.9])
@pytest.mark.parametrize("terms", ["c", "ct"])
def test_kpss_p_values_invert_the_characteristic_function(terms: str, x: float) -> None:
    # The eigenvalues are found here from the covariance of the bridge itself, by the midpoint rule, not from the
    # determinant that the package uses. Error of the rule: of the order of one over the squared number of points.
    points = 1200
    t = (np.arange(points) + 0.5) / points
    covariance = np.minimum.outer(t, t) - np.outer(t, t)
    if terms == "ct":
        covariance -= 3.0 * np.outer(t * (1.0 - t), t * (1.0 - t))  # MacNeill (1978), Annals of Statistics 6
    weights = np.linalg.eigvalsh(covariance / points)[::-1][:300]
    mean = {"c": 1.0 / 6.0, "ct": 1.0 / 15.0}[terms]  # the integral of the variance; what is left out moves x
    assert kpss_p_value(x, terms) == pytest.approx(imhof(x - (mean - weights.sum()), weights), abs=1e-4)


def test_kpss_p_values_invert_the_exact_characteristic_function() -> None:
    # 1 / (k pi)**2 for the Brownian bridge; the mean of those left out, 5e-5, moves x.
    order = np.arange(1, 2001)
    weights = 1.0 / (np.pi * order) ** 2
    left_out = 1.0 / 6.0 - weights.sum()
    for x in (0.03, 0.1, 0.25, 0.6):
        assert kpss_p_value(x, "c") == pytest.approx(imhof(x - left_out, weights), rel=1e-6)


@pytest.mark.parametrize(("terms", "largest"), [("c", 1.0 / np.pi**2), ("ct", 1.0 / (2.0 * np.pi) ** 2)])
def test_kpss_far_tail_follows_its_largest_eigenvalue(terms: str, largest: float) -> None:
    # The tail is exp(-x / (2 largest)) times a factor that changes slowly, like one over the square root of x.
    x = np.array([4.0, 8.0]) * largest * np.pi**2
    ratio = kpss_p_value(float(x[1]), terms) / kpss_p_value(float(x[0]), terms)
    expected = np.exp(-(x[1] - x[0]) / (2.0 * largest)) / np.sqrt(2.0)
    assert ratio == pytest.approx(expected, rel=0.05)
    assert 0.0 < kpss_p_value(float(x[1]), terms) < 1e-15


@pytest.mark.parametrize("terms", ["c", "ct"])
def test_kpss_p_value_falls_and_stays_a_probability(terms: str) -> None:
    x = np.concatenate([[0.0], np.geomspace(1e-4, 20.0, 2000)])
    p = np.array([kpss_p_value(float(v), terms) for v in x])
    assert p[0] == 1.0
    assert (np.diff(p) <= 1e-13).all()
    assert (p > 0.0).all()


def test_kpss_p_value_takes_less_than_a_millisecond() -> None:
    kpss_p_value(0.3, "ct")
    taken = []
    for _ in range(50):
        start = time.perf_counter()
        kpss_p_value(0.3, "ct")
        taken.append(time.perf_counter() - start)
    assert min(taken) < 1e-3
