"""Exact Gaussian maximum likelihood of one seasonal ARMA model."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from preflight_magic.kernels.arma_conditional import refine, regression
from preflight_magic.kernels.arma_conditional import start as conditional_start
from preflight_magic.kernels.arma_likelihood import Sample, is_exact, prepare, regress, whitened_columns
from preflight_magic.kernels.arma_maximum import Maximum, coefficient_covariance, maximise, polish
from preflight_magic.kernels.arma_parameters import Array, Order, coefficients, polynomials

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
    """The series of a sample less its mean, for conditional estimates; missing values filled by least squares."""
    series, gaps = sample.stacked[:, -1], sample.stacked[:, : sample.gaps]
    if sample.gaps:
        series = series - gaps @ (gaps.T @ series)
    return series - series.mean() if sample.mean else series


def finish(sample: Sample, found: Maximum, beside: Maximum | None = None) -> ArmaFit:
    """What is reported of a maximum, and of that of the restricted likelihood where it differs."""
    order = found.order
    if order.size:
        found, inverse = polish(sample, found)
        covariance = coefficient_covariance(order, found.free, inverse)
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
        mean = float(effects[-1]) * sample.scale + sample.centre
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
