"""Confidence intervals for the moduli of ARMA roots that stay valid near the circle; computed on demand.

The delta method fails near the circle: the modulus of an AR root is estimated too low, that of an MA root piles up at
one. Here each candidate modulus is tested by a parametric bootstrap: series are simulated from the fitted model with
that one root moved along its ray, the model is fitted to them again, and the interval holds the moduli under which the
estimate is neither too large nor too small.
"""

from __future__ import annotations

import cmath
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from functools import cache
from math import atanh, pi, sqrt, tanh

import numpy as np
from scipy.signal import lfilter

from preflight_magic.kernels.arma import ArmaFit, centred, starts
from preflight_magic.kernels.arma_likelihood import prepare
from preflight_magic.kernels.arma_maximum import maximise
from preflight_magic.kernels.arma_parameters import Array, Order, coefficients, polynomials, split
from preflight_magic.kernels.arma_roots import inverse_roots
from preflight_magic.model import Root

_LOCAL = 0.1
"""A modulus within this over the number of cycles of its lag counts as one: no sample of that length tells them."""
_MEMORY = 5.0
"""The simulation runs for this many time constants of the largest AR root before the series starts: exp(-5) < 1 %."""
_HALVINGS = 8
"""Of the range of moduli on the scale of the inverse hyperbolic tangent."""


@dataclass(frozen=True)
class RootInterval:
    """A root and the interval of its modulus, per step as the root's own; an upper end of one means it reaches one."""

    root: Root
    lower: float
    upper: float


@dataclass(frozen=True)
class RootBootstrap:
    """Intervals of all roots of one fit, in the order of `arma_roots.inverse_roots`.

    Attributes
    ----------
    intervals : tuple of RootInterval
    coverage : float
    replications, seed : int
        Simulated series for each modulus that was tested; all use the same draws.
    """

    intervals: tuple[RootInterval, ...]
    coverage: float
    replications: int
    seed: int


@dataclass(frozen=True)
class _Simulation:
    """What simulating and fitting again needs besides the coefficients."""

    order: Order
    estimate: Array
    n: int
    mean: bool
    nuisance: Array | None
    fixed: Array | None
    replications: int
    seed: int


def root_bootstrap(
    fit: ArmaFit,
    *,
    nuisance: Array | None = None,
    fixed: Array | None = None,
    coverage: float = 0.9,
    replications: int = 199,
    seed: int = 0,
    from_modulus: float = 0.0,
) -> RootBootstrap:
    """Intervals for the moduli of the inverse roots of a fitted model.

    Parameters
    ----------
    fit : ArmaFit
    nuisance, fixed : ndarray, shapes (n, k) and (n, l), optional
        The columns that were given to the fit.
    coverage : float
        In (0, 1); both tails alike.
    replications : int
        Simulated series at each modulus that is tested, some ten a root.
    seed : int
    from_modulus : float
        Roots with a smaller modulus per step are left out.

    Returns
    -------
    RootBootstrap
        Without roots for a model without coefficients.

    Raises
    ------
    ValueError
        For a coverage outside (0, 1), fewer than 99 replications, or a fit with missing values without `nuisance`.

    Notes
    -----
    Inversion of a bootstrap test as in Hansen (1999), Review of Economics and Statistics 81, for autoregressions, with
    the modulus itself as the statistic and normal innovations. The other roots stay at their estimates. Where a
    simulated model has more than one root, the one nearest to the root that was moved is compared.
    """
    if not 0.0 < coverage < 1.0:
        raise ValueError(f"the coverage is {coverage:g}; it must lie between 0 and 1")
    if replications < 99:
        raise ValueError(f"{replications} replications are too few for an interval; use at least 99")
    if nuisance is None and np.isnan(fit.innovations).any():
        raise ValueError("the fit has missing values; hand over the nuisance columns that it was given")
    mean = bool(np.isfinite(fit.mean_error))
    n = fit.innovations.size
    simulation = _Simulation(fit.order, fit.coefficients, n, mean, nuisance, fixed, replications, seed)
    tail = (1.0 - coverage) / 2.0
    roots = inverse_roots(fit.order, fit.coefficients, fit.covariance)
    found = [
        RootInterval(root, *_interval(simulation, roots, at, tail))
        for at, root in enumerate(roots)
        if root.modulus >= from_modulus
    ]
    return RootBootstrap(tuple(found), coverage, replications, seed)


def _interval(simulation: _Simulation, roots: Sequence[Root], at: int, tail: float) -> tuple[float, float]:
    """Ends of the interval per step of the root in place `at`."""
    lag = simulation.order.period if roots[at].seasonal else 1
    last = 1.0 - _LOCAL * lag / simulation.n
    observed = min(roots[at].modulus ** lag, last)

    @cache
    def moduli(modulus: float) -> Array:
        return np.minimum(_simulated_moduli(simulation, roots, at, modulus), last)

    def above(modulus: float) -> float:
        return float((moduli(modulus) >= observed).mean())

    def below(modulus: float) -> float:
        return float((moduli(modulus) <= observed).mean())

    enough = 0.5 * sqrt(tail * (1.0 - tail) / simulation.replications)
    lower = 0.0 if above(0.0) > tail else _crossing(lambda one: above(one) - tail, 0.0, observed, enough)
    upper = 1.0 if below(last) > tail else _crossing(lambda one: tail - below(one), observed, last, enough)
    return lower ** (1.0 / lag), upper ** (1.0 / lag)


def _crossing(distance: Callable[[float], float], low: float, high: float, enough: float) -> float:
    """Where a rising curve, negative at `low`, is within `enough` of zero: halving on a scale that widens near one."""
    left, right = atanh(low), atanh(high)
    for _ in range(_HALVINGS):
        middle = tanh(0.5 * (left + right))
        value = distance(middle)
        if abs(value) <= enough:
            return middle
        left, right = (atanh(middle), right) if value < 0.0 else (left, atanh(middle))
    return tanh(0.5 * (left + right))


def _simulated_moduli(simulation: _Simulation, roots: Sequence[Root], at: int, modulus: float) -> Array:
    """Moduli, in the root's own lag, estimated in series whose root in place `at` has the given modulus."""
    order, moved = simulation.order, roots[at]
    values = _moved(order, simulation.estimate, roots, at, modulus)
    centre = modulus * _direction(moved, order.period)
    found = []
    for draw in range(simulation.replications):
        series = _series(order, values, simulation.n, np.random.default_rng([simulation.seed, draw]))
        estimates = _estimate(simulation, series, values)
        if estimates is not None:
            others = [_value(one, order.period) for one in inverse_roots(order, estimates) if _alike(one, moved)]
            nearest: complex = min(others, key=lambda one: abs(one - centre))
            found.append(abs(nearest))
    return np.array(found)


def _alike(one: Root, other: Root) -> bool:
    return one.part == other.part and one.seasonal == other.seasonal


def _direction(root: Root, period: int) -> complex:
    """Where on the circle of its own lag a root points."""
    return cmath.exp(2j * pi * (period if root.seasonal else 1) / root.period)


def _value(root: Root, period: int) -> complex:
    """A root in its own lag, of a conjugate pair the one above the real axis."""
    return complex(root.modulus ** (period if root.seasonal else 1) * _direction(root, period))


def _moved(order: Order, estimate: Array, roots: Sequence[Root], at: int, modulus: float) -> Array:
    """Coefficients with the root in place `at`, and its conjugate, brought to `modulus` in its own lag."""
    together: list[complex] = []
    for place, root in enumerate(roots):
        if _alike(root, roots[at]):
            value = modulus * _direction(root, order.period) if place == at else _value(root, order.period)
            together += [value.conjugate(), value] if _is_pair(root, order.period) else [complex(value.real)]
    block = -np.real(np.poly(together))[1:]
    parts = list(split(order, estimate.copy()))
    which = 2 * roots[at].seasonal + (roots[at].part == "MA")
    parts[which] = -block if roots[at].part == "MA" else block
    return np.concatenate(parts)


def _is_pair(root: Root, period: int) -> bool:
    return root.modulus > 0.0 and abs(_direction(root, period).imag) > 1e-9


def _series(order: Order, values: Array, n: int, rng: np.random.Generator) -> Array:
    """A series of the model with unit innovations, long after its start."""
    ar, ma = polynomials(order, values)
    largest = max((one.modulus for one in inverse_roots(order, values) if one.part == "AR"), default=0.0)
    before = len(ma) + int(_MEMORY / max(1.0 - largest, _LOCAL / n))
    noise = rng.standard_normal(n + before)[::-1]  # so that the draws of the series do not hang on those before it
    return np.asarray(lfilter(ma, ar, noise), dtype=float)[before:]


def _estimate(simulation: _Simulation, series: Array, truth: Array) -> Array | None:
    sample = prepare(series, mean=simulation.mean, nuisance=simulation.nuisance, fixed=simulation.fixed)
    if sample is None:
        return None
    found = maximise(sample, simulation.order, [*starts(sample, simulation.order, centred(sample)), truth], 1e-6)
    return None if found is None else coefficients(simulation.order, found.free)
