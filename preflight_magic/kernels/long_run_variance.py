"""Long-run variance: kernel estimates, their automatic bandwidths, and AR(1) prewhitening.

One convention of bandwidth b throughout: autocovariance j has the weight ``k(j / (b + 1))`` with the Bartlett and
Parzen kernels, so that an integer b is the last lag used, and ``k(j / b)`` with the quadratic spectral kernel.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Literal

import numpy as np

from preflight_magic.kernels.lag_weights import bartlett, parzen, quadratic_spectral
from preflight_magic.kernels.least_squares import FloatArray
from preflight_magic.kernels.scaling import does_not_vary

Kernel = Literal["bartlett", "parzen", "quadratic spectral"]
Rule = Literal["andrews", "newey-west"]

_PREWHITENING_LIMIT = 0.97  # Andrews and Monahan (1992), from memory: keeps 1 / (1 - rho)**2 bounded


@dataclass(frozen=True)
class LongRunVariance:
    """A long-run variance and how it was estimated.

    Attributes
    ----------
    value : float
        In the squared unit of the series.
    bandwidth : float
    kernel : {"bartlett", "parzen", "quadratic spectral"}
    prewhitening : float
        AR(1) coefficient taken out before and put back after; 0 for none.
    """

    value: float
    bandwidth: float
    kernel: Kernel
    prewhitening: float = 0.0


@dataclass(frozen=True)
class _Shape:
    """Characteristic exponent q, optimal constant and pilot rate of a kernel: Newey and West (1994), tables I, II."""

    weight: Callable[[FloatArray], FloatArray]
    exponent: int
    constant: float
    pilot_rate: float
    by_lag: bool


_SHAPES: dict[Kernel, _Shape] = {
    "bartlett": _Shape(bartlett, 1, 1.1447, 2.0 / 9.0, True),
    "parzen": _Shape(parzen, 2, 2.6614, 4.0 / 25.0, True),
    "quadratic spectral": _Shape(quadratic_spectral, 2, 1.3221, 2.0 / 25.0, False),
}


def autocovariances(u: FloatArray, lags: int) -> FloatArray:
    """Raw autocovariances ``sum(u[t] u[t - j]) / n``, nothing subtracted.

    Parameters
    ----------
    u : ndarray, shape (n,)
    lags : int
        Below n.

    Returns
    -------
    ndarray, shape (lags + 1,)
    """
    n = u.size
    if lags > 64:  # a Fourier transform is cheaper from about here
        size = 1 << (n + lags).bit_length()
        spectrum = np.fft.rfft(u, size)
        found: FloatArray = np.fft.irfft(spectrum.real**2 + spectrum.imag**2, size)[: lags + 1] / n
        return found
    return np.array([u[j:] @ u[: n - j] for j in range(lags + 1)]) / n


def andrews_bandwidth(u: FloatArray, kernel: Kernel = "bartlett") -> float:
    """Bandwidth that minimises the asymptotic mean squared error if the series were an AR(1).

    Parameters
    ----------
    u : ndarray, shape (n,)
        With mean zero.
    kernel : {"bartlett", "parzen", "quadratic spectral"}

    Returns
    -------
    float
        In steps; does not depend on the unit of `u`.

    References
    ----------
    Andrews (1991), Econometrica 59, equations 6.2 and 6.4.
    """
    shape = _SHAPES[kernel]
    rho = _first_order(u)
    if shape.exponent == 1:
        alpha = 4.0 * rho**2 / ((1.0 - rho) ** 2 * (1.0 + rho) ** 2)
    else:
        alpha = 4.0 * rho**2 / (1.0 - rho) ** 4
    width = float(shape.constant * (alpha * u.size) ** (1.0 / (2 * shape.exponent + 1)))
    return min(max(width - 1.0, 0.0) if shape.by_lag else width, u.size - 1.0)


def newey_west_bandwidth(u: FloatArray, kernel: Kernel = "bartlett", pilot: int | None = None) -> float:
    """Bandwidth from the curvature of the spectrum at zero, estimated with a few autocovariances.

    Parameters
    ----------
    u : ndarray, shape (n,)
        With mean zero.
    kernel : {"bartlett", "parzen", "quadratic spectral"}
    pilot : int, optional
        Autocovariances used; by default 4 times a power of n / 100, as the authors suggest.

    Returns
    -------
    float
        In steps, a whole number for the Bartlett and Parzen kernels; does not depend on the unit of `u`.

    References
    ----------
    Newey and West (1994), Review of Economic Studies 61, table II.
    """
    shape, n = _SHAPES[kernel], u.size
    if pilot is None:
        pilot = int(4.0 * (n / 100.0) ** shape.pilot_rate)
    pilot = min(pilot, n - 1)
    sigma = autocovariances(u, pilot)
    order = np.arange(pilot + 1, dtype=np.float64)
    at_zero = float(sigma[0] + 2.0 * sigma[1:].sum())
    curvature = float(2.0 * (order**shape.exponent @ sigma))
    # The unweighted sum at zero may be anything, even zero: then the bandwidth is as long as it can be.
    power = 1.0 / (2 * shape.exponent + 1)
    width = shape.constant * ((curvature / at_zero) ** 2) ** power * n**power if at_zero else float(n)
    width = min(width, n - 1.0)
    return float(int(width)) if shape.by_lag else width


def long_run_variance(
    u: FloatArray,
    *,
    kernel: Kernel = "bartlett",
    bandwidth: float | Rule = "andrews",
    prewhiten: bool = False,
    fitted: int | None = None,
) -> LongRunVariance | None:
    """Kernel estimate of the long-run variance, the sum of all autocovariances.

    Parameters
    ----------
    u : ndarray, shape (n,)
        No missing values. Its mean is subtracted.
    kernel : {"bartlett", "parzen", "quadratic spectral"}
    bandwidth : float or {"andrews", "newey-west"}
        In steps, or the rule that finds it.
    prewhiten : bool
        Estimate on the residuals of an AR(1) and recolour (Andrews and Monahan 1992, Econometrica 60).
    fitted : int, optional
        Where `u` are residuals from a constant (1) or from constant and line (2): the estimate then allows for them in
        a short series, by degrees of freedom and, with `prewhiten`, by the bias of the AR(1) coefficient.

    Returns
    -------
    LongRunVariance or None
        None where the series has fewer than 3 values or does not vary.

    Raises
    ------
    ValueError
        For missing or infinite values or a negative bandwidth.

    References
    ----------
    Bias of the coefficient, ``-(k + (k + 2) rho) / n`` with k terms: Marriott and Pope (1954), Biometrika 41, and
    Kendall (1954), Biometrika 41, for a constant; for a line from memory, confirmed by simulation in the tests.
    """
    if not np.isfinite(u).all():
        raise ValueError("a long-run variance needs finite values")
    if u.size < 3 or does_not_vary(u):
        return None
    residual: FloatArray = u - u.mean()
    rho = 0.0
    if prewhiten:
        rho = _first_order(residual)
        if fitted is not None:
            rho += (fitted + (fitted + 2) * rho) / u.size
        rho = float(np.clip(rho, -_PREWHITENING_LIMIT, _PREWHITENING_LIMIT))
        residual = residual[1:] - rho * residual[:-1]
        if does_not_vary(residual):
            return None
    if bandwidth == "andrews":
        width = andrews_bandwidth(residual, kernel)
    elif bandwidth == "newey-west":
        width = newey_west_bandwidth(residual, kernel)
    else:
        width = float(bandwidth)
        if width < 0:
            raise ValueError(f"the bandwidth is {width:g}; it must not be negative")
    freedom = 1.0 if fitted is None else residual.size / max(residual.size - fitted, 1)
    return LongRunVariance(weighted_sum(residual, kernel, width) * freedom / (1.0 - rho) ** 2, width, kernel, rho)


def weighted_sum(u: FloatArray, kernel: Kernel, bandwidth: float) -> float:
    """Kernel-weighted sum of the autocovariances on both sides of zero.

    Parameters
    ----------
    u : ndarray, shape (n,)
        With mean zero.
    kernel : {"bartlett", "parzen", "quadratic spectral"}
    bandwidth : float
        In steps.

    Returns
    -------
    float
        Never negative: all three kernels are positive semi-definite.
    """
    shape = _SHAPES[kernel]
    if shape.by_lag:
        lags, width = min(int(bandwidth), u.size - 1), bandwidth + 1.0
    else:
        lags, width = (u.size - 1, bandwidth) if bandwidth > 0 else (0, 1.0)
    sigma = autocovariances(u, lags)
    return max(float(sigma[0] + 2.0 * (shape.weight(np.arange(1, lags + 1) / width) @ sigma[1:])), 0.0)


def _first_order(u: FloatArray) -> float:
    """AR(1) coefficient by least squares without a constant, kept off the unit root."""
    return float(np.clip(u[1:] @ u[:-1] / (u[:-1] @ u[:-1]), -0.999, 0.999))
