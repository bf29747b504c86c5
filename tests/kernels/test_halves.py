import numpy as np
import pytest
from scipy.signal import lfilter

from preflight_magic.kernels.halves import compare_halves


def ar1(phi: float, n: int, rng: np.random.Generator) -> np.ndarray:
    return np.asarray(lfilter([1.0], [1.0, -phi], rng.normal(size=n + 100))[100:])


def z_of(values: np.ndarray, lags: tuple[int, ...] = (1,), fitted: int = 0) -> dict[str, float]:
    found = compare_halves(values, lags, fitted)
    assert found is not None
    return {one.name: one.z for one in found}


@pytest.mark.parametrize("phi", [0.0, 0.5, -0.5])
def test_z_values_are_about_standard_normal_in_a_stationary_series(phi: float) -> None:
    rng = np.random.default_rng(3)
    found = np.array([list(z_of(ar1(phi, 400, rng)).values()) for _ in range(200)])
    beyond = (np.abs(found) > 1.96).mean(axis=0)
    assert (beyond < 0.11).all()
    assert beyond.mean() > 0.02


def test_each_moment_sees_its_own_change() -> None:
    rng = np.random.default_rng(4)
    late = np.arange(300) >= 150
    noise = rng.normal(size=300)
    shifted = z_of(noise + late)
    assert shifted["mean"] > 4
    # deviations are from the mean of each half, so a shift is told once
    assert abs(shifted["variance"]) < 3
    assert z_of(noise * (1.0 + late))["variance"] > 4
    changed = np.where(late, ar1(0.8, 300, rng) * 0.6, noise)
    assert z_of(changed)["autocovariance at lag 1"] > 3


def test_moments_are_those_of_the_halves() -> None:
    values = np.random.default_rng(5).normal(size=61)
    found = compare_halves(values, (2, 50))
    assert found is not None
    mean, variance, lagged = found
    first, second = values[:30], values[30:]
    assert (mean.first, mean.second) == (pytest.approx(first.mean()), pytest.approx(second.mean()))
    assert (variance.first, variance.second) == (pytest.approx(first.var()), pytest.approx(second.var()))
    centred = second - second.mean()
    assert lagged.second == pytest.approx((centred[2:] * centred[:-2]).mean())
    assert lagged.name == "autocovariance at lag 2"


def test_the_unit_does_not_matter() -> None:
    values = np.random.default_rng(6).normal(size=100)
    one, two = z_of(values), z_of(1e8 * values + 1e9)
    for name, z in one.items():
        assert two[name] == pytest.approx(z, rel=1e-5)


def test_degenerate_series_are_not_compared() -> None:
    assert compare_halves(np.ones(50)) is None
    assert compare_halves(np.arange(15.0)) is None
    spike = np.zeros(40)
    spike[3] = 1.0
    found = compare_halves(spike)
    assert found is not None


@pytest.mark.parametrize("phi", [0.0, 0.5, 0.8, -0.5])
@pytest.mark.parametrize("n", [48, 96])
def test_in_short_series_all_moments_together_err_as_rarely_as_they_say(phi: float, n: int) -> None:
    rng = np.random.default_rng([n, 9])
    # Four moments at 5 % together: 2.50 each.
    largest = [max(abs(z) for z in z_of(ar1(phi, n, rng), (1, 2)).values()) for _ in range(200)]
    assert np.mean(np.array(largest) > 2.50) < 0.09


def test_a_pattern_taken_out_before_is_counted() -> None:
    rng = np.random.default_rng(10)
    wide, counted = [], []
    for _ in range(300):
        values = rng.normal(size=(4, 12))
        left = (values - values.mean(axis=0)).ravel()
        wide.append(z_of(left)["mean"])
        counted.append(z_of(left, fitted=11)["mean"])
    assert np.mean(np.abs(counted) > 1.96) < 0.09
    assert np.std(wide) > 1.1 * np.std(counted)
