import numpy as np
import pytest

from preflight_magic.kernels.box_cox import HIGHEST, LOWEST, box_cox
from preflight_magic.kernels.power_transform import log_gain


def powered(exponent: float, n: int = 240, seed: int = 1, noise: float = 0.1) -> np.ndarray:
    """A monthly series that is an AR(1) about line and pattern after this Box-Cox power."""
    rng = np.random.default_rng(seed)
    errors = np.zeros(n)
    for t in range(1, n):
        errors[t] = 0.6 * errors[t - 1] + noise * rng.standard_normal()
    time = np.arange(n)
    z = 1.5 + 1.2 * time / n + 0.4 * np.sin(time * np.pi / 6.0) + errors
    return np.exp(z) if exponent == 0.0 else (1.0 + exponent * z) ** (1.0 / exponent)


@pytest.mark.parametrize("exponent", [0.0, 0.5, 1.0])
@pytest.mark.parametrize("period", [1, 12])
def test_the_gain_of_the_log_is_the_same(exponent: float, period: int) -> None:
    y = powered(exponent)
    found = box_cox(y, period)
    assert found is not None
    # The regression at the exponents 1 and 0; both searches stop a little before the very least.
    assert found.fall_from_one - found.fall_from_zero == pytest.approx(log_gain(y, period), abs=0.02)


@pytest.mark.parametrize("exponent", [-0.2, 0.0, 0.33, 1.0])
def test_the_interval_covers_the_exponent(exponent: float) -> None:
    inside, estimates = 0, []
    for seed in range(40):
        found = box_cox(powered(exponent, seed=seed), 12)
        assert found is not None
        assert found.lower <= found.exponent <= found.upper
        inside += found.lower <= exponent <= found.upper
        estimates.append(found.exponent)
    assert inside >= 33  # 38 expected; fewer than 33 has a probability of 0.003
    assert np.mean(estimates) == pytest.approx(exponent, abs=0.15)


def test_the_estimate_is_the_lowest_on_a_fine_grid() -> None:
    y = powered(0.4)
    found = box_cox(y, 12)
    assert found is not None
    # A power of a power: the gain of the log over y**p is the likelihood at p beside that at the log, in any unit.
    grid = np.round(np.arange(-0.6, 1.4, 0.02), 2)
    grid = grid[grid != 0.0]
    heights = np.array([log_gain(y**power, 12) for power in grid])
    inside = grid[heights < heights.min() + 3.8415]  # chi-squared of one degree of freedom, 5 %
    assert found.exponent == pytest.approx(grid[int(np.argmin(heights))], abs=0.021)
    assert found.lower == pytest.approx(inside[0], abs=0.025)
    assert found.upper == pytest.approx(inside[-1], abs=0.025)
    assert found.fall_from_zero == pytest.approx(-heights.min(), abs=0.05)
    assert found.nobs == y.size - 13


def test_an_outlier_does_not_decide() -> None:
    y = powered(0.0)
    clean = box_cox(y, 12)
    y[100] *= 3.0
    spoilt = box_cox(y, 12)
    assert clean is not None
    assert spoilt is not None
    assert spoilt.exponent == pytest.approx(clean.exponent, abs=0.15)


def test_wider_coverage_is_a_wider_interval() -> None:
    y = powered(0.5)
    narrow, wide = box_cox(y, 12, 0.5), box_cox(y, 12, 0.99)
    assert narrow is not None
    assert wide is not None
    assert wide.lower < narrow.lower < narrow.exponent < narrow.upper < wide.upper


def test_a_flat_likelihood_ends_at_the_search() -> None:
    found = box_cox(1000.0 + np.random.default_rng(1).standard_normal(60), 1)  # hardly varies beside its level
    assert found is not None
    assert (found.lower, found.upper) == (LOWEST, HIGHEST)


@pytest.mark.parametrize("scale", [1e-6, 1e6])
def test_the_unit_is_not_seen(scale: float) -> None:
    y = powered(0.5)
    plain, scaled = box_cox(y, 12), box_cox(scale * y, 12)
    assert plain is not None
    assert scaled is not None
    assert scaled.exponent == pytest.approx(plain.exponent, abs=1e-6)
    assert scaled.lower == pytest.approx(plain.lower, abs=1e-6)


def test_gaps_are_skipped() -> None:
    y = powered(0.5)
    y[[30, 31, 90]] = np.nan
    found = box_cox(y, 12)
    assert found is not None
    assert found.lower < 0.5 < found.upper


def test_what_cannot_carry_the_estimate_is_none() -> None:
    y = powered(0.5)
    assert box_cox(np.where(np.arange(240) == 9, 0.0, y), 12) is None
    assert box_cox(y - 100.0, 12) is None
    assert box_cox(y[:20], 12) is None
    assert box_cox(np.full(60, 3.0), 1) is None
    assert box_cox(np.full(60, np.nan), 1) is None
    assert box_cox(np.array([]), 1) is None
    with pytest.raises(ValueError, match="coverage"):
        box_cox(y, 12, 1.0)
