"""Upper tails of weighted sums of independent chi-squares, by inversion of the moment generating function.

The probability is the integral of ``M(t) exp(-t x) / (2 pi i t)`` along a line to the right of zero (Gil-Pelaez 1951;
Imhof 1961 takes the imaginary axis). Here the path crosses the real axis at the saddle point of the integrand and
bends to the right along a hyperbola, where the integrand dies out twice exponentially: the trapezoidal rule needs
some eighty points and keeps its relative accuracy far out in the tail.
"""

from __future__ import annotations

import cmath
from collections.abc import Callable
from dataclasses import dataclass
from functools import lru_cache
from math import acosh, exp, isnan, log, pi, sqrt

import numpy as np
from numpy.typing import NDArray
from scipy.optimize import brentq

from preflight_magic.kernels.least_squares import FloatArray

ComplexArray = NDArray[np.complex128]

_STEP = 0.1
_BEND = 0.6  # real over imaginary half axis of the hyperbola; below one, or a bell-shaped integrand grows along it
_DYING = 45.0  # exp(-45) is below the rounding of what stands before it
_FARTHEST = 20.0
_HALVINGS = 80
_PLACES = 12  # paths per factor e of the statistic
_NEVER_BELOW = 0.003  # times the degrees: P(Q < 0.003) < 1e-17 for one bridge
_OVERFLOW = 300.0


def weighted_chi_squares_p_value(
    statistic: float, weights: FloatArray, multiplicities: FloatArray | None = None
) -> float:
    """Upper-tail probability of a weighted sum of independent chi-squares.

    Parameters
    ----------
    statistic : float
    weights : ndarray, shape (k,)
        Positive, in the unit of `statistic`.
    multiplicities : ndarray, shape (k,), optional
        Degrees of freedom of each chi-square, by default 1.

    Returns
    -------
    float
        In [0, 1].

    Raises
    ------
    ValueError
        For a NaN statistic, no weights, or weights or multiplicities that are not positive and finite.

    References
    ----------
    Imhof (1961), Computing the distribution of quadratic forms in normal variables, Biometrika 48, 419-426.
    """
    w = np.asarray(weights, dtype=np.float64)
    m = np.ones(w.size) if multiplicities is None else np.asarray(multiplicities, dtype=np.float64)
    if isnan(statistic) or not w.size or m.shape != w.shape or not (np.isfinite(w) & (w > 0) & np.isfinite(m)).all():
        raise ValueError("a tail needs a statistic, positive weights and as many multiplicities")
    if not (m > 0).all():
        raise ValueError("multiplicities must be positive")
    if statistic <= 0.0:
        return 1.0
    largest = float(w.max())
    x, w = statistic / largest, w / largest  # the first singularity now stands at 1/2
    upper = x > float(w @ m)

    def slope(t: float) -> float:
        return float((m * w / (1.0 - 2.0 * w * t)).sum()) - 1.0 / t - x

    saddle = _root(slope, 0.0, 0.5) if upper else _root(slope, -(0.5 * float(m.sum()) + 2.0) / x, 0.0)
    curvature = float((2.0 * m * w**2 / (1.0 - 2.0 * w * saddle) ** 2).sum()) + 1.0 / saddle**2

    def log_transform(t: ComplexArray) -> ComplexArray:
        return np.asarray(-0.5 * (np.log(1.0 - 2.0 * t[:, None] * w) @ m), dtype=np.complex128)

    return _path(log_transform, x, saddle, curvature).tail(x)


def cramer_von_mises_p_value(statistic: float, degrees: int) -> float:
    """Upper-tail probability of the generalised Cramer-von Mises distribution.

    The law of the integral of ``B'B`` with B a vector of `degrees` independent Brownian bridges: chi-squares with
    weights ``1 / (k pi)**2`` and multiplicity `degrees`. It is the limit of the statistics of Nyblom (1989), of
    Kwiatkowski and others (1992, about a constant), Hansen (1992) and Canova and Hansen (1995).

    Parameters
    ----------
    statistic : float
    degrees : int
        At least 1.

    Returns
    -------
    float
        In [0, 1]; relative accuracy better than 1e-8 down to 1e-30.

    Raises
    ------
    ValueError
        For a NaN statistic or degrees below 1.

    Notes
    -----
    Its moment generating function is ``(z / sin z)**(degrees / 2)`` with ``z**2 = 2 t`` (Anderson and Darling 1952,
    Annals of Mathematical Statistics 23); its first singularity stands at ``pi**2 / 2``.
    """
    if isnan(statistic) or degrees < 1:
        raise ValueError(f"a tail needs a statistic and at least one degree of freedom; it got {statistic}, {degrees}")
    if statistic <= degrees * _NEVER_BELOW:
        return 1.0
    places = _PLACES + degrees // 2  # the law narrows with the degrees
    return _stability_path(round(places * log(statistic)), places, degrees).tail(statistic)


def cramer_von_mises_critical_value(level: float, degrees: int) -> float:
    """Value that the generalised Cramer-von Mises variable exceeds with probability `level`.

    Parameters
    ----------
    level : float
        In (0, 1), for example 0.05.
    degrees : int
        At least 1.

    Returns
    -------
    float
    """
    high = degrees / 6.0 + 10.0 * sqrt(degrees) + 150.0
    found: float = brentq(lambda x: cramer_von_mises_p_value(x, degrees) - level, 1e-3 * degrees, high, xtol=1e-12)
    return found


@lru_cache(maxsize=1024)
def _stability_path(place: int, places: int, degrees: int) -> _Path:
    """Path for the statistics near ``exp(place / places)``: they share it, since it need not be the best for each."""
    half, centre = degrees / 2.0, exp(place / places)

    def slope(t: float) -> float:
        z = cmath.sqrt(2.0 * t)
        return (half * (1.0 / z - 1.0 / cmath.tan(z)) / z).real - 1.0 / t - centre

    if centre > degrees / 6.0:
        saddle = _root(slope, 0.0, pi**2 / 2.0)
    else:
        saddle = _root(slope, -((degrees / centre) ** 2) - 4.0 / centre, 0.0)
    z = cmath.sqrt(2.0 * saddle)
    sine = cmath.sin(z) if abs(z.imag) < _OVERFLOW else complex(0.0, exp(_OVERFLOW))
    second = half * (1.0 / sine**2 + 1.0 / (cmath.tan(z) * z) - 1.0 / saddle).real / (2.0 * saddle)
    return _path(lambda t: half * _log_ratio(t), centre, saddle, second + 1.0 / saddle**2)


def _log_ratio(t: ComplexArray) -> ComplexArray:
    """``log(z / sin z)`` with ``z**2 = 2 t`` on the upper half plane, without a jump."""
    z = np.sqrt(2.0 * t)
    # sin z = i / 2 exp(-i z) (1 - exp(2 i z)), and the last factor stays to the right of zero
    found: ComplexArray = np.log(z) - np.log(0.5j) + 1j * z - np.log(1.0 - np.exp(2j * z))
    return found


@dataclass(frozen=True)
class _Path:
    """Points of a path of integration and what the integrand has there, but for ``exp(-t (x - centre))``."""

    points: ComplexArray
    weights: ComplexArray
    centre: float
    start: float

    def tail(self, statistic: float) -> float:
        """Upper tail at a statistic near the centre."""
        total = float((self.weights * np.exp((self.centre - statistic) * self.points)).imag.sum())
        return min(max(self.start + total, 0.0), 1.0)


def _path(
    log_transform: Callable[[ComplexArray], ComplexArray], centre: float, saddle: float, curvature: float
) -> _Path:
    """Upper half of a hyperbola through the saddle point; the lower half mirrors it.

    Left of zero the path gives the lower tail with a minus sign.
    """
    width = 1.0 / sqrt(curvature)
    u = np.arange(0.0, min(acosh(1.0 + _DYING / (centre * _BEND * width)), _FARTHEST) + _STEP, _STEP)
    cosh, sinh = np.cosh(u), np.sinh(u)
    t = saddle + width * (_BEND * (cosh - 1.0) + 1j * sinh)
    weights = np.exp(log_transform(t) - t * centre) * (_BEND * sinh + 1j * cosh) / t * (width * _STEP / pi)
    weights[0] *= 0.5
    return _Path(t, weights, centre, 0.0 if saddle > 0.0 else 1.0)


def _root(function: Callable[[float], float], low: float, high: float) -> float:
    """Zero of a function that rises from below to above it, to a few digits: it only places a path."""
    for _ in range(_HALVINGS):
        middle = 0.5 * (low + high)
        if function(middle) < 0.0:
            low = middle
        else:
            high = middle
        if high - low <= 1e-3 * min(abs(low), abs(high)):
            break
    return 0.5 * (low + high)
