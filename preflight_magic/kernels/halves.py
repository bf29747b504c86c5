"""Mean, variance and autocovariances of the two halves of a series, compared by long-run variances."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from scipy.special import ndtri, stdtr

from preflight_magic.kernels.least_squares import FloatArray
from preflight_magic.kernels.long_run_variance import long_run_variance
from preflight_magic.kernels.scaling import does_not_vary


@dataclass(frozen=True)
class Moment:
    """One moment in both halves.

    Attributes
    ----------
    name : str
        ``mean``, ``variance`` or ``autocovariance at lag k``.
    first, second : float
        In the unit of the series, squared for all but the mean.
    z : float
        Difference over its standard error from long-run variances, stretched as Student's t asks: about standard
        normal where the moment is the same in both halves. NaN where it cannot be computed.
    """

    name: str
    first: float
    second: float
    z: float

    def __str__(self) -> str:
        return f"{self.name} {self.first:.3g} and {self.second:.3g} (z {self.z:.1f})"


def compare_halves(values: FloatArray, lags: tuple[int, ...] = (1,), fitted: int = 0) -> tuple[Moment, ...] | None:
    """Compare the moments of the first and the second half.

    Parameters
    ----------
    values : ndarray, shape (n,)
        No NaN.
    lags : tuple of int
        Lags of the autocovariances; those beyond a quarter of a half are left out.
    fitted : int
        Columns taken out of the series by least squares before, which make it vary less.

    Returns
    -------
    tuple of Moment or None
        None with fewer than 16 values or where nothing varies.

    Notes
    -----
    Each moment is the mean of a series: the values, or products of deviations from the mean of their own half, so that
    a shift of the mean is told once. The variance of a mean is the long-run variance over the number of terms; it is
    estimated on both halves together, each less its mean, with the quadratic spectral kernel, the bandwidth of Andrews
    (1991) and AR(1) prewhitening (Andrews and Monahan 1992, Econometrica 60, 953-966), since a kernel alone makes it
    too small in short series. That variance is an estimate with few degrees of freedom: ``n / b`` for a quadratic
    spectral kernel of bandwidth b (Lazarus, Lewis, Stock and Watson 2018, HAR inference: recommendations for practice,
    Journal of Business and Economic Statistics 36, 541-559), and less for the AR(1) coefficient rho, which moves it as
    ``(1 - rho)**-2``: its logarithm has the variance ``4 (1 + rho) / (1 - rho) / n`` from that alone, by the delta
    method. So the ratio is taken as Student's t, and the z-value is the normal one of the same probability.
    """
    series = np.asarray(values, dtype=np.float64)
    n = series.size
    if n < 16 or does_not_vary(series):
        return None
    # Scaled, since products of products would overflow for very large values.
    scale = float(np.abs(series).max())
    halves = series[: n // 2] / scale, series[n // 2 :] / scale
    room = n / max(n - 2 - fitted, 2)
    found = [_moment("mean", halves[0], halves[1], scale, room)]
    parts = halves[0] - halves[0].mean(), halves[1] - halves[1].mean()
    found.append(_moment("variance", parts[0] ** 2, parts[1] ** 2, scale**2, room))
    for lag in lags:
        if 0 < lag <= n // 8:
            products = [part[lag:] * part[:-lag] for part in parts]
            found.append(_moment(f"autocovariance at lag {lag}", products[0], products[1], scale**2, room))
    return tuple(found)


def _moment(name: str, first: FloatArray, second: FloatArray, unit: float, room: float) -> Moment:
    gap = float(second.mean() - first.mean())
    pooled = np.concatenate([first - first.mean(), second - second.mean()])
    one = long_run_variance(pooled, kernel="quadratic spectral", bandwidth="andrews", prewhiten=True)
    z = float("nan")
    if one is not None and one.value > 0.0:
        deviation = float(np.sqrt(room * one.value * (1.0 / first.size + 1.0 / second.size)))
        rho = one.prewhitening
        degrees = pooled.size / (max(one.bandwidth, 1.0) + 2.0 * (1.0 + rho) / (1.0 - rho))
        z = _normal(gap / deviation, degrees)
    return Moment(name, unit * float(first.mean()), unit * float(second.mean()), z)


def _normal(t: float, degrees: float) -> float:
    """Standard normal value with the tail probability of a t-value."""
    tail = float(stdtr(degrees, -abs(t)))
    return float(np.copysign(-ndtri(tail), t)) if tail > 0.0 else t
