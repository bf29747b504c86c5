import numpy as np
import pytest
from scipy.signal import lfilter

from preflight_magic.kernels.largest_root import largest_root
from preflight_magic.kernels.persistence import half_life


def autoregression(*coefficients: float, n: int = 120, seed: int = 0) -> np.ndarray:
    noise = np.random.default_rng(seed).standard_normal(n)
    return lfilter([1.0], [1.0, *(-one for one in coefficients)], noise)


def test_half_life_of_a_first_order_autoregression() -> None:
    # 0.8**3 = 0.512 and 0.8**4 = 0.4096: the straight line between them meets one half at 3 + 0.012 / 0.1024.
    assert half_life(np.array([0.8])) == pytest.approx(3.0 + 0.012 / 0.1024)
    assert half_life(np.array([0.5**0.1])) == pytest.approx(10.0, abs=1e-9)
    assert half_life(np.array([])) == pytest.approx(0.5)
    assert half_life(np.array([1.0])) == np.inf
    assert half_life(np.array([1.2, -0.2])) == np.inf
    assert half_life(np.array([1.1])) == np.inf


def test_half_life_waits_for_the_last_return() -> None:
    # Only every fourth value responds: 0.9, 0.81, ..., 0.9**6 = 0.531 at step 24, and nothing at step 25.
    assert half_life(np.array([0.0, 0.0, 0.0, 0.9])) == pytest.approx(24.0 + (0.9**6 - 0.5) / 0.9**6)


def test_estimate_is_least_squares() -> None:
    y = autoregression(0.9, -0.3, 0.1)
    found = largest_root(y, "c", lags=2, replications=99)
    assert found is not None
    x = np.column_stack([np.ones(117), y[2:-1], y[1:-2], y[:-3]])
    beta = np.linalg.lstsq(x, y[3:], rcond=None)[0]
    assert found.least_squares.coefficient_sum == pytest.approx(beta[1:].sum(), rel=1e-10)
    # The autoregression with that sum is the unrestricted one.
    moduli = np.abs(np.roots([1.0, *(-one for one in beta[1:])]))
    assert found.least_squares.root == pytest.approx(moduli.max(), rel=1e-8)
    assert found.least_squares.half_life == pytest.approx(half_life(beta[1:]), rel=1e-6)
    assert (found.lags, found.nobs, found.terms, found.replications, found.seed) == (2, 117, "c", 99, 0)


def test_parts_stand_in_order_and_the_bias_is_taken_off() -> None:
    found = largest_root(autoregression(0.95, n=100, seed=3), "ct", lags=1)
    assert found is not None
    assert found.lower.coefficient_sum < found.median_unbiased.coefficient_sum < found.upper.coefficient_sum
    assert found.median_unbiased.coefficient_sum > found.least_squares.coefficient_sum
    assert found.lower.half_life < found.median_unbiased.half_life <= found.upper.half_life


def test_wider_coverage_gives_a_wider_interval() -> None:
    y = autoregression(0.8, seed=5)
    narrow, wide = (largest_root(y, "c", coverage=level, lags=0) for level in (0.5, 0.95))
    assert narrow is not None
    assert wide is not None
    assert wide.lower.coefficient_sum < narrow.lower.coefficient_sum
    assert wide.upper.coefficient_sum > narrow.upper.coefficient_sum
    assert wide.median_unbiased == narrow.median_unbiased


def test_far_from_one_it_is_the_usual_interval() -> None:
    # Estimate -+ 1.645 standard errors, sqrt((1 - rho**2) / n): the textbook interval of a stationary AR(1).
    y = autoregression(0.3, n=1000, seed=2)
    found = largest_root(y, "c", lags=0)
    assert found is not None
    error = np.sqrt((1.0 - 0.3**2) / 1000)
    assert found.lower.coefficient_sum == pytest.approx(found.least_squares.coefficient_sum - 1.645 * error, abs=0.007)
    assert found.upper.coefficient_sum == pytest.approx(found.least_squares.coefficient_sum + 1.645 * error, abs=0.007)


@pytest.mark.parametrize("terms", ["c", "ct"])
@pytest.mark.parametrize(("scale", "constant"), [(1e-6, 0.0), (1e6, 0.0), (1.0, 1e4)])
def test_sees_neither_unit_nor_origin(terms: str, scale: float, constant: float) -> None:
    y = autoregression(0.9, -0.2, seed=1)
    plain, other = (largest_root(x, terms, replications=199) for x in (y, scale * y + constant))
    assert plain is not None
    assert other is not None
    assert other.lags == plain.lags
    for part in ("lower", "median_unbiased", "upper"):
        assert getattr(other, part).coefficient_sum == pytest.approx(getattr(plain, part).coefficient_sum, rel=1e-6)


def test_seed_decides() -> None:
    y = autoregression(0.9, seed=8)
    assert largest_root(y, replications=199, seed=4) == largest_root(y, replications=199, seed=4)
    assert largest_root(y, replications=199, seed=4) != largest_root(y, replications=199, seed=5)


def test_refuses_what_cannot_carry_it() -> None:
    assert largest_root(np.full(50, 2.5)) is None
    assert largest_root(np.array([1.0, 3.0, 2.0])) is None
    assert largest_root(0.1 * np.arange(60.0)) is None
    assert largest_root(autoregression(0.5, n=20), lags=9) is None
    y = autoregression(0.5)
    with pytest.raises(ValueError, match="finite"):
        largest_root(np.array([1.0, np.nan, 2.0, 3.0, 1.0, 4.0]))
    with pytest.raises(ValueError, match="terms"):
        largest_root(y, "n")  # type: ignore[arg-type]
    with pytest.raises(ValueError, match="coverage"):
        largest_root(y, coverage=95)
    with pytest.raises(ValueError, match="replications"):
        largest_root(y, replications=20)
    with pytest.raises(ValueError, match="negative"):
        largest_root(y, lags=-1)


@pytest.mark.simulation
@pytest.mark.parametrize(("rho", "terms"), [(1.0, "c"), (0.95, "c"), (0.6, "c"), (1.0, "ct"), (0.95, "ct")])
def test_interval_covers_as_often_as_it_says(rho: float, terms: str) -> None:
    # 400 series of 80 values: a share of 0.90 has the standard error 0.015. The usual interval, estimate and 1.645
    # standard errors, covers a unit root with a line in less than half of them.
    covered, usual = 0, 0
    for seed in range(400):
        y = autoregression(rho, n=80, seed=seed)
        found = largest_root(y, terms, lags=0, replications=199, seed=seed)
        assert found is not None
        covered += found.lower.coefficient_sum <= rho <= found.upper.coefficient_sum
        usual += rho <= found.least_squares.coefficient_sum + 1.645 * np.sqrt((1.0 - min(rho, 0.99) ** 2) / 80)
    assert covered / 400 == pytest.approx(0.90, abs=0.045)
    if rho == 1.0 and terms == "ct":
        assert usual / 400 < 0.5
