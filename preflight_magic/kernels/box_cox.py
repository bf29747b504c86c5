"""Box-Cox exponent by likelihood, with an interval: the regression and the errors of the log's gain.

A series that cannot carry the estimate gives None.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from math import copysign, sqrt

import numpy as np
from scipy.linalg.lapack import dposv
from scipy.optimize import brentq
from scipy.special import chdtri

from preflight_magic.kernels.power_transform import lagged_design
from preflight_magic.kernels.restricted_likelihood import Array

LOWEST, HIGHEST = -2.0, 3.0
"""Exponents that are searched; common practice looks between -1 and 2."""

_DEGREES = 5.0  # of freedom of the errors, as in the log's gain; Lange, Little and Taylor (1989) found 3 to 10
_CYCLES_FOR_LAGS = 5  # cycles from which two seasonal lags are worth their rows, as in the log's gain
_MOST_ROUNDS = 60
_FINE = 1e-3  # exponents
_SETTLED = 3e-4  # relative change of the scale: at the estimate the likelihood is flat in it, so settles to 1e-4
_BEYOND = 1e9  # stands for an infinite likelihood, which root finding could not bear
_OVERFLOW = 1e150  # its square is still a number
_FIRST_STEP = 0.2  # from the estimate towards an end of the interval
_FLAT = 1e-3  # rise of the root of the deviance per exponent below which the edge is tried
_ZERO = 1e-6  # nearer to zero the transform is the logarithm
_TINY = 1e-20  # a mean square that is rounding, the values having level one


Profile = Callable[[float], tuple[float, float]]
"""Deviance and its slope at an exponent."""


@dataclass(frozen=True)
class BoxCoxExponent:
    """Estimate of a Box-Cox exponent.

    Attributes
    ----------
    exponent : float
        1 leaves the series as it is, 0 is the logarithm.
    lower, upper : float
        Interval by the likelihood ratio; at the end of the search where the likelihood does not fall enough.
    coverage : float
    fall_from_one, fall_from_zero : float
        How much lower -2 log likelihood is here than at exponent 1, and than at the logarithm. Not negative.
    nobs : int
        Observations in the regression.
    """

    exponent: float
    lower: float
    upper: float
    coverage: float
    fall_from_one: float
    fall_from_zero: float
    nobs: int


def box_cox(values: Array, period: int, coverage: float = 0.95) -> BoxCoxExponent | None:
    """Box-Cox exponent by likelihood in a regression with lags.

    Parameters
    ----------
    values : ndarray, shape (n,)
        NaN where missing.
    period : int
        Seasonal period of the pattern allowed for; 1 for none.
    coverage : float
        Of the interval, in (0, 1).

    Returns
    -------
    BoxCoxExponent or None
        None where a value is not positive, or the series is too short or fitted without error.

    Raises
    ------
    ValueError
        For a coverage outside (0, 1).

    Notes
    -----
    Box and Cox (1964), An analysis of transformations, Journal of the Royal Statistical Society B 26, 211-252, in a
    regression on constant, line, pattern, three lags and, in longer series, two seasonal lags, all lags transformed
    alike; the lags stand for the ARMA structure. Errors have Student's t distribution (Lange, Little and Taylor 1989).
    """
    if not 0.0 < coverage < 1.0:
        raise ValueError(f"an interval cannot have the coverage {coverage:g}")
    seen = values[np.isfinite(values)]
    if not seen.size or not (seen > 0).all():
        return None
    profile, nobs = _profile(values, period)
    if profile is None:
        return None
    exponent = _minimum(lambda power: profile(power)[1])
    least = profile(exponent)[0]
    if abs(least) >= 0.5 * _BEYOND:
        return None
    allowed = float(chdtri(1.0, 1.0 - coverage))
    lower, upper = (_end(profile, exponent, edge, allowed) for edge in (LOWEST, HIGHEST))
    falls = [max(profile(power)[0] - least, 0.0) for power in (1.0, 0.0)]
    return BoxCoxExponent(exponent, lower, upper, coverage, falls[0], falls[1], nobs)


def _minimum(slope: Callable[[float], float]) -> float:
    """Where the slope changes its sign, looked for from the exponents 0 and 1 outwards."""
    low, high = 0.0, 1.0
    while slope(low) > 0.0 and low > LOWEST:
        low, high = low - 1.0, low
    while slope(high) < 0.0 and high < HIGHEST:
        low, high = high, high + 1.0
    if slope(low) >= 0.0:
        return low
    return float(brentq(slope, low, high, xtol=_FINE)) if slope(high) > 0.0 else high


def _end(profile: Profile, exponent: float, edge: float, allowed: float) -> float:
    """Where the deviance is `allowed` above its least, at most at the edge.

    Newton's method on the square root of the rise, which is a straight line where the likelihood is normal.
    """
    least, sign = profile(exponent)[0], 1.0 if edge > exponent else -1.0
    inside, outside = exponent, edge
    power = exponent + sign * _FIRST_STEP
    for _ in range(_MOST_ROUNDS):
        if sign * (power - edge) >= 0.0:
            if profile(edge)[0] - least <= allowed:
                return edge
            power = 0.5 * (inside + edge)
        value, slope = profile(power)
        rise = max(value - least, 0.0)
        inside, outside = (power, outside) if rise <= allowed else (inside, power)
        if abs(outside - inside) <= _FINE:
            break
        steepness = sign * slope / (2.0 * sqrt(rise)) if rise > 0.0 else 0.0
        step = (sqrt(allowed) - sqrt(rise)) / steepness if steepness > _FLAT else 2.0 * (HIGHEST - LOWEST)
        last, power = power, power + sign * step
        if (outside != edge and sign * (power - outside) >= 0.0) or sign * (power - inside) <= 0.0:
            power = 0.5 * (inside + outside)
        elif abs(power - last) <= _FINE:
            return min(max(power, LOWEST), HIGHEST)
    return power


def _profile(values: Array, period: int) -> tuple[Profile | None, int]:
    """Deviance and its slope by exponent, and the observations in it; None where it has no freedom."""
    logs = np.log(values)
    logs = logs - np.nanmean(logs)
    lags = (1, 2, 3, period, period + 1) if period > 3 and len(values) >= _CYCLES_FOR_LAGS * period else (1, 2, 3)
    design, response, rank = lagged_design(logs, period, lags)
    if rank < 0:
        return None, 0
    fixed = np.linalg.qr(design[:, : -len(lags)])[0]
    moving = np.column_stack([design[:, -len(lags) :], response])
    jacobian = float(response.sum())
    columns = np.column_stack([fixed, moving])
    place = fixed.shape[1]

    def at(power: float, weights: Array) -> tuple[float, float, Array]:
        with np.errstate(over="ignore", invalid="ignore"):
            powered = moving if abs(power) < _ZERO else np.expm1(power * moving) / power
            columns[:, place:] = powered - fixed @ (fixed.T @ powered)
        if not (np.abs(columns[:, place:]) < _OVERFLOW).all():
            return _BEYOND, copysign(_BEYOND, power), weights
        found = _deviance(columns, weights)
        if found is None:
            return _BEYOND, copysign(_BEYOND, power), weights
        value, left, pull, weights = found
        moved = power * (moving * (1.0 + power * powered) - powered)
        turning = 0.5 * moving**2 if abs(power) < _ZERO else moved / power**2
        # At the estimate the other parameters do not matter to the slope: only the transformed values move.
        slope = 2.0 * float(pull @ (turning @ left[place:])) - 2.0 * jacobian
        return max(value - 2.0 * (power - 1.0) * jacobian, -_BEYOND), slope, weights

    known: dict[float, tuple[float, float, Array]] = {0.5: at(0.5, np.ones(len(response)))}

    def profile(power: float) -> tuple[float, float]:
        if power not in known:
            nearest = min(known, key=lambda one: abs(one - power))
            known[power] = at(power, known[nearest][2])
        return known[power][:2]

    return profile, len(response)


def _deviance(columns: Array, weights: Array) -> tuple[float, Array, Array, Array] | None:
    """-2 log likelihood of the last column on the others, with t errors and without its constant.

    Beside it what the columns count in the residual, half the derivative by each residual, and the weights at the end.
    Without end below where nothing is left, None where the regressors depend on each other. The scale is that of Kent,
    Tyler and Vardi (1994, Communications in Statistics: Simulation and Computation 23), which settles in half the
    rounds of the plain mean of the weighted squares and at the same value.
    """
    rows, last = len(columns), 0.0
    left = np.ones(columns.shape[1])
    for _ in range(_MOST_ROUNDS):
        gram = (columns * weights[:, None]).T @ columns
        _, effects, info = dposv(gram[:-1, :-1], gram[:-1, -1], lower=1)
        if info != 0:
            return None
        left[:-1] = -effects
        residual = columns @ left
        squares = residual**2
        scale = float(weights @ squares) / float(weights.sum())
        if not scale > _TINY:
            return -_BEYOND, left, np.zeros(rows), np.ones(rows)
        weights = (_DEGREES + 1.0) / (_DEGREES + squares / scale)
        if abs(scale - last) <= _SETTLED * scale:
            break
        last = scale
    total = float(np.log1p(squares / (_DEGREES * scale)).sum())
    return rows * float(np.log(scale)) + (_DEGREES + 1.0) * total, left, weights * residual / scale, weights
