"""Conditional least squares for seasonal ARMA models: cheap starts and a cheap ranking of many orders.

Residuals are those of the recursion with zeros before the first value; the likelihood proper is in `arma`.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from scipy.signal import lfilter

from preflight_magic.kernels.arma_parameters import Array, Order, polynomials, split, to_partial

INSIDE = 0.97
"""Inverse roots of starts are drawn within this modulus, where the recursion forgets its first values."""
_ROUNDS = 3
"""Gauss-Newton steps: the first is already efficient in large samples (Hannan and Rissanen 1982)."""


@dataclass(frozen=True)
class Regression:
    """Moments of a series on lags of itself and of the residuals of a long autoregression.

    Attributes
    ----------
    values : ndarray, shape (n,)
        Centred.
    moments : ndarray, shape (k + 1, k + 1)
        Of the series (last) and its k lagged columns.
    columns : mapping of (part, lag) to column
        Part is ``"w"`` for lags of the series, ``"e"`` for lags of the residuals.
    skip : int
        Rows whose residuals are left out of sums of squares, the same for every order.
    """

    values: Array
    moments: Array
    columns: dict[tuple[str, int], int]
    skip: int


def regression(values: Array, period: int, lags: int = 3) -> Regression:
    """Collect once what the starts of every order need.

    Parameters
    ----------
    values : ndarray, shape (n,)
        Centred.
    period : int
        Seasonal lag; 1 for none.
    lags : int
        Largest plain lag of any order.

    Returns
    -------
    Regression

    Notes
    -----
    Hannan and Rissanen (1982), Recursive estimation of mixed autoregressive-moving average order, Biometrika 69,
    81-94. The long autoregression has the lags 1 to about ``10 log10(n)``, and those around the seasonal lag.
    """
    n = len(values)
    seasonal = [period] if 1 < period < n // 2 else []
    longest = max(1, min(int(10.0 * np.log10(n)), n // 4))
    long = sorted({*range(1, min(longest, n // 4) + 1), *(lag + k for lag in seasonal for k in (-1, 0, 1))})
    design = np.column_stack([_lagged(values, lag) for lag in long])
    lost = min(long[-1], n // 2)
    gram = design[lost:].T @ design[lost:]
    ridge = 1e-8 * float(np.trace(gram)) + 1e-300
    effects = np.linalg.solve(gram + ridge * np.eye(len(long)), design[lost:].T @ values[lost:])
    residuals = values - design @ effects
    plain = [*range(1, min(lags, n // 4) + 1), *seasonal]
    keys = [("w", lag) for lag in plain] + [("e", lag) for lag in plain]
    stacked = np.column_stack([_lagged(values if part == "w" else residuals, lag) for part, lag in keys] + [values])
    first = max(plain)
    skip = min(lags, n // 4) + (period if seasonal and n > 5 * period else 0)
    return Regression(values, stacked[first:].T @ stacked[first:], {key: k for k, key in enumerate(keys)}, skip)


def _lagged(values: Array, lag: int) -> Array:
    out = np.zeros(len(values))
    out[lag:] = values[: len(values) - lag]
    return out


def start(found: Regression, order: Order) -> Array:
    """Coefficients by one linear regression, drawn inside the circle; zeros where it cannot be computed."""
    keys = [("w", lag) for lag in range(1, order.p + 1)] + [("e", lag) for lag in range(1, order.q + 1)]
    keys += [("w", order.period * k) for k in range(1, order.P + 1)]
    keys += [("e", order.period * k) for k in range(1, order.Q + 1)]
    if not keys or any(key not in found.columns for key in keys):
        return np.zeros(order.size)
    pick = [found.columns[key] for key in keys]
    block = found.moments[np.ix_(pick, pick)]
    ridge = 1e-8 * float(np.trace(block)) + 1e-300
    effects = np.asarray(np.linalg.solve(block + ridge * np.eye(len(pick)), found.moments[pick, -1]), dtype=float)
    return inside(order, effects)


def refine(found: Regression, order: Order, coefficients: Array, rounds: int = _ROUNDS) -> tuple[Array, float]:
    """Gauss-Newton steps on the sum of squares.

    Parameters
    ----------
    found : Regression
    order : Order
    coefficients : ndarray, shape (order.size,)
        Inside the circle.
    rounds : int
        Most steps.

    Returns
    -------
    coefficients : ndarray, shape (order.size,)
    mean_square : float
        Of the residuals after the first `skip`.
    """
    values, skip = found.values, found.skip
    residuals = _residuals(values, order, coefficients)
    total = float(residuals[skip:] @ residuals[skip:])
    for _ in range(rounds if order.size else 0):
        slopes = _slopes(values, residuals, order, coefficients)[skip:]
        gram = slopes.T @ slopes
        gram[np.diag_indices(order.size)] += 1e-6 * float(np.trace(gram)) + 1e-300
        move = np.linalg.solve(gram, slopes.T @ residuals[skip:])
        before = total
        for fraction in (1.0, 0.3):
            there = inside(order, coefficients - fraction * move)
            new = _residuals(values, order, there)
            size = float(new[skip:] @ new[skip:])
            if size < total:
                coefficients, residuals, total = there, new, size
                break
        if not total < before * (1.0 - 1e-4):
            break
    return coefficients, total / max(len(values) - skip, 1)


def _residuals(values: Array, order: Order, coefficients: Array) -> Array:
    ar, ma = polynomials(order, coefficients)
    return np.asarray(lfilter(ar, ma, values), dtype=float)


def _slopes(values: Array, residuals: Array, order: Order, coefficients: Array) -> Array:
    """Derivatives of the residuals by the coefficients, shape (n, size)."""
    ar, ma, sar, sma = split(order, coefficients)
    s, out = order.period, np.zeros((len(values), order.size))
    plain = polynomials(Order(order.p, order.q), np.concatenate([ar, ma]))
    seasonal = polynomials(Order(0, 0, order.P, order.Q, s), np.concatenate([sar, sma]))
    both = polynomials(order, coefficients)[1]
    parts = (
        (order.p, 1, seasonal[0], both, values),
        (order.q, 1, np.ones(1), plain[1], residuals),
        (order.P, s, plain[0], both, values),
        (order.Q, s, np.ones(1), seasonal[1], residuals),
    )
    column = 0
    for count, lag, above, below, what in parts:
        if count:
            filtered = -np.asarray(lfilter(above, below, what), dtype=float)
        for k in range(1, count + 1):
            out[lag * k :, column] = filtered[: len(values) - lag * k]
            column += 1
    return out


def inside(order: Order, coefficients: Array) -> Array:
    """The coefficients, with the inverse roots of each part drawn within `INSIDE`."""
    ar, ma, sar, sma = split(order, coefficients)
    return np.concatenate([_drawn(ar), -_drawn(-ma), _drawn(sar), -_drawn(-sma)])


def _drawn(part: Array) -> Array:
    if len(part) == 0 or (len(part) == 1 and abs(part[0]) <= INSIDE):
        return part
    if not np.isfinite(part).all():
        return np.zeros(len(part))
    if len(part) == 2 and abs(part[1]) < INSIDE**2 and abs(part[0]) < INSIDE - part[1] / INSIDE:
        return part
    if len(part) > 2 and np.abs(to_partial(part / INSIDE ** np.arange(1, len(part) + 1))).max() < 1.0:
        return part
    largest = float(np.abs(np.roots(np.concatenate([[1.0], -part]))).max())
    return part * (INSIDE / max(largest, INSIDE)) ** np.arange(1, len(part) + 1)
