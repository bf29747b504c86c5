"""Box-Cox exponent by likelihood, with an interval: the regression and the errors of the log's gain.

A series that cannot carry the estimate gives None.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from scipy.linalg.lapack import dposv
from scipy.optimize import brentq, minimize_scalar
from scipy.special import chdtri

from preflight_magic.kernels.power_transform import lagged_design
from preflight_magic.kernels.restricted_likelihood import Array

LOWEST, HIGHEST = -2.0, 3.0
"""Exponents that are searched; common practice looks between -1 and 2."""

_DEGREES = 5.0  # of freedom of the errors, as in the log's gain; Lange, Little and Taylor (1989) found 3 to 10
_CYCLES_FOR_LAGS = 5  # cycles from which two seasonal lags are worth their rows, as in the log's gain
_MOST_ROUNDS = 60
_FINE = 1e-3  # exponents
_SETTLED = 1e-3  # relative change of the scale: at the estimate the likelihood is flat in it, so settles to 1e-4
_BEYOND = 1e9  # stands for an infinite likelihood, which root finding could not bear
_OVERFLOW = 1e150  # its square is still a number
_TINY = 1e-20  # a mean square that is rounding, the values having level one


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
    deviance, nobs = _profile(values, period)
    if deviance is None:
        return None
    grid = np.arange(LOWEST, HIGHEST + 0.5)
    heights = np.array([deviance(float(power)) for power in grid])
    best = int(np.argmin(heights))
    low, high = float(grid[max(best - 1, 0)]), float(grid[min(best + 1, len(grid) - 1)])
    found = minimize_scalar(deviance, bounds=(low, high), method="bounded", options={"xatol": _FINE})
    at_best = (float(grid[best]), float(heights[best]))
    exponent, least = min((float(found.x), float(found.fun)), at_best, key=lambda one: one[1])
    if abs(least) >= 0.5 * _BEYOND:
        return None
    bound = least + float(chdtri(1.0, 1.0 - coverage))

    def over(power: float) -> float:
        return deviance(power) - bound

    below, above = grid[(grid < exponent) & (heights > bound)], grid[(grid > exponent) & (heights > bound)]
    lower = float(brentq(over, below[-1], exponent, xtol=_FINE)) if below.size else LOWEST
    upper = float(brentq(over, exponent, above[0], xtol=_FINE)) if above.size else HIGHEST
    falls = [max(deviance(power) - least, 0.0) for power in (1.0, 0.0)]
    return BoxCoxExponent(exponent, lower, upper, coverage, falls[0], falls[1], nobs)


def _profile(values: Array, period: int) -> tuple[Callable[[float], float] | None, int]:
    """-2 log likelihood as a function of the exponent, and the observations in it; None where it has no freedom."""
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

    def at(power: float, weights: Array) -> tuple[float, Array]:
        with np.errstate(over="ignore", invalid="ignore"):
            powered = moving if abs(power) < 1e-9 else np.expm1(power * moving) / power
            left = powered - fixed @ (fixed.T @ powered)
        if not (np.abs(left) < _OVERFLOW).all():
            return _BEYOND, weights
        columns[:, fixed.shape[1] :] = left
        value, weights = _deviance(columns, weights)
        return max(value - 2.0 * (power - 1.0) * jacobian, -_BEYOND), weights

    known: dict[float, tuple[float, Array]] = {0.5: at(0.5, np.ones(len(response)))}

    def deviance(power: float) -> float:
        """From the weights of the nearest exponent that is known."""
        if power not in known:
            known[power] = at(power, known[min(known, key=lambda one: abs(one - power))][1])
        return known[power][0]

    return deviance, len(response)


def _deviance(columns: Array, weights: Array) -> tuple[float, Array]:
    """-2 log likelihood of the last column on the others, with t errors and without its constant; weights at its end.

    Without end below where nothing is left, beyond all above where the regressors depend on each other. The scale is
    that of Kent, Tyler and Vardi (1994, Communications in Statistics: Simulation and Computation 23), which settles in
    half the rounds of the plain mean of the weighted squares and at the same value.
    """
    rows, last = len(columns), 0.0
    left = np.ones(columns.shape[1])
    for _ in range(_MOST_ROUNDS):
        gram = (columns * weights[:, None]).T @ columns
        _, effects, info = dposv(gram[:-1, :-1], gram[:-1, -1], lower=1)
        if info != 0:
            return _BEYOND, np.ones(rows)
        left[:-1] = -effects
        squares = (columns @ left) ** 2
        scale = float(weights @ squares) / float(weights.sum())
        if not scale > _TINY:
            return -_BEYOND, np.ones(rows)
        weights = (_DEGREES + 1.0) / (_DEGREES + squares / scale)
        if abs(scale - last) <= _SETTLED * scale:
            break
        last = scale
    total = float(np.log1p(squares / (_DEGREES * scale)).sum())
    return rows * float(np.log(scale)) + (_DEGREES + 1.0) * total, weights
