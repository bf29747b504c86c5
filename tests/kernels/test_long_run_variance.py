import numpy as np
import pytest
from scipy.integrate import quad
from scipy.signal import lfilter

from preflight_magic.kernels.lag_weights import bartlett, parzen, quadratic_spectral
from preflight_magic.kernels.long_run_variance import (
    andrews_bandwidth,
    autocovariances,
    long_run_variance,
    newey_west_bandwidth,
    weighted_sum,
)

KERNELS = ("bartlett", "parzen", "quadratic spectral")


def ar1(rho: float, n: int, seed: int = 5) -> np.ndarray:
    noise = np.random.default_rng(seed).standard_normal(n + 200)
    return lfilter([1.0], [1.0, -rho], noise)[200:]


def test_kernels_have_their_published_shapes() -> None:
    x = np.array([0.0, 0.25, 0.5, 0.75, 1.0, 1.5])
    np.testing.assert_allclose(bartlett(x), [1.0, 0.75, 0.5, 0.25, 0.0, 0.0])
    # 1 - 6 / 16 + 6 / 64, then 2 / 4**3: Andrews (1991), Econometrica 59, equation 2.7
    np.testing.assert_allclose(parzen(x), [1.0, 0.71875, 0.25, 0.03125, 0.0, 0.0])
    # its square integrates to 1: Andrews (1991), Econometrica 59, table I scales the kernels so
    assert quad(lambda v: float(quadratic_spectral(np.array([v]))[0]) ** 2, 0.0, 60.0, limit=500)[0] == pytest.approx(
        0.5, abs=1e-4
    )
    edge = quadratic_spectral(np.array([0.0, 0.000999999, 0.001, 0.001000001]))
    assert edge[0] == 1.0
    np.testing.assert_allclose(edge[1:], 1.0 - (1.2 * np.pi * 1e-3) ** 2 / 10.0, rtol=1e-8)


@pytest.mark.parametrize("lags", [0, 3, 64, 65, 199])
def test_autocovariances_are_plain_sums(lags: int) -> None:
    u = ar1(0.4, 200)
    expected = [float(np.sum(u[j:] * u[: 200 - j])) / 200 for j in range(lags + 1)]
    np.testing.assert_allclose(autocovariances(u, lags), expected, atol=1e-13)


@pytest.mark.parametrize(
    ("kernel", "referee"), [("bartlett", "Bartlett"), ("parzen", "Parzen"), ("quadratic spectral", "QuadraticSpectral")]
)
@pytest.mark.parametrize("bandwidth", [0.0, 0.4, 3.0, 7.6, 12.0])
def test_estimates_agree_with_arch(kernel: str, referee: str, bandwidth: float) -> None:
    covariance = pytest.importorskip("arch.covariance.kernel")
    u = ar1(0.6, 180)
    expected = getattr(covariance, referee)(u, bandwidth=bandwidth).cov.long_run
    found = long_run_variance(u, kernel=kernel, bandwidth=bandwidth)
    assert found is not None
    assert found.value == pytest.approx(float(np.squeeze(expected)), rel=1e-9)
    assert (found.bandwidth, found.kernel, found.prewhitening) == (bandwidth, kernel, 0.0)


@pytest.mark.parametrize("kernel", KERNELS)
def test_newey_west_bandwidth_agrees_with_arch(kernel: str) -> None:
    covariance = pytest.importorskip("arch.covariance.kernel")
    u = ar1(0.6, 180)
    u -= u.mean()
    name = {"bartlett": "Bartlett", "parzen": "Parzen", "quadratic spectral": "QuadraticSpectral"}[kernel]
    rate = {"bartlett": 2 / 9, "parzen": 4 / 25, "quadratic spectral": 2 / 25}[kernel]
    # arch rounds the number of autocovariances up where the paper rounds down, and leaves the result unrounded
    expected = getattr(covariance, name)(u).opt_bandwidth
    found = newey_west_bandwidth(u, kernel, pilot=int(np.ceil(4.0 * (180 / 100) ** rate)))
    assert found == pytest.approx(expected if kernel == "quadratic spectral" else int(expected), rel=1e-9)


def test_andrews_bandwidth_is_that_of_the_estimated_ar1() -> None:
    u = ar1(0.5, 400)
    u -= u.mean()
    rho = float(np.sum(u[1:] * u[:-1]) / np.sum(u[:-1] ** 2))
    # Andrews (1991), Econometrica 59, equations 6.2 and 6.4 with one series
    one = 4 * rho**2 / ((1 - rho) ** 2 * (1 + rho) ** 2)
    two = 4 * rho**2 / (1 - rho) ** 4
    assert andrews_bandwidth(u, "bartlett") == pytest.approx(1.1447 * (one * 400) ** (1 / 3) - 1.0)
    assert andrews_bandwidth(u, "parzen") == pytest.approx(2.6614 * (two * 400) ** (1 / 5) - 1.0)
    assert andrews_bandwidth(u, "quadratic spectral") == pytest.approx(1.3221 * (two * 400) ** (1 / 5))


@pytest.mark.parametrize("kernel", KERNELS)
@pytest.mark.parametrize("rule", ["andrews", "newey-west"])
@pytest.mark.parametrize("prewhiten", [False, True])
def test_long_run_variance_of_an_ar1_is_found(kernel: str, rule: str, prewhiten: bool) -> None:
    found = long_run_variance(ar1(0.5, 20_000), kernel=kernel, bandwidth=rule, prewhiten=prewhiten)
    assert found is not None
    assert found.value == pytest.approx(4.0, rel=0.15)  # 1 / (1 - 0.5)**2
    assert (found.prewhitening == pytest.approx(0.5, abs=0.05)) is prewhiten


@pytest.mark.parametrize("kernel", KERNELS)
@pytest.mark.parametrize("rule", ["andrews", "newey-west"])
@pytest.mark.parametrize("scale", [1e-9, 1e-6, 1e6])
def test_unit_and_origin_change_nothing_but_the_unit(kernel: str, rule: str, scale: float) -> None:
    u = ar1(0.7, 150)
    plain = long_run_variance(u, kernel=kernel, bandwidth=rule, prewhiten=True)
    other = long_run_variance(scale * (u + 50.0), kernel=kernel, bandwidth=rule, prewhiten=True)
    assert plain is not None
    assert other is not None
    assert other.value / scale**2 == pytest.approx(plain.value, rel=1e-9)
    assert other.bandwidth == pytest.approx(plain.bandwidth, rel=1e-9)


def test_prewhitening_coefficient_is_bounded() -> None:
    found = long_run_variance(np.cumsum(np.ones(300)) ** 1.5, prewhiten=True)
    assert found is not None
    assert found.prewhitening == 0.97  # Andrews and Monahan (1992), Econometrica 60, from memory


@pytest.mark.parametrize("kernel", KERNELS)
def test_estimate_is_never_negative(kernel: str) -> None:
    alternating = np.resize([1.0, -1.0], 61)
    assert weighted_sum(alternating - alternating.mean(), kernel, 20.0) >= 0.0


def test_series_that_cannot_be_used() -> None:
    assert long_run_variance(np.full(50, 3.7)) is None
    assert long_run_variance(np.array([1.0, 2.0])) is None
    with pytest.raises(ValueError, match="finite"):
        long_run_variance(np.array([1.0, np.nan, 2.0, 3.0]))
    with pytest.raises(ValueError, match="negative"):
        long_run_variance(ar1(0.2, 50), bandwidth=-1.0)


@pytest.mark.parametrize("terms", [1, 2])
def test_fitted_terms_are_allowed_for(terms: int) -> None:
    """In short series the plain estimate is too small by fitted terms; the other comes close on average."""
    n, rng = 40, np.random.default_rng(8)
    basis = np.linalg.qr(np.vander(np.linspace(-1.0, 1.0, n), terms))[0]
    plain, allowed, coefficients = [], [], []
    for _ in range(1500):
        u = lfilter([1.0], [1.0, -0.4], rng.standard_normal(n + 50))[50:]
        u = u - basis @ (basis.T @ u)
        one = long_run_variance(u, kernel="quadratic spectral", prewhiten=True)
        other = long_run_variance(u, kernel="quadratic spectral", prewhiten=True, fitted=terms)
        assert one is not None
        assert other is not None
        plain.append(one.value)
        allowed.append(other.value)
        coefficients.append((one.prewhitening, other.prewhitening))
    truth = 1.0 / (1.0 - 0.4) ** 2
    assert abs(np.log(np.median(allowed) / truth)) < 0.1
    assert np.median(plain) < np.median(allowed)
    first, second = np.mean(coefficients, axis=0)
    # Kendall (1954) and Marriott and Pope (1954), Biometrika 41, to order 1 / n
    assert first == pytest.approx(0.4 - (terms + (terms + 2) * 0.4) / n, abs=0.015)
    assert second == pytest.approx(0.4, abs=0.02)
