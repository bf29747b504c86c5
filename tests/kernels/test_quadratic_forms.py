import time

import numpy as np
import pytest
from scipy.integrate import quad
from scipy.stats import chi2

from preflight_magic.kernels.distributions import kpss_p_value
from preflight_magic.kernels.quadratic_forms import (
    cramer_von_mises_critical_value,
    cramer_von_mises_p_value,
    weighted_chi_squares_p_value,
)
from tests.references import seasonal

BRIDGE = 1.0 / (np.pi * np.arange(1, 2001)) ** 2
LEFT_OUT = 1.0 / 6.0 - BRIDGE.sum()  # the mean of the weights beyond, which moves the statistic


def density(x: float, degrees: int) -> float:
    step = 1e-5 * x
    return (cramer_von_mises_p_value(x - step, degrees) - cramer_von_mises_p_value(x + step, degrees)) / (2.0 * step)


# Anderson and Darling (1952), Annals of Mathematical Statistics 23, table 1.
@pytest.mark.parametrize(
    ("level", "value"),
    [(0.5, 0.11888), (0.2, 0.24124), (0.1, 0.34730), (0.05, 0.46136), (0.01, 0.74346), (0.001, 1.16786)],
)
def test_one_degree_is_cramer_and_von_mises(level: float, value: float) -> None:
    assert cramer_von_mises_critical_value(level, 1) == pytest.approx(value, abs=1.01e-5)


def test_published_simulated_critical_values_agree() -> None:
    # Canova and Hansen (1995), table 1, from Nyblom (1989) and Hansen (1990), as the package uroot carries it: 0.470,
    # 0.749, 1.01 ... at 5 %. To two or three digits, by simulation; how often they drew is not said there. Ten thousand
    # draws explain every distance within four standard errors.
    (rows, levels), values = seasonal.table("stability")
    assert rows[0] == "v1"
    assert values[:3, levels.index("0.05")].tolist() == [0.470, 0.749, 1.01]
    for degrees in range(1, 13):
        for column, level in enumerate(map(float, levels)):
            exact = cramer_von_mises_critical_value(level, degrees)
            error = np.sqrt(level * (1.0 - level) / 10_000) / density(exact, degrees)
            assert abs(values[degrees - 1, column] - exact) < 4.0 * error + 0.005


@pytest.mark.parametrize("x", np.geomspace(0.01, 9.0, 25))
def test_one_degree_is_the_level_kpss_distribution(x: float) -> None:
    assert cramer_von_mises_p_value(float(x), 1) == pytest.approx(kpss_p_value(float(x), "c"), rel=1e-9)


def imhof(x: float, weights: np.ndarray, degrees: int) -> float:
    """Imhof (1961), Biometrika 48: along the imaginary axis, by adaptive quadrature."""

    def integrand(u: float) -> float:
        angle = 0.5 * degrees * np.sum(np.arctan(weights * u)) - 0.5 * x * u
        return float(np.sin(angle) / u * np.exp(-0.25 * degrees * np.sum(np.log1p((weights * u) ** 2))))

    return 0.5 + quad(integrand, 0.0, 2500.0, limit=2000, epsabs=1e-12)[0] / np.pi


@pytest.mark.parametrize("degrees", [2, 3, 11, 51])
@pytest.mark.parametrize("level", [0.999, 0.77, 0.23, 0.01])
def test_p_values_invert_the_characteristic_function(degrees: int, level: float) -> None:
    x = cramer_von_mises_critical_value(level, degrees)
    assert cramer_von_mises_p_value(x, degrees) == pytest.approx(level, rel=1e-9)
    assert imhof(x - degrees * LEFT_OUT, BRIDGE, degrees) == pytest.approx(level, abs=1e-7)


@pytest.mark.parametrize("degrees", [1, 2, 5, 11, 23])
def test_p_values_are_those_of_simulated_bridges(degrees: int) -> None:
    rng = np.random.default_rng(degrees)
    draws = 20_000
    weights = 1.0 / (np.pi * np.arange(1, 41)) ** 2
    drawn = rng.chisquare(degrees, (draws, 40)) @ weights + degrees * (1.0 / 6.0 - weights.sum())
    for level in (0.95, 0.5, 0.1, 0.01):
        share = float(np.mean(drawn > cramer_von_mises_critical_value(level, degrees)))
        assert abs(share - level) < 4.0 * np.sqrt(level * (1.0 - level) / draws)


@pytest.mark.parametrize("degrees", [1, 2, 3, 11, 51, 364])
@pytest.mark.parametrize("level", [0.999, 0.9, 0.5, 0.23, 0.05, 1e-3, 1e-6, 1e-8, 1e-12])
def test_two_ways_agree_from_one_tail_to_the_other(degrees: int, level: float) -> None:
    x = cramer_von_mises_critical_value(level, degrees)
    # Leaving out weights changes the variance a little; 2000 of them leave 1e-7 of p at most in the far tail.
    general = weighted_chi_squares_p_value(x - degrees * LEFT_OUT, BRIDGE, np.full(2000, float(degrees)))
    assert general == pytest.approx(level, rel=1e-6)


@pytest.mark.parametrize("degrees", [1.0, 2.0, 7.0, 100.0])
@pytest.mark.parametrize("level", [0.9999, 0.5, 1e-3, 1e-9, 1e-30])
def test_equal_weights_are_one_chi_square(degrees: float, level: float) -> None:
    x = float(chi2.isf(level, degrees))
    one, half = np.array([1.0]), np.array([degrees / 2.0, degrees / 2.0])
    assert weighted_chi_squares_p_value(x, one, np.array([degrees])) == pytest.approx(level, rel=1e-10)
    assert weighted_chi_squares_p_value(3e-6 * x, np.array([3e-6, 3e-6]), half) == pytest.approx(level, rel=1e-10)


@pytest.mark.parametrize("x", [0.3, 2.0, 9.0, 40.0, 200.0])
def test_unequal_weights_have_their_closed_form(x: float) -> None:
    # Pairs of chi-squares are exponentials: P = sum over k of exp(-x / 2 w_k) / prod over j of (1 - w_j / w_k).
    weights = np.array([5.0, 2.0, 0.5])
    expected = sum(
        np.exp(-x / (2.0 * w)) / np.prod([1.0 - other / w for other in weights if other != w]) for w in weights
    )
    assert weighted_chi_squares_p_value(x, weights, np.full(3, 2.0)) == pytest.approx(expected, rel=1e-9)


@pytest.mark.parametrize("degrees", [1, 2, 11, 364])
def test_p_value_falls_and_stays_a_probability(degrees: int) -> None:
    x = degrees * np.concatenate([[-1.0, 0.0], np.geomspace(1e-6, 10.0, 1500)])
    p = np.array([cramer_von_mises_p_value(float(v), degrees) for v in x])
    assert p[0] == p[1] == 1.0
    assert (np.diff(p) <= 1e-12).all()
    assert (p >= 0.0).all()


def test_what_has_no_tail_is_refused() -> None:
    with pytest.raises(ValueError, match="degree"):
        cramer_von_mises_p_value(1.0, 0)
    with pytest.raises(ValueError, match="statistic"):
        cramer_von_mises_p_value(float("nan"), 2)
    for weights in ([], [0.0, 1.0], [-1.0], [np.inf]):
        with pytest.raises(ValueError, match="weights"):
            weighted_chi_squares_p_value(1.0, np.array(weights))
    with pytest.raises(ValueError, match="multiplicities"):
        weighted_chi_squares_p_value(1.0, np.array([1.0]), np.array([0.0]))


def test_a_p_value_takes_less_than_a_millisecond() -> None:
    taken = []
    for x in np.linspace(0.3, 3.0, 40):
        start = time.perf_counter()
        cramer_von_mises_p_value(float(x), 11)
        taken.append(time.perf_counter() - start)
    assert float(np.median(taken)) < 1e-3
