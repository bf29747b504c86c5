"""Distributions of unit-root statistics under their null hypotheses."""

from __future__ import annotations

from functools import cache
from math import erfc, sqrt
from typing import Literal

import numpy as np
from scipy.optimize import brentq

from preflight_magic.kernels.least_squares import FloatArray
from preflight_magic.kernels.tables import read

Terms = Literal["n", "c", "ct", "ctt"]
Bound = Literal["exact", "at most", "at least"]

_NEVER_BELOW = 0.003  # P(Q < 0.003) < 1e-17 for both bridges
_INTERVALS = 34  # exp(-x s**2 / 2) < 1e-17 at x = 0.003 beyond them, for both bridges
_NODES = 24  # per interval: more change nothing in double precision


def dickey_fuller_p_value(statistic: float, terms: Terms) -> tuple[float, Bound]:
    """Lower-tail probability of a Dickey-Fuller t-ratio under a unit root.

    Parameters
    ----------
    statistic : float
    terms : {"n", "c", "ct", "ctt"}
        Deterministic terms of the test regression.

    Returns
    -------
    p_value : float
    bound : {"exact", "at most", "at least"}
        Beyond the range of the published polynomials the value at its end is returned, as a bound.

    References
    ----------
    MacKinnon (1994), Journal of Business and Economic Statistics 12, tables 3 and 4.
    """
    left, right = _polynomials()[terms]
    low, split, high = left[0], left[1], right[1]
    x = min(max(statistic, low), high)
    a, b, c, d = (left if x <= split else right)[2]
    p_value = 0.5 * erfc(-(a + x * (b + x * (c + x * d))) / sqrt(2.0))
    return p_value, "at most" if statistic < low else "at least" if statistic > high else "exact"


def dickey_fuller_critical_values(terms: Terms, nobs: int) -> dict[str, float]:
    """Critical values of a Dickey-Fuller t-ratio in a finite sample.

    Parameters
    ----------
    terms : {"n", "c", "ct", "ctt"}
    nobs : int
        Observations in the test regression.

    Returns
    -------
    dict
        By level: ``1%``, ``5%`` and ``10%``.

    References
    ----------
    MacKinnon (2010), Queen's Economics Department Working Paper 1227.
    """
    x = 1.0 / nobs
    return {level: a + x * (b + x * (c + x * d)) for level, (a, b, c, d) in _surfaces()[terms].items()}


def kpss_p_value(statistic: float, terms: Literal["c", "ct"]) -> float:
    """Upper-tail probability of the KPSS statistic under stationarity, in large samples.

    The limit is the integral of a squared Brownian bridge (``c``) or of a squared second-level bridge (``ct``), a
    weighted sum of independent chi-squares. Its tail is a sum of real integrals between the zeros of the Fredholm
    determinant (Smirnov 1937; Darling 1955), which quadrature turns into a sum of exponentials. Against inversion of
    the characteristic function (Imhof 1961) it keeps its relative accuracy in the tail.

    Parameters
    ----------
    statistic : float
    terms : {"c", "ct"}
        Stationary about a constant or about a straight line.

    Returns
    -------
    float
        In [0, 1].

    References
    ----------
    Kwiatkowski, Phillips, Schmidt and Shin (1992), Journal of Econometrics 54: the limits.
    Darling (1955), Annals of Mathematical Statistics 26: the tail.
    """
    if statistic < _NEVER_BELOW:
        return 1.0
    rates, weights = _exponentials(terms)
    return min(float(weights @ np.exp(-statistic * rates)), 1.0)


def kpss_critical_value(level: float, terms: Literal["c", "ct"]) -> float:
    """Value that the KPSS statistic exceeds with probability `level` under stationarity, in large samples.

    Parameters
    ----------
    level : float
        In (0, 1), for example 0.05.
    terms : {"c", "ct"}

    Returns
    -------
    float
    """
    found: float = brentq(lambda x: kpss_p_value(x, terms) - level, _NEVER_BELOW, 500.0, xtol=1e-13)
    return found


@cache
def _polynomials() -> dict[str, list[tuple[float, float, tuple[float, ...]]]]:
    found: dict[str, list[tuple[float, float, tuple[float, ...]]]] = {}
    for row in read("dickey_fuller_probability"):
        piece = (float(row["low"]), float(row["high"]), tuple(float(row[name]) for name in "abcd"))
        found.setdefault(row["terms"], []).append(piece)
    return found


@cache
def _surfaces() -> dict[str, dict[str, tuple[float, ...]]]:
    found: dict[str, dict[str, tuple[float, ...]]] = {}
    for row in read("dickey_fuller_critical"):
        found.setdefault(row["terms"], {})[row["level"]] = tuple(float(row[name]) for name in "abcd")
    return found


@cache
def _exponentials(terms: Literal["c", "ct"]) -> tuple[FloatArray, FloatArray]:
    """Rates r and weights w with ``P(Q > x) = sum(w * exp(-r x))``.

    With D the Fredholm determinant at s squared and s1 < s2 < ... its zeros, the tail is

        2 / pi * sum over k of (-1)**(k + 1) * integral from s[2k-1] to s[2k] of exp(-x s**2 / 2) / (s sqrt(-D)) ds

    The integrand has inverse square roots at both ends: Gauss-Chebyshev quadrature.
    """
    zeros: FloatArray = _bridge_zeros(2 * _INTERVALS) if terms == "c" else _second_bridge_zeros(2 * _INTERVALS)
    start, end = zeros[0::2, None], zeros[1::2, None]
    angle = (np.arange(_NODES, dtype=np.float64) + 0.5) * np.pi / _NODES
    s = (start + end) / 2.0 + (end - start) / 2.0 * np.cos(angle)
    # Chebyshev's weight 1 / sqrt((s - start)(end - s)) is the same for every node but for this factor.
    weight = (end - start) / 2.0 * np.sin(angle)
    determinant = np.sin(s) / s if terms == "c" else 12.0 * (2.0 - s * np.sin(s) - 2.0 * np.cos(s)) / s**4
    sign = np.where(np.arange(_INTERVALS) % 2 == 0, 1.0, -1.0)[:, None]
    weights: FloatArray = (2.0 / _NODES * sign * weight / (s * np.sqrt(-determinant))).ravel()
    rates: FloatArray = (s**2 / 2.0).ravel()
    return rates, weights


def _bridge_zeros(count: int) -> FloatArray:
    """Zeros of ``sin(s) / s``."""
    zeros: FloatArray = np.pi * np.arange(1, count + 1, dtype=np.float64)
    return zeros


def _second_bridge_zeros(count: int) -> FloatArray:
    """Zeros of ``(2 - s sin(s) - 2 cos(s)) / s**4``: multiples of 2 pi, and the s with ``tan(s/2) = s/2``."""
    order = np.arange(1, count // 2 + 1)
    half = (order + 0.5) * np.pi - 1.0 / ((order + 0.5) * np.pi)
    for _ in range(6):  # Newton on sin(h) - h cos(h), from the second term of the expansion of its zeros
        half -= (np.sin(half) - half * np.cos(half)) / (half * np.sin(half))
    zeros: FloatArray = np.sort(np.concatenate([2.0 * np.pi * order, 2.0 * half]))
    return zeros
