"""Exact Gaussian maximum likelihood of one seasonal ARMA model."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray
from scipy.optimize import leastsq

from preflight_magic.kernels.arma_conditional import refine, regression
from preflight_magic.kernels.arma_conditional import start as conditional_start
from preflight_magic.kernels.arma_likelihood import Sample, evaluate, is_exact, prepare, regress, whitened_columns
from preflight_magic.kernels.arma_parameters import Array, Order, coefficients, free_parameters, polynomials
from preflight_magic.kernels.whiten import NotPositiveDefiniteError

EDGE = 6.0
"""Unconstrained parameters stay within this bound: tanh(6) = 0.99999 is as near the circle as a fit goes."""
_TYPICAL: tuple[tuple[float, float], ...] = ((0.5, 0.3), (0.9, -0.5), (-0.4, 0.6), (0.97, -0.8))
"""First AR and MA coefficients from which a search may start besides the conditional estimate."""


@dataclass(frozen=True)
class ArmaFit:
    """A seasonal ARMA model at its maximum likelihood.

    Attributes
    ----------
    order : Order
    coefficients : ndarray, shape (order.size,)
        AR, MA, seasonal AR, seasonal MA: ``1 - c B`` for AR parts, ``1 + c B`` for MA parts.
    mean, mean_error : float
        Generalised least squares mean and its standard error; zero and NaN where none was fitted.
    variance : float
        Of the innovations, maximum likelihood, in the squared unit of the series.
    log_likelihood : float
        Of the observed values.
    covariance : ndarray, shape (order.size, order.size)
        Of the coefficients, from the observed information; NaN for those at the edge of the parameter space.
    nobs : int
        Observed values, less the number of fixed columns.
    parameters : int
        Numbers estimated: coefficients, mean and variance.
    innovations : ndarray, shape (n,)
        Standardised one-step errors; NaN where the value is missing. Near such a value they are approximate, since it
        enters with its expectation given all others.
    correction : ndarray, shape (n,)
        What the nuisance columns explain: the series less this holds, at missing values, their expectations.
    restricted : ndarray, shape (order.size,)
        Coefficients at the maximum of the restricted likelihood, into which the mean enters by its contrasts only:
        less drawn to stationary AR roots and to MA roots at one. The same as `coefficients` where no mean was fitted.
    exact : bool
        Whether the likelihood is exact; else it is conditional on the values before the first being at the mean.
    """

    order: Order
    coefficients: Array
    mean: float
    mean_error: float
    variance: float
    log_likelihood: float
    covariance: Array
    nobs: int
    parameters: int
    innovations: Array
    correction: Array
    restricted: Array
    exact: bool = True

    def __str__(self) -> str:
        return f"{self.order}, innovation variance {self.variance:.3g}"

    @property
    def polynomials(self) -> tuple[Array, Array]:
        """AR and MA polynomials in the lag operator, seasonal parts multiplied in."""
        return polynomials(self.order, self.coefficients)

    @property
    def aicc(self) -> float:
        """Akaike's criterion corrected for small samples (Hurvich and Tsai 1989, Biometrika 76, 297-307)."""
        return corrected_aic(self.log_likelihood, self.parameters, self.nobs)

    @property
    def bic(self) -> float:
        """Schwarz (1978), Annals of Statistics 6, 461-464."""
        return -2.0 * self.log_likelihood + self.parameters * float(np.log(self.nobs))


def corrected_aic(log_likelihood: float, parameters: int, nobs: int) -> float:
    """AICc; inf where the correction has no positive denominator."""
    room = nobs - parameters - 1
    return -2.0 * log_likelihood + 2.0 * parameters * nobs / room if room > 0 else float("inf")


# ------------------------------------------------------------------------------------------------ maximum
@dataclass(frozen=True)
class Maximum:
    """Unconstrained parameters and log likelihood where a search ended."""

    order: Order
    free: Array
    log_likelihood: float


def maximise(sample: Sample, order: Order, starts: Sequence[Array], tolerance: float = 1e-10) -> Maximum | None:
    """Maximise the likelihood from the best of several starts.

    Parameters
    ----------
    sample : Sample
    order : Order
    starts : sequence of ndarray, shape (order.size,)
        Coefficients.
    tolerance : float
        Relative change of the sum of squares at which the search ends: ``count / 2`` of it in the log likelihood.

    Returns
    -------
    Maximum or None
        None where no start has a finite likelihood.

    Notes
    -----
    Levenberg-Marquardt on scaled residuals: ``S exp(log|V| / m)`` is a sum of squares whose logarithm is, up to a
    constant, ``-2 / m`` times the log likelihood.
    """

    def at(free: Array) -> tuple[float, Array]:
        return evaluate(sample, order, coefficients(order, np.clip(free, -EDGE, EDGE)))

    best: Maximum | None = None
    for values in starts:
        free = free_parameters(order, values)
        try:
            height = at(free)[0]
        except NotPositiveDefiniteError:
            continue
        if best is None or height > best.log_likelihood:
            best = Maximum(order, free, height)
    if best is None or order.size == 0:
        return best
    far = np.full(len(sample.stacked), 1e3)

    def residuals(free: Array) -> Array:
        try:
            return at(free)[1]
        except NotPositiveDefiniteError:
            return far

    rounds = 25 if tolerance < 1e-6 else 6
    found, *_ = leastsq(
        residuals,
        best.free,
        ftol=tolerance,
        xtol=max(tolerance, 1e-8),
        epsfcn=1e-12,
        maxfev=rounds * (order.size + 1),
        full_output=True,
    )
    try:
        free = np.clip(found, -EDGE, EDGE)
        height = at(free)[0]
    except NotPositiveDefiniteError:
        return best
    return Maximum(order, free, height) if height >= best.log_likelihood else best


def _polish(sample: Sample, found: Maximum) -> tuple[Maximum, Array]:
    """One Newton step, and the inverse observed information in unconstrained parameters, NaN at the edge."""
    order, size, step = found.order, found.order.size, 1e-3
    inner = np.flatnonzero(np.abs(found.free) < EDGE - 1.0)
    inverse = np.full((size, size), np.nan)

    def height(shift: Array) -> float:
        return evaluate(sample, order, coefficients(order, found.free + shift))[0]

    try:
        gradient, hessian = _derivatives(height, inner, size, step)
        block = np.linalg.inv(-hessian)
    except (NotPositiveDefiniteError, np.linalg.LinAlgError):
        return found, inverse
    if len(inner) == 0 or not np.linalg.eigvalsh(block).min() > 0.0:
        return found, inverse
    inverse[np.ix_(inner, inner)] = block
    move = np.zeros(size)
    move[inner] = block @ gradient
    try:
        there = height(move)
    except NotPositiveDefiniteError:
        return found, inverse
    return (Maximum(order, found.free + move, there) if there > found.log_likelihood else found), inverse


def _derivatives(
    height: Callable[[Array], float], inner: NDArray[np.intp], size: int, step: float
) -> tuple[Array, Array]:
    """Central differences of a function at zero, in the coordinates `inner`."""
    k = len(inner)
    moves = np.zeros((k, size))
    moves[np.arange(k), inner] = step
    middle = height(np.zeros(size))
    above = np.array([height(move) for move in moves])
    below = np.array([height(-move) for move in moves])
    hessian = np.diag(above + below - 2.0 * middle)
    for i in range(k):
        for j in range(i):
            both = height(moves[i] + moves[j]) + height(-moves[i] - moves[j])
            hessian[i, j] = hessian[j, i] = 0.5 * (both - above[i] - below[i] - above[j] - below[j] + 2.0 * middle)
    return (above - below) / (2.0 * step), hessian / step**2


def _to_coefficients(order: Order, free: Array, inverse: Array) -> Array:
    """Covariance of the coefficients from that of the unconstrained parameters."""
    size, step = order.size, 1e-6
    slopes = np.empty((size, size))
    for k, move in enumerate(step * np.eye(size)):
        slopes[:, k] = (coefficients(order, free + move) - coefficients(order, free - move)) / (2.0 * step)
    unknown = np.isnan(inverse.diagonal())
    found = slopes @ np.where(unknown[:, None] | unknown, 0.0, inverse) @ slopes.T
    touched = (slopes[:, unknown] != 0.0).any(axis=1)
    found[touched, :] = found[:, touched] = np.nan
    return np.asarray(found)


# ---------------------------------------------------------------------------------------------------- the fit
def starts(sample: Sample, order: Order, filled: Array) -> list[Array]:
    """Where a search for one order starts: the conditional estimate, and a few typical points."""
    if order.size == 0:
        return [np.empty(0)]
    found = regression(filled, order.period, max(order.p, order.q, 1))
    out = [refine(found, order, conditional_start(found, order))[0]]
    for first, second in _TYPICAL:
        point = np.zeros(order.size)
        point[: min(order.p, 1)] = first
        point[order.p : order.p + min(order.q, 1)] = second
        point[order.p + order.q + order.P :][:1] = -0.5
        out.append(point)
    return out


def fit(
    values: Array,
    order: Order,
    *,
    mean: bool,
    nuisance: Array | None = None,
    fixed: Array | None = None,
    start: Array | None = None,
) -> ArmaFit | None:
    """Fit one seasonal ARMA model by exact Gaussian maximum likelihood.

    Parameters
    ----------
    values : ndarray, shape (n,)
        No NaN; missing values hold any number and have a column in `nuisance`.
    order : Order
    mean : bool
        Whether a mean is estimated; else it is zero.
    nuisance : ndarray, shape (n, k), optional
        Columns with flat effects: one indicator per missing value, differenced as the series was. The likelihood is
        then that of the observed values (see `arma_likelihood.evaluate`).
    fixed : ndarray, shape (n, l), optional
        Columns whose effects were taken out of the series before; the likelihood is then restricted.
    start : ndarray, shape (order.size,), optional
        Coefficients where the search starts; by default those of conditional least squares.

    Returns
    -------
    ArmaFit or None
        None with too few values, where nothing varies, or where no start has a finite likelihood.
    """
    sample = prepare(values, mean=mean, nuisance=nuisance, fixed=fixed)
    if sample is None or order.size + mean + 1 >= sample.count:
        return None
    points = [np.asarray(start, dtype=float)] if start is not None else starts(sample, order, centred(sample))
    found = maximise(sample, order, points)
    if found is None:
        return None
    beside = maximise(contrasts(sample), order, [coefficients(order, found.free)], 1e-6) if mean else None
    return finish(sample, found, beside)


def contrasts(sample: Sample) -> Sample:
    """The same sample with its mean among the columns that have flat effects: the restricted likelihood."""
    return replace(sample, mean=False, flat=sample.flat + 1) if sample.mean else sample


def centred(sample: Sample) -> Array:
    """The series of a sample less its mean, for conditional estimates; missing values keep their fill."""
    series = sample.stacked[:, -1]
    return series - series.mean() if sample.mean else series


def finish(sample: Sample, found: Maximum, beside: Maximum | None = None) -> ArmaFit:
    """What is reported of a maximum, and of that of the restricted likelihood where it differs."""
    order = found.order
    if order.size:
        found, inverse = _polish(sample, found)
        covariance = _to_coefficients(order, found.free, inverse)
    else:
        covariance = np.empty((0, 0))
    estimates = coefficients(order, found.free)
    columns, _ = whitened_columns(sample, order, estimates)
    n, gaps, flat, m = len(columns), sample.gaps, sample.flat, sample.count
    residuals, effects, factor = regress(columns) if columns.shape[1] > 1 else (columns[:, 0], np.empty(0), None)
    variance = float(residuals @ residuals) / m
    innovations = residuals / np.sqrt(variance)
    mean, mean_error = 0.0, float("nan")
    if sample.mean and factor is not None:
        mean = float(effects[-1]) * sample.scale
        mean_error = float(np.sqrt(variance)) * sample.scale / float(factor[-1, -1])
    if flat:
        basis = np.linalg.qr(columns[:, :flat])[0]
        innovations = innovations / np.sqrt(np.maximum(1.0 - (basis**2).sum(axis=1), 1e-8))
        innovations[sample.missing] = np.nan
    return ArmaFit(
        order=order,
        coefficients=estimates,
        mean=mean,
        mean_error=mean_error,
        variance=variance * sample.scale**2,
        log_likelihood=float(found.log_likelihood) - m * float(np.log(sample.scale)),
        covariance=covariance,
        nobs=m,
        parameters=order.size + int(sample.mean) + 1,
        innovations=innovations,
        correction=sample.stacked[:, :gaps] @ effects[:gaps] * sample.scale if gaps else np.zeros(n),
        restricted=estimates if beside is None else coefficients(order, beside.free),
        exact=is_exact(sample, order),
    )
